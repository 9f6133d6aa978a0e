"""Every setting that meets the request at a cost up to some limit, or the cheapest of them.

The search's boxes again, but no pair keeps one best setting only: a box goes when its bounds admit no
setting, or none within the cost. What is left is split down to single settings, the cheapest boxes first.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import rounded
from optimizer.search.boxes import Boxes, settings_of, single, whole
from optimizer.search.plain import Judged, judge
from optimizer.search.query import Query
from optimizer.search.sources import is_sourced, may_be_sourced
from optimizer.search.space import Choice
from optimizer.search.split import filled, halves, narrowed
from optimizer.search.spread.corners import judged_whole
from optimizer.search.spread.shifted import bounded
from optimizer.search.view import view

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

BATCH = 4096


@dataclass(frozen=True, slots=True)
class Collected:
    """Settings that meet, with costs and smallest margins; what others there are lies in `open` boxes."""

    choice: Choice
    cost: Floats
    margin: Floats
    open: Boxes

    @property
    def complete(self) -> bool:
        """Whether there are no others."""
        return not len(self.open)


def collect(asked: Query, pairs: tuple[Ints, Ints], most: float, cap: int) -> Collected:
    """The settings of `pairs` (op-amps, photodiodes) that meet all targets and cost at most `most`.

    About `cap` of them where there are more: then not all, and those in the cheapest boxes.
    """
    with np.errstate(all="ignore"):  # absurd but stated values overflow; their figures do not exist
        return _Collecting(asked, most).run(*pairs, cap)


class _Collecting:
    """The boxes still open, by the least that they can cost, and what was found."""

    def __init__(self, asked: Query, most: float) -> None:
        self.asked, self.most = asked, most
        self.found: list[Judged] = []
        self.boxes = Boxes(np.zeros((0, 10), dtype=np.int64))
        self.least = np.zeros(0)

    def run(self, opamp: Ints, diode: Ints, cap: int) -> Collected:
        for begin in range(0, opamp.size, BATCH):
            part = slice(begin, begin + BATCH)
            self._take(whole(self.asked.space, opamp[part], diode[part]))
        while self.least.size and sum(found.reach.size for found in self.found) < cap:
            first = np.argsort(self.least, kind="stable")
            chosen, rest = first[: BATCH // 2], first[BATCH // 2 :]
            boxes = self.boxes.take(chosen)
            self.boxes, self.least = self.boxes.take(rest), self.least[rest]
            self._take(halves(self.asked.index, boxes))
        return self._collected()

    def _take(self, boxes: Boxes) -> None:
        """Bound `boxes`, judge the single ones that are left, and keep the others open."""
        index, goals = self.asked.index, self.asked.goals
        v = view(index, boxes)
        zero = np.zeros(len(boxes))
        limits = bounded(index, boxes, v, goals, (zero, zero))
        boxes = narrowed(index, boxes, limits.left, v)
        keep = limits.possible & filled(boxes) & (rounded(v.cost) <= self.most)
        if index.space.sources > 1:
            keep[keep] = may_be_sourced(index, boxes.take(keep), goals, 0.0)
        boxes, least = boxes.take(keep), limits.cost[keep]
        lone = single(boxes)
        if lone.any():
            self._judge(boxes.take(lone))
        self.boxes = Boxes(np.concatenate([self.boxes.rows, boxes.rows[~lone]]))
        self.least = np.concatenate([self.least, least[~lone]])

    def _judge(self, boxes: Boxes) -> None:
        space, index = self.asked.space, self.asked.index
        judged = judge(space, settings_of(boxes, index.resistors, index.capacitors), "cost")
        judged = judged.take(judged.meets & (judged.cost <= self.most))
        if judged.reach.size:
            judged = judged_whole(space, judged, "cost")
            judged = judged.take(judged.meets)
        if judged.reach.size and space.sources > 1:
            judged = judged.take(is_sourced(space, judged.choice, 0.0))
        if judged.reach.size:
            self.found.append(judged)

    def _collected(self) -> Collected:
        none = np.zeros(0, dtype=np.int64)
        parts = [found.choice.columns() for found in self.found]
        columns = [np.concatenate([none, *(part[k] for part in parts)]) for k in range(6)]
        cost = np.concatenate([np.zeros(0), *(found.cost for found in self.found)])
        margin = np.concatenate([np.zeros(0), *(found.vector[:, 0] for found in self.found)])
        return Collected(Choice(*columns), cost, margin, self.boxes)
