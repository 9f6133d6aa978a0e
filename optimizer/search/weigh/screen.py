"""Which pairs may serve a question that asks for more than the request does.

One pass of bounds over the pairs, under the request as it stands, serves all such questions: a pair
whose best margin for some target is proved to stay below what a question needs cannot serve it.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.search.bounds import Goals
from optimizer.search.boxes import whole
from optimizer.search.feed import Pairs
from optimizer.search.spread.shifted import bounded
from optimizer.search.view import Index, view
from optimizer.search.weigh.questions import Questions

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

BLOCK = 4096
SLACK = 1e-8
"""Relative slack on the margins needed, against rounding of limits and margins."""


@dataclass(slots=True)
class Screen:
    """Upper bounds on the margins of pairs against the limits of the first question, made as needed.

    `needs` holds, by question, the margins against those limits that its own limits come to (-inf
    throughout where some limit is looser: nothing is known then). A pair that cannot be has -inf.
    """

    index: Index
    pairs: Pairs
    goals: Goals
    needs: Floats
    ceiling: Floats
    done: int = field(default=0)

    @staticmethod
    def of(index: Index, pairs: Pairs, questions: Questions) -> Screen:
        """Nothing bounded yet."""
        base = questions.limits[0]
        limits = dict(zip(questions.names, base.tolist(), strict=True))
        columns = [
            margins.margin(name, questions.limits[:, k], base[k]) for k, name in enumerate(questions.names)
        ]
        needs = np.column_stack(columns)
        looser = np.any(needs < 0.0, axis=1, keepdims=True)
        needs = np.where(looser, -np.inf, needs - SLACK * (1.0 + needs))
        goals = Goals(index.space.bench, limits, margins.LARGEST)
        return Screen(index, pairs, goals, needs, np.zeros((pairs.size, len(questions.names))))

    def __call__(self, question: int, places: Ints) -> Bools:
        """Where the pairs at `places` may hold anything for `question`."""
        need = self.needs[question]
        if not places.size or np.all(need == -np.inf):
            return np.ones(places.size, dtype=bool)
        while self.done <= places.max():
            self._bound_more()
        return np.asarray(np.all(self.ceiling[places] >= need, axis=1))

    def _bound_more(self) -> None:
        part = slice(self.done, min(self.done + BLOCK, self.pairs.size))
        boxes = whole(self.index.space, self.pairs.opamp[part], self.pairs.diode[part])
        zero = np.zeros(len(boxes))
        said = bounded(self.index, boxes, view(self.index, boxes), self.goals, (zero, zero))
        self.ceiling[part] = np.where(said.possible[:, None], said.margin_columns, -np.inf)
        self.done = part.stop
