"""Standard streams: what is written fits them, and a reader that has gone is no failure."""

from __future__ import annotations

import os
from collections.abc import Sequence
from typing import TYPE_CHECKING, TextIO

if TYPE_CHECKING:
    from rich.text import Text


def write(stream: TextIO, text: str) -> None:
    """Write and flush; where the reader has gone, the rest is dropped without a word."""
    try:
        stream.write(text)
        stream.flush()
    except BrokenPipeError:
        # the answer stands all the same, and so does its exit status
        drop(stream)


def drop(stream: TextIO) -> None:
    """Let what is still written to `stream` go nowhere, without a complaint when Python ends."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, stream.fileno())
    os.close(nowhere)


def write_lines(stream: TextIO, lines: Sequence[Text]) -> None:
    """Write lines as `stream` takes them: coloured on a terminal that wants it, plain elsewhere."""
    from optimizer.report.terminal import rendered

    write(stream, rendered(stream, lines))
