"""Pools cut where candidates differ only in passives that no other channel can share.

Of two candidates of one kind with the same active parts, the same level and the same shared passives, whose
other passives come from the same families, either serves the board as well as the other: prices are those
of the families. A kind that is built once keeps the one with the largest margin, and nothing is lost. Of a
kind with several copies those are kept too whose passives suit most other candidates of the kind, so that
copies that are built differently may still share them; that may lose a plan, and counts as a cut.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

from optimizer.planning.columns import Field, Key, Pool
from optimizer.planning.kinds import NONE

FEW = 1500
"""Candidates so few that all may stay."""
LIKED = 3
"""Candidates kept of several that differ in passives of their own only, by how many others those suit."""


@dataclass(frozen=True, slots=True)
class Trimmed:
    """The pools that are left, and whether they have lost nothing for certain."""

    pools: tuple[Pool, ...]
    lossless: bool


def trimmed(field: Field, pools: Sequence[Pool]) -> Trimmed:
    """The pools without candidates that others serve as well, in passives of their kind alone."""
    if sum(len(pool.held) for pool in pools) <= FEW:
        return Trimmed(tuple(Pool(pool.kind, pool.group, dict(pool.held)) for pool in pools), True)
    used = [_parts(field, i, pool) for i, pool in enumerate(pools)]
    left, lossless = [], True
    for i, pool in enumerate(pools):
        others = set().union(*(parts for k, parts in enumerate(used) if k != i), _dividers(field, i, pool))
        kept = _kept(field, pool, others)
        lossless &= pool.kind.count == 1 or len(kept) == len(pool.held)
        left.append(Pool(pool.kind, pool.group, {key: pool.held[key] for key in kept}))
    return Trimmed(tuple(left), lossless)


def _dividers(field: Field, i: int, pool: Pool) -> set[int]:
    """The parts of the dividers that candidates of a kind use."""
    contexts = {held[1][2] for held in pool.held.values()}
    return {int(part) for context in contexts for part in field.kinds[i].divider[context]} - {NONE}


def _parts(field: Field, i: int, pool: Pool) -> set[int]:
    """Every passive that candidates of a kind use."""
    return {part for key in pool.held for part in key[2:4]} | _dividers(field, i, pool)


def _kept(field: Field, pool: Pool, others: set[int]) -> list[Key]:
    """The candidates to keep, in order."""
    groups: dict[tuple[object, ...], list[Key]] = {}
    for key in sorted(pool.held):
        groups.setdefault(_sign(field, key, others), []).append(key)
    liked = Counter(part for keys in groups.values() for part in {p for key in keys for p in key[2:4]})
    kept = []
    for keys in groups.values():
        best = max(keys, key=lambda key: pool.held[key][0])
        chosen = {best}
        if pool.kind.count > 1:
            ranked = sorted(keys, key=lambda key: (-liked[key[2]] - liked[key[3]], -pool.held[key][0], key))
            chosen |= set(ranked[:LIKED])
        kept += sorted(chosen)
    return kept


def _sign(field: Field, key: Key, others: set[int]) -> tuple[object, ...]:
    """What makes a candidate different from others for the rest of the board."""
    shelf = field.shelf.parts
    passives = [p if p == NONE or p in others else shelf[p].key[:3] for p in key[2:4]]
    return (*key[:2], *passives, *key[4:])
