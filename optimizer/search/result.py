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
    """One graded target of one candidate; `value` is None where the figure does not exist."""

    name: str
    value: float | None
    limit: float
    margin: float


@dataclass(frozen=True, slots=True)
class Candidate:
    """One choice along every axis, with its figures and margins."""

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
