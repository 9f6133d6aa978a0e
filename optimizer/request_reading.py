"""Where a problem of a request stands, and what was read of it so far."""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from optimizer.errors import Problem
from optimizer.request_lines import KeyPath
from optimizer.request_schema import KEYS, Name
from optimizer.request_values import Fault

_BARE = re.compile(r"[A-Za-z0-9_-]+")
_LONGEST = 60


@dataclass(frozen=True, slots=True)
class Place:
    """The file that problems are in, and the lines of its keys as far as known."""

    file: str
    lines: Mapping[KeyPath, int] = field(default_factory=dict)

    def problem(self, path: KeyPath, cell: str | None, rule: str, remedy: str = "") -> Problem:
        """Return a problem at the line of the key, or of the nearest table around it."""
        return Problem(self.file, self._line(path), dotted(path) or None, cell, rule, remedy)

    def _line(self, path: KeyPath) -> int | None:
        around = (path[:length] for length in range(len(path), 0, -1))
        return next((self.lines[part] for part in around if part in self.lines), None)


def dotted(path: KeyPath) -> str:
    """Return a key as TOML writes it: dotted, odd names in quotes, list items left out."""
    return ".".join(_written(name) for name in path if isinstance(name, str))


def _written(name: str) -> str:
    short = name if len(name) <= _LONGEST else name[: _LONGEST - 3] + "..."
    return short if _BARE.fullmatch(short) else json.dumps(short, ensure_ascii=False)


@dataclass(slots=True)
class Reading:
    """What was read so far.

    `values` and, as they were written, `cells` by key; `assume` by role and column; the tables met;
    the keys and tables that went `wrong`; and the problems.
    """

    place: Place
    values: dict[Name, Any] = field(default_factory=dict)
    cells: dict[Name, str] = field(default_factory=dict)
    assume: dict[tuple[str, str], float] = field(default_factory=dict)
    tables: set[Name] = field(default_factory=set)
    wrong: set[Name] = field(default_factory=set)
    problems: list[Problem] = field(default_factory=list)

    def value(self, key: Name) -> Any:
        """Return the value in force: as stated, else the default of the schema."""
        return self.values[key] if key in self.values else KEYS[key].default

    def is_wrong(self, key: Name) -> bool:
        """Tell whether the key, or a table around it, was met and could not be read."""
        return any(key[:length] in self.wrong for length in range(1, len(key) + 1))

    def refuse(self, path: Name, cell: str | None, rule: str, remedy: str = "") -> None:
        """Keep a problem and remember that the key went wrong."""
        self.wrong.add(path)
        self.problems.append(self.place.problem(path, cell, rule, remedy))

    def refuse_faults(self, path: Name, faults: Iterable[Fault]) -> None:
        """Keep every fault found in one value."""
        self.wrong.add(path)
        for fault in faults:
            at: KeyPath = path if fault.item is None else (*path, fault.item)
            self.problems.append(self.place.problem(at, fault.cell, fault.rule, fault.remedy))
