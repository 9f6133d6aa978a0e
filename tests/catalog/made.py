"""A folder of four small invented catalogs, to be spoilt by the tests."""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from optimizer.catalog import Catalogs, ReadOptions, read_catalogs
from optimizer.errors import InputError, Problem

GOOD: Mapping[str, Mapping[str, str]] = {
    "opamps": {
        "part": "ZQ100",
        "maker": "Maker A",
        "price": "1.85",
        "supply_min": "2.7 V",
        "supply_max": "5.5 V",
        "quiescent_current": "1 mA",
        "gbw": "10 MHz",
        "voltage_noise": "8 nV/rtHz",
        "bias_current": "2 pA",
        "offset_voltage": "500 uV",
    },
    "photodiodes": {
        "part": "PD100",
        "maker": "Maker B",
        "price": "3.20",
        "responsivity": "500 nm:0.3 A/W; 900 nm:0.6 A/W",
        "capacitance": "40 pF",
    },
    "resistors": {"family": "RX", "series": "E24", "from": "10 ohm", "to": "10 Mohm", "price": "0.02"},
    "capacitors": {"family": "CX", "series": "E12", "from": "1 pF", "to": "1 nF", "price": "0.03"},
}
ROLES = tuple(GOOD)


def table(rows: Sequence[Mapping[str, str]], delimiter: str = ",") -> str:
    """CSV text of the rows; the header is every key met."""
    header = list(dict.fromkeys(key for row in rows for key in row))
    stream = io.StringIO()
    writer = csv.DictWriter(stream, header, restval="", delimiter=delimiter, lineterminator="\n")
    writer.writeheader()
    writer.writerows(rows)
    return stream.getvalue()


def named(role: str, number: int) -> dict[str, str]:
    """A good row of the role under a name of its own."""
    row = dict(GOOD[role])
    first = next(iter(row))
    return row | {first: f"{row[first]}{number}"}


@dataclass(frozen=True)
class Folder:
    """Four catalogs in a folder, one good row each until they are overwritten."""

    path: Path

    def write(self, name: str, content: str | bytes) -> None:
        data = content.encode() if isinstance(content, str) else content
        (self.path / name).write_bytes(data)

    def rows(self, role: str, *rows: Mapping[str, str], delimiter: str = ",") -> None:
        self.write(f"{role}.csv", table(rows, delimiter))

    def read(self, **options: Any) -> Catalogs:
        files: dict[str, Sequence[str]] = {role: [f"{role}.csv"] for role in ROLES} | options.pop("files", {})
        return read_catalogs(files, ReadOptions(folder=self.path, **options))

    def problems(self, **options: Any) -> tuple[Problem, ...]:
        with pytest.raises(InputError) as caught:
            self.read(**options)
        return caught.value.problems

    def problem(self, **options: Any) -> Problem:
        """The one problem there must be."""
        found = self.problems(**options)
        assert len(found) == 1, [str(problem) for problem in found]
        return found[0]


def says(problem: Problem, *words: str) -> None:
    """Rule and remedy together must hold all these words."""
    text = f"{problem.rule} {problem.remedy}"
    missing = [word for word in words if word not in text]
    assert not missing, f"{missing} not in {text!r}"
