"""Of plans that cost the same, the one with more margin: passives exchanged while the cost does not rise.

A board's cost rarely tells one value of a resistor family from the next, but the margins do. Kind by kind
the copies that are built alike take, among the candidates with the same active parts, the one with the
largest margin that leaves the whole board no dearer and within its limits.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import replace

from optimizer.board.check import UnsoundPlanError
from optimizer.board.heuristic import Met
from optimizer.board.pools import Chosen as Choice
from optimizer.board.prices import purchase
from optimizer.board.reading import plan_of
from optimizer.planning.columns import Pool, assembled
from optimizer.planning.told import Chosen

PASSES = 4
"""How often all kinds are gone through at most."""
IMPOSSIBLE = 2**62


def polished(chosen: Chosen, pools: Sequence[Pool]) -> Chosen:
    """`chosen` with the margins that `pools`, which hold its candidates, allow at no more cost."""
    return _Polish(chosen, pools).polished()


class _Polish:
    """One plan on the board of all candidates with its active parts."""

    def __init__(self, chosen: Chosen, pools: Sequence[Pool]) -> None:
        self.before, self.pools = chosen, tuple(pools)
        self.made = assembled(chosen.field, pools)
        self.board = self.made.board
        place = {part: k for k, part in enumerate(self.made.parts)}
        bought = {place[chosen.made.parts[line.part]]: line.pieces for line in chosen.plan.lines}
        self.paid: dict[tuple[int, int], int] = {}
        self.packages = {p: n for p, n in bought.items() if self.board.parts[p].amplifiers}
        self.taken: Choice = tuple(
            tuple(sorted(after.index(before[j]) for j in options))
            for before, after, options in zip(
                chosen.made.keys, self.made.keys, chosen.plan.chosen, strict=True
            )
        )

    def polished(self) -> Chosen:
        """Exchange while that gains anything."""
        for _ in range(PASSES):
            every = [(i, j) for i, options in enumerate(self.taken) for j in sorted(set(options))]
            if not sum(self._exchanged(i, j) for i, j in every):
                break
        before = self.before.plan
        plan = plan_of(self.board, Met(0, self.taken, self._pieces(self.taken)), before.bound)
        # one that became cheaper than what was proved was so over smaller pools
        proven = before.proven and plan.totals.cost == before.totals.cost
        return Chosen(self.before.field, self.pools, self.made, replace(plan, proven=proven))

    def _exchanged(self, i: int, j: int) -> bool:
        """Give the copies of kind `i` that take option `j` a better one; whether there was any."""
        now = self._cost(self.taken)
        offers = [(self._cost(self._with(i, j, k)), -self._margin(i, k), k) for k in self._alike(i, j)]
        for cost, less, k in sorted(offers):
            if cost > now or (cost == now and -less <= self._margin(i, j)):
                return False
            if self._holds(self._with(i, j, k)):
                self.taken = self._with(i, j, k)
                return True
        return False

    def _margin(self, i: int, j: int) -> float:
        return self.pools[i].held[self.made.keys[i][j]][0]

    def _alike(self, i: int, j: int) -> Iterator[int]:
        """The options with the same active parts and amplifiers."""
        own = self.made.keys[i][j]
        for k, key in enumerate(self.made.keys[i]):
            if k != j and key[:2] == own[:2] and key[5] == own[5]:
                yield k

    def _with(self, i: int, j: int, k: int) -> Choice:
        options = tuple(sorted(k if option == j else option for option in self.taken[i]))
        return (*self.taken[:i], options, *self.taken[i + 1 :])

    def _pieces(self, taken: Choice) -> tuple[tuple[int, int], ...]:
        need: Counter[int] = Counter(self.packages)
        shared = set()
        for i, options in enumerate(taken):
            for j in options:
                option = self.board.channels[i].options[j]
                need.update(option.parts)
                if option.reference is not None:
                    shared.add(option.reference)
        for reference in shared:
            need.update(dict(self.board.references[reference].parts))
        return tuple(sorted(need.items()))

    def _cost(self, taken: Choice) -> int:
        """The cents of a build; far too many where the stock does not hold it."""
        return sum(self._paid(part, number) for part, number in self._pieces(taken))

    def _paid(self, part: int, number: int) -> int:
        if (part, number) not in self.paid:
            entry, boards = self.board.parts[part], self.board.boards
            bought = purchase(entry.breaks, boards, number, entry.stock)
            cents = IMPOSSIBLE if bought is None else bought.cents
            self.paid[part, number] = cents + self.board.line_item + self.board.placement * number
        return self.paid[part, number]

    def _holds(self, taken: Choice) -> bool:
        """Whether every limit is kept, and the levels still need the packages that there are."""
        try:
            plan_of(self.board, Met(0, taken, self._pieces(taken)), 0)
        except UnsoundPlanError:
            return False
        return True
