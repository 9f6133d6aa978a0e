"""The keys that a TOML file may hold, as a table: how each is read, what stands when it is left out."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from optimizer.toml.place import dotted

if TYPE_CHECKING:
    from optimizer.toml.reading import Reading

Name = tuple[str, ...]
Reader = Callable[[Any], Any]
TableReader = Callable[[Mapping[str, Any], "Reading"], None]


@dataclass(frozen=True, slots=True)
class Fault:
    """What is wrong with one value; `item` is its place in a list, None where it is no list item."""

    cell: str
    rule: str
    remedy: str = ""
    item: int | None = None


class Refused(ValueError):
    """A value that cannot be used, with every fault found in it."""

    def __init__(self, *faults: Fault) -> None:
        self.faults = faults
        super().__init__("; ".join(fault.rule for fault in faults))


@dataclass(frozen=True, slots=True)
class Key:
    """One key: its reader, the value left out stands for, and for a key that must be stated an example."""

    read: Reader
    default: Any = None
    example: str = ""


@dataclass(frozen=True, slots=True)
class Schema:
    """What a file, or one table of it, may hold.

    `keys` by table and name; `lists` of tables, each with the schema of one; `free` tables, whose keys
    a function of their own reads; `hints` say what to do about names that are met and mean nothing.
    """

    keys: Mapping[Name, Key]
    lists: Mapping[Name, Schema] = field(default_factory=dict)
    free: Mapping[Name, TableReader] = field(default_factory=dict)
    hints: Mapping[Name, str] = field(default_factory=dict)

    @property
    def tables(self) -> frozenset[Name]:
        """Every table, that of the whole (the empty name) among them."""
        around = {name[:length] for name in self.keys for length in range(len(name))}
        return frozenset({(), *around, *self.free})

    @property
    def required(self) -> tuple[Name, ...]:
        """The keys that must be stated."""
        return tuple(name for name, key in self.keys.items() if key.example)

    def names_in(self, table: Name) -> tuple[str, ...]:
        """Return the keys and tables that may stand in `table`."""
        keys = [name[-1] for name in self.keys if name[:-1] == table]
        tables = [name[-1] for name in (*self.tables, *self.lists) if name and name[:-1] == table]
        return (*keys, *sorted(tables))

    def tables_with(self, name: str) -> tuple[Name, ...]:
        """Return the tables in which a key of this name may stand."""
        tables = [path[:-1] for path in self.keys if path[-1] == name]
        lists = [path for path, one in self.lists.items() if (name,) in one.keys]
        return tuple(dict.fromkeys((*tables, *lists)))

    def stands(self, name: str) -> str:
        """Return in words in which table a key of this name stands; '' where there is no such key."""
        tables = self.tables_with(name)
        if tables == ((),):
            return f"{name} stands at the top, above the first [table]"
        return f"{name} stands in " + " or ".join(map(self.heading, filter(None, tables))) if tables else ""

    def heading(self, table: Name) -> str:
        """Return the line that begins a table."""
        return f"[[{dotted(table)}]]" if table in self.lists else f"[{dotted(table)}]"


def as_written(value: Any) -> str:
    """Return a value as TOML would have it, for messages."""
    if isinstance(value, str):
        return value
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return "a list"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int) and abs(value) > 10**40:
        return "a whole number of more than 40 digits"
    return str(value)
