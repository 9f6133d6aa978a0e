"""From the values read to the frozen request."""

from __future__ import annotations

import math
from pathlib import Path

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
from optimizer.toml.reading import Reading

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
        ranking=Ranking(**reading.table(("ranking",))),
        tolerance=_tolerance(reading),
        resilience=Resilience(**reading.table(("resilience",))),
        assume={(key[1], key[2]): value for key, value in reading.values.items() if key[0] == "assume"},
    )


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
    values = reading.table(("supply",))
    return Supply(**values | {"high": math.nan if values["high"] is None else values["high"]})


def _ambient(reading: Reading) -> Ambient:
    stated = any(key[0] == "ambient" for key in reading.values)
    return Ambient(**reading.table(("ambient",)), stated=stated)


def _tolerance(reading: Reading) -> Tolerance:
    """Return the spreads; a table that is stated counts even where it is empty."""
    values = reading.table(("tolerance",))
    goal = values.pop("yield")
    return Tolerance(**values, yield_=goal, stated=("tolerance",) in reading.tables)


def _targets(reading: Reading) -> Targets:
    values = reading.table(("targets",))
    cost = values["cost"]
    return Targets(**values | {"cost": cost.amount if isinstance(cost, Money) else None})


def _space(reading: Reading) -> Space:
    divider = reading.table(("space", "divider"))
    resistance = reading.table(("space", "resistance"))
    capacitance = reading.table(("space", "capacitance"))
    return Space(
        **reading.table(("space",)),
        divider=Divider(divider["series"], divider["from"], divider["to"], divider["bypass"]),
        resistance=(resistance["from"], resistance["to"]),
        capacitance=(capacitance["from"], capacitance["to"]),
        no_capacitor=capacitance["none"],
    )


def _converter(reading: Reading) -> Converter | None:
    """Return the converter where its table is stated, be it empty."""
    if ("converter",) not in reading.tables:
        return None
    values = reading.table(("converter",))
    follows = values["high"] == "supply"
    high = reading.value(("supply", "high")) if follows else values["high"]
    return Converter(values["bits"], values["low"], math.nan if high is None else high, follows)
