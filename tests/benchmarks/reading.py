"""The benchmark of reading and starting: `python -m tests.benchmarks.reading`; printed, not judged.

Reading is of a large op-amp catalog (with a photodiode and the few passives that a reading needs);
each read is in a fresh process and counts the imports that it causes.
`luxsift --help` is timed as a whole process, from outside.
"""

from __future__ import annotations

import argparse
import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from pathlib import Path

from tests.benchmarks.search import ROOT, machine
from tests.benchmarks.synthetic import write_catalogs

# The floors that the project set itself, in seconds.
READING = 3.0
HELP = 0.3

READ = """
import sys, time
begun = time.perf_counter()
from optimizer.catalog import ReadOptions, read_catalogs
files = dict(word.split("=", 1) for word in sys.argv[1:])
catalogs = read_catalogs({role: [file] for role, file in files.items()}, ReadOptions(quantity=200))
print(time.perf_counter() - begun, catalogs.opamps.size)
"""


def python(*words: str) -> str:
    """Run this Python with `words`, from a folder that holds nothing of ours; return what it printed."""
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    done = subprocess.run(
        [sys.executable, *words], capture_output=True, text=True, env=environment, check=True
    )
    return done.stdout


def reading(rows: int, runs: int) -> tuple[list[float], int]:
    """Seconds to read a catalog of `rows` op-amps, by run; and how many parts were usable."""
    seconds, usable = [], 0
    with tempfile.TemporaryDirectory() as name:
        files = write_catalogs(Path(name), opamps=rows, photodiodes=1, seed=1)
        for _ in range(runs):
            took, parts = python("-c", READ, *(f"{role}={file}" for role, file in files.items())).split()
            seconds.append(float(took))
            usable = int(parts)
    return seconds, usable


def starting(runs: int) -> list[float]:
    """Seconds of `luxsift --help`, by run; the first, which may compile, is left out."""
    seconds = []
    for _ in range(runs + 1):
        begun = time.perf_counter()
        python("-m", "optimizer", "--help")
        seconds.append(time.perf_counter() - begun)
    return seconds[1:]


def line(what: str, seconds: Sequence[float], floor: float) -> str:
    """One line of the table."""
    middle = statistics.median(seconds)
    remark = "" if middle <= floor else "  over its floor"
    return f"{what:<28}{middle:8.3f}{min(seconds):8.3f}{max(seconds):8.3f}{floor:8g}{remark}"


def main(given: Sequence[str] | None = None) -> None:
    """Run the benchmark and print its table."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks.reading", description=__doc__)
    parser.add_argument("--rows", type=int, default=20_000, help="rows of the catalog (20000)")
    parser.add_argument("--runs", type=int, default=7, help="how often (7)")
    args = parser.parse_args(given)
    print(machine())
    print(f"{'seconds':<28}{'median':>8}{'least':>8}{'most':>8}{'floor':>8}")
    seconds, usable = reading(args.rows, args.runs)
    print(line(f"read {args.rows} rows, {usable} usable", seconds, READING))
    print(line("luxsift --help", starting(args.runs), HELP))


if __name__ == "__main__":
    main()
