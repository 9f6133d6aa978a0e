"""How far a command of several steps is: shown on a terminal only."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager


@contextmanager
def steps(what: str, total: int) -> Iterator[Callable[[str], None]]:
    """A function to call with the name of each step as it begins; `what` names the steps together."""
    if not sys.stderr.isatty() or os.environ.get("TERM") == "dumb":
        yield lambda _name: None
        return
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn

    columns = (
        BarColumn(bar_width=20),
        TextColumn("{task.completed:,.0f} of {task.total:,.0f} {task.description} done", markup=False),
        TimeElapsedColumn(),
        TextColumn("{task.fields[now]}", markup=False),
    )
    with Progress(*columns, console=Console(stderr=True), transient=True) as display:
        task = display.add_task(what, total=total, now="")
        begun = 0

        def step(name: str) -> None:
            nonlocal begun
            display.update(task, completed=begun, now=name)
            begun += 1

        yield step
