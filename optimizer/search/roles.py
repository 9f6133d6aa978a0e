"""Op-amps and photodiodes as arrays at the hottest ambient, and the checks that each fails alone."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog import unit_price
from optimizer.catalog.parts import Parts
from optimizer.figures import CHECKS, Bench, output_limits
from optimizer.physics import loop, noise, output, photodiode
from optimizer.request.types import Request
from optimizer.search.contexts import Contexts
from optimizer.vocabulary import COLUMNS

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

PASSES = len(CHECKS)
"""Code of a part or pair that fails no check; below it, the index in CHECKS of the first one failed."""

FOLLOWER_MARGIN = 45.0
"""Phase margin [deg] that a buffer needs as a follower."""

ALWAYS = {
    "opamps": (
        "price", "supply_min", "supply_max", "gbw", "voltage_noise", "noise_corner", "bias_current",
        "offset_voltage", "input_low", "input_high", "output_low", "output_high",
        "input_capacitance_common", "input_capacitance_differential",
    ),
    "photodiodes": ("price", "responsivity", "capacitance"),
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class OpAmps:
    """One element an op-amp; units as in `figures.Settings`. `single`, `double`: price of one package

    at the build quantity, and of two at twice that; `cool`: supply current of one package [A];
    `own_noise`: current noise squared at 25 C [A^2/Hz], which `current_noise` holds when hot.
    """

    dc_gain: Floats
    gbw: Floats
    second_pole: Floats
    min_gain: Floats
    slew_rate: Floats
    voltage_noise: Floats
    noise_corner: Floats
    current_noise: Floats
    own_noise: Floats
    bias: Floats
    vos: Floats
    output_low: Floats
    output_high: Floats
    input_low: Floats
    input_high: Floats
    common: Floats
    differential: Floats
    output_current: Floats
    buffers: Bools
    spare: Bools
    cool: Floats
    single: Floats
    double: Floats


@dataclass(frozen=True, slots=True)
class Diodes:
    """One element a photodiode; `capacitance` has one column a context."""

    responsivity: Floats
    capacitance: Floats
    dark: Floats
    shunt: Floats
    pole: Floats
    reverse_max: Floats
    price: Floats


@dataclass(frozen=True, slots=True)
class Verdicts:
    """For one role: `code` (parts, contexts) of the first own check failed in each context, PASSES

    where none; `blank` (parts, contexts): place in `columns` of the first unknown one that is needed;
    `alone` (parts,): the check reached in the context that gets furthest; `column` (parts,): the name
    of the column where that check is `missing`, else ''.
    """

    code: NDArray[np.int8]
    blank: NDArray[np.int8]
    columns: tuple[str, ...]
    alone: Ints
    column: NDArray[np.str_]


def opamps(parts: Parts, request: Request, kelvin_distance: float) -> OpAmps:
    """Op-amps of the catalog at the hottest ambient; `kelvin_distance`: the larger |T - 25|."""
    n = parts.number
    hottest = request.ambient.hottest
    bias = photodiode.doubled(n["bias_current"], hottest, n["bias_doubling"])
    drift = n["offset_drift"] if kelvin_distance else np.zeros(parts.size)
    amp = loop.amplifier(n["open_loop_gain"], n["gbw"], n["second_pole"])
    with np.errstate(invalid="ignore"):
        follower = loop.follower_phase_margin(amp) >= FOLLOWER_MARGIN
        own = n["current_noise"] ** 2
        current = np.fmax(own, noise.shot_current(bias))
    return OpAmps(
        dc_gain=n["open_loop_gain"], gbw=n["gbw"], second_pole=n["second_pole"], min_gain=n["min_gain"],
        slew_rate=n["slew_rate"], voltage_noise=n["voltage_noise"], noise_corner=n["noise_corner"],
        current_noise=current, own_noise=own, bias=bias,
        vos=output.offset_voltage(n["offset_voltage"], drift, kelvin_distance),
        output_low=n["output_low"], output_high=n["output_high"],
        input_low=n["input_low"], input_high=n["input_high"],
        common=n["input_capacitance_common"], differential=n["input_capacitance_differential"],
        output_current=n["output_current"], buffers=(n["min_gain"] <= 1.0) & follower,
        spare=n["channels"] >= 2.0, cool=n["channels"] * n["quiescent_current"],
        single=unit_price(parts.points["price"], request.quantity),
        double=2.0 * unit_price(parts.points["price"], 2 * request.quantity),
    )  # fmt: skip


def diodes(parts: Parts, request: Request, contexts: Contexts) -> Diodes:
    """Photodiodes of the catalog at the hottest ambient, per unit of the request's light."""
    n = parts.number
    hottest = request.ambient.hottest
    wavelength = request.light.wavelength
    sensitivity = [photodiode.responsivity(wavelength, p) for p in parts.points["responsivity"]]
    responsivity = np.array(sensitivity, dtype=float).reshape(parts.size)
    if request.light.kind == "irradiance":
        responsivity = responsivity * n["active_area"]
    curves = [photodiode.junction_capacitance(contexts.bias, p) for p in parts.points["capacitance"]]
    return Diodes(
        responsivity=responsivity,
        capacitance=np.array(curves, dtype=float).reshape(parts.size, contexts.size),
        dark=photodiode.doubled(n["dark_current"], hottest, n["dark_doubling"]),
        shunt=photodiode.shunt_conductance(n["shunt_resistance"], hottest, n["dark_doubling"]),
        pole=photodiode.own_pole(n["rise_time"]),
        reverse_max=n["reverse_max"],
        price=unit_price(parts.points["price"], request.quantity),
    )


def _first(fails: Sequence[tuple[str, Bools]], size: int) -> Ints:
    """Index in CHECKS of the first check failed; `fails` in any order."""
    code = np.full(size, PASSES)
    for name, mask in fails:
        code = np.minimum(code, np.where(mask, CHECKS.index(name), PASSES))
    return code


def _named(parts: Parts, words: Sequence[str]) -> Bools:
    """Where a part is named by its part number or as maker/part."""
    both = np.char.add(np.char.add(parts.text["maker"], "/"), parts.text["part"])
    return np.isin(parts.text["part"], list(words)) | np.isin(both, list(words))


def _excluded(parts: Parts, request: Request) -> Bools:
    space = request.space
    wanted = _named(parts, space.require)
    fails = _named(parts, space.exclude) | (wanted.any() & ~wanted)
    for words, column in ((space.makers, "maker"), (space.packages, "package")):
        if words:
            fails |= ~np.isin(parts.text[column], list(words))
    return np.asarray(fails)


def _common_checks(parts: Parts, request: Request) -> list[tuple[str, Bools]]:
    n = parts.number
    with np.errstate(invalid="ignore"):
        cold, hot = n["temp_min"] > request.ambient.coldest, n["temp_max"] < request.ambient.hottest
        return [
            ("status", ~np.isin(parts.text["status"], list(request.space.status))),
            ("excluded", _excluded(parts, request)),
            ("stock", n["stock"] < request.quantity),
            ("temperature", (cold | hot) if request.ambient.stated else np.zeros(parts.size, dtype=bool)),
        ]


def _unknown(parts: Parts, columns: Sequence[str]) -> Ints:
    """Index in the contract's order of the first of `columns` that is unknown, else a large number."""
    order = list(COLUMNS[parts.role])
    first = np.full(parts.size, len(order))
    for column in columns:
        points = parts.points.get(column)
        unknown = np.isnan(parts.number[column]) if points is None else np.array([not p for p in points])
        first = np.minimum(first, np.where(unknown, order.index(column), len(order)))
    return first


def opamps_need(request: Request) -> list[str]:
    """Columns of op-amps that a stated target or check needs."""
    needed = list(ALWAYS["opamps"])
    if request.ambient.stated:
        needed += ["bias_doubling", "offset_drift", "temp_min", "temp_max"]
    stated = (
        (request.targets.slew, "slew_rate"),
        (request.supply.load, "output_current"),
        (request.targets.supply_current, "quiescent_current"),
    )
    return needed + [column for target, column in stated if target is not None]


def judge_opamps(
    parts: Parts, request: Request, contexts: Contexts, *, bench: Bench, arrays: OpAmps
) -> Verdicts:
    """Which checks each op-amp fails by itself, in each context."""
    n, supply = parts.number, request.supply
    blank = _unknown(parts, opamps_need(request))
    span = supply.high - supply.low
    low_end, high_end = bench.ends
    with np.errstate(invalid="ignore"):
        outside = (span * high_end > n["supply_max"]) | (span * low_end < n["supply_min"])
    own = [*_common_checks(parts, request), ("supply", outside), ("missing", blank < len(COLUMNS["opamps"]))]
    code = np.tile(_first(own, parts.size)[:, None], (1, contexts.size))
    extra = contexts.buffered & ~arrays.spare[:, None]
    with np.errstate(invalid="ignore"):
        scarce = extra & (n["stock"][:, None] < 2 * request.quantity)
        code = np.minimum(code, np.where(scarce, CHECKS.index("stock"), PASSES))
        outside = _outside_input(bench, arrays, contexts)
        code = np.minimum(code, np.where(outside, CHECKS.index("input_range"), PASSES))
        narrow = _no_window(bench, arrays)[:, None]
        code = np.minimum(code, np.where(narrow, CHECKS.index("window"), PASSES))
    return _verdicts("opamps", code, np.tile(blank[:, None], (1, contexts.size)))


def _outside_input(bench: Bench, arrays: OpAmps, contexts: Contexts) -> Bools:
    fails = np.zeros((arrays.gbw.size, contexts.size), dtype=bool)
    for end in bench.ends:
        vref = contexts.vref * end
        fails |= vref < (bench.low * end + arrays.input_low)[:, None]
        fails |= vref > (bench.high * end - arrays.input_high)[:, None]
    return fails


def _no_window(bench: Bench, arrays: OpAmps) -> Bools:
    fails = np.zeros(arrays.gbw.size, dtype=bool)
    for end in bench.ends:
        lower, upper = output_limits(bench, end, arrays.output_low, arrays.output_high)
        fails |= ~(upper > lower)
    return fails


def diodes_need(request: Request, *, biased: bool) -> list[str]:
    """Columns of photodiodes that a stated target or check needs where the wiring biases, or elsewhere."""
    needed, light = list(ALWAYS["photodiodes"]), request.light
    if request.ambient.stated:
        needed += ["temp_min", "temp_max"]
    if light.kind == "irradiance" or light.area_from is not None or light.area_to is not None:
        needed.append("active_area")
    if request.targets.bandwidth is not None:
        needed.append("rise_time")
    return [*needed, *(("dark_current", "reverse_max") if biased else ("shunt_resistance",))]


def judge_diodes(parts: Parts, request: Request, contexts: Contexts, *, bench: Bench) -> Verdicts:
    """Which checks each photodiode fails by itself, in each context."""
    light = request.light
    unbiased = _unknown(parts, diodes_need(request, biased=False))
    biased = _unknown(parts, diodes_need(request, biased=True))
    sensed = np.array([bool(p) for p in parts.points["responsivity"]], dtype=bool)
    with np.errstate(invalid="ignore"):
        area = parts.number["active_area"]
        wrong = area < (light.area_from or 0.0)
        wrong |= area > (np.inf if light.area_to is None else light.area_to)
        deaf = sensed & ~_sensitive(parts, light.wavelength)
    own = [*_common_checks(parts, request), ("excluded", wrong), ("wavelength", deaf)]
    blank = np.where(contexts.biased, biased[:, None], unbiased[:, None])
    code = np.tile(_first(own, parts.size)[:, None], (1, contexts.size))
    code = np.minimum(code, np.where(blank < len(COLUMNS["photodiodes"]), CHECKS.index("missing"), PASSES))
    with np.errstate(invalid="ignore"):
        over = contexts.biased & (contexts.bias * bench.ends[1] > parts.number["reverse_max"][:, None])
    code = np.minimum(code, np.where(over, CHECKS.index("reverse_bias"), PASSES))
    return _verdicts("photodiodes", code, blank)


def _sensitive(parts: Parts, wavelength: float) -> Bools:
    values = [photodiode.responsivity(wavelength, p) for p in parts.points["responsivity"]]
    return np.asarray(np.nan_to_num(np.array(values, dtype=float).reshape(parts.size)) > 0.0)


def _verdicts(role: str, code: Ints, blank: Ints) -> Verdicts:
    columns = (*COLUMNS[role], "")
    last = len(columns) - 1
    alone = code.max(axis=1, initial=-1)
    missing = CHECKS.index("missing")
    reached = np.where(code == missing, blank, last).min(axis=1, initial=last)
    named = [columns[i] if a == missing else "" for i, a in zip(reached, alone, strict=True)]
    column = np.array(named, dtype=str)
    return Verdicts(code.astype(np.int8), blank.astype(np.int8), columns, alone, column)
