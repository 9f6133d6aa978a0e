"""How far the search is: remembered always, shown on a terminal only."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from optimizer.search.result import Progress

Show = Callable[["Progress"], None]


@dataclass(slots=True)
class Watch:
    """Takes the search's reports: keeps the last one, and passes each on to `show` if there is one."""

    show: Show | None = None
    last: Progress | None = None

    def __call__(self, now: Progress) -> None:
        """Take one report."""
        self.last = now
        if self.show is not None:
            self.show(now)


@contextmanager
def watch(*, quiet: bool, what: str = "pairs") -> Iterator[Watch]:
    """A watch that shows progress, of `what` there is to decide, on standard error where a person sees it."""
    if quiet or not sys.stderr.isatty() or os.environ.get("TERM") == "dumb":
        yield Watch()
        return
    from rich.console import Console
    from rich.progress import BarColumn, TextColumn, TimeElapsedColumn
    from rich.progress import Progress as Display

    columns = (
        BarColumn(bar_width=20),
        TextColumn(f"{{task.completed:,.0f}} of {{task.total:,.0f}} {what} decided", markup=False),
        TimeElapsedColumn(),
        TextColumn("{task.fields[best]}", markup=False),
    )
    with Display(*columns, console=Console(stderr=True), transient=True) as display:
        task = display.add_task("", total=None, visible=False, best="")

        def show(now: Progress) -> None:
            best = f"best so far: {now.best}" if now.best else ""
            display.update(task, total=now.pairs, completed=now.decided, best=best, visible=True)

        yield Watch(show)
