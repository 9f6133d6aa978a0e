"""A TOML file that could be read as such: its tables, and the place of each key."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from optimizer.input_file import InputFile
from optimizer.toml.lines import key_lines
from optimizer.toml.place import Place
from optimizer.toml.text import decode, parse


@dataclass(frozen=True, slots=True)
class Document:
    """The tables of one TOML file, the lines of its keys, and its SHA-256."""

    tables: Mapping[str, Any]
    place: Place
    sha256: str


def read_document(source: InputFile) -> Document:
    """Return the tables of a file; raises InputError where it is not UTF-8 or not TOML."""
    text = decode(source.data, source.file)
    return Document(parse(text, source.file), Place(source.file, key_lines(text)), source.sha256)
