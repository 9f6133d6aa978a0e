"""Fills blanks: first by the request's [assume], then by the contract's defaults; then freezes."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Floats, Parts, Points
from optimizer.catalog.rows import Rows
from optimizer.errors import Problem
from optimizer.quantities import read_quantity
from optimizer.vocabulary import COLUMNS, NAMES, Column
from optimizer.vocabulary.allowed import NO_EFFECT, SINGLE_VALUE, single_kind

# Source: the SI Brochure, 9th edition (2019), exact value of the elementary charge [C]
_ELEMENTARY_CHARGE = 1.602176634e-19
_LISTED_AS_ASSUMED = frozenset({"open_loop_gain", "second_pole", "current_noise"})


def finish(rows: Rows, assume: Mapping[tuple[str, str], float]) -> tuple[Parts, list[Problem]]:
    """Return the parts with blanks filled, and what is wrong with the assumptions of this role.

    `assume` maps (role, column) to the SI value for blanks of that column.
    """
    number = {name: values.copy() for name, values in rows.number.items()}
    points = {name: tuple(cells) for name, cells in rows.points.items()}
    size = len(rows.origin)
    assumed = {name: np.zeros(size, dtype=np.bool_) for name in (*number, *points)}
    problems = []
    for (role, name), value in assume.items():
        if role != rows.role:
            continue
        problem = _refusal(role, name)
        if problem:
            problems.append(problem)
        elif name in number:
            _fill(name, np.full(size, value), number, assumed)
        else:
            points[name], assumed[name] = _filled_points(points[name], ((SINGLE_VALUE[name], value),))
    for column in COLUMNS[rows.role].values():
        _default(column, number, assumed)
    text = {name: np.array(cells, dtype=np.str_) for name, cells in _texts(rows).items()}
    return Parts(rows.role, text, number, points, assumed), problems


def _refusal(role: str, name: str) -> Problem | None:
    """Say which assumptions have no column to fill; their values were checked where they were read."""
    column = COLUMNS[role].get(name)
    if column is not None and single_kind(column) is not None:
        return None
    rule = f"{role} have no such column" if column is None else "a single value cannot fill this column"
    return Problem("the request", None, f"assume.{role}.{name}", None, rule)


def _fill(
    name: str, values: Floats, number: dict[str, Floats], assumed: dict[str, NDArray[np.bool_]]
) -> None:
    """Fill the blanks of a column, and mark those that got a value."""
    blank = np.isnan(number[name])
    number[name] = np.where(blank, values, number[name])
    assumed[name] |= blank & ~np.isnan(values)


def _filled_points(cells: tuple[Points, ...], value: Points) -> tuple[tuple[Points, ...], NDArray[np.bool_]]:
    blank = np.array([not points for points in cells], dtype=np.bool_)
    return tuple(points or value for points in cells), blank


def _default(column: Column, number: dict[str, Floats], assumed: dict[str, NDArray[np.bool_]]) -> None:
    if not column.default_text or column.name not in number:
        return
    if column.name == "current_noise":
        values = np.sqrt(2 * _ELEMENTARY_CHARGE * number["bias_current"])
    else:
        values = np.full_like(number[column.name], default_value(column))
    marks = assumed if column.name in _LISTED_AS_ASSUMED else {column.name: assumed[column.name].copy()}
    _fill(column.name, values, number, marks)


def default_value(column: Column) -> float:
    """Return what a blank of this column counts as [SI]; NaN where it stays unknown."""
    if column.default_text == "none":
        return NO_EFFECT[column.name]
    return read_quantity(column.default_text, column.kind) if column.default_text else math.nan


def _texts(rows: Rows) -> dict[str, list[str]]:
    """Return the texts with status and family filled in."""
    texts = dict(rows.text)
    if "status" in texts:
        texts["status"] = [status or "active" for status in texts["status"]]
    if NAMES[rows.role] == "part" and "family" in texts:
        texts["family"] = [
            family or part for family, part in zip(texts["family"], texts["part"], strict=True)
        ]
    return texts
