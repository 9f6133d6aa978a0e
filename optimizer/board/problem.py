"""A board as the model sees it: channels with their options, parts with prices, budgets and rules.

Everything is by index, in SI and whole cents a build; nothing here knows a request or a catalog.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from optimizer.errors import LuxsiftError

Breaks = tuple[tuple[float, float], ...]


class BoardError(LuxsiftError):
    """A board that does not hang together: an index out of range, a count below one."""


@dataclass(frozen=True, slots=True)
class BoardPart:
    """One part number: unit prices by quantity, stock (None: not checked), area [m2] (None: unknown).

    Of op-amps also: amplifiers in the package, and the supply current of the whole package [A].
    `active`: a photodiode or an op-amp; plans count as different only where these differ.
    """

    name: str
    breaks: Breaks
    stock: float | None = None
    area: float | None = None
    amplifiers: int = 0
    current: float = 0.0
    active: bool = False


@dataclass(frozen=True, slots=True)
class Family:
    """Op-amps that are the same amplifier in different packages: indices of their parts.

    A part belongs to one family only.
    """

    name: str
    packages: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class SharedReference:
    """One reference level: its parts with their count, the current of the divider [A], and the family

    of the buffer that drives it (None: bare). Channels that use the same one share it.
    """

    name: str
    parts: tuple[tuple[int, int], ...]
    current: float = 0.0
    buffer: int | None = None


@dataclass(frozen=True, slots=True)
class Option:
    """One way to build a channel: its parts (a part twice: two pieces), the family of its op-amp, the

    shared reference (None: none), amplifiers of the family (2 with a buffer of its own), and the
    current that it draws besides its packages [A].
    """

    parts: tuple[int, ...]
    family: int
    reference: int | None = None
    amplifiers: int = 1
    current: float = 0.0


@dataclass(frozen=True, slots=True)
class Channel:
    """One kind of channel, `count` of them alike, and the options that meet its request."""

    name: str
    count: int
    options: tuple[Option, ...]


BUDGETS = ("cost", "current", "area", "line_items", "opamp_parts")


@dataclass(frozen=True, slots=True)
class Budgets:
    """Limits on the whole board, None where there is none: cost [cents a build], current [A], area [m2]."""

    cost: int | None = None
    current: float | None = None
    area: float | None = None
    line_items: int | None = None
    opamp_parts: int | None = None

    def stated(self) -> dict[str, float]:
        """The limits that there are, by name."""
        values = {name: getattr(self, name) for name in BUDGETS}
        return {name: value for name, value in values.items() if value is not None}


@dataclass(frozen=True, slots=True)
class Board:
    """The whole problem. `line_item` and `placement` [cents a build]: a distinct part, a piece a board."""

    boards: int
    parts: tuple[BoardPart, ...]
    families: tuple[Family, ...]
    references: tuple[SharedReference, ...]
    channels: tuple[Channel, ...]
    budgets: Budgets = Budgets()
    line_item: int = 0
    placement: int = 0

    def is_active(self, part: int) -> bool:
        """Whether plans count as different where this part differs: a photodiode or an op-amp."""
        return self.parts[part].active or self.parts[part].amplifiers > 0


def checked(board: Board) -> Board:
    """`board` itself; raises BoardError with everything that does not hang together."""
    faults = list(_faults(board))
    if faults:
        raise BoardError("; ".join(faults))
    return board


def _faults(board: Board) -> Iterator[str]:
    yield from _bad_numbers(board)
    yield from _bad_parts(board)
    yield from _bad_indices(board)


def _bad_numbers(board: Board) -> Iterator[str]:
    if board.boards < 1:
        yield f"{board.boards} boards to build"
    if board.line_item < 0 or board.placement < 0:
        yield "a negative cost of line items or placements"
    for name, limit in board.budgets.stated().items():
        if limit < 0:
            yield f"a negative budget of {name}"
    for channel in board.channels:
        if channel.count < 1:
            yield f"channel {channel.name} has the count {channel.count}"


def _bad_parts(board: Board) -> Iterator[str]:
    homes = Counter(part for family in board.families for part in set(family.packages))
    for index, part in enumerate(board.parts):
        if not part.breaks or any(price < 0 for _, price in part.breaks):
            yield f"part {part.name} has no price, or a negative one"
        if homes[index] > 1:
            yield f"op-amp {part.name} belongs to {homes[index]} families"
        if (homes[index] > 0) != (part.amplifiers > 0):
            yield f"part {part.name} has {part.amplifiers} amplifiers and {homes[index]} families"
        if part.area is None and board.budgets.area is not None:
            yield f"part {part.name} has no area, and there is a budget of area"


def _bad_indices(board: Board) -> Iterator[str]:
    plain = {index for index, part in enumerate(board.parts) if not part.amplifiers}
    families, references = range(len(board.families)), range(len(board.references))
    for reference in board.references:
        if not plain.issuperset(part for part, _ in reference.parts):
            yield f"reference {reference.name} uses a part that is not there, or an op-amp as a part"
        if reference.buffer is not None and reference.buffer not in families:
            yield f"reference {reference.name} has a buffer of no family"
    for channel in board.channels:
        for option in channel.options:
            if not plain.issuperset(option.parts):
                yield f"channel {channel.name} uses a part that is not there, or an op-amp as a part"
            if option.family not in families or option.amplifiers < 1:
                yield f"channel {channel.name} uses no family, or no amplifier of it"
            if option.reference is not None and option.reference not in references:
                yield f"channel {channel.name} uses a reference that is not there"
