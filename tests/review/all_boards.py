"""Every board that could take the place of one: counted and priced by code of its own."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import permutations, product

from optimizer.catalog.parts import Parts
from optimizer.planning.outline import Outline
from optimizer.planning.plan import Build
from optimizer.search.result import Candidate
from tests.review.made_board import bought
from tests.review.tiny_boards import Tiny

Level = tuple[float | None, float | None, str]
"""The divider of a shared level, and the family of its buffer."""
Ref = Level | None
"""The shared level of a copy; None for a reference of its own."""
Way = tuple[str, Ref, int, Candidate]
"""A family, the shared level, the positions of the copy that change, and the receiver."""
Copy = tuple[str, int]
MANY = 150_000


@dataclass(frozen=True)
class Before:
    """The board as it stands: how each copy is built, its packages by part, its levels."""

    copies: dict[Copy, Build]
    packages: Counter[str]
    levels: tuple[Level, ...]


def before(board: Tiny, packages: Counter[str]) -> Before:
    copies = {(one.channel, copy): one for one in board.builds for copy in one.copies}
    levels: dict[str, Level] = {}
    for one in board.builds:
        if one.level is not None:
            levels[one.level] = _level(one.candidate)
    return Before(copies, packages, tuple(levels.values()))


def uses(one: Candidate, opamp: str) -> set[str]:
    """Everything that a receiver is made of."""
    named = {one.photodiode, opamp, one.resistor_family, str(one.capacitor_family)}
    return named | {str(one.outlines["divider_family"]), str(one.outlines["bypass_family"])}


def moved(old: Build, new: Candidate) -> int:
    """The positions of one copy that change; of a shared level only whether there is one."""
    one = old.candidate
    count = one.photodiode != new.photodiode
    count += one.wiring != new.wiring
    if old.level is not None or new.reference.buffered:
        count += (old.level is not None) != new.reference.buffered
    else:
        count += (one.reference.top, one.reference.bottom) != (new.reference.top, new.reference.bottom)
    count += (one.feedback_resistance, one.resistor_family) != (new.feedback_resistance, new.resistor_family)
    count += (one.feedback_capacitance, one.capacitor_family) != (
        new.feedback_capacitance,
        new.capacitor_family,
    )
    return count


def ways(board: Tiny, stood: Before, gone: str, *, all_move: bool) -> dict[Copy, list[Way]]:
    """How each copy may be built without what is gone; those that need not change as they are."""
    levels = {b.level for b in stood.copies.values() if gone in uses(b.candidate, b.opamp)} - {None}
    found: dict[Copy, list[Way]] = {}
    for copy, old in stood.copies.items():
        moves = all_move or gone in uses(old.candidate, old.opamp) or old.level in levels
        choices: Iterable[Candidate] = board.receivers[copy[0]] if moves else [old.candidate]
        found[copy] = [
            (one.opamp[:3], _ref(one), moved(old, one), one) for one in choices if gone not in uses(one, "")
        ]
    return found


def _ref(one: Candidate) -> Ref:
    return _level(one) if one.reference.buffered else None


def _level(one: Candidate) -> Level:
    return one.reference.top, one.reference.bottom, one.opamp[:3]


def fewest(board: Tiny, stood: Before, gone: str, found: dict[Copy, list[Way]]) -> int | None:
    """The fewest positions that any board changes."""
    least: list[list[tuple[str, Ref, int]]] = []
    for every in found.values():
        best: dict[tuple[str, Ref], int] = {}
        for family, ref, count, _ in every:
            best[family, ref] = min(best.get((family, ref), count), count)
        least.append([(family, ref, count) for (family, ref), count in best.items()])
    totals = [
        sum(count for _, _, count in taken) + _level_changes(stood, [ref for _, ref, _ in taken]) + swaps
        for taken in product(*least)
        for swaps in [_fewest_swaps(board.outline, stood, [t[:2] for t in taken], gone)]
        if swaps is not None
    ]
    return min(totals, default=None)


def cheapest(board: Tiny, stood: Before, gone: str, found: dict[Copy, list[Way]], total: int) -> int | None:
    """The least cents of a board that changes just `total` positions; None where there are too many."""
    floor = [min(way[2] for way in every) for every in found.values()]
    cut = [
        [way for way in every if way[2] + sum(floor) - own <= total]
        for every, own in zip(found.values(), floor, strict=True)
    ]
    size = 1
    for every in cut:
        size *= len(every)
    if size > MANY:
        return None
    best: int | None = None
    for taken in product(*cut):
        changed = sum(way[2] for way in taken)
        if changed > total:
            continue
        changed += _level_changes(stood, [way[1] for way in taken])
        if changed > total:
            continue
        for pack in _packings(board.outline, [way[:2] for way in taken], gone):
            if changed + _swapped(stood, pack) == total:
                cost = _cents(board.outline, [way[3] for way in taken], pack)
                best = cost if best is None else min(best, cost)
    return best


def _fewest_swaps(outline: Outline, stood: Before, taken: Sequence[tuple[str, Ref]], gone: str) -> int | None:
    return min((_swapped(stood, pack) for pack in _packings(outline, taken, gone)), default=None)


def _swapped(stood: Before, pack: Counter[str]) -> int:
    return max((stood.packages - pack).total(), (pack - stood.packages).total())


def _level_changes(stood: Before, refs: Sequence[Ref]) -> int:
    """The least over who takes whose place; a copy that had a level and has one follows it or leaves it."""
    homes = [None if old.level is None else _level(old.candidate) for old in stood.copies.values()]
    pairs = [(home, ref) for home, ref in zip(homes, refs, strict=True) if ref is not None]
    there = sorted({ref for _, ref in pairs}, key=str)
    old = stood.levels
    return min(
        sum(not follower or level[:2] != follower[:2] for level, follower in zip(old, line, strict=True))
        + len(set(there) - set(line))
        + sum(home is not None and dict(zip(old, line, strict=True))[home] != ref for home, ref in pairs)
        for line in set(permutations([*there, *([None] * len(old))], len(old)))
    )


def _packings(outline: Outline, taken: Sequence[tuple[str, Ref]], gone: str) -> Iterator[Counter[str]]:
    """Every choice of packages of which none could be left out."""
    need: Counter[str] = Counter(family for family, _ in taken)
    need.update(ref[2] for ref in {ref for _, ref in taken if ref is not None})
    each = [list(_held(_packages(outline, family, gone), n)) for family, n in sorted(need.items())]
    for packs in product(*each):
        yield sum(packs, Counter[str]())


def _packages(outline: Outline, family: str, gone: str) -> tuple[tuple[str, int], ...]:
    parts = outline.channels[0].study.catalogs.opamps
    sizes = zip(parts.text["part"].tolist(), parts.number["channels"].tolist(), strict=True)
    return tuple((part, int(size)) for part, size in sizes if part[:3] == family and part != gone)


@cache
def _held(packages: tuple[tuple[str, int], ...], need: int) -> tuple[Counter[str], ...]:
    found = []
    for counts in product(*(range(need + 1) for _ in packages)):
        held = sum(n * size for n, (_, size) in zip(counts, packages, strict=True))
        least = min((size for n, (_, size) in zip(counts, packages, strict=True) if n), default=0)
        if 0 <= held - need < least:
            found.append(Counter({part: n for n, (part, _) in zip(counts, packages, strict=True) if n}))
    return tuple(found)


def _cents(outline: Outline, taken: Sequence[Candidate], pack: Counter[str]) -> int:
    """What a build costs: the bill, its lines and its placements."""
    pieces: Counter[tuple[str, str, float]] = Counter()
    levels = set()
    for one in taken:
        pieces["photodiodes", one.photodiode, 0.0] += 1
        pieces["resistors", one.resistor_family, one.feedback_resistance] += 1
        pieces["capacitors", str(one.capacitor_family), one.feedback_capacitance] += 1
        ref = (one.reference.top, one.reference.bottom, one.opamp[:3])
        if one.reference.buffered and ref in levels:
            continue
        if one.reference.buffered:
            levels.add(ref)
        for value in ref[:2]:
            pieces["resistors", str(one.outlines["divider_family"]), float(value or 0.0)] += 1
        pieces["capacitors", str(one.outlines["bypass_family"]), 100e-9] += 1
    for part, number in pack.items():
        pieces["opamps", part, 0.0] += number
    parts = sum(_paid(outline, role, name, n) for (role, name, _), n in pieces.items())
    placed = round(outline.costs.placement * 100 * outline.quantity) * pieces.total()
    return parts + round(outline.costs.line_item * 100) * len(pieces) + placed


def _paid(outline: Outline, role: str, name: str, number: int) -> int:
    parts: Parts = getattr(outline.channels[0].study.catalogs, role)
    names = parts.text["part" if "part" in parts.text else "family"].tolist()
    return bought(parts.points["price"][names.index(name)], outline.quantity * number)[2]
