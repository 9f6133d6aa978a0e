"""What can be wrong with the user's input, as data; the command line turns it into words."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches


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
        return printable(f"{place}: {found}{self.rule}{remedy}")


class InputError(LuxsiftError):
    """The input cannot be used; carries every problem found, in reading order."""

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems: tuple[Problem, ...] = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class OutputError(LuxsiftError):
    """A file could not be written; the old one is as it was."""


class MissingExtraError(LuxsiftError):
    """An optional reader or writer is not installed."""


def nearest(word: str, known: Iterable[str]) -> str | None:
    """Return the known word nearest to `word` in spelling, case aside; None where none is near."""
    by_fold = {name.casefold(): name for name in known}
    near = get_close_matches(word[:60].casefold(), by_fold, n=1)
    return by_fold[near[0]] if near else None


def did_you_mean(word: str, known: Iterable[str]) -> str:
    """Return the remedy that names the known word nearest to `word`, '' where none is near."""
    near = nearest(word, known)
    return f"did you mean {near!r}?" if near else ""


def reason(error: Exception) -> str:
    """Return why the system refused, in its own words without number and file name."""
    return getattr(error, "strerror", None) or str(error)


def clean(text: object) -> str:
    """Return `text` on one line, spaces made single ones, so that no name drives the terminal."""
    return printable(" ".join(str(text).split()))


def shortened(text: str, most: int) -> str:
    """Return `text` cut to `most` characters, with dots where something was cut."""
    return text if len(text) <= most else f"{text[: most - 3]}..."


def printable(text: str) -> str:
    """Escape what a terminal would obey rather than show: names and remedies quote the user's input."""
    return "".join(sign if sign.isprintable() else sign.encode("unicode_escape").decode() for sign in text)
