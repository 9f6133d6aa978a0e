"""What was found out about one candidate beyond its record, as plain data for a page to show.

Each finding is optional: None or () where it was not looked for.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Cloud:
    """Cost and margin of everything that met the request, one element a pair, names alike."""

    cost: Floats
    margin: Floats
    names: tuple[str, ...]
    complete: bool


@dataclass(frozen=True, slots=True)
class Price:
    """What one step of one target costs: the limit tried (None: dropped) and the best that then meets.

    `step` is the relative change of the limit, positive where it is relaxed, None where it is dropped.
    `cost` and `margin` are None where nothing meets; `change` says what the best changes against the
    candidate that is best as the request stands, as pairs of position and 'old -> new'.
    """

    target: str
    step: float | None
    limit: float | None
    cost: float | None
    margin: float | None
    change: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True)
class Exposed:
    """How much one part of the candidate hangs on its supply; None where the catalog does not say."""

    part: str
    role: str
    status: str
    stock: float | None
    needed: int
    lead_weeks: float | None
    makers: int
    drop_ins: int
    values: int


@dataclass(frozen=True, slots=True)
class Reach:
    """What one part reaches of one target: the best `alone`, and where all are weighed `together`."""

    name: str
    limit: float
    alone: float | None
    together: float | None
    margin: float


@dataclass(frozen=True, slots=True)
class Compared:
    """One part (or pair) beside the chosen: the checks it fails in words, what it reaches, what stops it.

    `stopped_by` is the target or check that stops it, None where it meets the request; `margin` is
    that of its best setting, with the partner `closest`.
    """

    part: str
    fails: tuple[tuple[str, str], ...]
    reaches: tuple[Reach, ...]
    stopped_by: str | None
    margin: float | None
    closest: str | None


@dataclass(frozen=True, slots=True)
class Findings:
    """Everything that a page may show besides the record; `drawn` holds each target's random draws."""

    drawn: Mapping[str, Floats] = field(default_factory=dict)
    cloud: Cloud | None = None
    prices: tuple[Price, ...] = ()
    exposure: tuple[Exposed, ...] = ()
    compared: tuple[Compared, ...] = ()
