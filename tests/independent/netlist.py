"""The receiver of a case as a netlist for the circuit simulator.

The deck is a circuit, not the model's formulas: the op-amp is its two RC stages behind controlled
sources, its input capacitances hang on the nodes they hang on, a bare divider feeds the input
through its own impedance, a buffered one through a unity source, and noise comes from resistors.
What the model leaves out on purpose is left out here too: the loading of the divider by the input
capacitance to ground, supply ripple, the buffer's own dynamics.

Three copies of the receiver stand side by side: `white` carries every white source and the diode's
own pole, `pink` the 1/f sources and a signal without that pole, `open` is cut at the op-amp's input.
"""

from __future__ import annotations

from math import inf, log, pi, sqrt

from scipy.constants import Boltzmann, elementary_charge

from tests.independent import dense, direct
from tests.independent.direct import Case

SAMPLE = 1e3  # ohm; the resistor whose thermal noise is scaled into every other white source
PINK = 1e-6  # V2 at 1 Hz of the sampled flicker source; its own thermal noise is far below
POINTS = 400  # a decade
WHITE, FLICKER, OPEN = "w", "p", "o"  # the copies


def rc_stage(name: str, source: str, target: str, constant: float) -> list[str]:
    """A noiseless first-order pole between two nodes, behind a unity source; none for 0 s."""
    if constant == 0:
        return [f"E{name} {target} 0 {source} 0 1"]
    return [
        f"E{name} {target}_d 0 {source} 0 1",
        f"R{name} {target}_d {target} 1 noisy=0",
        f"C{name} {target} 0 {constant!r}",
    ]


def amplifier(tag: str, plus: str, minus: str, case: Case) -> list[str]:
    """The two-pole op-amp from its inputs to node `out`."""
    amp = case["opamp"]
    second = amp["second_pole"]
    return [
        f"Egain{tag} diff{tag} 0 {plus} {minus} {amp['open_loop_gain']!r}",
        *rc_stage(f"one{tag}", f"diff{tag}", f"first{tag}", amp["open_loop_gain"] / (2 * pi * amp["gbw"])),
        *rc_stage(
            f"two{tag}", f"first{tag}", f"second{tag}", 0.0 if second == inf else 1 / (2 * pi * second)
        ),
        f"Eout{tag} out{tag} 0 second{tag} 0 1",
    ]


def white_voltage(name: str, plus: str, minus: str, density: float) -> list[str]:
    """A white voltage source [V/rtHz] between two nodes: a noisy resistor behind a controlled source."""
    return [f"R{name} s{name} 0 {SAMPLE!r}", f"E{name} {plus} {minus} s{name} 0 {{{density!r}/sampled}}"]


def white_current(name: str, node: str, density: float) -> list[str]:
    return [f"R{name} s{name} 0 {SAMPLE!r}", f"G{name} 0 {node} s{name} 0 {{{density!r}/sampled}}"]


def pink_voltage(name: str, plus: str, minus: str, density: float) -> list[str]:
    """A 1/f voltage source, `density` [V/rtHz] at 1 Hz: a resistor that carries 1 A and flickers."""
    return [
        f"I{name} 0 p{name} 1",
        f"R{name} p{name} 0 flickers 1",
        f"E{name} {plus} {minus} p{name} 0 {density / sqrt(PINK)!r}",
    ]


def resistor(name: str, tag: str, nodes: str, value: float) -> str:
    """A resistor that is noisy in the white copy only."""
    return f"R{name}{tag} {nodes} {value!r}" + ("" if tag == WHITE else " noisy=0")


def summing_node(tag: str, case: Case) -> list[str]:
    """Everything at the summing node: feedback, diode, shunt, stray and input capacitances."""
    amp, net = case["opamp"], dense.circuit(case)
    biased, rising = direct.is_biased(case), direct.direction(case) > 0
    far = ("vneg" if rising else "vpos") if biased else f"ref{tag}"
    junction = direct.junction_capacitance(case["diode"]["capacitance"], direct.reverse_bias(case))
    lines = [
        resistor("f", tag, f"node{tag} back{tag}", net.rf),
        f"Cd{tag} node{tag} {far} {junction!r}",
        f"Cs{tag} node{tag} 0 {case['stray']!r}",
        f"Cc{tag} node{tag} 0 {amp['input_capacitance_common']!r}",
        f"Ci{tag} node{tag} ref{tag} {amp['input_capacitance_differential']!r}",
    ]
    if net.cf > 0:
        lines.append(f"Cf{tag} node{tag} back{tag} {net.cf!r}")
    if direct.shunt_resistance(case) < inf:
        lines.append(resistor("sh", tag, f"node{tag} {far}", direct.shunt_resistance(case)))
    return lines


def reference(tag: str, case: Case) -> list[str]:
    """Node `mid` (where a bare reference stands) and node `ref` (where the diode returns)."""
    if not direct.is_divider(case):
        return [f"Vmid{tag} mid{tag} 0 0", f"Vref{tag} ref{tag} mid{tag} 0"]
    values = case["reference"]
    lines = [
        resistor("t", tag, f"vpos mid{tag}", values["top"]),
        resistor("b", tag, f"mid{tag} vneg", values["bottom"]),
        f"Cb{tag} mid{tag} 0 {values['bypass']!r}",
    ]
    if direct.is_buffered(case):
        return [*lines, f"Ebuf{tag} ref{tag} 0 quiet{tag} 0 1"]
    return [*lines, f"Vref{tag} ref{tag} mid{tag} 0"]


def white_copy(case: Case) -> list[str]:
    """The receiver with its white noise; signal through the diode's own pole."""
    hot = sqrt(dense.hot_current(case))
    current = direct.responsivity(case) * direct.on_diode(case, case["light"]["background"])
    shot = sqrt(2 * elementary_charge * (current + direct.dark_current(case)))
    en = case["opamp"]["voltage_noise"]
    lines = [
        *rc_stage("pd", "signal", "slow", case["diode"]["rise_time"] / log(9)),
        "Gsigw 0 nodew slow 0 1",
        *white_current("ishot", "nodew", shot),
        *white_current("iamp", "nodew", hot),
        *white_voltage("en", "plusw", "refw", en),
    ]
    if direct.is_divider(case):
        lines += white_current("iplus", "midw", hot)
    if direct.is_buffered(case):
        lines += white_voltage("enbuf", "quietw", "midw", en)
    return [*lines, *receiver(WHITE, case)]


def pink_copy(case: Case) -> list[str]:
    """The receiver with its 1/f noise only; signal without the diode's pole."""
    at_one_hertz = case["opamp"]["voltage_noise"] * sqrt(case["opamp"]["noise_corner"])
    lines = ["Gsigp 0 nodep signal 0 1", *pink_voltage("fn", "plusp", "refp", at_one_hertz)]
    if direct.is_buffered(case):
        lines += pink_voltage("fnbuf", "quietp", "midp", at_one_hertz)
    return [*lines, *receiver(FLICKER, case)]


def receiver(tag: str, case: Case) -> list[str]:
    return [
        *reference(tag, case),
        *summing_node(tag, case),
        *amplifier(tag, f"plus{tag}", f"node{tag}", case),
        f"Vback{tag} back{tag} out{tag} 0",
        *rc_stage(f"lp{tag}", f"out{tag}", f"end{tag}", dense.circuit(case).t_low_pass),
    ]


def open_copy(case: Case) -> list[str]:
    """The feedback path cut at the op-amp's input, the op-amp driven by the signal source."""
    return [
        "Vmido mido 0 0",
        "Vrefo refo mido 0",
        "Vpluso pluso refo 0",
        *summing_node(OPEN, case),
        *amplifier(OPEN, "signal", "0", case),
        "Vbacko backo outo 0",
    ]


def span(case: Case) -> tuple[float, float]:
    """A sweep wide enough that the tails outside it can be taken as power laws."""
    bends = dense.corners(dense.circuit(case))
    return min(bends[0], case["noise_from"]) * 1e-4, bends[-1] * 1e3


def deck(case: Case, output: str) -> str:
    """The whole deck; `output` is the stem of the files the simulator writes."""
    low, high = span(case)
    vneg, vpos = direct.rails(case)
    sampled = sqrt(4 * Boltzmann * direct.kelvin(case) * SAMPLE)
    sweep = f"dec {POINTS} {low!r} {high!r}"
    return "\n".join(
        [
            "* a receiver",
            f".param sampled={sampled!r}",
            f".options temp={case['ambient']['hottest']!r} tnom={case['ambient']['hottest']!r}",
            f".model flickers R(rsh=1 kf={PINK!r} af=1)",
            f"Vpos vpos 0 {vpos!r}",
            f"Vneg vneg 0 {vneg!r}",
            "Vsig signal 0 dc 0 ac 1",
            *white_copy(case),
            *pink_copy(case),
            *open_copy(case),
            ".control",
            "set wr_singlescale",
            "set wr_vecnames",
            "set numdgt=12",
            f"ac {sweep}",
            f"wrdata {output}.ac v(endw) v(endp) v(outp) v(nodeo)",
            f"noise v(endw) Vsig {sweep}",
            f"wrdata {output}.white noise1.onoise_spectrum",
            f"noise v(endp) Vsig {sweep}",
            f"wrdata {output}.pink noise3.onoise_spectrum",
            "quit",
            ".endc",
            ".end",
            "",
        ]
    )
