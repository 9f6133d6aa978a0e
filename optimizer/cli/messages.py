"""Errors as lines for a person: one line a problem, long runs of like ones shortened."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from optimizer.errors import InputError, LuxsiftError, Problem

ALIKE, MOST = 5, 60


def error_lines(error: LuxsiftError) -> list[str]:
    """The lines to print for `error`, free of control characters."""
    if not isinstance(error, InputError):
        return [printable(f"luxsift: {error}")]
    many = len(error.problems)
    heading = "luxsift: 1 problem" if many == 1 else f"luxsift: {many:,} problems"
    return [heading, *(printable(f"  {line}") for line in _shortened(error.problems))]


def _shortened(problems: Sequence[Problem]) -> Iterator[str]:
    groups: dict[tuple[str, str | None, str], list[Problem]] = {}
    for problem in problems:
        groups.setdefault((problem.file, problem.column, problem.rule), []).append(problem)
    shown = 0
    for index, alike in enumerate(groups.values()):
        if shown >= MOST:
            rest = sum(len(group) for group in list(groups.values())[index:])
            yield f"... and {rest:,} more"
            return
        yield from (str(problem) for problem in alike[:ALIKE])
        shown += min(len(alike), ALIKE)
        if len(alike) > ALIKE:
            yield f"... and {len(alike) - ALIKE:,} more like these{_place(alike[0])}"


def _place(problem: Problem) -> str:
    return f" in {problem.file}" + (f", {problem.column}" if problem.column else "")


def printable(line: str) -> str:
    """`line` on one line and free of control characters, so that no cell drives the terminal."""
    flat = line.replace("\r", " ").replace("\n", " ").replace("\t", " ")
    return "".join(char if char.isprintable() else "?" for char in flat)
