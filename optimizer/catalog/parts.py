"""Catalog contents as checked columns in SI."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Points = tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True)
class Source:
    """One input file: its name as the request writes it, SHA-256 and data rows as read."""

    file: str
    sha256: str
    rows: int


@dataclass(frozen=True, slots=True)
class Parts:
    """One role's parts, one row each, all files merged, in the order read.

    `text`: column -> array of str ('' where blank). `number`: column -> array of float in SI,
    NaN = unknown. A stated `none` is the value that has no effect: second_pole, bias_doubling,
    shunt_resistance = inf; noise_corner, rise_time, offset_drift, dark_current = 0.
    `points`: column -> one tuple of (x, y) a row, () = unknown; a single capacitance is ((0, C),);
    a single price is ((1, price),). `assumed`: column -> bool array, True where a blank was filled
    by [assume] or by the defaults of open_loop_gain, second_pole, current_noise.
    """

    role: str
    text: Mapping[str, NDArray[np.str_]]
    number: Mapping[str, Floats]
    points: Mapping[str, tuple[Points, ...]]
    assumed: Mapping[str, NDArray[np.bool_]]

    @property
    def size(self) -> int:
        """How many parts there are."""
        return len(next(iter(self.text.values())))


@dataclass(frozen=True, slots=True)
class LeftOut:
    """Rows that were left out on the user's word (`bad_rows`, `duplicates`), each with why."""

    file: str
    row: int
    reason: str


@dataclass(frozen=True, slots=True)
class Catalogs:
    """The four roles, where they came from, and what was left out of them."""

    opamps: Parts
    photodiodes: Parts
    resistors: Parts
    capacitors: Parts
    sources: tuple[Source, ...]
    left_out: tuple[LeftOut, ...]
    currency: str | None
