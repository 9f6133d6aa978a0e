"""The benchmark of the board plan: `python -m tests.benchmarks.board [--quick]`; times are not judged.

Each case is a synthetic board; where the case says so, the plain formulation is solved too, in the same
run, by HiGHS, CBC and (where OR-Tools is installed) CP-SAT with one worker and with eight. The ratio is
our seconds, search for plans and proofs included, over those of the fastest of them; of the clock and, as
other work on the machine stretches that, of the processors. A rival that is over its time has no ratio.
"""

from __future__ import annotations

import argparse
import os
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from optimizer.board import solvers
from optimizer.board.problem import Board
from optimizer.board.solution import SolveOptions
from optimizer.board.solve import solve
from tests.benchmarks.plain_boards import RIVALS, Result, has_cpsat
from tests.benchmarks.synthetic_boards import board


@dataclass(frozen=True, slots=True)
class Case:
    """A board to plan: kinds of channels, candidates of each, copies of each, seconds, plans, the floor."""

    kinds: int
    candidates: int
    copies: int
    seconds: float
    plans: int
    rivals: bool
    floor: str

    @property
    def name(self) -> str:
        channels = (
            f"{self.kinds}" if self.copies == 1 else f"{self.kinds * self.copies} of {self.kinds} kinds"
        )
        return f"{channels} x {self.candidates}"


CASES = {
    "8x300": Case(8, 300, 1, 120.0, 1, True, "proven in half the time of the best rival"),
    "16x300": Case(16, 300, 1, 60.0, 1, False, "gap 0.5 % in 60 s"),
    "64of4": Case(4, 300, 16, 60.0, 1, False, "gap 0.05 % in 60 s"),
    "32x2000": Case(32, 2000, 1, 120.0, 1, False, "gap 3 % in 120 s"),
    "8x50": Case(8, 50, 1, 60.0, 1, True, "one plan: the measure of five"),
    "8x50five": Case(8, 50, 1, 60.0, 5, False, "five plans in 20 times one solve"),
}


@dataclass(frozen=True, slots=True)
class Ours:
    """What our own solve took and gave."""

    result: Result
    share: float
    plans: int
    solver: str
    left: str


def ours(case: Case, seed: int, solver: str) -> Ours:
    """Plan one board of a case by the project itself; `share` is the line items' part of the cost."""
    made = board(seed, case.kinds, case.candidates, [case.copies] * case.kinds)
    began, cpu = time.monotonic(), _cpu()
    found = solve(made, SolveOptions(case.seconds, solver, case.plans))
    seconds = time.monotonic() - began
    best = found.plans[0]
    result = Result(seconds, best.totals.cost, best.bound, _cpu() - cpu)
    share = best.totals.line_items * made.line_item / best.totals.cost
    left = f"{found.considered} of {found.options}"
    return Ours(result, share, len(found.plans), found.solver, left)


def _cpu() -> float:
    """Seconds of processors that this process and the solvers that it ran have used."""
    used = os.times()
    return used.user + used.system + used.children_user + used.children_system


def rivals(case: Case, seed: int, seconds: float) -> dict[str, Result]:
    """What the plain formulation took, by solver."""
    made = board(seed, case.kinds, case.candidates, [case.copies] * case.kinds)
    names = [n for n in RIVALS if has_cpsat() or not n.startswith("CP-SAT")]
    return {name: _timed(RIVALS[name], made, seconds) for name in names}


def _timed(rival: Callable[[Board, float], Result], made: Board, seconds: float) -> Result:
    cpu = _cpu()
    return replace(rival(made, seconds), cpu=_cpu() - cpu)


def row(case: Case, seed: int, own: Ours, others: dict[str, Result]) -> str:
    """One line: our time, gap and share, then the others', and the ratio to the best of them."""
    gap = own.result.gap or 0.0
    cells = [
        f"{case.name:<18} {seed:>4} {own.solver:>6} {own.result.seconds:>8.2f} {own.result.cpu:>7.2f}",
        f"{100 * gap:>8.3f} {100 * own.share:>6.1f} {own.plans:>5}  {own.left:<16}",
    ]
    cells += [f"{name} {_said(other)}" for name, other in others.items()]
    proved = [other for other in others.values() if other.proven]
    if proved and own.result.proven:
        clock = own.result.seconds / min(other.seconds for other in proved)
        cpu = own.result.cpu / min(other.cpu for other in proved)
        cells.append(f"ratio {clock:.2f} (processors {cpu:.2f})")
    wrong = [n for n, o in others.items() if o.proven and own.result.proven and _differ(own.result, o)]
    return "  ".join([*cells, *(f"{name} DISAGREES" for name in wrong)])


def _said(result: Result) -> str:
    if result.proven:
        return f"{result.seconds:.2f} s (cpu {result.cpu:.2f})"
    return f"over {result.seconds:.0f} s, gap {'-' if result.gap is None else f'{100 * result.gap:.2f} %'}"


def _differ(one: Result, other: Result) -> bool:
    assert one.cost is not None
    assert other.cost is not None
    return abs(one.cost - other.cost) >= 1.0


HEADING = "board              seed solver  seconds   cpu s    gap %  line %  plans  options left"


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the cases asked for and print a line for each board."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks.board", description=__doc__)
    parser.add_argument("--cases", default=",".join(CASES), help="of " + ", ".join(CASES))
    parser.add_argument("--seeds", default="1,2,3,4,5")
    parser.add_argument("--solver", default="auto")
    parser.add_argument("--rival-seconds", type=float, default=60.0)
    parser.add_argument("--quick", action="store_true", help="two small cases, one seed")
    wanted = parser.parse_args(arguments)
    names = ["8x50", "8x50five"] if wanted.quick else wanted.cases.split(",")
    seeds = [1] if wanted.quick else [int(seed) for seed in wanted.seeds.split(",")]
    unknown = [name for name in names if name not in CASES]
    if unknown:
        parser.error(f"{', '.join(unknown)}: choose from {', '.join(CASES)}")
    print(f"solver {solvers.resolved(wanted.solver)}; line %: line items' share of the cost")
    print(HEADING)
    for name in names:
        case = CASES[name]
        for seed in seeds:
            own = ours(case, seed, wanted.solver)
            others = rivals(case, seed, wanted.rival_seconds) if case.rivals else {}
            print(row(case, seed, own, others), flush=True)
        print(f"  floor: {case.floor}")


if __name__ == "__main__":
    main()
