"""Lines of text for a stream: plain, or with colour where a person looks at a terminal."""

from __future__ import annotations

import os
from collections.abc import Sequence
from io import StringIO
from typing import TextIO

from rich.console import Console
from rich.text import Text

LEAST_WIDTH, USUAL_WIDTH = 40, 80
ASCII = str.maketrans({"\u00b5": "u", "\u03bc": "u", "\u00b0": "deg ", "\u03a9": "ohm", "\u2126": "ohm"})


def to_text(lines: Sequence[Text], *, colour: bool) -> str:
    """The lines as text, each ending in a newline; escape codes only where `colour` is asked for."""
    if not colour:
        return "".join(f"{line.plain}\n" for line in lines)
    buffer = StringIO()
    console = Console(file=buffer, force_terminal=True, color_system="standard", highlight=False)
    for line in lines:
        console.print(line, soft_wrap=True, markup=False)
    return buffer.getvalue()


def rendered(stream: TextIO, lines: Sequence[Text]) -> str:
    """The lines as text that `stream` takes: its colours, its characters."""
    text = to_text(lines, colour=wants_colour(stream))
    encoding = getattr(stream, "encoding", None) or "utf-8"
    try:
        text.encode(encoding)
    except UnicodeEncodeError:
        return text.translate(ASCII).encode(encoding, "backslashreplace").decode(encoding)
    return text


def wants_colour(stream: TextIO) -> bool:
    """Whether `stream` is a terminal that takes colour (NO_COLOR and TERM=dumb say no)."""
    plain = os.environ.get("NO_COLOR") or os.environ.get("TERM") == "dumb"
    return stream.isatty() and not plain


def width_of(stream: TextIO) -> int:
    """The columns to write for: COLUMNS, else the terminal's, else 80."""
    said = os.environ.get("COLUMNS", "")
    if said.isdigit() and int(said) > 0:
        return max(LEAST_WIDTH, int(said))
    if not stream.isatty():
        return USUAL_WIDTH
    try:
        return max(LEAST_WIDTH, os.get_terminal_size(stream.fileno()).columns)
    except OSError:
        return USUAL_WIDTH
