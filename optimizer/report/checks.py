"""The eligibility checks of a part in words, each with the numbers that decide it."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.words import count, several
from optimizer.search.inquiry.eligibility import FAILED, NOT_CHECKED, NOT_REACHED, UNKNOWN, Check

Facts = Mapping[str, Any]


def check_words(check: Check) -> str:
    """What decides a check, in words: the part's numbers beside the request's."""
    if check.verdict == NOT_REACHED:
        return "no setting gets as far"
    if check.verdict == UNKNOWN:
        return "the catalog leaves it blank"
    if check.verdict == NOT_CHECKED and check.key in UNASKED:
        return UNASKED[check.key]
    if check.verdict == FAILED and not check.facts:
        return TOGETHER
    return WORDS[check.key]({**check.facts, "verdict": check.verdict})


def listed(names: Sequence[str], joint: str = "and") -> str:
    """Names in a sentence: 'a', 'a and b', 'a, b and c'; '' where there are none."""
    if not names:
        return ""
    cleaned = [clean(name) for name in names]
    return cleaned[0] if len(cleaned) == 1 else f"{', '.join(cleaned[:-1])} {joint} {cleaned[-1]}"


def _span(low: float, high: float, kind: str, digits: int = 3) -> str:
    return f"{show(low, kind, digits)} to {show(high, kind, digits)}"


def _status(facts: Facts) -> str:
    if facts["verdict"] == FAILED:
        return f"{facts['status']}; the request takes {listed(facts['admitted'], 'or')}"
    return str(facts["status"])


def _excluded(facts: Facts) -> str:
    said = []
    if "exclude" in facts:
        said.append(f"the request excludes {listed(facts['exclude'])}")
    if "require" in facts:
        said.append(f"the request requires {listed(facts['require'], 'or')}")
    if "maker" in facts:
        said.append(f"made by {clean(facts['maker'])}; the request takes {listed(facts['makers'], 'or')}")
    if "package" in facts:
        package = clean(facts["package"]) or "blank"
        said.append(f"package {package}; the request takes {listed(facts['packages'], 'or')}")
    if "area" in facts:
        said.append(f"active area {show(facts['area'], 'area')}; the request takes {_area(facts)}")
    return "; ".join(said) or "nothing in the request excludes it"


def _area(facts: Facts) -> str:
    low, high = facts["area_from"], facts["area_to"]
    if math.isinf(high):
        return f"{show(low, 'area')} or more"
    return f"{show(high, 'area')} or less" if not low else _span(low, high, "area")


def _stock(facts: Facts) -> str:
    needed = f"the build needs {count(int(facts['needed']))}"
    if "with_buffer" in facts:
        needed += f", or {count(int(facts['with_buffer']))} where a buffer takes a second package"
    if facts["verdict"] == NOT_CHECKED:
        return f"blank, so not checked; {needed}"
    return f"{count(int(facts['stock']))} in stock, {needed}"


def _temperature(facts: Facts) -> str:
    own = _span(facts["low"], facts["high"], "temperature")
    return f"{own}; the ambient is {_span(facts['coldest'], facts['hottest'], 'temperature')}"


def _wavelength(facts: Facts) -> str:
    points = _span(facts["low"], facts["high"], "length", 4)
    wanted = show(facts["wavelength"], "length", 4)
    if facts["verdict"] == FAILED and facts["low"] <= facts["wavelength"] <= facts["high"]:
        return f"no responsivity at {wanted}"
    if facts["verdict"] == FAILED:
        return f"responsivity is known from {points}; the request's light is at {wanted}"
    return f"{show(facts['responsivity'], 'responsivity')} at {wanted}, known from {points}"


def _supply(facts: Facts) -> str:
    own, nominal = _span(facts["low"], facts["high"], "voltage"), show(facts["nominal"], "voltage")
    if not facts["tolerance"]:
        return f"{own}; the request's is {nominal}"
    within = show(facts["tolerance"], "fraction")
    return (
        f"{own}; the request's {nominal} within {within} is {_span(facts['least'], facts['most'], 'voltage')}"
    )


def _missing(facts: Facts) -> str:
    if not facts["columns"]:
        return "all that is needed is known"
    said = f"{listed(facts['columns'])} blank"
    if "biased" in facts and facts["verdict"] != FAILED:
        said += f", which {'biased' if facts['biased'] else 'unbiased'} wirings need"
    if "role" in facts:
        said += f"; [assume.{facts['role']}] fills blanks"
    return said


def _reverse_bias(facts: Facts) -> str:
    stands, asked = show(facts["reverse_max"], "voltage"), show(facts["largest"], "voltage")
    return f"stands {stands}; wirings ask for up to {asked} at the high end of the supply"


def _input_range(facts: Facts) -> str:
    where = _of_contexts(facts)
    if facts["low"] > facts["high"]:
        return f"no Vref is inside the input range at both ends of the supply tolerance; {where}"
    return f"Vref may lie from {_span(facts['low'], facts['high'], 'voltage')}; {where}"


def _of_contexts(facts: Facts) -> str:
    total = several(int(facts["contexts"]), "wiring")
    return f"{count(int(facts['passing']))} of {total} with their references pass"


def _window(facts: Facts) -> str:
    room = show(max(facts["width"], 0.0), "voltage")
    low, high = (show(facts[name], "voltage") for name in ("from_low", "from_high"))
    return f"{room} between output limits that are {low} from V- and {high} from V+"


def _values(facts: Facts) -> str:
    kind = facts["kind"]
    inside = several(int(facts["count"]), "value")
    asked = _span(facts["from"], facts["to"], kind)
    return f"{inside} inside {asked}; it offers {_span(facts['low'], facts['high'], kind)}"


def _dark_output(facts: Facts) -> str:
    lies = _span(facts["lowest"], facts["highest"], "voltage")
    limits = _span(facts["lower"], facts["upper"], "voltage")
    said = f"without light the output lies from {lies}; the limits less guard are {limits}"
    return f"{said}: {show(facts['short'], 'voltage')} too far" if facts["verdict"] == FAILED else said


def _load(facts: Facts) -> str:
    needed, drives = show(facts["needed"], "current"), show(facts["output_current"], "current")
    return f"{show(facts['load'], 'resistance')} and the feedback take {needed}; it drives {drives}"


def _gain(facts: Facts) -> str:
    has, needed = show(facts["dc_gain"], "gain"), show(facts["needed"], "gain")
    return f"open-loop gain {has}; 1 + Rf/Rsh is {needed}"


def _min_gain(facts: Facts) -> str:
    stable = show(facts["min_gain"], "gain_ratio")
    if facts["buffered"]:
        follower, needed = show(facts["follower"], "angle"), show(facts["needed"], "angle")
        return (
            f"no buffer: it needs a noise gain of {stable}, and as a follower has a phase margin of "
            f"{follower}, where 1 V/V and {needed} are asked for"
        )
    return f"noise gain 1 + Cin/Cf {show(facts['noise_gain'], 'gain_ratio')}; stable from {stable}"


def _unstable(facts: Facts) -> str:
    phase = show(facts["phase_margin"], "angle")
    if facts["verdict"] == FAILED:
        return f"phase margin {phase} at the most stable setting at the ends of the ranges"
    return f"phase margin {phase}"


UNASKED: Mapping[str, str] = {
    "temperature": "the request states no ambient",
    "reverse_bias": "no wiring biases the photodiode",
    "load": "the request states no load",
}
TOGETHER = "each part passes in some wiring with its reference, but none passes with both"

WORDS: Mapping[str, Callable[[Facts], str]] = {
    "status": _status,
    "excluded": _excluded,
    "stock": _stock,
    "temperature": _temperature,
    "wavelength": _wavelength,
    "supply": _supply,
    "missing": _missing,
    "reverse_bias": _reverse_bias,
    "input_range": _input_range,
    "window": _window,
    "values": _values,
    "dark_output": _dark_output,
    "load": _load,
    "gain": _gain,
    "min_gain": _min_gain,
    "unstable": _unstable,
}
