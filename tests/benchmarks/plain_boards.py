"""The plain formulation of a board, as other solvers get it: no narrowing, no start, one call."""

from __future__ import annotations

import time
from collections import defaultdict
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from optimizer.board import runs, solvers
from optimizer.board.model import build
from optimizer.board.pools import pools_of
from optimizer.board.prices import pieces
from optimizer.board.problem import Board
from optimizer.board.supplies import most_of, used_references


@dataclass(frozen=True, slots=True)
class Result:
    """Seconds in all, the least cost and the bound [cents] (None: none), and the seconds of processors."""

    seconds: float
    cost: float | None
    bound: float | None
    cpu: float = 0.0

    @property
    def gap(self) -> float | None:
        """How far the bound is below the cost, relative."""
        if self.cost is None or self.bound is None:
            return None
        return max(0.0, self.cost - self.bound) / self.cost

    @property
    def proven(self) -> bool:
        """Whether no plan costs less."""
        return self.cost is not None and self.bound is not None and self.cost - self.bound < 1.0


def by_solver(name: str, board: Board, seconds: float) -> Result:
    """The rows of the published formulation in PuLP, equal channels merged, by `highs` or `cbc`."""
    began = time.monotonic()
    model = build(pools_of(board).board)
    run = solvers.run(name, runs.Task(model.problem, seconds))
    cost = None
    if run.values is not None:
        cost = sum(c * run.values[v.name] for v, c in model.problem.objective.items())
    bound = run.bound
    if run.outcome == runs.OPTIMAL and cost is not None:
        bound = max(cost - runs.GAP, -1.0 if bound is None else bound)
    return Result(time.monotonic() - began, cost, bound)


def has_cpsat() -> bool:
    """Whether OR-Tools, a benchmark's dependency only, is installed."""
    try:
        import ortools.sat.python.cp_model  # noqa: F401
    except ImportError:
        return False
    return True


def by_cpsat(workers: int, board: Board, seconds: float) -> Result:
    """The same rows in CP-SAT; with one worker at the linearization level that suits it best."""
    from ortools.sat.python import cp_model

    began = time.monotonic()
    solver = cp_model.CpSolver()
    solver.parameters.num_workers = workers
    solver.parameters.max_time_in_seconds = seconds
    if workers == 1:
        solver.parameters.linearization_level = 2
    status = solver.solve(_Rows(pools_of(board).board, cp_model.CpModel()).model())
    known = status in {cp_model.OPTIMAL, cp_model.FEASIBLE}
    cost = solver.objective_value if known else None
    return Result(time.monotonic() - began, cost, solver.best_objective_bound)


class _Rows:
    """The rows of `model`, written once more for CP-SAT."""

    def __init__(self, board: Board, model: Any) -> None:
        self.board, self.cp = board, model
        self.number: dict[int, Any] = {}
        self.open: dict[int, Any] = {}
        self.cost: list[Any] = []
        self.used: dict[int, list[Any]] = defaultdict(list)
        self.amplifiers: dict[int, list[Any]] = defaultdict(list)

    def model(self) -> Any:
        for supply, most in most_of(self.board).items():
            if supply < len(self.board.parts):
                self._buy(supply, most)
            else:
                for part in self.board.families[supply - len(self.board.parts)].packages:
                    self._buy(part, -(-most // self.board.parts[part].amplifiers))
        shared = {r: self._reference(r) for r in used_references(self.board)}
        for channel in self.board.channels:
            self._channel(channel, shared)
        for part, users in self.used.items():
            self.cp.add(self.number[part] == sum(users))
        for family, users in self.amplifiers.items():
            packages = self.board.families[family].packages
            held = sum(self.board.parts[a].amplifiers * self.number[a] for a in packages)
            self.cp.add(sum(users) <= held)
        placed = self.board.placement * sum(self.number.values())
        self.cp.minimize(sum(self.cost) + self.board.line_item * sum(self.open.values()) + placed)
        return self.cp

    def _buy(self, part: int, most: int) -> None:
        entry, taken, number = self.board.parts[part], [], []
        for piece in pieces(entry.breaks, self.board.boards, most, entry.stock):
            w = self.cp.new_bool_var("")
            q = self.cp.new_int_var(0, piece.last - piece.first, "")
            self.cp.add(q <= (piece.last - piece.first) * w)
            taken.append(w)
            number.append(piece.first * w + q)
            self.cost.append(piece.cost * w + piece.slope * q)
        self.open[part] = self.cp.new_bool_var("")
        self.cp.add(sum(taken) == self.open[part])
        self.number[part] = sum(number)

    def _reference(self, reference: int) -> Any:
        shared, v = self.board.references[reference], self.cp.new_bool_var("")
        for part, count in shared.parts:
            self.used[part].append(count * v)
            self.cp.add(v <= self.open[part])
        if shared.buffer is not None:
            self.amplifiers[shared.buffer].append(v)
            self.cp.add(v <= sum(self.open[a] for a in self.board.families[shared.buffer].packages))
        return v

    def _channel(self, channel: Any, shared: dict[int, Any]) -> None:
        options = [self.cp.new_int_var(0, channel.count, "") for _ in channel.options]
        self.cp.add(sum(options) == channel.count)
        users: dict[tuple[str, int], list[Any]] = defaultdict(list)
        for x, option in zip(options, channel.options, strict=True):
            for part in option.parts:
                self.used[part].append(x)
            for part in set(option.parts):
                users["part", part].append(x)
            self.amplifiers[option.family].append(option.amplifiers * x)
            users["family", option.family].append(x)
            if option.reference is not None:
                users["reference", option.reference].append(x)
        for (kind, key), taken in users.items():
            self.cp.add(sum(taken) <= channel.count * self._opened(kind, key, shared))

    def _opened(self, kind: str, key: int, shared: dict[int, Any]) -> Any:
        if kind == "family":
            return sum(self.open[a] for a in self.board.families[key].packages)
        return self.open[key] if kind == "part" else shared[key]


RIVALS: dict[str, Callable[[Board, float], Result]] = {
    "HiGHS": lambda board, seconds: by_solver("highs", board, seconds),
    "CBC": lambda board, seconds: by_solver("cbc", board, seconds),
    "CP-SAT 1": lambda board, seconds: by_cpsat(1, board, seconds),
    "CP-SAT 8": lambda board, seconds: by_cpsat(8, board, seconds),
}
