"""What one catalog file holds and what looks wrong in it, without refusing what may be true."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType

import numpy as np

from optimizer.catalog.duplicates import groups, sort_out
from optimizer.catalog.files import cut, read_catalog_file
from optimizer.catalog.headers import split_unit
from optimizer.catalog.ledger import settle
from optimizer.catalog.parts import LeftOut
from optimizer.catalog.reader import FileResult, ReadOptions, Run
from optimizer.catalog.rows import Rows
from optimizer.catalog.source_toml import read_source_map
from optimizer.errors import InputError, Problem
from optimizer.quantities import show
from optimizer.vocabulary import COLUMNS, NAMES, ROLES, Column
from optimizer.vocabulary.allowed import single_kind, value_kind

# What every request needs to know of a part, and what some requests do (contract: "Unknown is unknown").
_ALWAYS: Mapping[str, tuple[str, ...]] = MappingProxyType(
    {
        "opamps": (
            "price",
            "supply_min",
            "supply_max",
            "gbw",
            "voltage_noise",
            "noise_corner",
            "bias_current",
            "offset_voltage",
            "input_low",
            "input_high",
            "output_low",
            "output_high",
            "input_capacitance_common",
            "input_capacitance_differential",
        ),
        "photodiodes": ("price", "responsivity", "capacitance"),
        "resistors": ("price",),
        "capacitors": ("price",),
    }
)
_SOMETIMES = frozenset(
    {
        "quiescent_current",
        "bias_doubling",
        "offset_drift",
        "temp_min",
        "temp_max",
        "slew_rate",
        "output_current",
        "shunt_resistance",
        "dark_current",
        "reverse_max",
        "rise_time",
        "active_area",
    }
)


@dataclass(frozen=True, slots=True)
class ColumnCount:
    """How many parts have a known value in one column.

    `default` is what a blank counts as ('' where it stays unknown). `admits`: parts that an [assume]
    line for this column alone would admit, because nothing else that every request needs is unknown;
    None where no request needs the column, or no single value can fill it.
    """

    column: str
    known: int
    unknown: int
    default: str
    admits: int | None


@dataclass(frozen=True, slots=True)
class Suspicion:
    """One value that may be true and looks wrong: its line, column, value as read, and why."""

    row: int
    column: str
    value: str
    reason: str


@dataclass(frozen=True, slots=True)
class Duplicate:
    """One part of one maker that stands on several lines."""

    name: str
    maker: str
    rows: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Inspection:
    """What `luxsift inspect` says about one file.

    `rows` counts the rows of data in the file, `parts` those that a shortlist would see. `problems` is
    what a shortlist would refuse the file for; where there are any, the file is unusable as it is.
    """

    file: str
    role: str
    rows: int
    parts: int
    currency: str | None
    columns: tuple[ColumnCount, ...]
    suspicions: tuple[Suspicion, ...]
    duplicates: tuple[Duplicate, ...]
    left_out: tuple[LeftOut, ...]
    unused: tuple[str, ...]
    problems: tuple[Problem, ...]


def inspect_file(path: str | Path) -> Inspection:
    """Read one catalog file, with the source.toml beside it, and report on it.

    Raises InputError where the file cannot be cut into rows or is no known catalog, MissingExtraError
    for an .xlsx file without its reader.
    """
    file = str(path)
    readings = [_read(file, role) for role in _likely_roles(file)]
    role, run, result = min(readings, key=lambda reading: len(reading[1].problems))
    if result is None:
        raise InputError(dict.fromkeys(run.problems))
    sorted_out = sort_out(result.rows, [result.file_map.cheapest] * len(result.rows.origin), 1)
    parts = result.rows.keep(sorted_out.wanted)
    currency, clashes = settle(run.stated, None)
    return Inspection(
        file=file,
        role=role,
        rows=result.source.rows,
        parts=len(parts.origin),
        currency=currency,
        columns=tuple(_counts(parts)),
        suspicions=tuple(_suspicions(result.rows)),
        duplicates=tuple(_duplicates(result.rows)),
        left_out=(*result.left_out, *sorted_out.left_out),
        unused=result.unused,
        problems=tuple(dict.fromkeys([*run.problems, *sorted_out.problems, *clashes])),
    )


def _read(file: str, role: str) -> tuple[str, Run, FileResult | None]:
    run = Run(ReadOptions())
    return role, run, run.file(role, file)


def _likely_roles(file: str) -> list[str]:
    """Return the role that the file's name and its headers speak for; several where they tie."""
    path = Path(file)
    source = read_catalog_file(path, file)
    source_map = read_source_map(path, file)
    table = cut(source, ROLES, source_map)
    mapped = source_map.of(path.name).columns
    found = {split_unit(header)[0] for header in table.header} | set(mapped)
    scores = {role: _score(role, found, path) for role in ROLES}
    best = max(scores.values())
    if not any(best):
        rule = "no header is a column of a catalog of op-amps, photodiodes, resistors or capacitors"
        remedy = "name the columns as the README does, or map them in source.toml"
        raise InputError([Problem(file, table.header_line, None, None, rule, remedy)])
    return [role for role, score in scores.items() if score == best]


def _score(role: str, found: set[str], path: Path) -> tuple[bool, int, int]:
    """Tell how much speaks for a role: the file's name, then the required columns, then all columns."""
    required = {name for name, column in COLUMNS[role].items() if column.required}
    share = round(100 * len(required & found) / len(required))
    called = share > 0 and role.removesuffix("s") in path.stem.lower().replace("-", "")
    return called, share, len(COLUMNS[role].keys() & found)


def _counts(rows: Rows) -> Iterator[ColumnCount]:
    known = {name: rows.known(name) for name in COLUMNS[rows.role]}
    for name, column in COLUMNS[rows.role].items():
        count = int(np.count_nonzero(known[name]))
        admits = _admits(rows.role, column, known)
        yield ColumnCount(name, count, len(rows.origin) - count, column.default_text, admits)


def _admits(
    role: str, column: Column, known: Mapping[str, np.ndarray[tuple[int], np.dtype[np.bool_]]]
) -> int | None:
    needed = _ALWAYS[role]
    if (
        column.default_text
        or single_kind(column) is None
        or (column.name not in needed and column.name not in _SOMETIMES)
    ):
        return None
    others = [known[name] for name in needed if name != column.name]
    return int(np.count_nonzero(np.logical_and.reduce([~known[column.name], *others])))


def _suspicions(rows: Rows) -> list[Suspicion]:
    found: list[Suspicion] = []
    for name, column in COLUMNS[rows.role].items():
        if column.usual is None:
            continue
        if name in rows.number:
            found += _unusual(rows, column, enumerate(rows.number[name].tolist()))
        else:
            pairs = (
                (row, y) for row, points in enumerate(rows.points[name]) for y in _values(column, points)
            )
            found += _unusual(rows, column, pairs)
    found += _rising_prices(rows)
    return sorted(found, key=lambda suspicion: suspicion.row)


def _values(column: Column, points: tuple[tuple[float, float], ...]) -> Iterable[float]:
    """Return the quantities of a cell: of a list the values, of pairs the second ones."""
    return [x for x, _ in points] if column.kind.startswith("list:") else [y for _, y in points]


def _unusual(rows: Rows, column: Column, values: Iterable[tuple[int, float]]) -> Iterator[Suspicion]:
    low, high = column.usual or (-math.inf, math.inf)
    kind = value_kind(column) or "price"
    seen = -1
    for row, value in values:
        stated_none = column.none_allowed and (math.isinf(value) or value == 0)
        if math.isnan(value) or low <= value <= high or stated_none or row == seen:
            continue
        seen = row
        side = "below" if value < low else "above"
        reason = f"{side} the usual {show(low, kind)} to {show(high, kind)}{_slip(value, low, high)}"
        yield Suspicion(rows.origin[row].line, column.name, show(value, kind), reason)


def _slip(value: float, low: float, high: float) -> str:
    """Say so where a prefix too many or too few explains the value."""
    slips = (1e3, 1e-3, 1e6, 1e-6, 1e9, 1e-9, 1e12, 1e-12)
    return "; a unit slip?" if any(low <= value * factor <= high for factor in slips) else ""


def _rising_prices(rows: Rows) -> Iterator[Suspicion]:
    for row, breaks in enumerate(rows.points["price"]):
        prices = [price for _, price in breaks]
        if prices != sorted(prices, reverse=True):
            text = "; ".join(f"{quantity:g}:{price:g}" for quantity, price in breaks)
            yield Suspicion(rows.origin[row].line, "price", text, "the unit price rises with the quantity")


def _duplicates(rows: Rows) -> Iterator[Duplicate]:
    for same in groups(rows):
        name, maker = rows.text[NAMES[rows.role]][same[0]], rows.text["maker"][same[0]]
        yield Duplicate(name, maker, tuple(rows.origin[row].line for row in same))
