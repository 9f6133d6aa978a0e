"""Why pairs are not on the list: each pair counted once, by a rule that knows no order of work."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import CHECKS
from optimizer.search import feed
from optimizer.search.bounds import Goals
from optimizer.search.boxes import whole
from optimizer.search.reach import furthest
from optimizer.search.result import SOURCES
from optimizer.search.roles import PASSES, Verdicts
from optimizer.search.sources import offered
from optimizer.search.spread.shifted import bounded
from optimizer.search.view import Index, view

Ints = NDArray[np.int64]

_BLOCK = 262144
_MISSING = CHECKS.index("missing")


@dataclass(frozen=True, slots=True)
class Shown:
    """What the table shows: pair numbers, and the primary figure of its last row if it is full of rows

    that meet (else None).
    """

    pairs: Ints
    last: float | None


def dropped(index: Index, goals: Goals, *, by: str, shown: Shown) -> dict[str, int]:
    """Pairs by the key under which they count, in the order of the checks.

    A part that fails alone takes all its pairs with it. Of the others, one whose op-amp comes from too
    few makers in its package and pinout counts as such; one whose least cost (or
    supply current) is already above the last row shown is `cannot_beat`; one that reaches no eligible
    setting counts under the check it reached; one whose bounds prove a miss, and all when fewer pairs
    meet than are asked for, is `missed_target`; the rest is `cannot_beat`.
    """
    space = index.space
    counts: Counter[str] = Counter()
    _count_alone(space.opamp_verdicts, space.diode_verdicts, counts)
    o = np.flatnonzero(space.opamp_verdicts.alone == PASSES)
    d = np.flatnonzero(space.diode_verdicts.alone == PASSES)
    opamp, diode = np.repeat(o, d.size), np.tile(d, o.size)
    for begin in range(0, opamp.size, _BLOCK):
        part = slice(begin, begin + _BLOCK)
        _count_block(index, goals, (opamp[part], diode[part]), by=by, shown=shown, counts=counts)
    named = [*CHECKS, SOURCES, "missed_target", "cannot_beat"]
    order = {key: place for place, key in enumerate(named)}
    return dict(sorted(counts.items(), key=lambda item: (order[item[0].partition(":")[0]], item[0])))


def _count_alone(opamps: Verdicts, diodes: Verdicts, counts: Counter[str]) -> None:
    """Pairs of which a part fails alone: under the earlier check, the op-amp's column first."""
    left: Counter[tuple[int, str]] = Counter(zip(opamps.alone.tolist(), opamps.column.tolist(), strict=True))
    right: Counter[tuple[int, str]] = Counter(zip(diodes.alone.tolist(), diodes.column.tolist(), strict=True))
    for (o_code, o_column), o_count in left.items():
        for (d_code, d_column), d_count in right.items():
            code, column = (o_code, o_column) if o_code <= d_code else (d_code, d_column)
            if code < PASSES:
                counts[CHECKS[code] + (f":{column}" if column else "")] += o_count * d_count


def _count_block(
    index: Index, goals: Goals, pairs: tuple[Ints, Ints], *, by: str, shown: Shown, counts: Counter[str]
) -> None:
    space = index.space
    opamp, diode = pairs
    number = opamp * space.diodes.price.size + diode
    rest = ~np.isin(number, shown.pairs)
    opamp, diode = opamp[rest], diode[rest]
    if space.sources > 1:
        lone = ~offered(space)[opamp]
        counts[SOURCES] += int(lone.sum())
        opamp, diode = opamp[~lone], diode[~lone]
    if shown.last is not None and by in ("cost", "supply_current"):
        above = feed.floors(index, opamp, diode, by=by) > shown.last
        counts["cannot_beat"] += int(above.sum())
        opamp, diode = opamp[~above], diode[~above]
    reach = furthest(space, opamp, diode)
    _count_reached(index, (opamp, diode), reach, counts)
    eligible = reach == PASSES
    if shown.last is None:
        counts["missed_target"] += int(eligible.sum())
    else:
        boxes = whole(space, opamp[eligible], diode[eligible])
        zero = np.zeros(len(boxes))
        may = bounded(index, boxes, view(index, boxes), goals, (zero, zero)).possible
        counts["missed_target"] += int((~may).sum())
        counts["cannot_beat"] += int(may.sum())
    for key in [key for key, count in counts.items() if not count]:
        del counts[key]


def _count_reached(index: Index, pairs: tuple[Ints, Ints], reach: Ints, counts: Counter[str]) -> None:
    """Pairs that reach no eligible setting, by check (and for unknown values by column)."""
    for code in np.unique(reach[reach < PASSES]):
        here = reach == code
        if code != _MISSING:
            counts[CHECKS[code]] += int(here.sum())
            continue
        for opamp, diode in zip(pairs[0][here], pairs[1][here], strict=True):
            counts[f"missing:{_blank(index, int(opamp), int(diode))}"] += 1


def _blank(index: Index, opamp: int, diode: int) -> str:
    """The earliest unknown column among the contexts of one pair that get as far as `missing`."""
    space = index.space
    o, d = space.opamp_verdicts, space.diode_verdicts
    at = np.minimum(o.code[opamp], d.code[diode]) == _MISSING
    amp_lacks = at & (o.code[opamp] == _MISSING)
    if amp_lacks.any():
        return str(o.columns[int(o.blank[opamp][amp_lacks].min())])
    return str(d.columns[int(d.blank[diode][at & (d.code[diode] == _MISSING)].min())])
