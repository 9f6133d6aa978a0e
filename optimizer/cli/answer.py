"""An answer given: the files that are asked for, then what is printed."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterable, Sequence
from typing import TYPE_CHECKING

from optimizer.cli.options.shared import STANDARD_OUTPUT
from optimizer.cli.output import write, write_lines
from optimizer.errors import OutputError, clean

if TYPE_CHECKING:
    from rich.text import Text

    from optimizer.review.reopen import Changed

File = tuple[str | None, Callable[[], str]]
"""The path that an option was given (None: it was not), and what makes the text."""
Draw = Callable[[int], Sequence["Text"]]
"""Lines for a width."""


def answered(files: Iterable[File], draw: Draw, *, piped: bool) -> None:
    """Write the files, print the answer, and only then raise OutputError where a file could not be written.

    Where a file goes to standard output (`piped`), the answer goes to standard error.
    """
    failure = _saved(files)
    shown(draw, piped=piped)
    if failure is not None:
        raise failure


def shown(draw: Draw, *, piped: bool) -> None:
    """Print the answer; `piped`: standard output is taken by a file."""
    from optimizer.report.terminal import width_of

    stream = sys.stderr if piped else sys.stdout
    write_lines(stream, draw(width_of(stream)))


def _saved(files: Iterable[File]) -> OutputError | None:
    """Write each text where it is asked for; the error comes back, so that the answer is still printed."""
    from optimizer.record import write_text

    try:
        for path, text in files:
            if path == STANDARD_OUTPUT:
                write(sys.stdout, text())
            elif path is not None:
                write_text(path, text())
    except OutputError as error:
        return error
    return None


def tell_changed(changed: Iterable[Changed]) -> None:
    """Say on standard error which files are not what they were when a record was made."""
    for change in changed:
        write(sys.stderr, f"luxsift: {clean(change.file)} is not what it was when the record was made\n")
