"""On which line each key of a TOML text stands; the standard reader tells values only."""

from __future__ import annotations

import contextlib
import re
import tomllib
from bisect import bisect_right
from collections.abc import Iterable

KeyPath = tuple[str | int, ...]

_BLANK = re.compile(r"(?:[ \t\r\n]+|#[^\n]*)*")
_BLANK_OR_COMMA = re.compile(r"(?:[ \t\r\n,]+|#[^\n]*)*")
_OPEN = re.compile(r"\[+")
_CLOSE = re.compile(r"[ \t]*\]+")
_SPACE = re.compile(r"[ \t]*")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_BARE_VALUE = re.compile(r"[^,\]}#\n]+")
_STRING = re.compile(
    r'"""(?:[^"\\]|\\.|"(?!""))*"{3,5}'
    r"|'''(?:[^']|'(?!''))*'{3,5}"
    r'|"(?:[^"\\\n]|\\.)*"'
    r"|'[^'\n]*'",
    re.DOTALL,
)


class _Lost(Exception):
    """The scanner met text that it does not follow."""


def key_lines(text: str) -> dict[KeyPath, int]:
    """Return the line (1 = first) of every key, table and list item of a valid TOML text.

    A key is a tuple of names, a list item its list's key and its place (0 = first); the tables under
    one [[heading]] are the items of a list. A table has the line of its first mention. What the scanner
    cannot follow is left out, never guessed.
    """
    scanner = _Scanner(text)
    with contextlib.suppress(_Lost, RecursionError):
        scanner.document()
    return scanner.lines


class _Scanner:
    """Walks the text once, noting where each key begins."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.lines: dict[KeyPath, int] = {}
        self._last: dict[KeyPath, int] = {}  # the last item so far of each list of tables
        self._ends = [match.start() for match in re.finditer("\n", text)]

    def document(self) -> None:
        table: KeyPath = ()
        self._skip(_BLANK)
        while self.at < len(self.text):
            if self._next("["):
                table = self._header()
            else:
                self._pair(table)
            self._skip(_BLANK)

    def _header(self) -> KeyPath:
        start, item = self.at, self._next("[[")
        self._skip(_OPEN)
        *around, name = self._key()
        table: KeyPath = (*self._in_last_items(around), name)
        if item:
            self._last[table] = self._last.get(table, -1) + 1
        table = self._in_last_items((name,), table[:-1])
        self._note(table, start)
        self._skip(_CLOSE)
        return table

    def _in_last_items(self, names: Iterable[str | int], path: KeyPath = ()) -> KeyPath:
        """Follow names from a path; a list of tables stands for the last of its items."""
        for name in names:
            path = (*path, name)
            if path in self._last:
                path = (*path, self._last[path])
        return path

    def _pair(self, table: KeyPath) -> None:
        start = self.at
        key = table + self._key()
        self._note(key, start)
        self._skip(_SPACE)
        if not self._next("="):
            raise _Lost
        self.at += 1
        self._skip(_SPACE)
        self._value(key)

    def _key(self) -> KeyPath:
        names: list[str] = []
        while True:
            self._skip(_SPACE)
            names.append(self._name())
            self._skip(_SPACE)
            if not self._next("."):
                return tuple(names)
            self.at += 1

    def _name(self) -> str:
        if self._next('"') or self._next("'"):
            return str(tomllib.loads("name = " + self._take(_STRING))["name"])
        return self._take(_BARE_KEY)

    def _value(self, key: KeyPath) -> None:
        if self._next("["):
            self._array(key)
        elif self._next("{"):
            self._inline_table(key)
        elif self._next('"') or self._next("'"):
            self._take(_STRING)
        else:
            self._take(_BARE_VALUE)

    def _array(self, key: KeyPath) -> None:
        self.at += 1
        place = 0
        self._skip(_BLANK_OR_COMMA)
        while not self._next("]"):
            self._note((*key, place), self.at)
            self._value((*key, place))
            self._skip(_BLANK_OR_COMMA)
            place += 1
        self.at += 1

    def _inline_table(self, key: KeyPath) -> None:
        self.at += 1
        self._skip(_BLANK_OR_COMMA)
        while not self._next("}"):
            self._pair(key)
            self._skip(_BLANK_OR_COMMA)
        self.at += 1

    def _note(self, key: KeyPath, at: int) -> None:
        line = bisect_right(self._ends, at) + 1
        for length in range(1, len(key) + 1):
            self.lines.setdefault(key[:length], line)

    def _next(self, sign: str) -> bool:
        return self.text.startswith(sign, self.at)

    def _skip(self, pattern: re.Pattern[str]) -> None:
        match = pattern.match(self.text, self.at)
        self.at = match.end() if match else self.at

    def _take(self, pattern: re.Pattern[str]) -> str:
        match = pattern.match(self.text, self.at)
        if match is None:
            raise _Lost
        self.at = match.end()
        return match.group()
