"""Pools made small without losing a plan: equal channels become one with a count, useless options go."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations

from optimizer.board.problem import Board, Channel, Option

Chosen = tuple[tuple[int, ...], ...]
"""For each channel, the option that each of its `count` copies takes."""

MANY = 8
"""Passives of an option from which on no option with fewer is looked for: subsets would be too many."""

Shape = tuple[tuple[int, ...], int, int | None, int]
"""Sorted parts, family, reference and amplifiers of an option."""


@dataclass(frozen=True, slots=True)
class Pools:
    """A board with fewer channels and options that has the same best plans, and where they come from.

    `origins`: the channels of the original that each channel stands for; `options`: the place of each of
    its options there.
    """

    original: Board
    board: Board
    origins: tuple[tuple[int, ...], ...]
    options: tuple[tuple[int, ...], ...]

    def whole(self, chosen: Chosen) -> Chosen:
        """The choice on the original board that `chosen` on this one stands for."""
        found: list[tuple[int, ...]] = [()] * len(self.original.channels)
        for origins, options, taken in zip(self.origins, self.options, chosen, strict=True):
            left = sorted(options[j] for j in taken)
            for channel in origins:
                count = self.original.channels[channel].count
                found[channel], left = tuple(left[:count]), left[count:]
        return tuple(found)

    def small(self, chosen: Chosen) -> Chosen | None:
        """The choice on this board for one on the original; None where an option has gone."""
        found = []
        for origins, options in zip(self.origins, self.options, strict=True):
            place = {j: k for k, j in enumerate(options)}
            taken = [place.get(j) for channel in origins for j in chosen[channel]]
            if None in taken:
                return None
            found.append(tuple(sorted(k for k in taken if k is not None)))
        return tuple(found)

    def keeping(self, keep: Sequence[Iterable[int]]) -> Pools:
        """These pools with the options `keep` of each channel only."""
        kept = tuple(map(tuple, keep))
        options = tuple(tuple(old[j] for j in new) for old, new in zip(self.options, kept, strict=True))
        return replace(self, board=with_options(self.board, kept), options=options)

    @property
    def size(self) -> int:
        """How many options there are in all."""
        return sum(map(len, self.options))


def with_options(board: Board, keep: Sequence[Sequence[int]]) -> Board:
    """The board with the options `keep` of each channel only."""
    channels = tuple(
        replace(channel, options=tuple(channel.options[j] for j in options))
        for channel, options in zip(board.channels, keep, strict=True)
    )
    return replace(board, channels=channels)


def pools_of(board: Board) -> Pools:
    """Equal channels merged, and options left out that another one of the channel serves as well."""
    groups: dict[tuple[Option, ...], list[int]] = {}
    for index, channel in enumerate(board.channels):
        groups.setdefault(channel.options, []).append(index)
    kept = [undominated(board, options) for options in groups]
    channels = tuple(
        Channel(
            board.channels[origins[0]].name,
            sum(board.channels[i].count for i in origins),
            tuple(options[j] for j in keep),
        )
        for (options, origins), keep in zip(groups.items(), kept, strict=True)
    )
    return Pools(board, replace(board, channels=channels), tuple(map(tuple, groups.values())), tuple(kept))


def undominated(board: Board, options: Sequence[Option]) -> tuple[int, ...]:
    """The options, by place, that do the same as no other with fewer passives; of equal ones the first.

    Whatever the prices, stocks and budgets: fewer pieces of the same parts never cost or draw more. The
    photodiode and the amplifiers must be the same, so that plans with other active parts all stay.
    """
    best: dict[Shape, tuple[float, int]] = {}
    for place, option in enumerate(options):
        key = (tuple(sorted(option.parts)), option.family, option.reference, option.amplifiers)
        best[key] = min(best.get(key, (option.current, place)), (option.current, place))
    return tuple(
        sorted(
            place
            for shape, (current, place) in best.items()
            if not any(best[r][0] <= current for r in _rivals(board, shape) if r in best)
        )
    )


def _rivals(board: Board, shape: Shape) -> Iterator[Shape]:
    """Shapes that use fewer passives than `shape` and nothing else."""
    parts, family, reference, amplifiers = shape
    active = tuple(part for part in parts if board.is_active(part))
    passive = tuple(part for part in parts if not board.is_active(part))
    if len(passive) > MANY:
        return
    bare = reference is not None and board.references[reference].buffer is None
    for size in range(len(passive) + 1):
        for subset in set(combinations(passive, size)):
            fewer = tuple(sorted(active + subset))
            if size < len(passive):
                yield fewer, family, reference, amplifiers
            if bare:
                yield fewer, family, None, amplifiers
