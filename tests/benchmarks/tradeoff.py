"""The benchmark of the trade-off table: `python -m tests.benchmarks.tradeoff [--quick]`.

Times are printed, not judged: of one plain search (the shortlist by cost, ten rows) and of the whole table
of targets and steps, both in this process on the same catalogs, the plain search before and after.
"""

from __future__ import annotations

import argparse
import tempfile
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace
from pathlib import Path

from optimizer import study
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import shortlist
from optimizer.search.weigh.tradeoff import tradeoff
from tests.benchmarks.synthetic import write_catalogs, write_request

KINDS = ("easy-by-cost", "dual-by-cost", "fast-by-cost")
HEADING = (
    f"{'size':>10}  {'seed':>4}  {'request':<13}  {'plain s':>8}  {'table s':>8}  {'ratio':>6}  questions"
)


def lines(sizes: Sequence[tuple[int, int]], seeds: Sequence[int]) -> Iterator[str]:
    """The heading, then one line a case."""
    yield HEADING
    for opamps, photodiodes in sizes:
        for seed in seeds:
            for kind in KINDS:
                plain, table, questions = measured(*drawn(opamps, photodiodes, seed, kind))
                case = f"{f'{opamps}x{photodiodes}':>10}  {seed:>4}  {kind:<13}"
                yield f"{case}  {plain:>8.2f}  {table:>8.2f}  {table / plain:>6.1f}  {questions:>9}"


def drawn(opamps: int, photodiodes: int, seed: int, kind: str) -> tuple[Request, Catalogs]:
    """Synthetic catalogs and a request by cost on them."""
    with tempfile.TemporaryDirectory() as folder:
        write_catalogs(Path(folder), opamps=opamps, photodiodes=photodiodes, seed=seed)
        loaded = study.load(write_request(Path(folder), kind))
    ranking = replace(loaded.request.ranking, by="cost", show=10)
    return replace(loaded.request, ranking=ranking), loaded.catalogs


def measured(request: Request, catalogs: Catalogs) -> tuple[float, float, int]:
    """Processor seconds of one plain search (the mean of two) and of the whole table; its questions."""
    before = _seconds(lambda: shortlist(request, catalogs))
    found = []
    table = _seconds(lambda: found.append(tradeoff(request, catalogs)))
    after = _seconds(lambda: shortlist(request, catalogs))
    return (before + after) / 2.0, table, found[0].questions


def _seconds(work: Callable[[], object]) -> float:
    begun = time.process_time()
    work()
    return time.process_time() - begun


def main(words: Sequence[str] | None = None) -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="the small size and one seed only")
    quick = parser.parse_args(words).quick
    sizes = [(300, 200)] if quick else [(300, 200), (1000, 500)]
    for line in lines(sizes, [1] if quick else [1, 2]):
        print(line, flush=True)


if __name__ == "__main__":
    main()
