"""Every key of a request, as a table: how its value is read, what it may be, what stands when left out."""

from __future__ import annotations

from collections.abc import Mapping

from optimizer.request.assume import read_assume
from optimizer.request.types import (
    DISTRIBUTIONS,
    METHODS,
    RANKINGS,
    REFERENCES,
    ROLES,
    WIRINGS,
    Ranking,
    Resilience,
    Space,
    Supply,
    Tolerance,
)
from optimizer.request.values import (
    CATALOG_CURRENCY,
    currency,
    distinct,
    either,
    flag,
    light,
    many,
    price,
    quantity,
    share,
    text,
    whole,
    word,
)
from optimizer.series import SERIES
from optimizer.toml.schema import Key, Name, Schema
from optimizer.vocabulary.allowed import ABSOLUTE_ZERO, STATUSES

LONGEST_WAVE = 1e-3
MOST_BITS = 64
MOST_DRAWS = 1_000_000
CONVERTER_BITS, CONVERTER_LOW, CONVERTER_HIGH = 16, 0.0, 4.096

_SUPPLY = Supply(high=0.0)
_SPACE = Space()
_RANKING = Ranking()
_TOLERANCE = Tolerance()
_VOLTAGE = quantity("voltage")
_TEMPERATURE = quantity("temperature", least=ABSOLUTE_ZERO)
_RESISTANCE = quantity("resistance", above=0.0)
_CAPACITANCE = quantity("capacitance", above=0.0)
_FREQUENCY = quantity("frequency", above=0.0)
_NAMES = many(text)

_TABLES: dict[str, dict[str, Key]] = {
    "": {
        "name": Key(text),
        "quantity": Key(whole(1), 1),
        "currency": Key(currency, CATALOG_CURRENCY),
    },
    "light": {
        "wavelength": Key(quantity("length", above=0.0, most=LONGEST_WAVE), example='"850 nm"'),
        "weakest": Key(light(above_zero=True), example='"30 nW"'),
        "strongest": Key(light(above_zero=True), example='"3 uW"'),
        "background": Key(light(above_zero=False), light(above_zero=False)(0)),
    },
    "light.active_area": {
        "from": Key(quantity("area", least=0.0)),
        "to": Key(quantity("area", above=0.0)),
    },
    "supply": {
        "high": Key(_VOLTAGE, example='"5 V"'),
        "low": Key(_VOLTAGE, _SUPPLY.low),
        "tolerance": Key(quantity("fraction", least=0.0, below=1.0), _SUPPLY.tolerance),
        "guard": Key(quantity("voltage", least=0.0), _SUPPLY.guard),
        "load": Key(_RESISTANCE),
        "load_to": Key(either("reference", None, _VOLTAGE), _SUPPLY.load_to),
    },
    "ambient": {
        "coldest": Key(_TEMPERATURE, 25.0),
        "hottest": Key(_TEMPERATURE, 25.0),
    },
    "targets": {
        "bandwidth": Key(_FREQUENCY),
        "snr": Key(quantity("level")),
        "dynamic_range": Key(quantity("level")),
        "phase_margin": Key(quantity("angle", least=0.0, below=180.0)),
        "peaking": Key(quantity("level", above=0.0)),
        "offset": Key(quantity("voltage", above=0.0)),
        "slew": Key(quantity("ratio", above=0.0)),
        "supply_current": Key(quantity("current", above=0.0)),
        "cost": Key(price),
    },
    "space": {
        "wirings": Key(distinct(many(word(WIRINGS), least=1)), _SPACE.wirings),
        "references": Key(distinct(many(word(REFERENCES), least=1)), _SPACE.references),
        "low_pass": Key(distinct(many(either("none", None, _FREQUENCY), least=1)), _SPACE.low_pass),
        "stray": Key(quantity("capacitance", least=0.0), _SPACE.stray),
        "dark_on_rail": Key(flag, _SPACE.dark_on_rail),
        "noise_from": Key(_FREQUENCY, _SPACE.noise_from),
        "status": Key(distinct(many(word(STATUSES), least=1)), _SPACE.status),
        "require": Key(_NAMES, _SPACE.require),
        "exclude": Key(_NAMES, _SPACE.exclude),
        "makers": Key(_NAMES, _SPACE.makers),
        "packages": Key(_NAMES, _SPACE.packages),
    },
    "space.divider": {
        "series": Key(word(tuple(SERIES)), _SPACE.divider.series),
        "from": Key(_RESISTANCE, _SPACE.divider.low),
        "to": Key(_RESISTANCE, _SPACE.divider.high),
        "bypass": Key(_CAPACITANCE, _SPACE.divider.bypass),
    },
    "space.resistance": {
        "from": Key(_RESISTANCE, _SPACE.resistance[0]),
        "to": Key(_RESISTANCE, _SPACE.resistance[1]),
    },
    "space.capacitance": {
        "from": Key(_CAPACITANCE, _SPACE.capacitance[0]),
        "to": Key(_CAPACITANCE, _SPACE.capacitance[1]),
        "none": Key(flag, _SPACE.no_capacitor),
    },
    "converter": {
        "bits": Key(whole(1, MOST_BITS), CONVERTER_BITS),
        "low": Key(_VOLTAGE, CONVERTER_LOW),
        "high": Key(either("supply", "supply", _VOLTAGE), CONVERTER_HIGH),
    },
    "catalogs": {role: Key(distinct(many(text, least=1)), (f"../catalogs/{role}.csv",)) for role in ROLES},
    "ranking": {
        "by": Key(word(RANKINGS), _RANKING.by),
        "show": Key(whole(1), _RANKING.show),
        "comfort": Key(share, _RANKING.comfort),
    },
    "tolerance": {
        "method": Key(word(METHODS), _TOLERANCE.method),
        "yield": Key(quantity("fraction", above=0.0, below=1.0)),
        "distribution": Key(word(DISTRIBUTIONS), _TOLERANCE.distribution),
        "draws": Key(whole(1, MOST_DRAWS), _TOLERANCE.draws),
        "seed": Key(whole(0), _TOLERANCE.seed),
        **{
            name: Key(quantity("fraction", least=0.0, below=1.0), spread)
            for name, spread in _TOLERANCE.spreads.items()
        },
    },
    "resilience": {
        "opamp_sources": Key(whole(1), Resilience().opamp_sources),
    },
}


def _split(table: str) -> Name:
    return tuple(table.split(".")) if table else ()


KEYS: Mapping[Name, Key] = {
    (*_split(table), name): key for table, keys in _TABLES.items() for name, key in keys.items()
}
SCHEMA = Schema(
    keys=KEYS,
    free={("assume",): read_assume},
    hints={
        ("targets", "full_scale"): "full_scale is always graded, its limit is light.strongest",
        ("channels",): "a file with channels is a board file: `luxsift board` plans it",
    },
)
