"""How far planning a board is: shown on a terminal only."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from optimizer.planning.plan import Stage


@contextmanager
def stages(quantity: int, *, quiet: bool) -> Iterator[Callable[[Stage], None]]:
    """A function to call with each stage of planning `quantity` boards.

    It shows what is being done, the best cost, the bound and the gap between them on standard error,
    where a person sees it.
    """
    if quiet or not sys.stderr.isatty() or os.environ.get("TERM") == "dumb":
        yield lambda _stage: None
        return
    from rich.console import Console
    from rich.progress import Progress, TextColumn, TimeElapsedColumn

    columns = (TimeElapsedColumn(), TextColumn("{task.description}", markup=False))
    with Progress(*columns, console=Console(stderr=True), transient=True) as display:
        task = display.add_task("reading what the channels may use", total=None)
        yield lambda stage: display.update(task, description=words(stage, quantity))


def words(stage: Stage, quantity: int) -> str:
    """A stage in words, money a board: 'narrowing; best 23.41, bound 23.10, gap 1.3 %'."""
    from optimizer.errors import clean

    return f"{clean(stage.doing)}; {_reached(stage, quantity)}"


def _reached(stage: Stage, quantity: int) -> str:
    from optimizer.report.words import percent

    cost, bound = stage.cost, stage.bound
    if bound is not None and bound <= 0:  # says nothing: no board costs less
        bound = None
    if cost is None:
        return "no plan yet" if bound is None else f"no plan yet, bound {_each(bound, quantity)}"
    if bound is None:
        return f"best {_each(cost, quantity)}, no bound yet"
    share = percent((cost - bound) / cost) if cost > bound else "0 %"
    return f"best {_each(cost, quantity)}, bound {_each(bound, quantity)}, gap {share}"


def _each(cents: int, quantity: int) -> str:
    """Cents a build as money a board."""
    from optimizer.report.board.amounts import CENTS, money

    return money(cents / CENTS / quantity)
