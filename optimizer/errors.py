"""What can be wrong with the user's input, as data; the command line turns it into words."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


class LuxsiftError(Exception):
    """Root of every error that luxsift raises on purpose."""


@dataclass(frozen=True, slots=True)
class Problem:
    """One thing wrong in one place of the input.

    `file` is the name as the user wrote it; `row` is the line in that file (1 = first line) and
    `column` the header or dotted key, each None where there is none; `cell` is the text found;
    `rule` says what was expected, `remedy` what to do about it (may be empty).
    """

    file: str
    row: int | None
    column: str | None
    cell: str | None
    rule: str
    remedy: str = ""

    def __str__(self) -> str:
        place = self.file if self.row is None else f"{self.file}, line {self.row}"
        if self.column:
            place += f", {self.column}"
        found = "" if self.cell is None else f"found {self.cell!r}, "
        remedy = f" ({self.remedy})" if self.remedy else ""
        return f"{place}: {found}{self.rule}{remedy}"


class InputError(LuxsiftError):
    """The input cannot be used; carries every problem found, in reading order."""

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems: tuple[Problem, ...] = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class OutputError(LuxsiftError):
    """A file could not be written; the old one is as it was."""


class MissingExtraError(LuxsiftError):
    """An optional reader or writer is not installed."""
