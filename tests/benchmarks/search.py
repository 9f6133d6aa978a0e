"""The benchmark of the search: `python -m tests.benchmarks.search [--quick]`; times are printed, not judged.

Every case (a size, a seed, a request) runs in a fresh process. Seconds are of the search alone, on the
clock; processor seconds stand beside them because other programs hardly change those. The ratio is
against the project's own plain evaluator, measured in the same process after the search, and counts
distinct combinations only.
"""

from __future__ import annotations

import argparse
import json
import os
import platform
import subprocess
import sys
import tempfile
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from tests.benchmarks.case import Measured
from tests.benchmarks.synthetic import write_catalogs, write_request
from tests.benchmarks.synthetic_data import REQUESTS

ROOT = Path(__file__).parents[2]

Size = tuple[int, int]

# The floors that the project set itself: seconds of search on two cores, ratio, peak memory.
BY_COST: dict[Size, float] = {(300, 200): 2.0, (1000, 500): 4.0, (5000, 2000): 20.0}
BY_MARGIN: dict[Size, float] = {(300, 200): 10.0, (1000, 500): 30.0}
RATIO: dict[Size, float] = {(1000, 500): 1e6}
MEMORY = 1e9

CORNERS = "-corners"
"""What the name of a request ends in that grades another one's corners."""
LONGEST = 120.0
"""Seconds after which a case is ended."""
LARGEST = 4 * 2**30
"""Bytes of address space at which a case is ended."""


@dataclass(frozen=True, slots=True)
class Case:
    """One search to measure: op-amps and photodiodes, seed of the catalogs, name of the request."""

    size: Size
    seed: int
    request: str

    @property
    def floor(self) -> float | None:
        """Seconds that the search may take, where the project set a floor; `nothing` is ranked by cost."""
        if self.request.endswith("by-cost") or self.request == "nothing":
            return BY_COST.get(self.size)
        return BY_MARGIN.get(self.size) if self.request.endswith("by-margin") else None


@dataclass(frozen=True, slots=True)
class How:
    """How every case is run: processes, seconds of the plain evaluator, whether to profile."""

    workers: int
    plain: float
    profile: bool


@dataclass(frozen=True, slots=True)
class Result:
    """A case and what it took; `found` is None where the process died, and `died` says how."""

    case: Case
    found: Measured | None
    died: str = ""


COLUMNS: tuple[tuple[str, int, Callable[[Case, Measured], str]], ...] = (
    ("size", 9, lambda c, m: f"{c.size[0]}x{c.size[1]}"),
    ("seed", 4, lambda c, m: f"{c.seed}"),
    ("request", 20, lambda c, m: c.request),
    ("seconds", 7, lambda c, m: f"{m.seconds:.2f}"),
    ("floor", 5, lambda c, m: "-" if c.floor is None else f"{c.floor:g}"),
    ("cpu s", 6, lambda c, m: f"{m.cpu:.2f}"),
    ("reading", 7, lambda c, m: f"{m.reading:.2f}"),
    ("combinations", 12, lambda c, m: f"{m.combinations:.3g}"),
    ("comb/s", 8, lambda c, m: "-" if m.stopped else f"{m.rate:.2g}"),
    ("pairs", 8, lambda c, m: f"{m.pairs}"),
    ("evaluated", 9, lambda c, m: f"{m.evaluated}"),
    ("peak MB", 7, lambda c, m: f"{m.memory / 1e6:.0f}"),
    ("meet", 4, lambda c, m: f"{m.meet}"),
    ("plain/s", 8, lambda c, m: f"{m.plain:.2g}"),
    ("ratio", 8, lambda c, m: "-" if m.stopped else f"{m.ratio:.2g}"),
)


def line(cells: Sequence[str]) -> str:
    """One line of the table."""
    return "  ".join(cell.rjust(width) for cell, (_, width, _) in zip(cells, COLUMNS, strict=True))


def row(result: Result) -> str:
    """One case as a line of the table, with a word where it was ended or passed a floor."""
    found = result.found
    if found is None:
        case = result.case
        return f"{case.size[0]}x{case.size[1]}  {case.seed}  {case.request}: {result.died}"
    remark = found.stopped or "; ".join(shortfalls(result.case, found))
    return f"{line([show(result.case, found) for _, _, show in COLUMNS])}  {remark}".rstrip()


def shortfalls(case: Case, found: Measured) -> list[str]:
    """The floors that a case did not keep."""
    words = []
    if case.floor is not None and found.seconds > case.floor:
        words.append(f"time over {case.floor:g} s")
    if found.ratio < RATIO.get(case.size, 0.0):
        words.append(f"ratio under {RATIO[case.size]:.0e}")
    if found.memory > MEMORY:
        words.append(f"memory over {MEMORY / 1e9:g} GB")
    return words


def run(case: Case, request: Path, how: How) -> Result:
    """Run one case in a process of its own."""
    command = [sys.executable, "-m", "tests.benchmarks.case", str(request), "--workers", str(how.workers)]
    command += ["--seconds", str(LONGEST), "--memory", str(LARGEST), "--plain", str(how.plain)]
    command += ["--profile"] if how.profile else []
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    done = subprocess.run(command, stdout=subprocess.PIPE, text=True, env=environment, check=False)
    if done.returncode:
        return Result(case, None, f"ended with status {done.returncode}")
    return Result(case, Measured(**json.loads(done.stdout)))


def run_all(
    sizes: Sequence[Size], seeds: Sequence[int], requests: Sequence[str], how: How
) -> Iterator[Result]:
    """Run every request on catalogs of every size and seed."""
    for size in sizes:
        for seed in seeds:
            with tempfile.TemporaryDirectory() as name:
                folder = Path(name)
                write_catalogs(folder, opamps=size[0], photodiodes=size[1], seed=seed)
                for request in requests:
                    yield run(Case(size, seed, request), write_request(folder, request), how)


def summary(results: Sequence[Result]) -> str:
    """How many cases kept every floor that applies to them, the slowest of each request and size, and how
    much more the corners of a request took than its nominal values in the same run.
    """
    ended = [r for r in results if r.found is None or r.found.stopped]
    over = [r for r in results if r.found and not r.found.stopped and shortfalls(r.case, r.found)]
    kept = len(results) - len(ended) - len(over)
    lines = [
        f"{len(results)} cases: {kept} within their floors, {len(over)} past one, {len(ended)} ended early"
    ]
    worst: dict[tuple[Size, str], float] = {}
    for result in results:
        if result.found:
            key = (result.case.size, result.case.request)
            worst[key] = max(worst.get(key, 0.0), result.found.seconds)
    lines += [f"  slowest {size[0]}x{size[1]} {request}: {s:.2f} s" for (size, request), s in worst.items()]
    return "\n".join([*lines, *corners_over_nominal(results)])


def corners_over_nominal(results: Sequence[Result]) -> list[str]:
    """One line for each case that grades the corners of another: processor time over that of the other."""
    found = {result.case: result.found for result in results if result.found and not result.found.stopped}
    lines = []
    for case, cornered in found.items():
        nominal = found.get(replace(case, request=case.request.removesuffix(CORNERS)))
        if case.request.endswith(CORNERS) and nominal:
            size = f"{case.size[0]}x{case.size[1]} seed {case.seed}"
            times = f"{cornered.cpu / nominal.cpu:.1f} times the processor time of the nominal search"
            lines.append(f"  {case.request} {size}: {times}")
    return lines


def machine() -> str:
    """Where the times come from, and how busy it is."""
    load = ", ".join(f"{value:.1f}" for value in os.getloadavg())
    python = f"Python {platform.python_version()}, numpy {np.__version__}"
    return f"{python}, {platform.machine()}, {os.cpu_count()} processors, load {load}"


def sizes_of(text: str) -> list[Size]:
    """The sizes in text such as '300x200,1000x500'."""
    sizes = []
    for part in text.split(","):
        opamps, photodiodes = part.split("x")
        sizes.append((int(opamps), int(photodiodes)))
    return sizes


def seeds_of(text: str) -> list[int]:
    """The seeds in text such as '1,2,3'."""
    return [int(part) for part in text.split(",")]


def requests_of(text: str) -> list[str]:
    """The requests in text such as 'nothing,easy-by-cost'."""
    names = text.split(",")
    if unknown := set(names) - set(REQUESTS):
        raise argparse.ArgumentTypeError(f"{', '.join(sorted(unknown))}: choose from {', '.join(REQUESTS)}")
    return names


def arguments(given: Sequence[str] | None) -> argparse.Namespace:
    """Read the command line."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks.search", description=__doc__)
    parser.add_argument(
        "--quick", action="store_true", help="300x200, one seed, one second of plain evaluator"
    )
    parser.add_argument("--sizes", type=sizes_of, help="op-amps x photodiodes (300x200,1000x500,5000x2000)")
    parser.add_argument("--seeds", type=seeds_of, help="of the catalogs (1,2,3)")
    parser.add_argument("--requests", type=requests_of, default=list(REQUESTS), help="which (all)")
    parser.add_argument("--workers", type=int, default=1, help="processes a search (1)")
    parser.add_argument("--plain", type=float, help="seconds of plain evaluator a case (3)")
    parser.add_argument("--profile", action="store_true", help="profile every search, to stderr")
    return parser.parse_args(given)


def main(given: Sequence[str] | None = None) -> None:
    """Run the benchmark and print its table as it grows."""
    args = arguments(given)
    sizes = args.sizes or ([(300, 200)] if args.quick else list(BY_COST))
    seeds = args.seeds or ([1] if args.quick else [1, 2, 3])
    how = How(args.workers, args.plain or (1.0 if args.quick else 3.0), args.profile)
    print(f"{machine()}; {how.workers} worker(s)")
    print(line([name for name, _, _ in COLUMNS]), flush=True)
    results = []
    for result in run_all(sizes, seeds, args.requests, how):
        print(row(result), flush=True)
        results.append(result)
    print(summary(results))
    print(machine())


if __name__ == "__main__":
    main()
