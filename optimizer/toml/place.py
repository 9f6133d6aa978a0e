"""Where in a TOML file a problem stands."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from optimizer.errors import Problem
from optimizer.toml.lines import KeyPath

_BARE = re.compile(r"[A-Za-z0-9_-]+")


@dataclass(frozen=True, slots=True)
class Place:
    """The file that problems are in, and the lines of its keys as far as known.

    Keys are named as seen from `inside`, a table of the file.
    """

    file: str
    lines: Mapping[KeyPath, int] = field(default_factory=dict)
    inside: KeyPath = ()

    def within(self, path: KeyPath) -> Place:
        """Return the place of the table at `path`."""
        return replace(self, inside=(*self.inside, *path))

    def problem(self, path: KeyPath, cell: str | None, rule: str, remedy: str = "") -> Problem:
        """Return a problem at the line of the key, or of the nearest table around it."""
        whole = (*self.inside, *path)
        return Problem(self.file, self._line(whole), dotted(whole) or None, cell, rule, remedy)

    def _line(self, path: KeyPath) -> int | None:
        around = (path[:length] for length in range(len(path), 0, -1))
        return next((self.lines[part] for part in around if part in self.lines), None)


def dotted(path: KeyPath) -> str:
    """Return a key as TOML writes it: dotted, odd names in quotes, list items left out.

    >>> dotted(("file", "opamps.csv", "ignore", 2))
    'file."opamps.csv".ignore'
    """
    return ".".join(_written(name) for name in path if isinstance(name, str))


def _written(name: str) -> str:
    return name if _BARE.fullmatch(name) else json.dumps(name, ensure_ascii=False)
