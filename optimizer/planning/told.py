"""A plan of the model told by name: who is built how, which packages serve whom, what is bought and used."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from optimizer.board.problem import BoardError
from optimizer.board.solution import Plan
from optimizer.planning.bill import bill_of, cost_of, totals_of
from optimizer.planning.columns import Assembled, Field, Key, Pool
from optimizer.planning.packages import Copy, Taken, packed
from optimizer.planning.plan import BoardPlan, Build, Level, Package
from optimizer.search import assemble
from optimizer.search.result import Candidate


class UnsoundBoardError(BoardError):
    """A plan whose receivers, graded anew, miss their requests."""


@dataclass(frozen=True, slots=True)
class Chosen:
    """A plan of the model, the assembled board that it is of, and the pools behind that."""

    field: Field
    pools: Sequence[Pool]
    made: Assembled
    plan: Plan


def told(chosen: Chosen, rank: int, proven: str) -> BoardPlan:
    """The plan by name. Raises UnsoundBoardError where a receiver, graded anew, misses its request."""
    taken = tuple(_taken(chosen))
    levels = _levels(chosen, taken)
    pieces = {chosen.made.parts[line.part]: line.pieces for line in chosen.plan.lines}
    packages = packed(chosen.field, taken, {name: group for (_, group), name in levels.items()}, pieces)
    bill = bill_of(chosen.field, pieces)
    cost = cost_of(chosen.field.outline, bill)
    totals, limiting = totals_of(chosen.field, bill, cost, chosen.plan.totals.current)
    return BoardPlan(
        rank=rank,
        builds=tuple(_builds(chosen, taken, levels, packages)),
        packages=packages,
        levels=tuple(_named(chosen, taken, levels, packages)),
        bill=bill,
        totals=totals,
        limiting=limiting,
        cost=cost,
        bound=min(chosen.plan.bound, cost),
        proven=proven,
    )


def _taken(chosen: Chosen) -> Iterator[Taken]:
    """Every copy on the board with what it takes; equal ones together."""
    for number, kind in enumerate(chosen.field.kinds):
        options = iter(chosen.plan.chosen[number])
        for channel in kind.channels:
            for copy in range(1, channel.count + 1):
                yield Taken((channel.name, copy), number, chosen.made.keys[number][next(options)])


LevelKey = tuple[tuple[int, ...], int]
"""The parts of a shared divider, and the group of its buffer."""


def _level_of(chosen: Chosen, taken: Taken) -> LevelKey | None:
    """The shared level that a copy uses; None on ground, or with a divider of its own."""
    if not taken.key[5]:
        return None
    context = chosen.pools[taken.kind].held[taken.key][1][2]
    divider = chosen.field.kinds[taken.kind].divider[context]
    return tuple(int(part) for part in divider), taken.key[1]


def _levels(chosen: Chosen, taken: Sequence[Taken]) -> dict[LevelKey, str]:
    """The shared levels in the order of their first use, by name."""
    names: dict[LevelKey, str] = {}
    for one in taken:
        level = _level_of(chosen, one)
        if level is not None:
            names.setdefault(level, f"VREF{len(names) + 1}")
    return names


def _builds(
    chosen: Chosen, taken: Sequence[Taken], levels: Mapping[LevelKey, str], packages: Sequence[Package]
) -> Iterator[Build]:
    """How the copies are built; those that are alike, and in the same kind of package, together."""
    served = {
        (place.channel, place.copy): (package.opamp, package.maker)
        for package in packages
        for place in package.places
        if place.channel is not None
    }
    alike: dict[tuple[str, int, Key, tuple[str, str]], list[Copy]] = {}
    for one in taken:
        alike.setdefault((one.copy[0], one.kind, one.key, served[one.copy]), []).append(one.copy)
    graded = {(kind, key): _candidate(chosen, kind, key) for _, kind, key, _ in alike}
    for (channel, kind, key, (opamp, maker)), copies in alike.items():
        level = _level_of(chosen, Taken(copies[0], kind, key))
        yield Build(
            channel=channel,
            copies=tuple(copy for _, copy in copies),
            candidate=graded[kind, key],
            level=None if level is None else levels[level],
            opamp=opamp,
            opamp_maker=maker,
        )


def _candidate(chosen: Chosen, kind: int, key: Key) -> Candidate:
    """The receiver of one option, evaluated anew from its catalogs."""
    of = chosen.field.kinds[kind]
    rows = chosen.pools[kind].choice([key])
    candidate = assemble.candidates(of.space, of.study.catalogs, rows)[0]
    if candidate.missed:
        raise UnsoundBoardError(f"{of.name} with {candidate.opamp} misses {', '.join(candidate.missed)}")
    return candidate


def _named(
    chosen: Chosen, taken: Sequence[Taken], levels: Mapping[LevelKey, str], packages: Sequence[Package]
) -> Iterator[Level]:
    shelf = chosen.field.shelf
    for level, name in levels.items():
        users = [one for one in taken if _level_of(chosen, one) == level]
        first = users[0]
        contexts = chosen.field.kinds[first.kind].space.contexts
        context = chosen.pools[first.kind].held[first.key][1][2]
        top, bottom, bypass = (shelf.parts[part] for part in level[0])
        buffer = next(p for p in packages if any(place.level == name for place in p.places))
        yield Level(
            name=name,
            voltage=float(f"{contexts.vref[context]:.9g}"),
            top=top.key[3],
            bottom=bottom.key[3],
            bypass=bypass.key[3],
            resistor_family=top.key[2],
            capacitor_family=bypass.key[2],
            opamp=buffer.opamp,
            channels=tuple(dict.fromkeys(one.copy[0] for one in users)),
        )
