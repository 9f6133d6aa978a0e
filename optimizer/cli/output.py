"""Standard streams: what is written fits them, and a reader that has gone is no failure."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING, TextIO

from optimizer.errors import OutputError, reason

if TYPE_CHECKING:
    from rich.text import Text


def write(stream: TextIO, text: str) -> None:
    """Write and flush; where the reader has gone, the rest is dropped without a word.

    Raises OutputError where the system refuses for another reason, such as a full disk; the rest is
    dropped then too.
    """
    try:
        stream.write(text)
        stream.flush()
    except BrokenPipeError:
        # the answer stands all the same, and so does its exit status
        drop(stream)
    except OSError as error:
        drop(stream)
        name = "standard error" if stream is sys.stderr else "standard output"
        raise OutputError(f"{name}: cannot be written: {reason(error)}") from error


def drop(stream: TextIO) -> None:
    """Let what is still written to `stream` go nowhere, without a complaint when Python ends."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, stream.fileno())
    os.close(nowhere)


def write_lines(stream: TextIO, lines: Sequence[Text]) -> None:
    """Write lines as `stream` takes them: coloured on a terminal that wants it, plain elsewhere."""
    from optimizer.report.terminal import rendered

    write(stream, rendered(stream, lines))
