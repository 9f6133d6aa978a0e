"""What may take the place of what is on a board: the ways to build each receiver, by how much they change.

Receivers that need not change keep their one way. Of the others every setting that changes at most so many
positions of a copy is looked for, whatever its op-amp: packages are counted on the board as a whole.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.errors import InputError, Problem
from optimizer.planning.amplifiers import amplifiers_of
from optimizer.planning.columns import Field, Key, Pool
from optimizer.planning.kinds import NONE, Kind, dividers_of, kinds_of
from optimizer.planning.outline import Outline, Wanted
from optimizer.planning.shelf import Shelf
from optimizer.review.board_gone import Gone, Hit
from optimizer.search.change import dividers
from optimizer.search.change.dividers import Shops
from optimizer.search.change.positions import OUT, SAME, Axis, Fitted, Grades, graded, wired
from optimizer.search.change.substitutes import in_whole, laid_out, products
from optimizer.search.collect import Collected, collect
from optimizer.search.locate import locate, referred
from optimizer.search.space import Choice, Space

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

CAP = 2000
"""Settings of one receiver with the same positions changed that are looked for at once at most."""
KEEP = 40
"""Ways with one photodiode over one route that are kept, the cheapest with what is on the board already."""


@dataclass(slots=True)
class Ways:
    """The ways to build one receiver: a pool, how many positions of a copy each changes, its grades.

    A way goes over an op-amp (in any package) and a shared level, or none. Of each such route all ways of
    fewest changes are there, of those up to `looked`, and all ways of up to `whole` changes; a level that
    is not on the board (`stays` holds those that are) counts as one change. Where it is not `complete`,
    only the cheapest of too many are there, and where it is not `covered`, routes may be missing. Grades
    are None for a receiver that need not change. `had` are the parts on the board.
    """

    hit: Hit
    pool: Pool
    grades: Grades | None
    stays: frozenset[int] = frozenset()
    had: frozenset[int] = frozenset()
    line_item: float = 0.0
    moves: dict[Key, int] = field(default_factory=dict)
    looked: int = -1
    whole: int = -1
    complete: bool = True
    covered: bool = True

    @property
    def most(self) -> int:
        """How many positions of a copy can change at most."""
        if self.grades is None:
            return 0
        return 1 + sum(int(axis.changed.max()) for axis in self.grades.axes)

    @property
    def least(self) -> int:
        """How many positions of a copy change at least."""
        return min(self.moves.values(), default=self.looked + 1)

    @property
    def copies(self) -> int:
        """How many copies are built."""
        return len(self.hit.receiver.copies)

    def add(self, choice: Choice, margin: Floats, moves: int) -> None:
        """Take in settings that change `moves` positions, where none that changes fewer does the same."""
        fresh = np.array([key not in self.moves for key in self.pool.keys(choice)], dtype=bool)
        self.pool.add(choice.take(fresh), margin[fresh])
        self.moves |= dict.fromkeys(self.pool.keys(choice.take(fresh)), moves)


def field_of(outline: Outline, plan: Mapping[str, Any], gone: Gone) -> Field:
    """Everything to choose from, with one kind of channel for each receiver of the plan.

    Raises InputError where catalogs of two channels disagree on a part.
    """
    shelf = Shelf()
    known = {channel.name: kind for kind in kinds_of(outline, shelf) for channel in kind.channels}
    kinds = tuple(
        _kind(known[hit.receiver.channel], (hit, place), shelf, _levels(plan, gone))
        for place, hit in enumerate(gone.hits)
    )
    if shelf.problems:
        raise InputError(shelf.problems)
    limited = [name for name, limit in asdict(outline.limits).items() if limit is not None]
    return Field(outline, kinds, shelf, amplifiers_of(kinds, shelf, limited))


def label(place: int) -> str:
    """What the channel that stands for the receiver at `place` is called in a field."""
    return f"receiver {place}"


def _levels(plan: Mapping[str, Any], gone: Gone) -> list[Mapping[str, Any]]:
    """One candidate that uses it for each shared level of the plan."""
    users = {hit.receiver.level: hit.receiver.candidate for hit in gone.hits}
    return [users[level["name"]] for level in plan["levels"] if level["name"] in users]


def _kind(known: Kind, of: tuple[Hit, int], shelf: Shelf, levels: Sequence[Mapping[str, Any]]) -> Kind:
    hit, place = of
    receiver, study = hit.receiver, hit.receiver.reopened.study
    space = dividers.left(hit.space, study.catalogs, hit.taken.plan)
    for candidate in levels:
        if hit.receiver.level is None or candidate["reference"] != receiver.candidate["reference"]:
            space = _as_on_board(space, hit, candidate)
    divider, level = dividers_of(shelf, study, space)
    channel = Wanted(label(place), known.channels[0].request, len(receiver.copies), study)
    return replace(known, channels=(channel,), space=space, divider=divider, level=level)


def _as_on_board(space: Space, hit: Hit, candidate: Mapping[str, Any]) -> Space:
    """`space` with the level that `candidate` shares bought from its families, as far as they can be had."""
    out = hit.taken.plan.out
    shops = []
    for parts, use, gone in (
        (hit.catalogs.resistors, "divider", out.resistors),
        (hit.catalogs.capacitors, "bypass", out.capacitors),
    ):
        name, maker = candidate.get(f"{use}_family"), candidate.get(f"{use}_maker")
        own = Fitted(name or "", maker, "").rows(parts, "family")
        shops.append([own & ~gone, ~gone])
    contexts = referred(space, candidate["reference"]) & space.contexts.buffered
    return dividers.bought(space, hit.catalogs, Shops(*shops), contexts)


def ways_of(of: Field, plan: Mapping[str, Any], gone: Gone) -> list[Ways]:
    """The receivers with nothing looked for yet; those that need not change have their one way."""
    levels, had = _levels(plan, gone), _had(of, plan)
    every = [_ways(of, place, hit, levels) for place, hit in enumerate(gone.hits)]
    for ways in every:
        ways.had, ways.line_item = had, of.outline.costs.line_item / of.outline.quantity
    return every


def _had(of: Field, plan: Mapping[str, Any]) -> frozenset[int]:
    """The parts of a plan's bill by place on the shelf."""
    lines = {(line["role"], line["maker"], line["part"], line["value"] or 0.0) for line in plan["bill"]}
    known = ((part.role, part.key[1], part.key[2], part.value or 0.0) for part in of.shelf.parts)
    return frozenset(place for place, part in enumerate(known) if part in lines)


def _ways(of: Field, place: int, hit: Hit, levels: Sequence[Mapping[str, Any]]) -> Ways:
    kind, group = of.kinds[place], of.amplifiers.group[place]
    if hit.moves:
        x = kind.space.contexts
        there = [kind.level[referred(kind.space, one["reference"]) & x.buffered] for one in levels]
        stays = frozenset(np.concatenate([np.zeros(0, dtype=np.int64), *there]).tolist())
        return Ways(hit, Pool(kind, group), _grades(of, place, hit), stays)
    ways = Ways(hit, Pool(kind, group), None, looked=0, whole=0)
    choice = locate(kind.space, hit.catalogs, hit.receiver.built)
    rows = of.amplifiers.rows[place]
    smallest = rows[group[rows] == group[choice.opamp]]
    if not smallest.size:
        raise InputError([_uncounted(hit)])
    ways.add(replace(choice, opamp=smallest), np.zeros(1), 0)
    return ways


def _uncounted(hit: Hit) -> Problem:
    catalog = hit.catalogs.sources[0].file if hit.catalogs.sources else "opamps"
    rule = "the board has a limit for which its catalog leaves a blank (supply current or area)"
    return Problem(catalog, None, None, str(hit.receiver.candidate["opamp"]), rule)


def _grades(of: Field, place: int, hit: Hit) -> Grades:
    """How many positions of a copy each choice changes, op-amps and shared levels apart; OUT: not at all."""
    kind, plan = of.kinds[place], hit.taken.plan
    found = graded(kind.space, hit.catalogs, plan)
    context = found.context
    if hit.receiver.level is not None:
        rewired = (~wired(kind.space, plan.board)).astype(np.int64)
        context = Axis(rewired + ~kind.space.contexts.buffered, context.grade)
    return Grades(
        opamp=_opamps(of, place, hit),
        diode=_plain(found.diode),
        context=_plain(context),
        resistor=_plain(found.resistor),
        capacitor=_plain(found.capacitor),
        low_pass=_plain(found.low_pass),
    )


def _plain(axis: Axis) -> Axis:
    """The axis without kinds of change: a choice is to be had or not."""
    return Axis(axis.changed, np.where(axis.grade == OUT, OUT, SAME))


def _opamps(of: Field, place: int, hit: Hit) -> Axis:
    """One op-amp of each group, for packages are counted elsewhere; where it is kept only its own."""
    group, rows = of.amplifiers.group[place], of.amplifiers.rows[place]
    if "opamp" in hit.taken.plan.keep:
        own = hit.taken.plan.board.parts["opamp"].rows(hit.catalogs.opamps, "part")
        rows = rows[np.isin(group[rows], group[own])]
    grade = np.full(group.size, OUT)
    grade[rows] = SAME
    return Axis(np.zeros(group.size, dtype=np.int64), grade)


def widen(ways: Ways) -> None:
    """Take in the ways that change one position more, over routes that have no way yet."""
    assert ways.grades is not None
    ways.looked += 1
    for grades in list(_without_way(ways, ways.grades)):
        _take_each(ways, grades, ways.looked)


def widen_whole(ways: Ways) -> None:
    """Take in all ways that change one position more."""
    assert ways.grades is not None
    ways.whole += 1
    _take_each(ways, ways.grades, ways.whole)


def _take_each(ways: Ways, grades: Grades, changes: int) -> None:
    """Ways of so many changes with references of their own, over levels of the board, over other levels."""
    kind, context = ways.pool.kind, grades.context
    buffered = kind.space.contexts.buffered
    stays = [buffered & (kind.level == level) for level in sorted(ways.stays)]
    other = buffered & ~np.isin(kind.level, list(ways.stays))
    for here, moves in [(~buffered, changes), *((level, changes) for level in stays), (other, changes - 1)]:
        axis = Axis(context.changed, np.where(here, context.grade, OUT))
        if moves >= 0 and here.any():
            _take(ways, replace(grades, context=axis), moves)


def _take(ways: Ways, grades: Grades, moves: int) -> None:
    """Take in ways of one product after another; where they are too many, at least some of each op-amp."""
    kind = ways.pool.kind
    for part in products(grades, SAME, moves):
        ready = laid_out(kind.space, part)
        if ready is None:
            continue
        asked, opamps, diodes = ready
        found = [collect(asked, _pairs(opamps, diodes), np.inf, CAP)]
        if not found[0].complete:
            ways.complete = False
            buffered = kind.level[part[2] & kind.space.contexts.buffered]
            ways.covered &= np.unique(buffered).size < 2
            found += [collect(asked, _pairs(opamps[[k]], diodes), np.inf, KEEP) for k in range(opamps.size)]
        for one in found:
            _keep(ways, in_whole(part, one.choice), one, moves)


def _pairs(opamps: Ints, diodes: Ints) -> tuple[Ints, Ints]:
    return np.repeat(opamps, diodes.size), np.tile(diodes, opamps.size)


def _keep(ways: Ways, choice: Choice, found: Collected, moves: int) -> None:
    """Take in the cheapest of each photodiode and route, what must be stocked anew in mind."""
    kind = ways.pool.kind
    if not choice.opamp.size:
        return
    x, had = kind.space.contexts, np.array(sorted(ways.had), dtype=np.int64)
    own = kind.divider[choice.context] * ~x.buffered[choice.context][:, None]
    parts = [kind.diode_part[choice.diode], kind.resistor_part[choice.resistor]]
    parts += [kind.capacitor_part[choice.capacitor], *own.T]
    new = np.sum([~np.isin(part, had) for part in parts], axis=0)
    route = np.where(x.buffered[choice.context], kind.level[choice.context], NONE)
    order = np.lexsort(
        (found.cost + ways.line_item * new, ways.pool.group[choice.opamp], route, choice.diode)
    )
    same = np.column_stack([choice.diode, route, ways.pool.group[choice.opamp]])[order]
    first = np.r_[True, np.any(same[1:] != same[:-1], axis=1)]
    begins = np.flatnonzero(first)[np.cumsum(first) - 1]
    kept = order[np.arange(order.size) - begins < KEEP]
    ways.complete &= kept.size == order.size
    ways.add(choice.take(kept), found.margin[kept], moves)


def _without_way(ways: Ways, grades: Grades) -> Iterator[Grades]:
    """The grades of routes without a way: op-amps with the same routes together."""
    alike: dict[frozenset[int | None], list[int]] = {}
    for row in np.flatnonzero(grades.opamp.grade != OUT).tolist():
        group = int(ways.pool.group[row])
        routes = frozenset(_level_of(key) for key in ways.moves if key[1] == group)
        alike.setdefault(routes, []).append(row)
    kind = ways.pool.kind
    for routes, rows in alike.items():
        levels = np.where(kind.space.contexts.buffered, kind.level, NONE)
        had = np.isin(levels, [NONE if level is None else level for level in routes])
        context = Axis(grades.context.changed, np.where(had, OUT, grades.context.grade))
        opamp = np.full(grades.opamp.grade.size, OUT)
        opamp[rows] = SAME
        yield replace(grades, opamp=Axis(grades.opamp.changed, opamp), context=context)


def _level_of(key: Key) -> int | None:
    """The shared level of a way; None where its reference is its own."""
    return key[4] if key[5] else None
