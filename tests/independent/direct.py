"""The figures that need no frequency, by direct definition: bias, currents, DC, light, money.

Written from the model's text alone; see `tests.independent.dense` for what that means and for
how a case is written.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import inf, log, sqrt

import numpy as np
from scipy.optimize import brentq

Case = dict


def is_biased(case: Case) -> bool:
    return case["wiring"].endswith("-biased")


def direction(case: Case) -> int:
    return +1 if case["wiring"].startswith("rising") else -1


def is_divider(case: Case) -> bool:
    return case["reference"]["kind"] == "divider"


def is_buffered(case: Case) -> bool:
    return is_divider(case) and not is_biased(case)


def rails(case: Case, end: float = 0.0) -> tuple[float, float]:
    """V- and V+ at one end of the supply tolerance (-1, +1) or at nominal (0)."""
    scale = 1 + end * case["supply"]["tolerance"]
    return case["supply"]["low"] * scale, case["supply"]["high"] * scale


def reference_voltage(case: Case, end: float = 0.0) -> float:
    if not is_divider(case):
        return 0.0
    low, high = rails(case, end)
    top, bottom = case["reference"]["top"], case["reference"]["bottom"]
    return low + (high - low) * bottom / (top + bottom)


def reverse_bias(case: Case, end: float = 0.0) -> float:
    if not is_biased(case):
        return 0.0
    low, high = rails(case, end)
    middle = reference_voltage(case, end)
    return middle - low if direction(case) > 0 else high - middle


def kelvin(case: Case) -> float:
    return case["ambient"]["hottest"] + 273.15


def warmed(value: float, doubling: float, case: Case) -> float:
    return value * 2 ** ((case["ambient"]["hottest"] - 25) / doubling)


def responsivity(case: Case) -> float:
    points = case["diode"]["responsivity"]
    return float(np.interp(case["light"]["wavelength"], *zip(*points, strict=True)))


def junction_capacitance(points: Sequence[tuple[float, float]], bias: float) -> float:
    """The law through one point; between several, a line in (ln(1 + V/0.6), ln C)."""
    if len(points) == 1 or bias < points[0][0]:
        at, value = points[0]
        return value * sqrt((1 + at / 0.6) / (1 + bias / 0.6))
    spread = [log(1 + at / 0.6) for at, _ in points]
    return float(np.exp(np.interp(log(1 + bias / 0.6), spread, [log(c) for _, c in points])))


def dark_current(case: Case) -> float:
    if not is_biased(case):
        return 0.0
    return warmed(case["diode"]["dark_current"], case["diode"]["dark_doubling"], case)


def shunt_resistance(case: Case) -> float:
    if is_biased(case):
        return inf
    return case["diode"]["shunt_resistance"] / warmed(1.0, case["diode"]["dark_doubling"], case)


def bias_current(case: Case) -> float:
    return warmed(case["opamp"]["bias_current"], case["opamp"]["bias_doubling"], case)


def divider_resistance(case: Case) -> float:
    if not is_divider(case):
        return 0.0
    return 1 / (1 / case["reference"]["top"] + 1 / case["reference"]["bottom"])


def converter_range(case: Case, end: float = 0.0) -> tuple[float, float]:
    """The range that is read; a `high` of "supply" is V+ and moves with it, `low` is what is stated."""
    converter = case["converter"]
    if converter is None:
        return -inf, inf
    return converter["low"], rails(case, end)[1] if converter["follows_supply"] else converter["high"]


def converter_square(case: Case) -> float:
    if case["converter"] is None:
        return 0.0
    low, high = converter_range(case)
    return ((high - low) / 2 ** case["converter"]["bits"]) ** 2 / 12


def on_diode(case: Case, light: float) -> float:
    """Power on the diode [W] for light in the request's kind."""
    return light * (case["diode"]["active_area"] if case["light"]["kind"] == "irradiance" else 1.0)


def output_limits(case: Case, end: float) -> tuple[float, float]:
    (low, high), (bottom, top) = rails(case, end), converter_range(case, end)
    amp = case["opamp"]
    return max(low + amp["output_low"], bottom), min(high - amp["output_high"], top)


def dc_error(case: Case) -> float:
    amp, ambient = case["opamp"], case["ambient"]
    swing = max(abs(ambient["coldest"] - 25), abs(ambient["hottest"] - 25))
    offset = amp["offset_voltage"] + amp["offset_drift"] * swing
    rf = case["feedback"]["resistance"]
    buffer = offset if is_buffered(case) else 0.0
    return (
        offset * (1 + rf / shunt_resistance(case))
        + bias_current(case) * (rf + divider_resistance(case))
        + buffer
    )


def full_scale(case: Case, offset: float, h0: float) -> float:
    """The strongest light that still fits, by looking for the light that just does not."""
    guard, sigma = case["supply"]["guard"], direction(case)

    def room(light: float) -> float:
        power = on_diode(case, light) + on_diode(case, case["light"]["background"])
        move = offset + h0 * responsivity(case) * power
        spaces = []
        for end in (-1, +1):
            low, high = output_limits(case, end)
            output = reference_voltage(case, end) + sigma * move
            spaces.append(high - guard - output if sigma > 0 else output - low - guard)
        return min(spaces)

    if room(0.0) <= 0:
        return 0.0
    light = 1e-15
    while room(light) > 0:
        light *= 2
    return float(brentq(room, 0.0, light, xtol=1e-40, rtol=1e-14, maxiter=500))


def unit_price(breaks: Sequence[tuple[float, float]], quantity: int) -> float:
    reached = [price for least, price in breaks if least <= quantity]
    return reached[-1] if reached else breaks[0][1]


def packages(case: Case) -> int:
    return 2 if is_buffered(case) and case["opamp"]["channels"] < 2 else 1


def cost(case: Case) -> float:
    count, quantity, prices = packages(case), case["quantity"], case["prices"]
    total = unit_price(case["diode"]["price"], quantity) + unit_price(prices["resistor"], quantity)
    total += count * unit_price(case["opamp"]["price"], quantity * count)
    if case["feedback"]["placed"] > 0:
        total += unit_price(prices["capacitor"], quantity)
    if is_divider(case):
        total += 2 * min(unit_price(breaks, quantity) for breaks in prices["divider"])
        total += min(unit_price(breaks, quantity) for breaks in prices["bypass"])
    return total


def supply_current(case: Case) -> float:
    low, high = rails(case)
    divider = (
        (high - low) / (case["reference"]["top"] + case["reference"]["bottom"]) if is_divider(case) else 0.0
    )
    return packages(case) * case["opamp"]["channels"] * case["opamp"]["quiescent_current"] + divider
