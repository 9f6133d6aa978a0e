"""Invented parts that pass every check, to be spoilt one value at a time, and requests for them."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import replace
from math import inf
from pathlib import Path
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.figures import CHECKS
from optimizer.request_types import Divider, Light, Request, Space, Supply, Targets
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.roles import PASSES
from tests.independent.adapter import parts

Row = dict[str, Any]
NAN = float("nan")

OPAMP: Row = {
    "part": "YZA-1",
    "maker": "Maker A",
    "package": "SOIC-8",
    "status": "active",
    "channels": 1.0,
    "stock": NAN,
    "price": [(1.0, 2.0)],
    "supply_min": 2.7,
    "supply_max": 12.0,
    "quiescent_current": 1e-3,
    "gbw": 10e6,
    "open_loop_gain": 1e5,
    "second_pole": inf,
    "min_gain": 1.0,
    "slew_rate": 5e6,
    "voltage_noise": 8e-9,
    "noise_corner": 100.0,
    "current_noise": 1e-15,
    "bias_current": 2e-12,
    "bias_doubling": 10.0,
    "offset_voltage": 0.5e-3,
    "offset_drift": 2e-6,
    "input_low": 0.0,
    "input_high": 1.0,
    "output_low": 0.02,
    "output_high": 0.02,
    "input_capacitance_common": 3e-12,
    "input_capacitance_differential": 2e-12,
    "output_current": 10e-3,
    "temp_min": -40.0,
    "temp_max": 125.0,
}
DIODE: Row = {
    "part": "YZD-1",
    "maker": "Maker B",
    "package": "TO-5",
    "status": "active",
    "stock": NAN,
    "price": [(1.0, 3.0)],
    "responsivity": [(400e-9, 0.2), (900e-9, 0.6), (1100e-9, 0.1)],
    "capacitance": [(0.0, 40e-12)],
    "dark_current": 1e-9,
    "dark_doubling": 10.0,
    "shunt_resistance": 1e9,
    "reverse_max": 30.0,
    "rise_time": 20e-9,
    "active_area": 4e-6,
    "temp_min": -40.0,
    "temp_max": 100.0,
}
RESISTOR: Row = {
    "family": "YZR-1",
    "maker": "Maker C",
    "series": "E3",
    "from": 10.0,
    "to": 10e6,
    "parasitic_capacitance": 0.05e-12,
    "price": [(1.0, 0.02)],
}
CAPACITOR: Row = {
    "family": "YZC-1",
    "maker": "Maker C",
    "series": "E3",
    "from": 1e-12,
    "to": 1e-6,
    "price": [(1.0, 0.03)],
}

SPACE = Space(
    divider=Divider(series="E3", low=10e3, high=47e3, bypass=100e-9),
    resistance=(100e3, 1e6),
    capacitance=(1e-12, 10e-12),
)
REQUEST = Request(
    name="made",
    light=Light(850e-9, "power", 30e-9, 1e-6),
    supply=Supply(5.0),
    catalogs={},
    path=Path("request.toml"),
    space=SPACE,
)


def opamp(**changes: Any) -> Row:
    """A good op-amp with `changes`; None makes a value unknown."""
    return OPAMP | changes


def diode(**changes: Any) -> Row:
    """A good photodiode with `changes`."""
    return DIODE | changes


def resistor(**changes: Any) -> Row:
    """A family of resistors."""
    return RESISTOR | changes


def capacitor(**changes: Any) -> Row:
    """A family of capacitors."""
    return CAPACITOR | changes


def listed(*values: float) -> Row:
    """The changes that make a family offer just `values`."""
    return {"series": "list", "from": None, "to": None, "values": [(value, 0.0) for value in values]}


def catalogs(
    opamps: Sequence[Row] = (OPAMP,),
    photodiodes: Sequence[Row] = (DIODE,),
    resistors: Sequence[Row] = (RESISTOR,),
    capacitors: Sequence[Row] = (CAPACITOR,),
) -> Catalogs:
    """Catalogs of these rows."""
    tables = {"opamps": opamps, "photodiodes": photodiodes, "resistors": resistors, "capacitors": capacitors}
    return Catalogs(
        **{role: parts(role, rows) for role, rows in tables.items()},
        sources=(),
        left_out=(),
        currency=None,
    )


def assumed(table: Parts, column: str, *rows: int) -> Parts:
    """`table` with `column` marked as filled in at `rows`."""
    mask = np.isin(np.arange(table.size), rows)
    return replace(table, assumed={**table.assumed, column: mask})


def request(
    *,
    light: Any = None,
    supply: Any = None,
    space: Any = None,
    targets: Any = None,
    ranking: Any = None,
    **changes: Any,
) -> Request:
    """The request of this module with `changes`, those of a table as a dict."""
    changes |= {
        "light": replace(REQUEST.light, **(light or {})),
        "supply": replace(REQUEST.supply, **(supply or {})),
        "space": replace(REQUEST.space, **(space or {})),
        "targets": Targets(**(targets or {})),
        "ranking": replace(REQUEST.ranking, **(ranking or {})),
    }
    return replace(REQUEST, **changes)


def reached(request: Request, catalogs: Catalogs) -> Counter[str]:
    """By evaluating every setting of every pair: the check that it reaches, or how it ends.

    Parts that fail alone are not told from others here, for that is what the search must get right:
    a pair counts under the check that its setting that gets furthest fails.
    """
    space = spaces.build(request, catalogs)
    counts = Counter[str]()
    for o in range(catalogs.opamps.size):
        for d in range(catalogs.photodiodes.size):
            result = plain.pair(space, o, d)
            if result.reach < PASSES:
                counts[CHECKS[result.reach]] += 1
            else:
                counts["meets" if result.best is not None else "misses"] += 1
    return counts
