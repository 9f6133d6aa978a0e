"""What is drawn of a candidate held to other means: python-control, scipy, quadrature, the simulator.

Curves and step to python-control's own closing of the loop, the noise budget to adaptive quadrature of
the dense evaluation, the densities to their budget, and all of it to netlists run in ngspice.
"""

from __future__ import annotations

import subprocess
from math import exp, inf, log, pi, sqrt
from pathlib import Path

import control
import numpy as np
import pytest
from scipy.linalg import matrix_balance
from scipy.signal import StateSpace, TransferFunction
from scipy.signal import step as scipy_step

from optimizer.search.examine import Glass, NoiseSpectrum, examine
from tests.independent import dense, netlist, simulator
from tests.independent.adapter import engine_setting
from tests.independent.cases import stable_case
from tests.independent.dense import Circuit
from tests.independent.direct import Case
from tests.independent.test_transfer import blocks, closed, in_states, in_units, low_pass, stage

pytestmark = pytest.mark.independent

CASES = 15
DAMPED = 5.0  # deg


def random_cases(seed: int, count: int = CASES, margin: float = DAMPED) -> list[Case]:
    rng = np.random.default_rng([61, seed])
    return [stable_case(rng, margin) for _ in range(count)]


def examined(case: Case) -> Glass:
    return examine(*engine_setting(case))


@pytest.mark.parametrize("case", random_cases(1))
def test_curves_are_those_of_python_control(case: Case) -> None:
    net, curves = dense.circuit(case), examined(case).curves
    unit = 1 / (2 * pi * curves.crossover)
    scaled = in_units(net, unit)
    s = 2j * pi * curves.frequency * unit
    gain, _, noise_gain = blocks(scaled)
    outside = low_pass(scaled) * control.tf([1], [scaled.t_diode, 1])
    loop = gain(s) / noise_gain(s)
    np.testing.assert_allclose(curves.open_loop, np.abs(gain(s)), rtol=1e-9)
    np.testing.assert_allclose(curves.noise_gain, np.abs(noise_gain(s)), rtol=1e-9)
    np.testing.assert_allclose(curves.loop_gain, np.abs(loop), rtol=1e-9)
    turned = np.exp(1j * np.radians(curves.loop_phase - 180.0))
    np.testing.assert_allclose(turned, loop / np.abs(loop), rtol=1e-9)
    response = closed(scaled)(s)
    np.testing.assert_allclose(curves.loop_transresistance, np.abs(response), rtol=1e-6)
    np.testing.assert_allclose(curves.transresistance, np.abs(response * outside(s)), rtol=1e-6)


@pytest.mark.parametrize("case", random_cases(2))
def test_the_budget_is_what_adaptive_quadrature_finds(case: Case) -> None:
    budget, parts = examined(case).noise.budget, dense.noise_parts(case)
    currents = ("feedback_resistor", "shunt", "background_shot", "dark_shot", "amplifier_current")
    sums = {
        "current": sum(budget.get(name, 0.0) for name in currents),
        "signal": budget["signal_shot"],
        "white": budget["amplifier_voltage"],
        "pink": budget.get("amplifier_flicker", 0.0),
        "divider": budget.get("reference_divider", 0.0),
        "buffer": budget.get("reference_buffer", 0.0),
        "converter": budget.get("converter", 0.0),
    }
    expected = {**parts, "buffer": parts["buffer_white"] + parts["buffer_pink"]}
    for name, value in sums.items():
        assert value == pytest.approx(float(expected[name]), rel=1e-8, abs=0.0), name


@pytest.mark.parametrize("case", random_cases(3))
def test_each_current_is_its_share_of_the_densities(case: Case) -> None:
    """Currents share one response, so their mean squares divide as their densities do."""
    noise, parts = examined(case).noise, dense.noise_parts(case)
    thermal = 4 * dense.Boltzmann * dense.direct.kelvin(case)
    whole = parts["current"] / dense.current_density(case, 0.0)
    net = dense.circuit(case)
    expected = {
        "feedback_resistor": thermal / net.rf,
        "shunt": thermal * net.leak,
        "amplifier_current": dense.hot_current(case),
        "dark_shot": 2 * dense.elementary_charge * dense.direct.dark_current(case),
    }
    for name, density in expected.items():
        assert noise.budget.get(name, 0.0) == pytest.approx(density * whole, rel=1e-8), name
        assert (name in noise.density) == (density > 0)


def integrated(noise: NoiseSpectrum, name: str, start: float) -> float:
    """A contribution's mean square by trapezoids in ln f, its ends taken as flat below and 1/f^2 above."""
    kept = noise.frequency >= (start if name == "amplifier_flicker" else 0.0)
    logs, per_log = np.log(noise.frequency[kept]), (noise.density[name] ** 2 * noise.frequency)[kept]
    below = 0.0 if name == "amplifier_flicker" else per_log[0]
    return float(np.trapezoid(per_log, logs) + below + per_log[-1])


@pytest.mark.parametrize("case", random_cases(4, margin=20.0))
def test_densities_integrate_to_their_budget(case: Case) -> None:
    noise = examined(case).noise
    names = [name for name in noise.density if name != "reference_buffer"]  # white and flicker in one
    assert {*noise.budget} - {"converter"} == {*noise.density}
    for name in names:
        found = integrated(noise, name, case["noise_from"])
        assert found == pytest.approx(noise.budget[name], rel=3e-3), name


def states(net: Circuit) -> control.StateSpace:
    """The receiver in states, the diode's pole first."""
    system = in_states(net)
    return system * stage(net.t_diode) if net.t_diode else system


@pytest.mark.parametrize("case", random_cases(5))
def test_the_step_is_that_of_python_control(case: Case) -> None:
    step, net = examined(case).step, dense.circuit(case)
    unit = step.time[-1]
    times = np.linspace(0.0, 1.0, 401)
    balanced = states(in_units(net, unit))
    matrix, scale = matrix_balance(balanced.A, permute=False)
    system = control.ss(matrix, np.linalg.solve(scale, balanced.B), balanced.C @ scale, balanced.D)
    answer = control.step_response(system, times).outputs / float(system.dcgain().real)
    found = np.interp(times * unit, step.time, step.value)
    np.testing.assert_allclose(found, answer, atol=2e-3 * max(1.0, answer.max()))
    exact = np.interp(step.time, times * unit, answer)
    assert step.value[0] == pytest.approx(0.0, abs=1e-12)
    assert np.abs(step.value - exact).max() < 0.02  # between the few points of the reference


def circuit_of(rf: float, cf: float, cin: float, gbw: float) -> Case:
    """A receiver whose op-amp has one pole and next to unbounded gain: two poles closed."""
    case = stable_case(np.random.default_rng(3), wiring="rising-unbiased", kind="ground")
    case["opamp"] |= {"gbw": gbw, "open_loop_gain": 1e9, "second_pole": inf}
    case["opamp"] |= {"input_capacitance_common": 1e-21, "input_capacitance_differential": 1e-21}
    case["diode"] |= {"capacitance": [(0.0, cin)], "rise_time": 0.0, "shunt_resistance": inf}
    case["feedback"] = {"resistance": rf, "placed": cf, "parasitic": 0.0}
    return case | {"low_pass": None, "stray": 1e-21}


def test_overshoot_of_a_butterworth_response_is_the_published_one() -> None:
    """4.3 % at Q = 0.707. Source: OPA607/OPA2607 data sheet SBOS981J, Texas Instruments 2021, 9.2."""
    rf, gbw, cf = 100e3, 50e6, 1e-12
    # e1^2 = 2 e2 with e1 = tf + 1/w, e2 = t/w and w = 2 pi GBW
    w = 2 * pi * gbw
    tf = rf * cf
    cin = (w * (tf + 1 / w) ** 2 / 2 - tf) / rf
    step = examined(circuit_of(rf, cf, cin, gbw)).step
    assert 100 * step.overshoot == pytest.approx(4.3, abs=0.05)
    assert step.overshoot == pytest.approx(exp(-pi), rel=1e-5)


@pytest.mark.parametrize("quality", [0.55, 0.8, 1.5, 4.0, 20.0])
def test_overshoot_follows_its_closed_form(quality: float) -> None:
    """100 exp(-pi / sqrt(4 Q^2 - 1)) %. Source: as above (checks: TIA-10)."""
    rf, gbw, cf = 100e3, 50e6, 0.2e-12
    w, tf = 2 * pi * gbw, rf * cf
    total = w * (quality * (tf + 1 / w)) ** 2
    step = examined(circuit_of(rf, cf, total / rf - cf, gbw)).step
    assert step.overshoot == pytest.approx(exp(-pi / sqrt(4 * quality**2 - 1)), rel=1e-4)


def test_one_slow_pole_rises_in_ln_9_time_constants() -> None:
    case = circuit_of(1e3, 1e-15, 1e-12, 1e9) | {"low_pass": 1e3}
    step, lag = examined(case).step, 1 / (2 * pi * 1e3)
    assert step.rise_time == pytest.approx(log(9) * lag, rel=1e-4)
    assert step.settling_time == pytest.approx(log(100) * lag, rel=1e-4)
    assert step.overshoot == 0.0


def test_equal_poles_lose_no_digits() -> None:
    """Diode pole and low-pass alike, over a loop far faster: 1 - (1 + t/T) exp(-t/T)."""
    lag = 1e-4
    case = circuit_of(1e3, 1e-15, 1e-12, 1e9) | {"low_pass": 1 / (2 * pi * lag)}
    case["diode"]["rise_time"] = lag * log(9)
    step = examined(case).step
    x = step.time / lag
    np.testing.assert_allclose(step.value, 1 - (1 + x) * np.exp(-x), atol=1e-4)


def test_step_is_that_of_scipy_signal() -> None:
    case = circuit_of(100e3, 0.3e-12, 20e-12, 50e6) | {"low_pass": 1e6}
    step, net = examined(case).step, dense.circuit(case)
    unit = step.time[-1]
    system = (closed(in_units(net, unit)) * low_pass(in_units(net, unit))).minreal(1e-9)
    scaled = TransferFunction(system.num[0][0], system.den[0][0]).to_ss()
    times, answer = scipy_step(StateSpace(scaled), T=step.time / unit)
    np.testing.assert_allclose(times * unit, step.time)
    np.testing.assert_allclose(answer / net.rf, step.value, atol=1e-6)


def transient(case: Case, step_end: float, folder: Path) -> tuple[np.ndarray, np.ndarray]:
    """Time [s] and output of the netlist of `case` after a step of 1 A of photocurrent, over its end."""
    deck = netlist.deck(case, "unused")
    head, _, _ = deck.partition(".control")
    head = head.replace("Vsig signal 0 dc 0 ac 1", f"Vsig signal 0 pulse(0 1 0 {step_end * 1e-7!r})")
    lines = [
        ".options reltol=1e-6",
        ".control",
        "set wr_singlescale",
        "set numdgt=12",
        f"tran {step_end / 2000!r} {step_end!r} 0 {step_end / 2000!r}",
        "wrdata answer.txt v(endw)",
        "quit",
        ".endc",
        ".end",
        "",
    ]
    (folder / "step.cir").write_text(head + "\n".join(lines), encoding="utf-8")
    command = [simulator.SIMULATOR, "-b", "step.cir"]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, timeout=120, check=False)
    assert (folder / "answer.txt").exists(), f"{done.stdout}\n{done.stderr}"
    table = np.loadtxt(folder / "answer.txt")
    return table[:, 0], table[:, 1]


@pytest.mark.simulator
@pytest.mark.parametrize("seed", range(4))
def test_curves_and_densities_are_those_of_the_simulator(seed: int, tmp_path: Path) -> None:
    case = stable_case(np.random.default_rng([62, seed]), 20.0)
    glass, sweep = examined(case), simulator.simulate(case, tmp_path, "case")
    curves, noise = glass.curves, glass.noise
    inner = slice(5, -5)
    for ours, theirs in (
        (curves.transresistance, sweep.whole),
        (curves.loop_transresistance, sweep.loop),
        (curves.loop_gain, sweep.loop_gain),
    ):
        found = np.interp(np.log(curves.frequency), np.log(sweep.frequency), np.log(np.abs(theirs)))
        np.testing.assert_allclose(np.log(ours)[inner], found[inner], atol=2e-3)
    frequency, dark = noise.frequency, noise.total**2 - noise.density["signal_shot"] ** 2
    counted = np.flatnonzero(frequency >= case["noise_from"])[inner]
    power = np.interp(np.log(frequency), np.log(sweep.noise_frequency), np.log(sweep.white + sweep.pink))
    np.testing.assert_allclose(np.log(dark[counted]), power[counted], atol=5e-3)


@pytest.mark.simulator
@pytest.mark.parametrize("seed", range(4))
def test_the_step_is_that_of_the_simulator(seed: int, tmp_path: Path) -> None:
    case, glass = quick_case(np.random.default_rng([63, seed]))
    time, output = transient(case, float(glass.step.time[-1]), tmp_path)
    answer = -output / glass.values["transresistance"]  # the netlist draws its current from the node
    found = np.interp(glass.step.time, time, answer)
    np.testing.assert_allclose(glass.step.value, found, atol=5e-3)


def quick_case(rng: np.random.Generator) -> tuple[Case, Glass]:
    """A receiver none of whose poles is so fast beside its answer that the simulator crawls."""
    while True:
        case = stable_case(rng, 20.0)
        glass, net = examined(case), dense.circuit(case)
        lags = [net.t_diode, net.t_low_pass, net.t2, net.rf * net.cf]
        fastest = min(lag for lag in (*lags, 0.1 / glass.curves.crossover) if lag > 0)
        if glass.step.time[-1] < 1e3 * fastest:
            return case, glass
