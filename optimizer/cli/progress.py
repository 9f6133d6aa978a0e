"""How far the search is, on a terminal; silent where nobody looks."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from optimizer.search.result import Progress

Report = Callable[["Progress"], None]


@contextmanager
def progress(*, quiet: bool) -> Iterator[Report | None]:
    """A function that shows progress on standard error, or None where nobody would see it."""
    if quiet or not sys.stderr.isatty() or os.environ.get("TERM") == "dumb":
        yield None
        return
    from rich.console import Console
    from rich.progress import BarColumn, TextColumn, TimeElapsedColumn
    from rich.progress import Progress as Display

    columns = (
        BarColumn(bar_width=20),
        TextColumn("{task.completed:,.0f} of {task.total:,.0f} pairs decided", markup=False),
        TimeElapsedColumn(),
        TextColumn("{task.fields[best]}", markup=False),
    )
    with Display(*columns, console=Console(stderr=True), transient=True) as display:
        task = display.add_task("", total=None, visible=False, best="")

        def show(now: Progress) -> None:
            best = f"best so far: {now.best}" if now.best else "nothing meets so far"
            display.update(task, total=now.pairs, completed=now.decided, best=best, visible=True)

        yield show
