"""From the bytes of a TOML file to its tables, or to problems that say what is wrong with the file."""

from __future__ import annotations

import re
import tomllib
from typing import Any

from optimizer.errors import InputError, Problem

_UTF16 = (b"\xff\xfe", b"\xfe\xff")
_PLACE = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")
_UNQUOTED = re.compile(r"^\s*(\S+)\s*=\s*([^\"'\[{#\s][^\"'#]*?)\s*(?:#.*)?$")
_LONGEST = 80
# How the reader's messages begin, what they mean to a user, and what to do.
_SAID = (
    ("Cannot declare", "this table stands above already", "put the keys of both under one heading"),
    ("Cannot mutate", "this table stands above already", "put the keys of both under one heading"),
    ("Cannot overwrite", "this key stands above already", "keep one of the two"),
    ("Illegal character '\\n'", "the text is not closed on its line", "put the missing quote at its end"),
    (
        "Illegal character '\\r'",
        "a line ends in a lone carriage return",
        "save the file with usual line ends",
    ),
    ("Unterminated string", "the text is not closed", "put the missing quote at its end"),
    ("Unclosed array", "a list is not closed", "put the missing ]"),
)
_OPEN = "is a quote or a bracket left open?"
_COLON = re.compile(r"^\s*(\w+)\s*:\s*(.+?)\s*$")


def decode(data: bytes, file: str) -> str:
    """Return the text of a UTF-8 file, with or without byte-order mark; raises InputError."""
    if data.startswith(_UTF16) or b"\x00" in data[:4]:
        rule = "the file is in UTF-16 or UTF-32, expected UTF-8"
        raise InputError([Problem(file, 1, None, None, rule, "save it again as UTF-8")])
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise InputError([_stray_byte(error, file)]) from None


def _stray_byte(error: UnicodeDecodeError, file: str) -> Problem:
    """Name the first byte that is not UTF-8, with its line."""
    before = bytes(error.object[: error.start])
    row = before.count(b"\n") + 1
    column = len(before.rsplit(b"\n", 1)[-1].decode("utf-8", "replace")) + 1
    byte = error.object[error.start]
    sign = bytes([byte]).decode("cp1252", "replace")
    rule = f"byte 0x{byte:02X} in column {column} is not UTF-8"
    remedy = f"save the file again as UTF-8 (in Windows-1252 the byte would be {sign!r})"
    return Problem(file, row, None, None, rule, remedy)


def parse(text: str, file: str) -> dict[str, Any]:
    """Return the tables of a TOML text; raises InputError with line and column of the first error."""
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise InputError([Problem(file, None, None, None, "lists or tables nested too deep")]) from None
    except ValueError as error:
        raise InputError([_syntax_problem(str(error), text, file)]) from None


def _syntax_problem(message: str, text: str, file: str) -> Problem:
    lines = text.split("\n")
    place = _PLACE.search(message)
    if place is None:  # what Python itself refuses, such as a number of thousands of digits
        return Problem(file, None, None, None, "not valid TOML: a number has too many digits")
    row = int(place[1]) if place[1] else len(lines)
    line = lines[row - 1].strip()[:_LONGEST]
    where = f"column {place[2]}" if place[2] else "the end of the file"
    what, remedy = _in_words(_PLACE.sub("", message))
    remedy = remedy or _line_remedy(line) or _other_format(file) or ("" if place[1] else _OPEN)
    return Problem(file, row, None, line or None, f"not valid TOML at {where}: {what}", remedy)


def _in_words(what: str) -> tuple[str, str]:
    """Return the reader's message, in plain words where it is one of those met most, and a remedy."""
    for start, words, remedy in _SAID:
        if what.startswith(start):
            return words, remedy
    return what[:1].lower() + what[1:], ""


def _line_remedy(line: str) -> str:
    """Return what to do about a value without quotes, True for true, and a colon for an equals sign."""
    unquoted = _UNQUOTED.match(line)
    if unquoted and unquoted[2] in ("True", "False"):
        return f"write {unquoted[1]} = {unquoted[2].lower()}"
    if unquoted:
        return f'put the value in quotes: {unquoted[1]} = "{unquoted[2]}"'
    colon = _COLON.match(line)
    return f"write {colon[1]} = {colon[2]}" if colon and "=" not in line else ""


def _other_format(file: str) -> str:
    return "" if file.endswith(".toml") else "expected a TOML file, and this name does not end in .toml"
