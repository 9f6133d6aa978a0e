"""From the values read to the frozen request."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

from optimizer.request.reading import Reading
from optimizer.request.schema import KEYS, Name
from optimizer.request.types import (
    ROLES,
    Ambient,
    Converter,
    Divider,
    Light,
    Ranking,
    Request,
    Resilience,
    Space,
    Supply,
    Targets,
    Tolerance,
)
from optimizer.request.values import Level, Money

_NO_LIGHT = Level(math.nan, "power")


def build(reading: Reading, path: Path) -> Request:
    """Return the request with every value in force.

    Where problems were kept it stands in for what could not be read, and serves only to find more
    of them: a required number is NaN, anything else its default.
    """
    top = reading.value
    return Request(
        name=top(("name",)) or path.stem or "request",
        light=_light(reading),
        supply=_supply(reading),
        catalogs={role: top(("catalogs", role)) for role in ROLES},
        path=path,
        quantity=top(("quantity",)),
        currency=top(("currency",)),
        ambient=_ambient(reading),
        targets=_targets(reading),
        space=_space(reading),
        converter=_converter(reading),
        ranking=Ranking(**_table(("ranking",), reading)),
        tolerance=_tolerance(reading),
        resilience=Resilience(**_table(("resilience",), reading)),
        assume=dict(reading.assume),
    )


def _table(table: Name, reading: Reading) -> dict[str, Any]:
    """Return the values in force of one table's own keys."""
    return {key[-1]: reading.value(key) for key in KEYS if key[:-1] == table}


def _light(reading: Reading) -> Light:
    levels = {
        name: reading.value(("light", name)) or _NO_LIGHT for name in ("weakest", "strongest", "background")
    }
    wavelength = reading.value(("light", "wavelength"))
    return Light(
        wavelength=math.nan if wavelength is None else wavelength,
        kind=levels["weakest"].kind,
        weakest=levels["weakest"].value,
        strongest=levels["strongest"].value,
        background=levels["background"].value,
        area_from=reading.value(("light", "active_area", "from")),
        area_to=reading.value(("light", "active_area", "to")),
    )


def _supply(reading: Reading) -> Supply:
    values = _table(("supply",), reading)
    return Supply(**values | {"high": math.nan if values["high"] is None else values["high"]})


def _ambient(reading: Reading) -> Ambient:
    stated = any(key[0] == "ambient" for key in reading.values)
    return Ambient(**_table(("ambient",), reading), stated=stated)


def _tolerance(reading: Reading) -> Tolerance:
    """Return the spreads; a table that is stated counts even where it is empty."""
    values = _table(("tolerance",), reading)
    goal = values.pop("yield")
    return Tolerance(**values, yield_=goal, stated=("tolerance",) in reading.tables)


def _targets(reading: Reading) -> Targets:
    values = _table(("targets",), reading)
    cost = values["cost"]
    return Targets(**values | {"cost": cost.amount if isinstance(cost, Money) else None})


def _space(reading: Reading) -> Space:
    divider = _table(("space", "divider"), reading)
    resistance = _table(("space", "resistance"), reading)
    capacitance = _table(("space", "capacitance"), reading)
    return Space(
        **_table(("space",), reading),
        divider=Divider(divider["series"], divider["from"], divider["to"], divider["bypass"]),
        resistance=(resistance["from"], resistance["to"]),
        capacitance=(capacitance["from"], capacitance["to"]),
        no_capacitor=capacitance["none"],
    )


def _converter(reading: Reading) -> Converter | None:
    """Return the converter where its table is stated, be it empty."""
    if ("converter",) not in reading.tables:
        return None
    values = _table(("converter",), reading)
    follows = values["high"] == "supply"
    high = reading.value(("supply", "high")) if follows else values["high"]
    return Converter(values["bits"], values["low"], math.nan if high is None else high, follows)
