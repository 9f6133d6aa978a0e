"""Every part number that the channels of a board may use, each known once however many catalogs hold it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from optimizer.board.problem import BoardPart
from optimizer.catalog.parts import Catalogs, Parts
from optimizer.errors import Problem
from optimizer.quantities import show
from optimizer.vocabulary import NAMES

Ints = NDArray[np.int64]
Key = tuple[str, str, str, float]
"""Role, maker, part or family, and the value of a passive, or the number of the rails of an op-amp (else 0).

Amplifiers on different rails cannot share a package, so an op-amp counts as another part on each.
"""

KINDS = {"resistors": "resistance", "capacitors": "capacitance"}
TOLD = {"photodiodes": "photodiode", "opamps": "opamp", "resistors": "resistor", "capacitors": "capacitor"}


@dataclass(frozen=True, slots=True)
class Stocked:
    """One part number: what the board's model needs to know, and how a bill names it."""

    key: Key
    entry: BoardPart
    package: str | None
    pinout: str | None
    unknown_current: bool = False

    @property
    def role(self) -> str:
        """Of `plan.ROLES`."""
        return TOLD[self.key[0]]

    @property
    def value(self) -> float | None:
        """The value of a passive [ohm, F]."""
        return self.key[3] if self.key[0] in KINDS else None


@dataclass(slots=True)
class Shelf:
    """The part numbers in the order in which they were first met, and where two catalogs disagree on one."""

    parts: list[Stocked] = field(default_factory=list)
    places: dict[Key, int] = field(default_factory=dict)
    sources: dict[Key, str] = field(default_factory=dict)
    problems: list[Problem] = field(default_factory=list)

    def rows(self, parts: Parts, file: str, rails: int = 0) -> Ints:
        """The index of every row of `parts` (photodiodes or op-amps); -1 where its price is unknown."""
        every = range(parts.size)
        return np.array([self._place(_stocked(parts, row, rails), file) for row in every], dtype=np.int64)

    def values(self, parts: Parts, rows: Sequence[int], values: Sequence[float], file: str) -> Ints:
        """The index of each of `values` of the families at `rows`; -1 where the row is none (-1)."""
        return np.array(
            [
                -1 if row < 0 else self._place(_stocked(parts, row, value), file)
                for row, value in zip(rows, values, strict=True)
            ],
            dtype=np.int64,
        )

    def _place(self, stocked: Stocked | None, file: str) -> int:
        if stocked is None:
            return -1
        key = stocked.key
        if key not in self.places:
            self.places[key] = len(self.parts)
            self.sources[key] = file
            self.parts.append(stocked)
        elif self.parts[self.places[key]] != stocked:
            known = self.parts[self.places[key]]
            self.problems.append(_disagreement(known, stocked, (self.sources[key], file)))
        return self.places[key]

    def entries(self) -> tuple[BoardPart, ...]:
        """The parts as the board's model takes them."""
        return tuple(part.entry for part in self.parts)


def _stocked(parts: Parts, row: int, value: float) -> Stocked | None:
    """What row `row` of a catalog is as a part number; None where its price is unknown."""
    prices = parts.points["price"][row]
    if not prices:
        return None
    name = str(parts.text[NAMES[parts.role]][row])
    maker = str(parts.text["maker"][row])
    kind = KINDS.get(parts.role)
    amplifiers = int(parts.number["channels"][row]) if parts.role == "opamps" else 0
    drawn = amplifiers * float(parts.number["quiescent_current"][row]) if amplifiers else 0.0
    entry = BoardPart(
        name=name if kind is None else f"{name} {show(value, kind)}",
        breaks=tuple(prices),
        stock=_known(parts, "stock", row),
        area=_known(parts, "board_area", row),
        amplifiers=amplifiers,
        current=0.0 if np.isnan(drawn) else drawn,
        active=kind is None,
    )
    package, pinout = (_text(parts, column, row) for column in ("package", "pinout"))
    return Stocked((parts.role, maker, name, value), entry, package, pinout, bool(np.isnan(drawn)))


def _known(parts: Parts, column: str, row: int) -> float | None:
    """A number of a catalog; None where it is unknown or there is no such column."""
    value = float(parts.number[column][row]) if column in parts.number else float("nan")
    return None if np.isnan(value) else value


def _text(parts: Parts, column: str, row: int) -> str | None:
    return (str(parts.text[column][row]) or None) if column in parts.text else None


def _disagreement(one: Stocked, other: Stocked, files: tuple[str, str]) -> Problem:
    role, maker, name, _ = one.key
    differing = ", ".join(_differing(one, other))
    return Problem(
        file=files[1],
        row=None,
        column=None,
        cell=f"{maker}/{name}",
        rule=f"the catalogs of two channels ({files[0]} and {files[1]}) disagree on it: {differing}",
        remedy=f"let all channels of the board read the same {role}",
    )


def _differing(one: Stocked, other: Stocked) -> Iterator[str]:
    for word in ("breaks", "stock", "area", "amplifiers", "current"):
        if getattr(one.entry, word) != getattr(other.entry, word):
            yield {"breaks": "price", "current": "quiescent current", "area": "board area"}.get(word, word)
    if (one.package, one.pinout) != (other.package, other.pinout):
        yield "package"


def files_of(catalogs: Catalogs) -> str:
    """What names the catalogs of one channel in a message."""
    return ", ".join(source.file for source in catalogs.sources)
