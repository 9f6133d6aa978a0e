"""Candidates as flat rows: one column a value, the same for the DataFrame and the CSV file."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from optimizer.vocabulary import TARGETS, VOCABULARY

if TYPE_CHECKING:
    import pandas as pd

# What stands in front of the figures and behind them: column -> its type in a DataFrame.
CHOICE: Mapping[str, str] = {
    "rank": "int64",
    "photodiode": "object",
    "opamp": "object",
    "photodiode_maker": "object",
    "opamp_maker": "object",
    "wiring": "object",
    "reference": "object",
    "reference_voltage": "float64",
    "divider_top": "float64",
    "divider_bottom": "float64",
    "buffered": "bool",
    "extra_package": "bool",
    "feedback_resistance": "float64",
    "resistor_family": "object",
    "feedback_capacitance": "float64",
    "capacitor_family": "object",
    "low_pass": "float64",
}
VERDICT: Mapping[str, str] = {"limiting": "object", "margin": "float64"}
NOTES: Mapping[str, str] = dict.fromkeys(("missed", "assumed", "linear_model"), "object")
# Behind the margins, where the request states [tolerance]; the record's keys under `yield`.
YIELD: Mapping[str, str] = {
    "yield": "float64",
    "yield_low": "float64",
    "yield_high": "float64",
    "yield_draws": "float64",
    "yield_meets": "object",
    "yield_unknown": "object",
}


def columns(request: Mapping[str, Any]) -> tuple[str, ...]:
    """The columns of a row, with one `<target>_margin` for each target that `request` grades.

    Where it grades corners, `<target>_worst` and `<target>_corner` too, and where it states [tolerance]
    the yield.
    """
    names, tolerance = graded(request), request.get("tolerance", {})
    margins = [f"{name}_margin" for name in names]
    if tolerance.get("method") == "corners":
        margins += [f"{name}_{part}" for name in names for part in ("worst", "corner")]
    return (*CHOICE, *VOCABULARY, *VERDICT, *margins, *(YIELD if tolerance else ()), *NOTES)


def graded(request: Mapping[str, Any]) -> tuple[str, ...]:
    """The graded targets in the order of the record; full_scale always is one."""
    stated = {name for name, limit in request.get("targets", {}).items() if limit is not None}
    return tuple(name for name in TARGETS if name == "full_scale" or name in stated)


def flat(candidate: Mapping[str, Any]) -> dict[str, Any]:
    """One candidate of a record as column -> value; lists become text joined by '; '."""
    reference = candidate["reference"]
    row = {name: candidate[name] for name in CHOICE if name in candidate}
    row |= {"reference": reference["kind"], "reference_voltage": reference["voltage"]}
    row |= {"divider_top": reference["top"], "divider_bottom": reference["bottom"]}
    row |= {name: reference[name] for name in ("buffered", "extra_package")}
    row |= {name: candidate["figures"].get(name) for name in VOCABULARY}
    row |= {f"{target['name']}_margin": target["margin"] for target in candidate["targets"]}
    row |= {name: candidate[name] for name in VERDICT}
    row |= _corners(candidate) | _yield(candidate)
    return row | {name: "; ".join(candidate.get(name, ())) for name in NOTES}


def _corners(candidate: Mapping[str, Any]) -> dict[str, Any]:
    """The worst value of each target and its corner, as 'gbw=-0.3; voltage_noise=0.2'."""
    row: dict[str, Any] = {}
    for target in candidate["targets"]:
        if target.get("corner") is not None:
            row[f"{target['name']}_worst"] = target["worst"]
            corner = (f"{axis}={deviation:.9g}" for axis, deviation in target["corner"].items())
            row[f"{target['name']}_corner"] = "; ".join(corner)
    return row


def _yield(candidate: Mapping[str, Any]) -> dict[str, Any]:
    found = candidate.get("yield")
    if found is None:
        return {}
    row = {f"yield_{part}": found[part] for part in ("low", "high", "draws", "meets")}
    return row | {"yield": found["yield"], "yield_unknown": "; ".join(found["unknown"])}


def frame(candidates: Sequence[Mapping[str, Any]], request: Mapping[str, Any]) -> pd.DataFrame:
    """The candidates as a DataFrame of `columns(request)`, indexed from 0; NaN where no figure exists."""
    import pandas as pd

    names = columns(request)
    table = pd.DataFrame([flat(candidate) for candidate in candidates], columns=list(names))
    types = {**CHOICE, **VERDICT, **YIELD, **NOTES}
    types |= {name: "object" for name in names if name.endswith("_corner")}
    return table.astype({name: types.get(name, "float64") for name in names})
