"""The one place that prints errors and decides the exit status."""

from __future__ import annotations

import io
import sys
from collections.abc import Callable, Sequence
from contextlib import suppress
from importlib import import_module
from typing import TYPE_CHECKING

from optimizer.cli.arguments import parse, parser
from optimizer.cli.messages import error_lines
from optimizer.cli.output import write
from optimizer.errors import LuxsiftError, OutputError

if TYPE_CHECKING:
    import argparse

BAD_INPUT, INTERRUPTED = 2, 130


def main(words: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status: 0, 1, 2 or 130 (see `luxsift --help`)."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")
    return _guarded(list(sys.argv[1:] if words is None else words))


def _guarded(words: list[str]) -> int:
    try:
        status = _run(words)
        write(sys.stdout, "")  # what argparse printed may fail here, but not when Python ends
        return status
    except LuxsiftError as error:
        _tell("\n".join(error_lines(error)) + "\n")
        return BAD_INPUT
    except KeyboardInterrupt:
        _tell("luxsift: interrupted; nothing was decided or written\n")
        return INTERRUPTED


def _tell(text: str) -> None:
    with suppress(OutputError):  # the exit status is all that is left to say it with
        write(sys.stderr, text)


def _run(words: list[str]) -> int:
    try:
        parsed = parse(words)
    except SystemExit as end:  # argparse has printed its help
        return int(end.code or 0)
    if parsed.version:
        from optimizer.record.build import installed_version

        write(sys.stdout, f"luxsift {installed_version()}\n")
        return 0
    if parsed.command is None:
        write(sys.stderr, parser().format_help())
        return BAD_INPUT
    return _command(parsed.command)(parsed)


def _command(name: str) -> Callable[[argparse.Namespace], int]:
    command: Callable[[argparse.Namespace], int] = getattr(import_module(f"optimizer.cli.{name}"), name)
    return command
