"""The benchmark of planning whole boards from catalogs: `python -m tests.benchmarks.planning [--quick]`.

Times are printed, not judged: to the first plan and in all; how much of the cost could be saved at most over
everything that the requests admit, and over the pools; and what the plan saves against each channel alone.
"""

from __future__ import annotations

import argparse
import tempfile
import time
from collections.abc import Iterator, Sequence
from pathlib import Path

from optimizer.planning.outline import Outline
from optimizer.planning.plan import Planned, Stage
from optimizer.planning.plan_board import plan_board
from optimizer.planning.reading import read_board
from tests.benchmarks.synthetic import write_catalogs, write_request

COUNTS = {"easy-by-cost": 3, "fast-by-cost": 2}
BOARD = """quantity = 400
[costs]
line_item = 15.0
placement = 0.01
[solve]
plans = 3
time = {time}
"""
CHANNEL = """[[channels]]
name = "{name}"
request = "{name}.toml"
count = {count}
"""
HEADING = (
    f"{'size':>10}  {'seed':>4}  {'first s':>8}  {'all s':>8}  {'cpu s':>8}  {'pools %':>8}  {'all %':>8}  "
    f"{'saves %':>8}  {'candidates':>10}  status"
)


def lines(sizes: Sequence[tuple[int, int]], seeds: Sequence[int], seconds: float) -> Iterator[str]:
    """The heading, then one line a case."""
    yield HEADING
    for opamps, photodiodes in sizes:
        for seed in seeds:
            with tempfile.TemporaryDirectory() as folder:
                outline = drawn(Path(folder), (opamps, photodiodes), seed, seconds)
            yield f"{f'{opamps}x{photodiodes}':>10}  {seed:>4}  {measured(outline)}"


def drawn(folder: Path, size: tuple[int, int], seed: int, seconds: float) -> Outline:
    """A board of five channels of two kinds on synthetic catalogs."""
    write_catalogs(folder, opamps=size[0], photodiodes=size[1], seed=seed)
    text = BOARD.format(time=seconds)
    for name, count in COUNTS.items():
        write_request(folder, name)
        text += CHANNEL.format(name=name, count=count)
    (folder / "board.toml").write_text(text, "utf-8")
    return read_board(folder / "board.toml")


def measured(outline: Outline) -> str:
    """One row of the table."""
    stages: list[Stage] = []
    begun, cpu = time.monotonic(), time.process_time()
    found = plan_board(outline, stages.append)
    seconds, cpu = time.monotonic() - begun, time.process_time() - cpu
    first = next((stage.seconds for stage in stages if stage.cost is not None), float("nan"))
    kept = sum(pool.kept for pool in found.pools)
    times = f"{first:>8.2f}  {seconds:>8.2f}  {cpu:>8.2f}"
    return f"{times}  {shares(found)}  {kept:>10}  {found.status}"


def shares(found: Planned) -> str:
    """In percent of the plan's cost: what could be saved over the pools, over everything, and what was."""
    if not found.plans or found.floor is None or found.alone is None:
        return f"{'-':>8}  {'-':>8}  {'-':>8}"
    cost = found.plans[0].cost
    gaps = (cost - found.plans[0].bound, cost - found.floor, found.alone.cost - cost)
    return "  ".join(f"{100.0 * gap / cost:>8.2f}" for gap in gaps)


def main(words: Sequence[str] | None = None) -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks.planning", description=__doc__)
    parser.add_argument("--quick", action="store_true", help="the small size and one seed only")
    parser.add_argument("--time", type=float, default=60.0, help="seconds that a board may take")
    wanted = parser.parse_args(words)
    sizes = [(300, 200)] if wanted.quick else [(300, 200), (1000, 500)]
    for line in lines(sizes, [1] if wanted.quick else [1, 2], wanted.time):
        print(line, flush=True)


if __name__ == "__main__":
    main()
