"""What a search returns: plain frozen records, in SI, with the names of the saved record."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class Reference:
    """The reference at the non-inverting input: `ground`, or a `divider` of `top` and `bottom` ohms."""

    kind: str
    voltage: float
    top: float | None
    bottom: float | None
    buffered: bool
    extra_package: bool


@dataclass(frozen=True, slots=True)
class TargetValue:
    """One graded target of one candidate; `value` is None where the figure does not exist.

    Where corners are graded, `margin` is that of `worst`, the value at the worst corner, and `corner`
    says what deviates there and by what fraction (nothing where nominal is the worst).
    """

    name: str
    value: float | None
    limit: float
    margin: float
    worst: float | None = None
    corner: Mapping[str, float] | None = None


@dataclass(frozen=True, slots=True)
class Candidate:
    """One choice along every axis, with its figures and margins.

    `outlines` holds, by the record's keys, packages and pinouts of the parts, makers of the families, and
    the families that the divider's parts come from; None where the catalog leaves a blank, or there is none.
    """

    photodiode: str
    photodiode_maker: str
    opamp: str
    opamp_maker: str
    wiring: str
    reference: Reference
    feedback_resistance: float
    resistor_family: str
    feedback_capacitance: float
    capacitor_family: str | None
    low_pass: float | None
    figures: Mapping[str, float | None]
    targets: tuple[TargetValue, ...]
    limiting: str
    margin: float
    missed: tuple[str, ...]
    assumed: tuple[str, ...]
    linear_model: tuple[str, ...] = ()
    outlines: Mapping[str, str | None] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Outcome:
    """The result of one search; `dropped` counts pairs by the keys of the eligibility table.

    `impossible` holds what no part could meet, said before any search. `blocking` names the single
    targets of which each, if dropped, would let something through (only when nothing meets).
    """

    candidates: tuple[Candidate, ...]
    near_misses: tuple[Candidate, ...]
    combinations: int
    pairs: int
    evaluated: int
    seconds: float
    proven: bool
    dropped: Mapping[str, int] = field(default_factory=dict)
    impossible: tuple[str, ...] = ()
    blocking: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a search is: pairs decided out of all, the best so far in words, settings evaluated."""

    pairs: int
    decided: int
    evaluated: int
    best: str | None
