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
class Simulated:
    """What the random draws of one candidate came to.

    `passed` of `draws` met the request, which is the share `yield_`, with `low` and `high` the ends of
    its Wilson 95 % interval. `failures` counts the draws that missed each target or failed each check
    (a draw may count under several), `worst` and `best` hold each target's extremes (None: in some
    draw, or in all, the figure does not exist). Where a spread is unknown, `unknown` names the columns
    and nothing was drawn.
    """

    draws: int
    passed: int = 0
    yield_: float | None = None
    low: float | None = None
    high: float | None = None
    failures: Mapping[str, int] = field(default_factory=dict)
    worst: Mapping[str, float | None] = field(default_factory=dict)
    best: Mapping[str, float | None] = field(default_factory=dict)
    unknown: tuple[str, ...] = ()

    def reaches(self, wanted: float) -> bool:
        """Whether the yield is `wanted` or more, by the lower end of its interval; not where unknown."""
        return self.low is not None and self.low >= wanted


SOURCES = "opamp_sources"
"""What is missed where all targets are met, but not with op-amps of as many makers as asked for."""


@dataclass(frozen=True, slots=True)
class Alternate:
    """An op-amp of another maker that meets every target in the place of the chosen one."""

    opamp: str
    opamp_maker: str
    cost: float
    limiting: str
    margin: float


@dataclass(frozen=True, slots=True)
class Candidate:
    """One choice along every axis, with its figures and margins.

    `outlines` holds, by the record's keys, packages and pinouts of the parts, makers of the families, and
    the families that the divider's parts come from; None where the catalog leaves a blank, or there is none.
    `simulated` is None where nothing was drawn at random, `alternates` empty where no second source is
    asked for.
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
    simulated: Simulated | None = None
    alternates: tuple[Alternate, ...] = ()


@dataclass(frozen=True, slots=True)
class Unusable:
    """A family that the request admits and offers values to, left out for what is `blank` in the catalog.

    `role` is "resistor" or "capacitor".
    """

    role: str
    family: str
    maker: str
    blank: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Outcome:
    """The result of one search; `dropped` counts pairs by the keys of the eligibility table.

    `impossible` holds what no part could meet, said before any search. `blocking` names the single
    targets of which each, if dropped, would let something through (only when nothing meets).
    `unusable` are the families of passives that took no part.
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
    unusable: tuple[Unusable, ...] = ()


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a search is: pairs decided out of all, the best so far in words, settings evaluated."""

    pairs: int
    decided: int
    evaluated: int
    best: str | None
