"""Random boards so small that every plan can be tried, with every feature, and budgets that bind."""

from __future__ import annotations

import random

from optimizer.board.problem import Board, BoardPart, Budgets, Channel, Family, Option, SharedReference

PRICES = (0.05, 0.125, 0.31, 0.8, 1.25, 2.0, 3.335)


def board(seed: int) -> Board:
    """One random board; the same for the same seed."""
    return _Maker(random.Random(seed)).board()


class _Maker:
    def __init__(self, draw: random.Random) -> None:
        self.draw = draw
        self.boards = draw.choice([1, 3, 10, 40])
        self.parts: list[BoardPart] = []

    def board(self) -> Board:
        diodes = [self._part(f"D{k}", active=True) for k in range(self.draw.randint(1, 3))]
        passives = [self._part(f"R{k}") for k in range(self.draw.randint(2, 4))]
        families = tuple(self._family(k) for k in range(self.draw.randint(1, 2)))
        references = tuple(
            self._reference(k, passives, len(families)) for k in range(self.draw.randint(0, 2))
        )
        channels = [
            self._channel(k, diodes, passives, families, references) for k in range(self.draw.randint(1, 3))
        ]
        if len(channels) > 1 and self.draw.random() < 0.3:
            channels[1] = Channel("again", channels[1].count, channels[0].options)
        return Board(
            self.boards,
            tuple(self.parts),
            families,
            references,
            tuple(channels),
            self._budgets(),
            self.draw.choice([0, 17, 150, 1500]),
            self.draw.choice([0, 1, 12]),
        )

    def _part(self, name: str, *, active: bool = False, amplifiers: int = 0) -> int:
        price = self.draw.choice(PRICES) * max(1.0, amplifiers**0.7)
        breaks = [(1.0, round(price, 4))]
        for first in sorted(self.draw.sample([2, 5, 10, 25, 50, 100, 200], self.draw.randint(0, 3))):
            price *= self.draw.uniform(0.55, 1.0)
            breaks.append((float(first), round(price, 4)))
        need = self.boards * self.draw.choice([1, 2, 3, 5])
        self.parts.append(
            BoardPart(
                name,
                tuple(breaks),
                stock=float(need + self.draw.randint(0, 30)) if self.draw.random() < 0.3 else None,
                area=self.draw.choice([1e-6, 2e-6, 5e-6]),
                amplifiers=amplifiers,
                current=amplifiers * self.draw.choice([0.5e-3, 1e-3]),
                active=active,
            )
        )
        return len(self.parts) - 1

    def _family(self, k: int) -> Family:
        sizes = self.draw.choice([(1,), (2,), (1, 2), (1, 2, 4), (2, 4), (1, 1)])
        packages = [self._part(f"O{k}x{size}-{n}", amplifiers=size) for n, size in enumerate(sizes)]
        return Family(f"O{k}", tuple(packages))

    def _reference(self, k: int, passives: list[int], families: int) -> SharedReference:
        count = self.draw.randint(1, 2)
        parts = tuple((part, self.draw.choice([1, 1, 2])) for part in self.draw.sample(passives, count))
        buffer = self.draw.randrange(families) if self.draw.random() < 0.5 else None
        return SharedReference(f"V{k}", parts, self.draw.choice([0.0, 1e-4]), buffer)

    def _channel(
        self, k: int, diodes: list[int], passives: list[int], families: tuple[Family, ...],
        references: tuple[SharedReference, ...],
    ) -> Channel:  # fmt: skip
        options = []
        for _ in range(self.draw.randint(1, 4)):
            passive = [self.draw.choice(passives) for _ in range(self.draw.randint(1, 2))]
            shared = self.draw.randrange(len(references)) if references and self.draw.random() < 0.6 else None
            options.append(
                Option(
                    (self.draw.choice(diodes), *passive),
                    self.draw.randrange(len(families)),
                    shared,
                    self.draw.choice([1, 1, 2]),
                    self.draw.choice([0.0, 0.0, 2e-4]),
                )
            )
        return Channel(f"c{k}", self.draw.choice([1, 1, 2]), tuple(options))

    def _budgets(self) -> Budgets:
        def maybe(values: list[float]) -> float | None:
            return self.draw.choice(values) if self.draw.random() < 0.25 else None

        cost = maybe([300, 1500, 6000, 20000])
        lines, opamps = maybe([4, 5, 6, 7]), maybe([1, 1, 2])
        return Budgets(
            None if cost is None else int(cost),
            maybe([1e-3, 2e-3, 3e-3, 4.5e-3]),
            maybe([8e-6, 12e-6, 20e-6]),
            None if lines is None else int(lines),
            None if opamps is None else int(opamps),
        )
