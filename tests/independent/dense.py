"""Every figure of the receiver model by dense numerics, as a second opinion on the engine.

Written from the model's text alone, with no code and no algebra of the package: transfer functions
are complex numbers at one frequency, straight from the circuit; crossings are looked for on a dense
grid and refined; noise is adaptive quadrature. Slow, and meant to be.

A case is one setting as plain SI numbers (temperatures in C; see `tests.independent.cases`);
"no such effect" is written as the value that has none: 0 for a rise time, a noise corner, a drift or
a dark current, inf for a second pole, a doubling interval or a shunt.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from math import exp, log, log10, pi, sqrt

import numpy as np
from scipy.constants import Boltzmann, elementary_charge
from scipy.integrate import quad
from scipy.optimize import brentq, minimize_scalar

from tests.independent import direct
from tests.independent.direct import Case

Density = Callable[[float], float]

GRID_PER_E = 200  # grid points per factor e of frequency
GRAZE_DISTANCE = 1e-3  # a turning point of ln|H| this near the threshold grazes it
GRAZE_SLOPE = 1e-3  # so does a crossing at which |H| changes this little per factor of frequency


@dataclass(frozen=True)
class Circuit:
    """The small-signal circuit: resistances, capacitances and time constants in SI."""

    rf: float
    cf: float
    leak: float  # conductance of the shunt
    cin: float
    cref: float
    gain0: float
    t1: float
    t2: float
    t_diode: float
    t_low_pass: float
    t_divider: float

    def gain(self, s):
        return self.gain0 / ((1 + s * self.t1) * (1 + s * self.t2))

    def feedback(self, s):
        return self.rf / (1 + s * self.rf * self.cf)

    def noise_gain(self, s):
        return 1 + self.feedback(s) * (self.leak + s * self.cin)

    def reference_gain(self, s):
        return 1 + self.feedback(s) * s * self.cref

    def loop_gain(self, s):
        return self.gain(s) / self.noise_gain(s)

    def transresistance(self, s):
        return self.feedback(s) * self.gain(s) / (self.gain(s) + self.noise_gain(s))

    def from_input(self, s):
        """From a voltage in series with the op-amp's input to the output."""
        return self.gain(s) * self.noise_gain(s) / (self.gain(s) + self.noise_gain(s))

    def from_reference(self, s):
        return self.gain(s) * self.reference_gain(s) / (self.gain(s) + self.noise_gain(s))

    def low_pass(self, s):
        return 1 / (1 + s * self.t_low_pass)

    def diode(self, s):
        return 1 / (1 + s * self.t_diode)


def circuit(case: Case) -> Circuit:
    amp, feedback = case["opamp"], case["feedback"]
    junction = direct.junction_capacitance(case["diode"]["capacitance"], direct.reverse_bias(case))
    common, stray = amp["input_capacitance_common"], case["stray"]
    return Circuit(
        rf=feedback["resistance"],
        cf=feedback["placed"] + feedback["parasitic"],
        leak=1 / direct.shunt_resistance(case),
        cin=junction + common + amp["input_capacitance_differential"] + stray,
        cref=common + stray + (junction if direct.is_biased(case) else 0.0),
        gain0=amp["open_loop_gain"],
        t1=amp["open_loop_gain"] / (2 * pi * amp["gbw"]),
        t2=1 / (2 * pi * amp["second_pole"]),
        t_diode=case["diode"]["rise_time"] / log(9),
        t_low_pass=0.0 if case["low_pass"] is None else 1 / (2 * pi * case["low_pass"]),
        t_divider=direct.divider_resistance(case) * case["reference"].get("bypass", 0.0),
    )


def corners(net: Circuit) -> list[float]:
    """Frequencies around which something bends; they only steer grids and break points."""
    times = [net.t1, net.t1 / net.gain0, net.t2, net.t_diode, net.t_low_pass, net.t_divider]
    times += [net.rf * net.cf, net.rf * (net.cin + net.cf)]
    plain = [1 / (2 * pi * t) for t in times if t > 0]
    loaded = [
        (1 + net.rf * net.leak) / (2 * pi * net.rf * (net.cin + net.cf)),
        (1 + net.rf * net.leak) / net.t1,
    ]
    return sorted({*plain, *loaded})


def grid(net: Circuit) -> np.ndarray:
    low, high = log(corners(net)[0]) - 12, log(corners(net)[-1]) + 7
    return np.linspace(low, high, int((high - low) * GRID_PER_E))


def at(log_frequency):
    return 2j * pi * np.exp(log_frequency)


@dataclass(frozen=True)
class Crossing:
    """Where a level is first crossed [Hz], and whether it is only grazed there or before."""

    frequency: float
    grazes: bool


def first_crossing(level: Callable, logs: np.ndarray) -> Crossing:
    """The lowest frequency at which `level` (of ln f) turns negative."""
    values = level(logs)
    inner = np.arange(1, len(logs) - 1)
    lows = inner[(values[inner] <= values[inner - 1]) & (values[inner] <= values[inner + 1])]
    highs = inner[(values[inner] >= values[inner - 1]) & (values[inner] >= values[inner + 1])]
    turns = [turning(level, logs, i, +1)[1] for i in lows if abs(values[i]) < 0.1]
    turns += [turning(level, logs, i, -1)[1] for i in highs if abs(values[i]) < 0.1]
    i = int(np.argmax(values < 0))
    if i == 0:  # never below the level, or from the start
        return Crossing(float("nan"), False)
    root = brentq(level, logs[i - 1], logs[i], xtol=1e-14, rtol=1e-14)
    slope = (level(root + 1e-4) - level(root - 1e-4)) / 2e-4
    near = any(abs(value) < GRAZE_DISTANCE for value in turns)
    return Crossing(float(np.exp(root)), bool(near or abs(slope) < GRAZE_SLOPE))


def turning(level: Callable, logs: np.ndarray, i: int, sign: int) -> tuple[float, float]:
    """Where `level` has its minimum (sign +1) or maximum (-1) around grid point i, and its value there."""
    step = logs[i + 1] - logs[i]
    # counted from the grid point, for the method's own tolerance is relative to the argument
    found = minimize_scalar(
        lambda shift: sign * level(logs[i] + shift),
        bounds=(-step, step),
        method="bounded",
        options={"xatol": 1e-13},
    )
    return float(logs[i] + found.x), sign * float(found.fun)


def bandwidth(case: Case) -> Crossing:
    net = circuit(case)
    start = abs(net.transresistance(0)) / sqrt(2)

    def level(u):
        s = at(u)
        return np.log(np.abs(net.transresistance(s) * net.diode(s) * net.low_pass(s)) / start)

    return first_crossing(level, grid(net))


@cache
def crossover(net: Circuit) -> float:
    return first_crossing(lambda u: np.log(np.abs(net.loop_gain(at(u)))), grid(net)).frequency


def phase_margin(case: Case) -> float:
    net = circuit(case)
    s = 2j * pi * crossover(net)
    lag = np.angle(1 + s * net.t1) + np.angle(1 + s * net.t2) + np.angle(net.noise_gain(s))
    return 180 - float(np.degrees(lag))


@cache
def resonance(net: Circuit) -> tuple[float, float]:
    """The frequency [Hz] of the largest |H|, and that |H| over H0 (at least 1)."""
    logs = grid(net)

    def level(u):
        return np.log(np.abs(net.transresistance(at(u)) / net.transresistance(0)))

    i = int(np.argmax(level(logs)[1:-1])) + 1
    where, top = turning(level, logs, i, -1)
    return float(np.exp(where)), max(1.0, float(np.exp(top)))


def break_points(net: Circuit) -> np.ndarray:
    """ln f from far below the lowest bend to far above the highest, with a mark at each feature."""
    bends = corners(net)
    low, high = bends[0] * 1e-8, bends[-1] * 1e7
    marks = [*bends, resonance(net)[0], crossover(net)]
    steps = np.exp(np.arange(log(low), log(high), 3.0))
    return np.log(sorted({low, high, *(f for f in marks if low < f < high), *steps}))


def integrate(density: Density, edges: np.ndarray, start: float) -> float:
    """The integral of a density over frequency from `start` [Hz] (0: from nothing) up."""
    low, high = (start or float(np.exp(edges[0]))), float(np.exp(edges[-1]))
    panels = [log(low), *edges[edges > log(low)]]
    ends = (density(low) * low if start == 0 else 0.0) + density(high) * high
    return ends + sum(_panel(density, a, b) for a, b in pairwise(panels))


def _panel(density: Density, low: float, high: float) -> float:
    def per_log(u: float) -> float:
        return density(exp(u)) * exp(u)

    return float(quad(per_log, low, high, epsabs=0, epsrel=1e-10, limit=400)[0])


def squared(*transfers: Callable) -> Density:
    """The product of |transfer|^2 at a frequency in Hz."""

    def density(frequency: float) -> float:
        s = 2j * pi * float(frequency)
        value = 1 + 0j
        for transfer in transfers:
            value *= transfer(s)
        return abs(value) ** 2

    return density


def current_density(case: Case, signal: float) -> float:
    """White current noise at the summing node [A2/Hz] for a signal current [A]."""
    thermal = 4 * Boltzmann * direct.kelvin(case)
    background = direct.responsivity(case) * direct.on_diode(case, case["light"]["background"])
    shot = 2 * elementary_charge * (signal + background + direct.dark_current(case))
    return (
        thermal / case["feedback"]["resistance"]
        + thermal / direct.shunt_resistance(case)
        + shot
        + hot_current(case)
    )


def hot_current(case: Case) -> float:
    """The op-amp's own current noise at the hottest [A2/Hz]."""
    return max(case["opamp"]["current_noise"] ** 2, 2 * elementary_charge * direct.bias_current(case))


def divider_density(case: Case) -> float:
    rp = direct.divider_resistance(case)
    return 4 * Boltzmann * direct.kelvin(case) * rp + hot_current(case) * rp**2


def noise_parts(case: Case) -> dict[str, float]:
    """Mean squares at the output [V2]: `signal` is that of the weakest light's own shot noise."""
    net, edges = circuit(case), break_points(circuit(case))
    en2, corner = case["opamp"]["voltage_noise"] ** 2, case["opamp"]["noise_corner"]
    from_input = squared(net.from_input, net.low_pass)
    from_reference = squared(net.from_reference, net.low_pass)
    filtered = squared(net.from_reference, net.low_pass, lambda s: 1 / (1 + s * net.t_divider))
    weakest = direct.responsivity(case) * direct.on_diode(case, case["light"]["weakest"])
    per_current = integrate(squared(net.transresistance, net.low_pass), edges, 0.0)
    divider, buffered = direct.is_divider(case), direct.is_buffered(case)

    def pink(response: Density) -> float:
        return corner and corner * integrate(lambda f: response(f) / f, edges, case["noise_from"])

    return {
        "current": current_density(case, 0.0) * per_current,
        "signal": 2 * elementary_charge * weakest * per_current,
        "white": en2 * integrate(from_input, edges, 0.0),
        "pink": en2 * pink(from_input),
        "divider": divider and divider_density(case) * integrate(filtered, edges, 0.0),
        "buffer_white": buffered and en2 * integrate(from_reference, edges, 0.0),
        "buffer_pink": buffered and en2 * pink(from_reference),
        "converter": direct.converter_square(case),
    }


def decibels(ratio: float) -> float | None:
    return 20 * log10(ratio) if ratio > 0 else None


def evaluate(case: Case) -> dict[str, float | None]:
    """Every figure of the model, unrounded; None where a figure does not exist."""
    net, r = circuit(case), direct.responsivity(case)
    h0 = abs(net.transresistance(0))
    parts = noise_parts(case)
    dark = sqrt(sum(value for name, value in parts.items() if name != "signal"))
    weak = sqrt(sum(parts.values()))
    error = direct.dc_error(case)
    offset = error + direct.dark_current(case) * h0
    largest = direct.full_scale(case, offset, h0)
    strongest = h0 * r * direct.on_diode(case, case["light"]["strongest"])
    target = case["bandwidth_target"]
    return {
        "bandwidth": bandwidth(case).frequency,
        "snr": decibels(r * direct.on_diode(case, case["light"]["weakest"]) * h0 / weak),
        "dynamic_range": decibels(r * direct.on_diode(case, largest) * h0 / dark),
        "phase_margin": phase_margin(case),
        "peaking": 20 * log10(resonance(net)[1]),
        "offset": offset,
        "full_scale": largest,
        "slew": None if target is None else case["opamp"]["slew_rate"] / (pi * target * strongest),
        "supply_current": direct.supply_current(case),
        "cost": direct.cost(case),
        "error": error,
        "output_noise_dark": dark,
        "output_noise_weak": weak,
        "noise_equivalent_light": dark / (h0 * r) / direct.on_diode(case, 1.0),
        "transresistance": h0,
        "input_capacitance": net.cin,
        "reverse_bias": direct.reverse_bias(case),
    }
