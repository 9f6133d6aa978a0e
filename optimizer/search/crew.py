"""Hunting alone or with several processes; the result is the same."""

from __future__ import annotations

import multiprocessing
import multiprocessing.connection
import signal
import time
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from multiprocessing.connection import Connection
from multiprocessing.process import BaseProcess
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.errors import LuxsiftError
from optimizer.search import feed, keys
from optimizer.search.bounds import Goals
from optimizer.search.boxes import Boxes
from optimizer.search.hunt import Hunt, Rules
from optimizer.search.result import Progress
from optimizer.search.space import Choice, Space
from optimizer.search.view import Index

Floats = NDArray[np.float64]

REPORT_EVERY = 0.1
"""Seconds between two reports of progress."""


@dataclass(frozen=True, slots=True)
class Found:
    """The best settings of the pairs that are shown, in rank order, with the columns that rank them."""

    choice: Choice
    primary: Floats
    cost: Floats
    vector: Floats
    margin_columns: Floats
    evaluated: int


@dataclass(slots=True)
class Crew:
    """Who hunts: `workers` processes over `index`, telling `progress` the best in the words of `label`."""

    index: Index
    workers: int
    progress: Callable[[Progress], None] | None
    label: Callable[[Choice], str]
    evaluated: int = 0
    last: float = 0.0
    met: list[Found] = field(default_factory=list)
    current: Hunt | None = None
    parts: list[Found] = field(default_factory=list)

    def hunt(self, goals: Goals, rules: Rules, pairs: feed.Pairs, *, first_only: bool = False) -> Found:
        """The best `rules.show` pairs of `pairs`; with `first_only` any that meet will do."""
        if not pairs.size:
            found = nothing(len(goals.limits))
        elif self.workers < 2:
            found = self._alone(goals, rules, pairs, first_only)
        else:
            found = self._shared(goals, rules, pairs)
        self.evaluated += found.evaluated
        self.met.append(found)
        self.current = None
        return found

    def so_far(self) -> Found:
        """What had been found when the work stopped; of the hunt for pairs that meet only."""
        if self.met:
            return self.met[0]
        if self.parts:
            return merged(self.index.space, self.parts, self.index.space.request.ranking.show)
        if self.current is None:
            return nothing(len(self.index.space.limits))
        self.evaluated += self.current.evaluated
        return gathered(self.current)

    def _alone(self, goals: Goals, rules: Rules, pairs: feed.Pairs, first_only: bool) -> Found:
        def watch(hunt: Hunt, taken: int) -> bool:
            self.current = hunt
            self._tell(hunt, taken, pairs.size)
            return first_only and hunt.incumbents.bar is not None

        return gathered(feed.run(self.index, goals, rules, pairs=pairs, watch=watch))

    def _tell(self, hunt: Hunt, taken: int, total: int) -> None:
        now = time.monotonic()
        if self.progress is None or now - self.last < REPORT_EVERY:
            return
        self.last = now
        best = None
        if hunt.incumbents.shown.size and hunt.incumbents.judged is not None:
            best = self.label(hunt.incumbents.judged.choice.take(hunt.incumbents.shown[:1]))
        rows = hunt.pool.boxes.rows
        open_pairs = np.unique(
            rows[:, Boxes.OPAMP] * self.index.space.diodes.price.size + rows[:, Boxes.DIODE]
        )
        done = max(taken - open_pairs.size, 0)
        self.progress(Progress(total, done, self.evaluated + hunt.evaluated, best))

    def _shared(self, goals: Goals, rules: Rules, pairs: feed.Pairs) -> Found:
        """Every worker hunts through its share of the pairs; the best of all shares are the best."""
        shares = [pairs.take(np.arange(k, pairs.size, self.workers)) for k in range(self.workers)]
        shares = [share for share in shares if share.size]
        with _interrupts_held():
            team = [_hired(self.index, goals, rules, share) for share in shares]
        try:
            return merged(self.index.space, self._awaited(team, pairs.size), rules.show)
        finally:
            for worker in team:
                worker.process.terminate()
                worker.process.join()

    def _awaited(self, team: Sequence[Worker], total: int) -> list[Found]:
        """The findings of all workers, with progress as each is done."""
        self.parts = []
        open_: dict[Any, Worker] = {worker.answer: worker for worker in team}
        decided = 0
        while open_:
            for answer in multiprocessing.connection.wait(list(open_)):
                worker = open_.pop(answer)
                self.parts.append(worker.received())
                decided += worker.pairs
                if self.progress is not None:
                    self.progress(Progress(total, decided, sum(p.evaluated for p in self.parts), None))
        return self.parts


@dataclass(frozen=True, slots=True)
class Worker:
    """One process at work on `pairs` pairs, and the end of the pipe that its answer comes through."""

    process: BaseProcess
    answer: Connection
    pairs: int

    def received(self) -> Found:
        """What it found; raises what stopped it."""
        try:
            answer = self.answer.recv()
        except EOFError:
            raise LuxsiftError("a worker process ended before it was done; try --workers 1") from None
        if isinstance(answer, BaseException):
            raise answer
        assert isinstance(answer, Found)
        return answer


def _hired(index: Index, goals: Goals, rules: Rules, share: feed.Pairs) -> Worker:
    """Start a process on `share`. Forked where that can be: the tables are then not copied."""
    method = "fork" if "fork" in multiprocessing.get_all_start_methods() else None
    context: Any = multiprocessing.get_context(method)
    answer, sender = context.Pipe(duplex=False)
    process = context.Process(target=_work, args=(sender, index, goals, rules, share), daemon=True)
    process.start()
    sender.close()
    return Worker(process, answer, share.size)


def _work(sender: Connection, index: Index, goals: Goals, rules: Rules, share: feed.Pairs) -> None:
    """What a worker process does: hunt, and send what it found or what stopped it."""
    _ignore_interrupts()
    np.seterr(all="ignore")  # as in the parent
    try:
        hunt = feed.run(index, goals, rules, pairs=share, watch=lambda _hunt, _taken: False)
        sender.send(gathered(hunt))
    except Exception as problem:  # raised again in the parent
        sender.send(problem)
    finally:
        sender.close()


@contextmanager
def _interrupts_held() -> Iterator[None]:
    """Ctrl-C waits: one that arrives while a process is being made would be lost.

    Only where signals can be held back, and in the main thread, which alone receives them.
    """
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_UNBLOCK, {signal.SIGINT})


def _ignore_interrupts() -> None:
    """Ctrl-C reaches every process of the terminal; the parent alone acts on it."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    if hasattr(signal, "pthread_sigmask"):
        signal.pthread_sigmask(signal.SIG_UNBLOCK, {signal.SIGINT})


def nothing(targets: int) -> Found:
    """No setting found, with `targets` graded targets."""
    none = np.zeros(0, dtype=np.int64)
    empty = np.zeros(0)
    return Found(Choice(none, none, none, none, none, none), empty, empty, *(np.zeros((0, targets)),) * 2, 0)


def gathered(hunt: Hunt) -> Found:
    """What a hunt would show, in rank order."""
    judged = hunt.incumbents.judged
    if judged is None:
        return replace(nothing(len(hunt.goals.limits)), evaluated=hunt.evaluated)
    rows = judged.take(hunt.incumbents.shown)
    return Found(rows.choice, rows.primary, rows.cost, rows.vector, rows.margin_columns, hunt.evaluated)


def merged(space: Space, parts: list[Found], show: int) -> Found:
    """The best `show` of several shares."""
    columns = [np.concatenate(c) for c in zip(*(p.choice.columns() for p in parts), strict=True)]
    choice = Choice(*columns)
    names = ("primary", "cost", "vector", "margin_columns")
    first, cost, vector, table = (np.concatenate([getattr(p, name) for p in parts]) for name in names)
    key = keys.between_pairs(space, choice, (first, cost, vector))
    best = keys.order(key)[:show]
    evaluated = sum(p.evaluated for p in parts)
    return Found(choice.take(best), first[best], cost[best], vector[best], table[best], evaluated)
