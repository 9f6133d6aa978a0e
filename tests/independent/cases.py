"""Random settings of the whole space, as plain SI numbers.

They are meant to be awkward rather than good designs: feedback capacitors of nanofarads on megohms,
shunts below Rf, second poles below GBW, diode poles below the resonance, hardly damped loops.
All values are invented.
"""

from __future__ import annotations

from math import inf, log, log10, pi, sqrt

import numpy as np

from tests.independent import dense, direct, eligibility
from tests.independent.direct import Case

WIRINGS = ("rising-unbiased", "rising-biased", "falling-unbiased", "falling-biased")
SPLIT = ((-5.0, 5.0), (-2.5, 2.5), (-12.0, 12.0), (-1.0, 4.0))
SINGLE = ((0.0, 5.0), (0.0, 3.3), (0.0, 12.0))
E12 = (1.0, 1.2, 1.5, 1.8, 2.2, 2.7, 3.3, 3.9, 4.7, 5.6, 6.8, 8.2)


def decades(rng: np.random.Generator, low: float, high: float) -> float:
    """A value that is uniform in its logarithm."""
    return float(10 ** rng.uniform(log10(low), log10(high)))


def chance(rng: np.random.Generator, probability: float) -> bool:
    return bool(rng.random() < probability)


def breaks(rng: np.random.Generator, dearest: float) -> list[tuple[float, float]]:
    """Price breaks that fall, of one to three levels."""
    starts = [1, 25, 500][: int(rng.integers(1, 4))]
    return [(float(start), dearest * 0.8**i) for i, start in enumerate(starts)]


def random_case(rng: np.random.Generator, wiring: str | None = None, kind: str | None = None) -> Case:
    """One setting; the wiring and the kind of reference may be given."""
    wiring = wiring or str(rng.choice(WIRINGS))
    kind = kind or str(rng.choice(["ground", "divider"]))
    needs_split = kind == "ground" and wiring != "rising-unbiased"
    split = needs_split or chance(rng, 0.4)
    low, high = (SPLIT if split else SINGLE)[int(rng.integers(4 if split else 3))]
    case = {
        "wiring": wiring,
        "supply": supply(rng, low, high),
        "ambient": {"coldest": float(rng.uniform(-40, 20)), "hottest": float(rng.uniform(25, 105))},
        "reference": reference(rng, kind),
        "diode": diode(rng),
        "opamp": opamp(rng),
        "low_pass": None,
        "stray": decades(rng, 0.1e-12, 5e-12),
        "noise_from": decades(rng, 1e-3, 100),
        "dark_on_rail": chance(rng, 0.5),
        "bandwidth_target": None if chance(rng, 0.2) else decades(rng, 1e2, 1e7),
        "quantity": int(rng.choice([1, 10, 13, 200, 300, 1000])),
    }
    case["feedback"] = feedback(rng, case)
    case["prices"] = {
        "resistor": breaks(rng, 0.11),
        "capacitor": breaks(rng, 0.07),
        "divider": [breaks(rng, decades(rng, 0.02, 0.3)) for _ in range(2)],
        "bypass": [breaks(rng, decades(rng, 0.02, 0.3)) for _ in range(3)],
    }
    case["converter"] = converter(rng, low, high)
    case["light"] = light(rng, case)
    return slower(rng, case)


def stable_case(rng: np.random.Generator, margin: float = 0.05, **fixed: str) -> Case:
    """The next random setting whose phase margin is at least `margin` degrees."""
    while True:
        case = random_case(rng, **fixed)
        if dense.phase_margin(case) >= margin:
            return case


def spoiled_case(rng: np.random.Generator) -> Case:
    """A random setting that may lack gain, range or sensitivity, or stand just at an edge of a check."""
    case = random_case(rng)
    amp, supply, net = case["opamp"], case["supply"], dense.circuit(case)
    least = (supply["high"] - supply["low"]) * (1 - supply["tolerance"])
    if chance(rng, 0.03):
        case["light"]["wavelength"] = float(rng.choice([390e-9, 1.11e-6]))
    if chance(rng, 0.05):
        amp["supply_min"] = least * float(rng.uniform(0.95, 1.1))
    if chance(rng, 0.1):
        amp["output_low"] = least - amp["output_high"] - supply["guard"] * float(rng.uniform(-0.5, 2))
    if chance(rng, 0.1):
        amp["open_loop_gain"] = (1 + net.rf * net.leak) * float(rng.uniform(0.5, 1.5))
    if supply["load"] is not None and chance(rng, 0.3):
        amp["bias_current"] = 1e-4
        amp["output_current"] = eligibility.output_load(case) - direct.bias_current(case) * float(
            rng.uniform(-1, 1)
        )
    return case


def supply(rng: np.random.Generator, low: float, high: float) -> dict:
    return {
        "low": low,
        "high": high,
        "tolerance": float(rng.choice([0.0, 0.03, 0.1])),
        "guard": float(rng.choice([0.0, 0.02, 0.1])),
        "load": decades(rng, 300, 1e5) if chance(rng, 0.4) else None,
        "load_to": float(rng.uniform(low, high)) if chance(rng, 0.6) else None,
    }


def reference(rng: np.random.Generator, kind: str) -> dict:
    """Ground, or a divider of two E12 values within a decade and a half."""
    if kind == "ground":
        return {"kind": "ground"}
    power = int(rng.integers(3, 6))
    top, bottom = (float(f"{rng.choice(E12)}e{power + int(rng.integers(0, 2))}") for _ in range(2))
    return {
        "kind": "divider",
        "top": top,
        "bottom": bottom,
        "bypass": float(f"{rng.choice(E12)}e{rng.integers(-8, -5)}"),
    }


def diode(rng: np.random.Generator) -> dict:
    """A photodiode with one to four points of capacitance and responsivity."""
    largest = decades(rng, 0.5e-12, 5e-9)
    bends = sorted(rng.uniform(0.3, 15, int(rng.integers(0, 4))))
    falls = np.cumprod([1.0, *rng.uniform(0.6, 1.0, len(bends))])
    first = 0.0 if chance(rng, 0.6) else 0.2
    return {
        "responsivity": [(400e-9, 0.15), (700e-9, 0.45), (900e-9, 0.6), (1100e-9, 0.1)],
        "capacitance": [
            (float(v), float(largest * fall)) for v, fall in zip([first, *bends], falls, strict=True)
        ],
        "dark_current": 0.0 if chance(rng, 0.1) else decades(rng, 1e-12, 1e-8),
        "dark_doubling": inf if chance(rng, 0.1) else float(rng.uniform(6, 14)),
        "shunt_resistance": inf if chance(rng, 0.2) else decades(rng, 1e5, 1e12),
        "rise_time": 0.0 if chance(rng, 0.3) else decades(rng, 1e-10, 1e-6),
        "active_area": decades(rng, 5e-8, 1e-4),
        "price": breaks(rng, 4.0),
        "stock": float("nan") if chance(rng, 0.8) else float(rng.integers(1, 600)),
        "reverse_max": decades(rng, 3, 60),
        "temp_min": -40.0,
        "temp_max": 125.0 if chance(rng, 0.9) else 85.0,
    }


def opamp(rng: np.random.Generator) -> dict:
    """An op-amp with its second pole absent, or from well below to well above GBW."""
    gbw = decades(rng, 1e5, 5e9)
    bias = decades(rng, 1e-14, 1e-6)
    return {
        "gbw": gbw,
        "open_loop_gain": decades(rng, 3e3, 3e6),
        "second_pole": inf if chance(rng, 0.4) else gbw * decades(rng, 0.2, 10),
        "slew_rate": decades(rng, 1e4, 1e9),
        "voltage_noise": decades(rng, 0.8e-9, 60e-9),
        "noise_corner": 0.0 if chance(rng, 0.15) else decades(rng, 1, 1e5),
        "current_noise": decades(rng, 0.1e-15, 5e-12),
        "bias_current": bias,
        "bias_doubling": inf if chance(rng, 0.3) else float(rng.uniform(8, 12)),
        "offset_voltage": decades(rng, 1e-6, 5e-3),
        "offset_drift": 0.0 if chance(rng, 0.1) else decades(rng, 1e-8, 1e-5),
        "output_low": decades(rng, 1e-3, 0.3),
        "output_high": decades(rng, 1e-3, 0.5),
        "input_capacitance_common": decades(rng, 0.3e-12, 15e-12),
        "input_capacitance_differential": decades(rng, 0.1e-12, 10e-12),
        "channels": int(rng.choice([1, 2, 4])),
        "quiescent_current": decades(rng, 1e-6, 2e-2),
        "price": breaks(rng, 3.0),
        "stock": float("nan") if chance(rng, 0.8) else float(rng.integers(1, 600)),
        "supply_min": float(rng.choice([1.8, 2.7, 4.5])),
        "supply_max": float(rng.choice([5.5, 12.6, 36.0, 36.0, 36.0])),
        "input_low": float(rng.choice([-0.1, 0.0, 1.0])),
        "input_high": float(rng.choice([-0.1, 0.5, 1.5])),
        "min_gain": 1.0 if chance(rng, 0.7) else decades(rng, 2, 20),
        "output_current": decades(rng, 1e-3, 0.1),
        "temp_min": -40.0 if chance(rng, 0.95) else -20.0,
        "temp_max": 125.0,
    }


def feedback(rng: np.random.Generator, case: Case) -> dict:
    """Rf with its capacitor: none, about a flat response, or anything from 0.1 pF to 10 nF."""
    gain0 = case["opamp"]["open_loop_gain"]
    rf = decades(rng, 1e3, 1e8)
    if not direct.is_biased(case) and chance(rng, 0.3):
        # the model drops a loop whose A0 is not above 1 + Rf/Rsh; stay above with the shunt hot
        hot = direct.warmed(1.0, case["diode"]["dark_doubling"], case)
        case["diode"]["shunt_resistance"] = rf * hot / decades(rng, 0.5, gain0 / 20)
    if not direct.is_biased(case):
        rf = min(rf, direct.shunt_resistance(case) * gain0 / 20)
    flat = sqrt(case["diode"]["capacitance"][0][1] / (pi * rf * case["opamp"]["gbw"]))
    placed = [0.0, flat * decades(rng, 0.1, 10), decades(rng, 0.1e-12, 10e-9)][
        int(rng.choice(3, p=[0.2, 0.5, 0.3]))
    ]
    return {
        "resistance": rf,
        "placed": placed,
        "parasitic": 0.0 if chance(rng, 0.3) else decades(rng, 0.02e-12, 0.3e-12),
    }


def converter(rng: np.random.Generator, low: float, high: float) -> dict | None:
    """None, a fixed range inside the rails, or one whose upper end is V+."""
    if chance(rng, 0.5):
        return None
    inset, follows = float(rng.uniform(0, 0.25)) * (high - low), chance(rng, 0.5)
    return {
        "bits": int(rng.choice([8, 12, 16, 24])),
        "low": low + inset * float(rng.choice([0, 1])),
        "high": high if follows else high - inset,
        "follows_supply": follows,
    }


def light(rng: np.random.Generator, case: Case) -> dict:
    """Light whose strongest takes from a hundredth to three times the supply at the output."""
    case["light"] = {"wavelength": float(rng.uniform(420e-9, 1080e-9))}
    span = case["supply"]["high"] - case["supply"]["low"]
    strongest = span * decades(rng, 0.01, 3) / case["feedback"]["resistance"] / direct.responsivity(case)
    kind = str(rng.choice(["power", "irradiance"]))
    if kind == "irradiance":
        strongest /= case["diode"]["active_area"]
    return {
        **case["light"],
        "kind": kind,
        "strongest": strongest,
        "weakest": strongest * decades(rng, 1e-5, 1),
        "background": 0.0 if chance(rng, 0.4) else strongest * decades(rng, 1e-3, 0.5),
    }


def slower(rng: np.random.Generator, case: Case) -> Case:
    """Poles outside the loop around its own speed: the diode's (30 % of cases) and the low-pass (40 %)."""
    net = dense.circuit(case)
    own = sqrt(case["opamp"]["gbw"] / (2 * pi * net.rf * (net.cin + net.cf)))
    if chance(rng, 0.3):
        case["diode"]["rise_time"] = log(9) / (2 * pi * own * decades(rng, 0.02, 3))
    if chance(rng, 0.4):
        case["low_pass"] = own * decades(rng, 0.01, 5)
    return case
