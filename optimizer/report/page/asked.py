"""What was asked: the request's tables with the values in force, each in its unit."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import KINDS, QuantityError, read_quantity, show
from optimizer.report.page.blocks import Block, Facts, Part, Section, Words
from optimizer.report.page.terms import term
from optimizer.report.words import light_kind
from optimizer.vocabulary import COLUMNS, VOCABULARY, figure_kind

TABLES: Mapping[str, str] = {
    "": "Build",
    "light": "Light",
    "supply": "Supply",
    "ambient": "Ambient",
    "targets": "Targets",
    "space": "What may be chosen",
    "converter": "Converter",
    "assume": "Assumed where catalogs leave blanks",
    "tolerance": "Tolerances",
    "resilience": "Sources of supply",
    "catalogs": "Catalogs",
    "ranking": "Ranking",
}
KEYS: Mapping[str, str] = {
    "light.wavelength": "length",
    "light.weakest": "light",
    "light.strongest": "light",
    "light.background": "light",
    "light.active_area.from": "area",
    "light.active_area.to": "area",
    "supply.high": "voltage",
    "supply.low": "voltage",
    "supply.tolerance": "fraction",
    "supply.guard": "voltage",
    "supply.load": "resistance",
    "supply.load_to": "voltage",
    "ambient.coldest": "temperature",
    "ambient.hottest": "temperature",
    "space.divider.from": "resistance",
    "space.divider.to": "resistance",
    "space.divider.bypass": "capacitance",
    "space.resistance.from": "resistance",
    "space.resistance.to": "resistance",
    "space.capacitance.from": "capacitance",
    "space.capacitance.to": "capacitance",
    "space.low_pass": "frequency",
    "space.stray": "capacitance",
    "space.noise_from": "frequency",
    "converter.low": "voltage",
    "converter.high": "voltage",
    "ranking.comfort": "fraction",
    "tolerance.yield": "fraction",
}
WHOLE = {"quantity", "draws", "seed", "bits", "show", "opamp_sources"}
EMPTY = {"require": "no part in particular", "exclude": "none", "makers": "any", "packages": "any"}


def asked(request: Mapping[str, Any]) -> Section:
    """The section on the request."""
    tables: dict[str, dict[str, Any]] = {"": {}}
    for name, value in request.items():
        if isinstance(value, Mapping):
            tables[name] = dict(value)
        elif name != "name":
            tables[""][name] = value
    ordered = [name for name in TABLES if name in tables] + [name for name in tables if name not in TABLES]
    parts = tuple(_part(name, tables[name], request) for name in ordered)
    text = "The request as it was in force, defaults and options filled in."
    blocks: tuple[Block, ...] = (Words(text),)
    return Section("request", "What was asked", blocks, parts)


def _part(name: str, table: Mapping[str, Any], request: Mapping[str, Any]) -> Part:
    pairs = tuple((_label(name, key), _value(f"{name}.{key}", value, request)) for key, value in _flat(table))
    heading = TABLES.get(name, clean(name))
    return Part(heading, (Facts(pairs, label=heading),))


def _label(table: str, key: str) -> str:
    """'active area, from' for the key active_area.from; targets are called what they are elsewhere."""
    return term(key) if table == "targets" else clean(key).replace(".", ", ").replace("_", " ")


def _flat(table: Mapping[str, Any], above: str = "") -> Iterator[tuple[str, Any]]:
    for key, value in table.items():
        if isinstance(value, Mapping):
            yield from _flat(value, f"{above}{key}.")
        else:
            yield f"{above}{key}", value


def _value(path: str, value: Any, request: Mapping[str, Any]) -> str:
    key = path.rpartition(".")[2]
    if isinstance(value, list | tuple):
        return ", ".join(_value(path, item, request) for item in value) or EMPTY.get(key, "none")
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int | float):
        kind = _kind(path, request)
        digits = 3 if kind == "price" else 6
        return show(float(value), kind, digits) if kind else f"{value:,}" if key in WHOLE else f"{value:.6g}"
    return _text(path, str(value), request)


def _text(path: str, value: str, request: Mapping[str, Any]) -> str:
    """Text as it stands, but for the irradiance that a record writes as text."""
    if _kind(path, request) == "irradiance":
        try:
            return show(read_quantity(value, "irradiance"), "irradiance", 6)
        except QuantityError:
            return clean(value)
    return clean(value)


def _kind(path: str, request: Mapping[str, Any]) -> str | None:
    """The kind of quantity that stands at `path`; None where it is none, or not known."""
    table, _, key = path.partition(".")
    if table == "targets" and key in VOCABULARY:
        return figure_kind(key, light_kind(request))
    if table == "tolerance" and key not in WHOLE:
        return "fraction"
    if table == "assume":
        return _column_kind(key.split("."))
    kind = KEYS.get(path)
    return light_kind(request) if kind == "light" else kind


def _column_kind(names: Sequence[str]) -> str | None:
    column = COLUMNS.get(names[0], {}).get(names[-1])
    if column is None:
        return None
    kind = "level" if column.kind == "gain" else column.kind
    return kind if kind in KINDS else None
