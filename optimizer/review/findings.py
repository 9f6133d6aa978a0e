"""What was found out about one candidate beyond its record, as plain data for a page to show.

Each finding is optional: None or () where it was not looked for.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.review.supply import Exposure
from optimizer.search.inquiry.finding import Finding
from optimizer.search.weigh.tradeoff import Tradeoff

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Cloud:
    """Cost and margin of every pair that met the request, at its cheapest setting; one element a pair.

    Sorted by rising cost. Where it is not `complete`, more pairs meet, none of them cheaper. `front`
    marks those that no other equals or beats in both, of equals the first.
    """

    names: tuple[str, ...]
    cost: Floats
    margin: Floats
    complete: bool

    @property
    def front(self) -> NDArray[np.bool_]:
        """Which pairs no other matches or beats in both cost and margin."""
        order = np.lexsort((-self.margin, self.cost))
        most = np.maximum.accumulate(self.margin[order])
        front = np.ones(order.size, dtype=bool)
        front[order[1:]] = self.margin[order[1:]] > most[:-1]
        return front


@dataclass(frozen=True, slots=True)
class Compared:
    """A part that was asked about by `name`, what was found out, and the same as a record's data."""

    name: str
    finding: Finding
    data: Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Findings:
    """Everything that a page may show besides the record; `drawn` holds each target's random draws."""

    drawn: Mapping[str, Floats] = field(default_factory=dict)
    cloud: Cloud | None = None
    prices: Tradeoff | None = None
    exposure: tuple[Exposure, ...] = ()
    compared: tuple[Compared, ...] = ()
