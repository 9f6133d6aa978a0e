"""One part over all the boards that use it: how much of it is needed, what there is, what serves instead."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs
from optimizer.review.withdrawal import VANISHED, catalog_of, rows_of
from optimizer.search.change.positions import USES, Fitted
from optimizer.search.change.serving import Serving
from optimizer.vocabulary import NAMES

STATUS_ORDER = (VANISHED, "obsolete", "last-time-buy", "not-for-new-designs", "active", "")
"""From the worst; a passive family has none."""


@dataclass(frozen=True, slots=True)
class Exposure:
    """One part that candidates use, and how much hangs on it.

    `uses` says for what (see USES), `records` where (of boards with the channels). `status` is '' for a
    passive family and VANISHED for a part that the catalogs no longer hold; `outlined` is whether its
    package (and pinout) is known, without which nothing counts as a substitute; of several catalogs the
    worst is said of status, stock and lead time, each None where unknown. `needed` pieces are for all
    builds together. `makers` offer the part or a drop-in for it. `drop_ins` and `values` count what serves
    every record, `fewest` both together in the record that has least.
    """

    part: str
    maker: str
    uses: tuple[str, ...]
    records: tuple[str, ...]
    status: str
    outlined: bool
    stock: float | None
    lead_weeks: float | None
    needed: int
    makers: int
    drop_ins: int
    values: int
    fewest: int

    @property
    def alone(self) -> bool:
        """Whether nothing can take its place in every record."""
        return not self.drop_ins + self.values

    @property
    def short(self) -> bool:
        """Whether less is in stock than the builds need."""
        return self.stock is not None and self.stock < self.needed

    @property
    def lost(self) -> bool:
        """Whether it can no longer be had by its status."""
        return self.status in (VANISHED, "obsolete")


@dataclass(slots=True)
class Case:
    """What is gathered of one part; one entry of `catalogs` and `served` a candidate that uses it.

    `records` holds the channels of each record of a board, nothing for other records.
    """

    part: Fitted
    uses: set[str] = field(default_factory=set)
    records: dict[str, list[str]] = field(default_factory=dict)
    catalogs: list[Catalogs] = field(default_factory=list)
    served: list[Serving] = field(default_factory=list)
    needed: int = 0


def pieces(use: str, extra_package: bool) -> int:
    """How many pieces of a part one receiver takes for `use`."""
    return 2 if use == "divider" or (use == "opamp" and extra_package) else 1


def summed(case: Case, order: Mapping[str, int]) -> Exposure:
    """The exposure of one part; `order` is the place of each record."""
    uses = tuple(use for use in USES if use in case.uses)
    drop_ins = frozenset.intersection(*(served.drop_ins for served in case.served))
    either = frozenset.intersection(*(served.drop_ins | served.values for served in case.served))
    makers = {case.part.maker or "", *(maker for _, maker in drop_ins), *_namesakes(case, uses[0])}
    return Exposure(
        part=case.part.name,
        maker=case.part.maker or "",
        uses=uses,
        records=tuple(
            located(name, case.records[name]) for name in sorted(case.records, key=lambda name: order[name])
        ),
        status=_status(case, uses[0]),
        outlined=bool(case.part.package and (case.part.pinout or uses[0] not in ("photodiode", "opamp"))),
        stock=_known(min, _numbers(case, uses[0], "stock")),
        lead_weeks=_known(max, _numbers(case, uses[0], "lead_weeks")),
        needed=case.needed,
        makers=len(makers - {""}) or 1,
        drop_ins=len(drop_ins),
        values=len(either - drop_ins),
        fewest=min(len(served.drop_ins) + len(served.values) for served in case.served),
    )


def located(record: str, channels: Sequence[str]) -> str:
    """Where a part is used: the record, and of a board its channels: 'sonde.json (turbidity, colour)'."""
    return f"{record} ({', '.join(channels)})" if channels else record


def _namesakes(case: Case, use: str) -> Iterator[str]:
    """The makers that offer a part of the same name."""
    for catalogs in case.catalogs:
        parts = catalog_of(catalogs, use)
        yield from parts.text["maker"][parts.text[NAMES[parts.role]] == case.part.name].tolist()


def _status(case: Case, use: str) -> str:
    """The worst status that a catalog gives the part."""
    said = set()
    for catalogs in case.catalogs:
        parts, rows = catalog_of(catalogs, use), rows_of(catalogs, use, case.part)
        if not rows.any():
            said.add(VANISHED)
        elif "status" in parts.text:
            said |= set(parts.text["status"][rows].tolist())
    return min(said or {""}, key=STATUS_ORDER.index)


def _numbers(case: Case, use: str, column: str) -> Iterator[float]:
    for catalogs in case.catalogs:
        parts = catalog_of(catalogs, use)
        if column in parts.number:
            yield from parts.number[column][rows_of(catalogs, use, case.part)].tolist()


def _known(worst: Callable[[Iterable[float]], float], values: Iterable[float]) -> float | None:
    known = [value for value in values if not np.isnan(value)]
    return worst(known) if known else None


def worst_first(one: Exposure) -> tuple[Any, ...]:
    """The order of exposures: those that some record has no substitute for, those that none serves in all

    records, by status, short of stock, fewest drop-ins, fewest values, fewest makers, longest lead time.
    """
    return (
        one.fewest > 0,
        not one.alone,
        STATUS_ORDER.index(one.status),
        not one.short,
        one.drop_ins,
        one.values,
        one.makers,
        -(one.lead_weeks or 0.0),
        USES.index(one.uses[0]),
        one.part,
        one.maker,
    )
