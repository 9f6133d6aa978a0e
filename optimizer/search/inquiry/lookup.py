"""Which catalog rows a user means by the names of parts and families."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.errors import InputError, Problem, did_you_mean
from optimizer.vocabulary import NAMES, ROLES

COMMAND_LINE = "command line"
ONE: dict[str, str] = {
    "opamps": "an op-amp",
    "photodiodes": "a photodiode",
    "resistors": "a resistor family",
    "capacitors": "a capacitor family",
}
"""What one row of each role is called."""


@dataclass(frozen=True, slots=True)
class Part:
    """One row of a catalog: its role, its place among the role's parts, its name and its maker."""

    role: str
    row: int
    name: str
    maker: str

    @property
    def full(self) -> str:
        """The name that tells parts of several makers apart; the bare name where no maker is stated."""
        return f"{self.maker}/{self.name}" if self.maker else self.name


def parts_of(catalogs: Catalogs, role: str) -> Parts:
    """The parts of one role."""
    parts: Parts = getattr(catalogs, role)
    return parts


def every(catalogs: Catalogs) -> Iterator[Part]:
    """All parts and families of the catalogs."""
    for role in ROLES:
        text = parts_of(catalogs, role).text
        names = text[NAMES[role]].tolist()
        makers = text["maker"].tolist() if "maker" in text else [""] * len(names)
        for row, (name, maker) in enumerate(zip(names, makers, strict=True)):
            yield Part(role, row, name, maker)


def lookup(catalogs: Catalogs, words: Sequence[str]) -> tuple[Part, ...]:
    """The parts named by `words`, each by its name or as maker/part, at most one of a role.

    Raises InputError with every name that is unknown or that several parts have.
    """
    found, problems = [], []
    known = list(every(catalogs))
    for word in words:
        matches = [part for part in known if word in (part.name, part.full)]
        if len(matches) == 1:
            found.append(matches[0])
        else:
            problems.append(_problem(word, matches, known))
    problems = problems or list(_clashes(found))
    if problems:
        raise InputError(problems)
    return tuple(found)


def _problem(word: str, matches: Sequence[Part], known: Sequence[Part]) -> Problem:
    if not matches:
        names = sorted({part.name for part in known} | {part.full for part in known})
        rule = "the catalogs hold no such part or family"
        return Problem(COMMAND_LINE, None, "PART", word, rule, did_you_mean(word, names))
    called = [f"{ONE[part.role]}, {part.full!r}" for part in matches]
    remedy = "name it as maker/part" if len({part.full for part in matches}) == len(matches) else ""
    rule = f"expected the name of one part, and {len(matches)} have it: {'; '.join(called)}"
    return Problem(COMMAND_LINE, None, "PART", word, rule, remedy)


def _clashes(found: Sequence[Part]) -> Iterator[Problem]:
    """A receiver has one part of a role."""
    for role in ROLES:
        names = [part.full for part in found if part.role == role]
        if len(names) > 1:
            rule = f"expected parts of different roles: each of these is {ONE[role]}"
            yield Problem(COMMAND_LINE, None, "PART", ", ".join(names), rule, "ask about one at a time")
