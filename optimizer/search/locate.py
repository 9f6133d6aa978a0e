"""From a candidate of a saved record back to its setting by index, in the space as it is now."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.errors import LuxsiftError, clean
from optimizer.figures import evaluate
from optimizer.quantities import show
from optimizer.request.types import WIRINGS
from optimizer.search.space import Choice, Space, settings
from optimizer.search.values import Passives

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]
Candidate = Mapping[str, Any]
"""One candidate in the form of a saved record."""

POSITIONS = (
    "photodiode",
    "opamp",
    "wiring",
    "reference",
    "feedback_resistance",
    "feedback_capacitance",
    "low_pass",
)
"""What a candidate chooses, in the order in which it is reported."""

SAME_VALUE = 1e-9
SAME_CUTOFF = 1e-8  # a record holds a low-pass to 9 digits


class NotFound(LuxsiftError):
    """A candidate chooses what is not there any more: `missing` holds each position and the words."""

    def __init__(self, missing: Iterable[tuple[str, str]]) -> None:
        self.missing: tuple[tuple[str, str], ...] = tuple(missing)
        super().__init__("; ".join(words for _, words in self.missing))


def locate(space: Space, catalogs: Catalogs, candidate: Candidate) -> Choice:
    """The one-row choice of `space` that `candidate` stands for.

    Families of one name from several makers are told apart by the recorded figures, for a record does
    not name a family's maker. Raises NotFound with everything that is not there.
    """
    found = (
        _part(catalogs.opamps, candidate, "opamp"),
        _part(catalogs.photodiodes, candidate, "photodiode"),
        _context(space, candidate),
        _resistor(space.resistors, candidate),
        _capacitor(space.capacitors, candidate),
        _low_pass(space, candidate),
    )
    missing = [lack for where in found for lack in where.missing]
    if missing:
        raise NotFound(sorted(missing, key=lambda lack: POSITIONS.index(lack[0])))
    columns = np.meshgrid(*(where.rows for where in found), indexing="ij")
    choice = Choice(*(np.asarray(column.ravel(), dtype=np.int64) for column in columns))
    return choice if choice.opamp.size == 1 else _nearest(space, choice, candidate)


@dataclass(frozen=True, slots=True)
class _Found:
    """The rows where something is; without any, what is missing."""

    rows: Ints
    missing: tuple[tuple[str, str], ...] = ()


def _found(here: Bools, *missing: tuple[str, str]) -> _Found:
    rows = np.flatnonzero(here)
    return _Found(rows, () if rows.size else missing)


def _part(parts: Parts, candidate: Candidate, position: str) -> _Found:
    part, maker = str(candidate[position]), str(candidate[f"{position}_maker"])
    named = parts.text["part"] == part
    others = sorted({clean(other) for other in parts.text["maker"][named]})
    but = f", only one of {' and one of '.join(others)}" if others else ""
    words = f"{clean(part)} of {clean(maker)} is not in the catalogs{but}"
    return _found(named & (parts.text["maker"] == maker), (position, words))


def _context(space: Space, candidate: Candidate) -> _Found:
    name, reference = str(candidate["wiring"]), candidate["reference"]
    wired = space.contexts.wiring == (WIRINGS.index(name) if name in WIRINGS else -1)
    agreed = referred(space, reference)
    words = _reference_words(reference)
    missing = []
    if not wired.any():
        missing.append(("wiring", f"{clean(name)} is not among the wirings to choose from"))
    if not agreed.any():
        missing.append(("reference", f"{words} is not among the references to choose from"))
    apart = ("reference", f"{words} cannot stand with {clean(name)}")
    return _found(wired & agreed, *(missing or [apart]))


def referred(space: Space, reference: Mapping[str, Any]) -> Bools:
    """Where the contexts of `space` have the `reference` of a candidate, whatever their wiring."""
    contexts = space.contexts
    if reference["kind"] != "divider":
        return np.asarray(~contexts.divided & (reference["kind"] == "ground"))
    top, bottom = _number(reference["top"]), _number(reference["bottom"])
    return same(contexts.top, top) & same(contexts.bottom, bottom)


def _reference_words(reference: Mapping[str, Any]) -> str:
    if reference["kind"] != "divider":
        return clean(reference["kind"])
    top, bottom = (show(_number(reference[end]), "resistance", 4) for end in ("top", "bottom"))
    return f"the divider of {top} over {bottom}"


def _resistor(choices: Passives, candidate: Candidate) -> _Found:
    value, family = _number(candidate["feedback_resistance"]), str(candidate["resistor_family"])
    words = f"{show(value, 'resistance', 4)} of {clean(family)} is not among the resistors to choose from"
    here = same(choices.value, value) & _of_family(choices, family)
    return _found(here, ("feedback_resistance", words))


def _capacitor(choices: Passives, candidate: Candidate) -> _Found:
    value, family = _number(candidate["feedback_capacitance"]), candidate["capacitor_family"]
    valued = same(choices.value, value)
    if family is None:
        words = "a receiver without feedback capacitor is not among the choices"
        return _found(valued & (choices.family < 0), ("feedback_capacitance", words))
    words = f"{show(value, 'capacitance', 4)} of {clean(family)} is not among the capacitors to choose from"
    others = [clean(choices.names[k]) for k in choices.family[valued & (choices.family >= 0)]]
    words += f", where this value comes from {' and '.join(others)}" if others else ""
    return _found(valued & _of_family(choices, str(family)), ("feedback_capacitance", words))


def _low_pass(space: Space, candidate: Candidate) -> _Found:
    cutoff = candidate["low_pass"]
    wanted = 0.0 if cutoff is None else 1.0 / (2.0 * np.pi * float(cutoff))
    said = "no low-pass" if cutoff is None else f"a low-pass of {show(float(cutoff), 'frequency', 4)}"
    here = same(space.low_passes, wanted, SAME_CUTOFF)
    return _found(here, ("low_pass", f"{said} is not among the choices"))


def _number(value: Any) -> float:
    return float("nan") if value is None else float(value)


def same(values: NDArray[np.float64], wanted: float, tolerance: float = SAME_VALUE) -> Bools:
    """Where `values` are `wanted` but for rounding; nowhere where either is NaN."""
    return np.asarray(np.abs(values - wanted) <= tolerance * abs(wanted))


def _of_family(choices: Passives, name: str) -> Bools:
    families = [k for k, known in enumerate(choices.names) if known == name]
    return np.isin(choices.family, families)


def _nearest(space: Space, choice: Choice, candidate: Candidate) -> Choice:
    """The one of a few settings whose figures are nearest to the recorded ones; the first of equals."""
    with np.errstate(all="ignore"):
        figures = evaluate(space.bench, settings(space, choice)).figures
    distance = np.zeros(choice.opamp.size)
    for name, value in candidate.get("figures", {}).items():
        if name in figures and value:
            distance += np.nan_to_num(np.abs(figures[name] / value - 1.0), nan=1.0)
    return choice.take(np.array([int(np.argmin(distance))]))
