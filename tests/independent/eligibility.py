"""Which check of the model a case fails first, written from the model's text like the dense figures."""

from __future__ import annotations

from math import inf

import numpy as np

from tests.independent import dense, direct
from tests.independent.direct import Case

ENDS = (-1, +1)


def short_of_stock(case: Case) -> bool:
    packages, quantity = direct.packages(case), case["quantity"]
    return case["opamp"]["stock"] < packages * quantity or case["diode"]["stock"] < quantity


def outside_temperature(case: Case) -> bool:
    coldest, hottest = case["ambient"]["coldest"], case["ambient"]["hottest"]
    return any(
        coldest < part["temp_min"] or hottest > part["temp_max"] for part in (case["opamp"], case["diode"])
    )


def outside_wavelength(case: Case) -> bool:
    points = case["diode"]["responsivity"]
    return not points[0][0] <= case["light"]["wavelength"] <= points[-1][0]


def outside_supply(case: Case) -> bool:
    spans = [high - low for low, high in (direct.rails(case, end) for end in ENDS)]
    return min(spans) < case["opamp"]["supply_min"] or max(spans) > case["opamp"]["supply_max"]


def too_much_reverse_bias(case: Case) -> bool:
    return direct.reverse_bias(case, +1) > case["diode"]["reverse_max"]


def outside_input_range(case: Case) -> bool:
    amp = case["opamp"]
    for end in ENDS:
        low, high = direct.rails(case, end)
        if not low + amp["input_low"] <= direct.reference_voltage(case, end) <= high - amp["input_high"]:
            return True
    return False


def no_window(case: Case) -> bool:
    return any(low >= high for low, high in (direct.output_limits(case, end) for end in ENDS))


def rests_on_rail(case: Case) -> bool:
    """Whether the request's `dark_on_rail` holds for this circuit."""
    single = case["supply"]["low"] == 0 and not direct.is_divider(case)
    return case["dark_on_rail"] and single and direct.direction(case) > 0


def dark_output_clips(case: Case) -> bool:
    h0 = abs(dense.circuit(case).transresistance(0))
    error = direct.dc_error(case)
    moves = [-error, error, direct.direction(case) * (error + direct.dark_current(case) * h0)]
    guard, lower_only = case["supply"]["guard"], rests_on_rail(case)
    if lower_only:
        weakest = direct.responsivity(case) * direct.on_diode(case, case["light"]["weakest"])
        moves = [h0 * weakest - error]
    for end in ENDS:
        low, high = direct.output_limits(case, end)
        outputs = [direct.reference_voltage(case, end) + move for move in moves]
        if min(outputs) < low + guard or (not lower_only and max(outputs) > high - guard):
            return True
    return False


def output_load(case: Case) -> float:
    """What the output has to drive at the high end of the supply [A], into load and feedback."""
    supply, light = case["supply"], case["light"]
    to = direct.reference_voltage(case, +1) if supply["load_to"] is None else supply["load_to"]
    farthest = max(abs(limit - to) for limit in direct.output_limits(case, +1))
    power = direct.on_diode(case, light["strongest"]) + direct.on_diode(case, light["background"])
    feedback = direct.responsivity(case) * power + direct.dark_current(case) + direct.bias_current(case)
    return farthest / supply["load"] + feedback


def overloaded(case: Case) -> bool:
    return case["supply"]["load"] is not None and output_load(case) > case["opamp"]["output_current"]


def too_little_gain(case: Case) -> bool:
    net = dense.circuit(case)
    return net.gain0 <= 1 + net.rf * net.leak


def follower_margin(case: Case) -> float:
    """Phase margin [deg] of the op-amp alone at noise gain 1."""
    net = dense.circuit(case)
    crossing = dense.first_crossing(lambda u: np.log(np.abs(net.gain(dense.at(u)))), dense.grid(net))
    w = 2 * np.pi * crossing.frequency
    return 180 - float(np.degrees(np.arctan(w * net.t1) + np.arctan(w * net.t2)))


def too_little_noise_gain(case: Case) -> bool:
    net, least = dense.circuit(case), case["opamp"]["min_gain"]
    own = inf if net.cf == 0 else 1 + net.cin / net.cf
    if own < least:
        return True
    return direct.is_buffered(case) and (least > 1 or follower_margin(case) < 45)


def unstable(case: Case) -> bool:
    return not dense.phase_margin(case) > 0


CHECKS = {
    "stock": short_of_stock,
    "temperature": outside_temperature,
    "wavelength": outside_wavelength,
    "supply": outside_supply,
    "reverse_bias": too_much_reverse_bias,
    "input_range": outside_input_range,
    "window": no_window,
    "dark_output": dark_output_clips,
    "load": overloaded,
    "gain": too_little_gain,
    "min_gain": too_little_noise_gain,
    "unstable": unstable,
}
"""In the model's order; `status`, `excluded` and `missing` are words of catalogs, not of a case."""


def verdict(case: Case) -> str | None:
    """The first check that fails; None where the case is eligible."""
    return next((name for name, fails in CHECKS.items() if fails(case)), None)
