"""Invented boards of any size for the benchmark: pools as a search would hand them over.

Each channel takes some of the diodes, families and values; half of its (diode, family) pairs need a
reference level, plain or buffered. Prices fall with quantity; some parts are short in stock. The line-item
cost is set so that it makes about 19 % of the best plan's cost: that share is nearly all the difficulty.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from optimizer.board.problem import Board, BoardPart, Budgets, Channel, Family, Option, SharedReference

BOARDS = 400
LINE_ITEM, PLACEMENT = 3200, 400
"""Cents a build: 32.00 for each part number, 0.01 for each piece."""
DIODES, FAMILIES, RESISTORS, CAPACITORS, LEVELS = 60, 50, 60, 40, 12
TAKEN, WINDOW = 20, 20


def board(seed: int, channels: int, candidates: int, counts: Sequence[int] | None = None) -> Board:
    """One board of `channels` kinds with `candidates` options each; `counts` of each kind (1)."""
    return _Maker(np.random.default_rng(seed)).board(channels, candidates, counts or [1] * channels)


@dataclass
class _Maker:
    draw: np.random.Generator
    parts: list[BoardPart] = field(default_factory=list)
    references: dict[tuple[int, int | None], int] = field(default_factory=dict)
    shared: list[SharedReference] = field(default_factory=list)

    def board(self, channels: int, candidates: int, counts: Sequence[int]) -> Board:
        self.diodes = [
            self._part(f"D{k}", self.draw.uniform(0.6, 3.0), 5e-6, active=True) for k in range(DIODES)
        ]
        self.families = tuple(self._family(k) for k in range(FAMILIES))
        self.resistors = [
            self._part(f"R{k}", self.draw.choice([0.006, 0.01, 0.03]), 1e-6) for k in range(RESISTORS)
        ]
        self.capacitors = [
            self._part(f"C{k}", self.draw.choice([0.006, 0.012, 0.03]), 1e-6) for k in range(CAPACITORS)
        ]
        self.bypass = self._part("C-bypass", 0.01, 1e-6)
        pairs = [self.draw.choice(self.resistors, 2, replace=False) for _ in range(LEVELS)]
        self.levels = [((int(a), 1), (int(b), 1), (self.bypass, 1)) for a, b in pairs]
        kinds = tuple(self._channel(k, candidates, counts[k]) for k in range(channels))
        return Board(
            BOARDS,
            tuple(self.parts),
            self.families,
            tuple(self.shared),
            kinds,
            Budgets(),
            LINE_ITEM,
            PLACEMENT,
        )

    def _part(
        self, name: str, price: float, area: float, *, active: bool = False, amplifiers: int = 0
    ) -> int:
        short = not name.startswith(("R", "C")) and self.draw.random() < 0.3
        self.parts.append(
            BoardPart(
                name,
                self._breaks(float(price)),
                float(self.draw.integers(BOARDS, 10 * BOARDS)) if short else None,
                area,
                amplifiers,
                1e-3 * amplifiers,
                active,
            )
        )
        return len(self.parts) - 1

    def _breaks(self, price: float) -> tuple[tuple[float, float], ...]:
        breaks = [(1.0, round(price, 4))]
        for first in (100, 500, 1000, 5000):
            if self.draw.random() < 0.7:
                price *= self.draw.uniform(0.72, 0.93)
                breaks.append((float(first), round(price, 4)))
        return tuple(breaks)

    def _family(self, k: int) -> Family:
        base = self.draw.uniform(0.35, 2.0)
        sizes = [size for size in (1, 2, 4) if size == 1 or self.draw.random() < 0.5]
        return Family(
            f"O{k}",
            tuple(
                self._part(f"O{k}x{size}", base * size**0.75, 8e-6 * size**0.7, amplifiers=size)
                for size in sizes
            ),
        )

    def _reference(self, level: int, buffer: int | None) -> int:
        if (level, buffer) not in self.references:
            self.references[level, buffer] = len(self.shared)
            self.shared.append(SharedReference(f"V{level}-{buffer}", self.levels[level], 1e-5, buffer))
        return self.references[level, buffer]

    def _channel(self, k: int, candidates: int, count: int) -> Channel:
        diodes = self.draw.choice(self.diodes, TAKEN, replace=False)
        families = self.draw.choice(FAMILIES, TAKEN, replace=False)
        first = int(self.draw.integers(0, RESISTORS - WINDOW))
        needs = self.draw.random((TAKEN, TAKEN)) < 0.5
        options: dict[Option, None] = {}
        while len(options) < candidates:
            d, f = self.draw.integers(0, TAKEN, 2)
            family, reference = int(families[f]), None
            if needs[d, f]:
                level, buffered = int(self.draw.integers(LEVELS)), self.draw.random() < 0.4
                reference = self._reference(level, family if buffered else None)
            r = self.resistors[first + int(self.draw.integers(WINDOW))]
            c = self.capacitors[first * 2 // 3 % 25 + int(self.draw.integers(12))]
            options[Option((int(diodes[d]), r, c), family, reference)] = None
        return Channel(f"kind {k}", count, tuple(options))
