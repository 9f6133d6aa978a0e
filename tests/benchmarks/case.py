"""One benchmark case in a process of its own, so that its peak memory is its own: read, search, measure.

`tests.benchmarks.search` starts it; the answer is one line of JSON, a `Measured`.
"""

from __future__ import annotations

import argparse
import cProfile
import json
import os
import pstats
import resource
import signal
import sys
import time
from collections.abc import Iterator
from contextlib import AbstractContextManager, contextmanager, nullcontext
from dataclasses import asdict, dataclass
from itertools import islice
from pathlib import Path

import numpy as np

from optimizer import study
from optimizer.search import Interrupted, shortlist
from optimizer.search.plain import every_choice, judge
from optimizer.search.result import Outcome
from optimizer.search.space import Space, build

BLOCKS_OF_A_PAIR = 8


@dataclass(frozen=True, slots=True)
class Measured:
    """What one case took.

    `reading`, `seconds` [s]; `cpu` the processor time of the search [s], which another program's load
    hardly changes; `combinations` declared, and `distinct` those that differ after equal
    choices are merged, which is what the plain evaluator would go through; `plain` its settings a
    second; `memory` peak [bytes]; `stopped` says why a case was ended early.
    """

    reading: float
    seconds: float
    cpu: float
    pairs: int
    combinations: int
    distinct: int
    evaluated: int
    meet: int
    memory: int
    plain: float
    stopped: str

    @property
    def rate(self) -> float:
        """Combinations decided a second."""
        return self.combinations / self.seconds

    @property
    def ratio(self) -> float:
        """How many times faster than the plain evaluator, counting distinct combinations only."""
        return self.distinct / self.seconds / self.plain


def cpu_time() -> float:
    """Processor time of this process and of its workers that have ended [s]."""
    times = os.times()
    return times.user + times.system + times.children_user + times.children_system


def peak_memory(workers: int) -> int:
    """The peak of this process [bytes]; with workers, and as often as there are any that of the largest.

    The kernel keeps only the largest of the workers' peaks, so the sum errs on the large side.
    """
    unit = 1 if sys.platform == "darwin" else 1024
    own = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    largest = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss
    return (own + (workers * largest if workers > 1 else 0)) * unit


def plain_rate(space: Space, seconds: float) -> float:
    """Settings a second of the plain evaluator, from about `seconds` of the first blocks of random pairs.

    Only the judging is timed, which flatters the plain evaluator a little; a block takes as long
    whatever its contexts are.
    """
    rng = np.random.default_rng(0)
    spent, done = 0.0, 0
    while spent < seconds:
        opamp = int(rng.integers(space.opamps.gbw.size))
        diode = int(rng.integers(space.diodes.price.size))
        for choice in islice(every_choice(space, opamp, diode), BLOCKS_OF_A_PAIR):
            begun = time.perf_counter()
            judge(space, choice, space.request.ranking.by)
            spent += time.perf_counter() - begun
            done += choice.opamp.size
    return done / spent


def settings_of_a_pair(space: Space) -> int:
    """How many settings of one pair the plain evaluator goes through."""
    return space.contexts.size * space.resistors.size * space.capacitors.size * space.low_passes.size


@dataclass(frozen=True, slots=True)
class Limits:
    """When a case is ended: seconds of search, and bytes of address space."""

    seconds: float
    memory: int


def measure(request: Path, limits: Limits, *, workers: int, plain: float, profile: bool) -> Measured:
    """Read, search and measure the request at `request`."""
    begun = time.perf_counter()
    read = study.load(request)
    reading = time.perf_counter() - begun
    begun, cpu_begun = time.perf_counter(), cpu_time()
    with _profiled() if profile else nullcontext():
        outcome, stopped = _searched(read, workers, limits)
    seconds, cpu = time.perf_counter() - begun, cpu_time() - cpu_begun
    memory = peak_memory(workers)
    space = build(read.request, read.catalogs)
    pairs = read.catalogs.opamps.size * read.catalogs.photodiodes.size
    return Measured(
        reading=reading,
        seconds=seconds,
        cpu=cpu,
        pairs=pairs,
        combinations=space.combinations,
        distinct=pairs * settings_of_a_pair(space),
        evaluated=0 if outcome is None else outcome.evaluated,
        meet=0 if outcome is None else len(outcome.candidates),
        memory=memory,
        plain=plain_rate(space, plain),
        stopped=stopped,
    )


def _searched(read: study.Study, workers: int, limits: Limits) -> tuple[Outcome | None, str]:
    """Search within `limits`: what was found (so far, where it was stopped), and why it was stopped."""
    too_long = f"over {limits.seconds:g} s"
    try:
        with _limited(limits):
            return shortlist(read.request, read.catalogs, workers=workers), ""
    except Interrupted as stop:
        return stop.outcome, too_long
    except KeyboardInterrupt:
        return None, too_long
    except MemoryError:
        return None, f"over {limits.memory / 2**30:g} GB"


@contextmanager
def _limited(limits: Limits) -> Iterator[None]:
    """Interrupt as Ctrl-C does once the time is over, and refuse memory past the limit."""
    signal.signal(signal.SIGALRM, signal.default_int_handler)
    signal.setitimer(signal.ITIMER_REAL, limits.seconds)
    soft, hard = resource.getrlimit(resource.RLIMIT_AS)
    resource.setrlimit(resource.RLIMIT_AS, (limits.memory, hard))
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0.0)
        resource.setrlimit(resource.RLIMIT_AS, (soft, hard))


class _Profiler(cProfile.Profile):
    """A profile that is printed when it ends, also when the search was cut short."""

    def __exit__(self, *reason: object) -> None:
        super().__exit__(*reason)
        pstats.Stats(self, stream=sys.stderr).sort_stats("tottime").print_stats(10)


def _profiled() -> AbstractContextManager[object]:
    return _Profiler(time.process_time)


def main() -> None:
    """Measure the case named on the command line."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks.case", description=__doc__)
    parser.add_argument("request", type=Path)
    parser.add_argument("--workers", type=int, required=True)
    parser.add_argument("--seconds", type=float, required=True, help="of search, at most")
    parser.add_argument("--memory", type=int, required=True, help="bytes of address space, at most")
    parser.add_argument("--plain", type=float, required=True, help="seconds of the plain evaluator")
    parser.add_argument("--profile", action="store_true", help="print a profile to stderr")
    given = parser.parse_args()
    limits = Limits(given.seconds, given.memory)
    found = measure(given.request, limits, workers=given.workers, plain=given.plain, profile=given.profile)
    print(json.dumps(asdict(found)))


if __name__ == "__main__":
    main()
