"""Errors as lines for a person: one line a problem, long runs of like ones shortened."""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace
from pathlib import Path

from optimizer.cli.options.shared import COMMAND_LINE
from optimizer.errors import InputError, LuxsiftError, Problem, clean, shortened

ALIKE, MOST = 5, 60
LONGEST_NAME, LONGEST_CELL, LONGEST_WORDS = 120, 60, 400


class StudyError(InputError):
    """Problems of a request, its catalogs and the options; `request` is the request's path as typed."""

    def __init__(self, problems: Iterable[Problem], request: str) -> None:
        super().__init__(problems)
        self.request = request


def error_lines(error: LuxsiftError) -> list[str]:
    """The lines to print for `error`, free of control characters."""
    if not isinstance(error, InputError):
        return [clean(f"luxsift: {error}")]
    many = len(error.problems)
    heading = "luxsift: 1 problem" if many == 1 else f"luxsift: {many:,} problems"
    if isinstance(error, StudyError):
        heading += where_from(error.request, {problem.file for problem in error.problems})
    return [heading, *(f"  {line}" for line in _shortened(error.problems))]


def where_from(request: str, files: Iterable[str]) -> str:
    """Words for a heading over `files`, which a request names as seen from its own folder; '' where that
    is the working directory, or where none of them is a catalog so named.
    """
    own, folder = Path(request), Path(request).parent
    named = [file for file in files if file not in (COMMAND_LINE, str(own)) and not Path(file).is_absolute()]
    if not named or os.path.samefile(folder, os.curdir):
        return ""
    return f"; catalogs are named as seen from the folder {clean(folder)}"


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
        yield from (str(_brief(problem)) for problem in alike[:ALIKE])
        shown += min(len(alike), ALIKE)
        if len(alike) > ALIKE:
            yield f"... and {len(alike) - ALIKE:,} more like these in {_place(_brief(alike[0]))}"


def _place(problem: Problem) -> str:
    return clean(f"{problem.file}, {problem.column}" if problem.column else problem.file)


def _brief(problem: Problem) -> Problem:
    """The problem with its long texts cut: a cell may hold a whole file where a quote is left open."""
    return replace(
        problem,
        column=None if problem.column is None else shortened(problem.column, LONGEST_NAME),
        cell=None if problem.cell is None else shortened(problem.cell, LONGEST_CELL),
        rule=shortened(problem.rule, LONGEST_WORDS),
        remedy=shortened(problem.remedy, LONGEST_WORDS),
    )
