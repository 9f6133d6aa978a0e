"""The request's tables and keys with the values in force, as the saved record writes them."""

from __future__ import annotations

import math
from dataclasses import asdict
from typing import Any

from optimizer.request.types import Converter, Light, Request, Space, Tolerance
from optimizer.vocabulary import COLUMNS
from optimizer.vocabulary.allowed import NO_EFFECT


def in_force(request: Request) -> dict[str, Any]:
    """Return the request as nested tables, named as in its TOML, with every default filled in.

    Numbers are what a bare number in the request means: SI, but temperatures in C, angles in deg,
    gains in dB. Irradiance is text with its unit. Keys without a value are left out, so that the
    tables written as TOML read to an equal request (an assumed gain within float rounding).
    """
    tables: dict[str, Any] = {
        "name": request.name,
        "quantity": request.quantity,
        "currency": request.currency,
        "light": _light(request.light),
        "supply": _stated(asdict(request.supply)) | {"load_to": _load_to(request)},
        "ambient": _ambient(request),
        "targets": _stated(asdict(request.targets)),
        "space": _space(request.space),
        "converter": _converter(request.converter),
        "assume": _assume(request),
        "catalogs": {role: list(files) for role, files in request.catalogs.items()},
        "ranking": asdict(request.ranking),
        "tolerance": _tolerance(request.tolerance),
        "resilience": asdict(request.resilience),
    }
    return {name: value for name, value in tables.items() if value != {}}


def _stated(values: dict[str, Any]) -> dict[str, Any]:
    return {name: value for name, value in values.items() if value is not None}


def _light(light: Light) -> dict[str, Any]:
    def level(value: float) -> float | str:
        return f"{value!r} W/m2" if light.kind == "irradiance" else value

    area = _stated({"from": light.area_from, "to": light.area_to})
    return {
        "wavelength": light.wavelength,
        "weakest": level(light.weakest),
        "strongest": level(light.strongest),
        "background": level(light.background),
    } | ({"active_area": area} if area else {})


def _load_to(request: Request) -> float | str:
    return "reference" if request.supply.load_to is None else request.supply.load_to


def _ambient(request: Request) -> dict[str, Any]:
    ambient = request.ambient
    return {"coldest": ambient.coldest, "hottest": ambient.hottest} if ambient.stated else {}


def _tolerance(tolerance: Tolerance) -> dict[str, Any]:
    if tolerance == Tolerance():
        return {}
    drawn = {
        "method": tolerance.method,
        "yield": tolerance.yield_,
        "distribution": tolerance.distribution,
        "draws": tolerance.draws,
        "seed": tolerance.seed,
    }
    return _stated(drawn) | tolerance.spreads


def _space(space: Space) -> dict[str, Any]:
    divider = space.divider
    return {
        "wirings": list(space.wirings),
        "references": list(space.references),
        "divider": {
            "series": divider.series,
            "from": divider.low,
            "to": divider.high,
            "bypass": divider.bypass,
        },
        "resistance": {"from": space.resistance[0], "to": space.resistance[1]},
        "capacitance": {
            "from": space.capacitance[0],
            "to": space.capacitance[1],
            "none": space.no_capacitor,
        },
        "low_pass": ["none" if cutoff is None else cutoff for cutoff in space.low_pass],
        "stray": space.stray,
        "dark_on_rail": space.dark_on_rail,
        "noise_from": space.noise_from,
        "status": list(space.status),
        "require": list(space.require),
        "exclude": list(space.exclude),
        "makers": list(space.makers),
        "packages": list(space.packages),
    }


def _converter(converter: Converter | None) -> dict[str, Any]:
    if converter is None:
        return {}
    high = "supply" if converter.follows_supply else converter.high
    return {"bits": converter.bits, "low": converter.low, "high": high}


def _assume(request: Request) -> dict[str, dict[str, float | str]]:
    tables: dict[str, dict[str, float | str]] = {}
    for (role, column), value in sorted(request.assume.items()):
        tables.setdefault(role, {})[column] = _bare(role, column, value)
    return tables


def _bare(role: str, column: str, value: float) -> float | str:
    """Return the bare number that reads to `value`; 'none' where it stands for no effect."""
    if COLUMNS[role][column].none_allowed and value == NO_EFFECT[column]:
        return "none"
    if COLUMNS[role][column].kind == "gain":
        return _decibel(value)
    return value


def _decibel(ratio: float) -> float:
    """Return the level that reads nearest to the ratio: a few floats around the logarithm are tried."""
    level = 20.0 * math.log10(ratio)
    near = [round(level, 9), level, math.nextafter(level, -math.inf), math.nextafter(level, math.inf)]
    return min(near, key=lambda guess: abs(10.0 ** (guess / 20.0) - ratio))
