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
from optimizer.request.types import RANKINGS, Ambient, Divider, Light, Request, Space, Supply, Targets
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


def awkward(seed: int, by: str | None = None) -> tuple[Request, Catalogs]:
    """Five op-amps and four photodiodes, each with a few values spoilt or unknown, and a request for them.

    Small enough to evaluate everything; most checks are reached by some pair of some seed.
    """
    rng = np.random.default_rng(seed)

    def pick(*choices: Any) -> Any:
        return choices[int(rng.integers(len(choices)))]

    low = pick(0.0, 0.0, -5.0)
    amps = [opamp(part=f"YZA-{k}", **_spoilt(rng, OPAMP_VALUES)) for k in range(5)]
    sensors = [diode(part=f"YZD-{k}", **_spoilt(rng, DIODE_VALUES)) for k in range(4)]
    stated = {
        "bandwidth": pick(None, 5e3, 50e3, 200e3),
        "snr": pick(None, 25.0, 36.0, 41.0),
        "dynamic_range": pick(None, 80.0, 100.0),
        "phase_margin": pick(None, 45.0, 70.0),
        "peaking": pick(None, 0.5),
        "offset": pick(None, 2e-3, 20e-3),
        "supply_current": pick(None, 1.2e-3, 3e-3),
        "cost": pick(None, 4.0, 5.2, 6.0),
    }
    if stated["bandwidth"] is not None:
        stated["slew"] = pick(None, 2.0)
    asked = request(
        quantity=pick(1, 100),
        light={"background": pick(0.0, 20e-9), "strongest": pick(1e-6, 5e-6)},
        supply={"low": low, "guard": pick(0.0, 0.05), "tolerance": pick(0.0, 0.05), "load": pick(None, 1e3)},
        ambient=pick(Ambient(), Ambient(-20.0, 60.0, stated=True)),
        space={
            "references": pick(("ground",), ("divider",), ("ground", "divider")),
            "wirings": pick(SPACE.wirings, SPACE.wirings, SPACE.wirings[::2], SPACE.wirings[1::2]),
            "low_pass": pick((None,), (None, 30e3)),
            "dark_on_rail": pick(False, True),
            "no_capacitor": pick(False, True),
            "divider": Divider(series="E3", low=10e3, high=22e3),
        },
        targets=stated,
        ranking={"by": by or pick(*RANKINGS), "show": pick(1, 3, 20), "comfort": pick(0.1, 0.5, 1.0)},
    )
    families = [resistor(), resistor(family="YZR-0", parasitic_capacitance=pick(0.0, 0.3e-12))]
    return asked, catalogs(amps, sensors, families)


OPAMP_VALUES: Row = {
    "channels": (1.0, 2.0),
    "stock": (NAN, 150.0, 50.0),
    "price": ([(1.0, 0.8), (200.0, 0.3)], [(1.0, 2.0)], []),
    "quiescent_current": (0.4e-3, 1e-3, None),
    "gbw": (0.2e6, 3e6, 50e6),
    "open_loop_gain": (1e5, 1e3, 15.0, 1.5),
    "second_pole": (inf, 1e6, 20e3, 1e3),
    "min_gain": (1.0, 1.0, 4.0, 60.0),
    "voltage_noise": (3e-9, 30e-9),
    "bias_current": (2e-12, 30e-9, 3e-6),
    "offset_voltage": (0.0, 0.5e-3, 5e-3),
    "input_low": (0.0, -0.1, 1.9, 6.0),
    "output_low": (0.0, 0.02, 1.0, None),
    "output_high": (0.02, 2.3, 4.95),
    "output_current": (50e-3, 4e-3, None),
    "noise_corner": (0.0, 1e3, None),
    "status": ("active", "active", "obsolete"),
    "slew_rate": (5e6, 3e3, None),
}
DIODE_VALUES: Row = {
    "price": ([(1.0, 0.5)], [(1.0, 3.0), (100.0, 1.0)]),
    "capacitance": ([(0.0, 5e-12)], [(0.0, 400e-12), (10.0, 100e-12)]),
    "dark_current": (0.0, 50e-9, None),
    "shunt_resistance": (inf, 1e6, 5e3, None),
    "reverse_max": (30.0, 1.0, None),
    "rise_time": (0.0, 3e-6, None),
    "responsivity": ([(400e-9, 0.2), (900e-9, 0.6)], [(300e-9, 0.1), (700e-9, 0.3)]),
    "stock": (NAN, 80.0),
}


def _spoilt(rng: np.random.Generator, values: Row) -> Row:
    """A few of `values`, each with one of its choices."""
    names = rng.choice(list(values), size=int(rng.integers(1, 5)), replace=False)
    return {name: values[name][int(rng.integers(len(values[name])))] for name in names.tolist()}
