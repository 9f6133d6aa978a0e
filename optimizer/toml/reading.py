"""What was read of a TOML file so far, and what went wrong with it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Any

from optimizer.errors import Problem
from optimizer.toml.lines import KeyPath
from optimizer.toml.place import Place
from optimizer.toml.schema import Fault, Name, Schema


@dataclass(slots=True)
class Reading:
    """What was read so far.

    `values` and, as they were written, `cells` by key; the tables met; the `items` of lists of tables;
    the keys and tables that went `wrong`; and the problems, those of the items among them.
    """

    schema: Schema
    place: Place
    values: dict[Name, Any] = field(default_factory=dict)
    cells: dict[Name, str] = field(default_factory=dict)
    tables: set[Name] = field(default_factory=set)
    items: dict[Name, list[Reading]] = field(default_factory=dict)
    wrong: set[Name] = field(default_factory=set)
    problems: list[Problem] = field(default_factory=list)

    def value(self, key: Name) -> Any:
        """Return the value in force: as stated, else the default of the schema."""
        return self.values[key] if key in self.values else self.schema.keys[key].default

    def table(self, table: Name) -> dict[str, Any]:
        """Return the values in force of one table's own keys."""
        return {key[-1]: self.value(key) for key in self.schema.keys if key[:-1] == table}

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


def by_line(problem: Problem) -> int:
    """Order problems as the file reads; those without a line (missing tables) come first."""
    return problem.row or 0
