"""A batch of boxes as intervals of physical values: what the bounds are computed from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import output_limits
from optimizer.physics import reference
from optimizer.search.boxes import Boxes, RangeMin, Run, Span, run_of
from optimizer.search.roles import PASSES
from optimizer.search.space import Space, total_cost
from optimizer.search.values import corners

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Amps:
    """By op-amp: time constants [s], output limits less guard at the two tolerance ends [V], the

    capacitance that is always at the node [F], and the Vref that inputs and outputs admit [V].
    """

    dominant: Floats
    second: Floats
    both: Floats
    lower: Floats
    upper: Floats
    node: Floats
    reference_node: Floats
    vref_floor: Floats
    vref_ceiling: Floats
    dark_floor: Floats
    dark_ceiling: Floats
    passes: NDArray[np.int32]


@dataclass(frozen=True, slots=True)
class Index:
    """A space laid out for boxes: rising runs of passives, range minima over contexts, tables by part."""

    space: Space
    resistors: Run
    capacitors: Run
    amps: Amps
    diode_passes: NDArray[np.int32]
    rising: RangeMin
    rising_most: RangeMin
    falling: RangeMin
    falling_least: RangeMin
    bias_least: RangeMin
    bias_most: RangeMin
    cost: RangeMin
    current: RangeMin
    source: RangeMin
    counts: Ints


BIASED, DIVIDED, BUFFERED, RISING, ON_RAIL = range(5)


@dataclass(frozen=True, slots=True)
class View:
    """Boxes as intervals; one element a box, in SI. `possible` is False where no context passes."""

    possible: Bools
    gain: Floats
    dominant: Floats
    second: Floats
    both: Floats
    voltage_noise: Floats
    noise_corner: Floats
    current_noise: Floats
    bias: Floats
    vos: Floats
    lower: Floats
    upper: Floats
    vref_floor: Floats
    vref_ceiling: Floats
    dark_floor: Floats
    dark_ceiling: Floats
    responsivity: Floats
    pole: Floats
    dark_low: Floats
    shunt_low: Floats
    shunt_high: Floats
    cin_low: Floats
    cin_high: Floats
    junction_low: Floats
    junction_high: Floats
    reference_node: Floats
    rises: Bools
    falls: Bools
    rise_from: Floats
    rise_to: Floats
    fall_from: Floats
    fall_to: Floats
    divided: Bools
    buffered: Bools
    on_rail: Bools
    source_low: Floats
    rf_low: Floats
    rf_high: Floats
    cf_low: Floats
    cf_high: Floats
    lag_low: Floats
    lag_high: Floats
    min_gain: Floats
    buffers: Bools
    slew_rate: Floats
    drive: Floats
    supply_current: Floats
    cost: Floats


def lay_out(space: Space) -> Index:
    """Lay out `space` for boxes."""
    x = space.contexts
    bench = space.bench
    on_rail = (x.sign > 0) & ~x.divided & (bench.dark_on_rail and bench.low == 0.0)
    vref, source, current = _at_corner(space)
    flags = np.array([x.biased, x.divided, x.buffered, x.sign > 0, on_rail])
    counts = np.zeros((5, x.size + 1), dtype=np.int64)
    np.cumsum(flags, axis=1, out=counts[:, 1:])
    return Index(
        space=space,
        resistors=run_of(space.resistors),
        capacitors=run_of(space.capacitors),
        amps=_amps(space),
        diode_passes=_passes(space.diode_verdicts.code),
        rising=RangeMin.of(np.where(x.sign > 0, vref, np.inf)),
        rising_most=RangeMin.of(np.where(x.sign > 0, -vref, np.inf)),
        falling=RangeMin.of(np.where(x.sign < 0, -vref, np.inf)),
        falling_least=RangeMin.of(np.where(x.sign < 0, vref, np.inf)),
        bias_least=RangeMin.of(x.bias),
        bias_most=RangeMin.of(-x.bias),
        cost=RangeMin.of(x.cost),
        current=RangeMin.of(current),
        source=RangeMin.of(source),
        counts=counts,
    )


def _at_corner(space: Space) -> tuple[Floats, Floats, Floats]:
    """Vref [V], source resistance [ohm] and current [A] of dividers where their spreads count.

    Vref and source at the corner that leaves light the least room, the current at its largest.
    """
    x, bench = space.contexts, space.bench
    if not corners(space.request):
        return x.vref, x.source, x.current
    step = np.where(x.divided, x.spread, 0.0)
    top, bottom = x.top * (1.0 - x.sign * step), x.bottom * (1.0 + x.sign * step)
    vref = np.where(x.divided, reference.divided(bench.high, bench.low, top, bottom), x.vref)
    source = np.where(x.divided, reference.parallel(top, bottom), 0.0)
    most = reference.current(bench.high, bench.low, x.top * (1.0 - step), x.bottom * (1.0 - step))
    return vref, source, np.where(x.divided, most, 0.0)


def _passes(code: NDArray[np.int8]) -> NDArray[np.int32]:
    counts = np.zeros((code.shape[0], code.shape[1] + 1), dtype=np.int32)
    np.cumsum(code == PASSES, axis=1, out=counts[:, 1:])
    return counts


def _amps(space: Space) -> Amps:
    bench, o, stray = space.bench, space.opamps, space.request.space.stray
    a, b = o.dc_gain / (2 * np.pi * o.gbw), 1.0 / (2 * np.pi * o.second_pole)
    limits = [output_limits(bench, end, o.output_low, o.output_high) for end in bench.ends]
    lower = np.array([low + bench.guard for low, _ in limits])
    upper = np.array([high - bench.guard for _, high in limits])
    ends = np.array(bench.ends)[:, None]
    with np.errstate(invalid="ignore"):
        return Amps(
            dominant=a,
            second=b,
            both=a * b / (a + b),
            lower=lower,
            upper=upper,
            node=o.common + o.differential + stray,
            reference_node=o.common + stray,
            vref_floor=np.max((bench.low * ends + o.input_low) / ends, axis=0),
            vref_ceiling=np.min((bench.high * ends - o.input_high) / ends, axis=0),
            dark_floor=np.max(lower / ends, axis=0),
            dark_ceiling=np.min(upper / ends, axis=0),
            passes=_passes(space.opamp_verdicts.code),
        )


def view(index: Index, boxes: Boxes) -> View:
    """The intervals of `boxes`."""
    column = boxes.column
    x = Span.of(column(Boxes.X0), column(Boxes.X1))
    r = Span.of(column(Boxes.R0), column(Boxes.R1))
    counts = index.counts[:, column(Boxes.X1)] - index.counts[:, column(Boxes.X0)]
    size = column(Boxes.X1) - column(Boxes.X0)
    return View(
        **_of_opamps(index, column(Boxes.OPAMP)),
        **_of_contexts(index, boxes, x, counts),
        **_of_passives(index, boxes, r),
        **totals(index, boxes),
        rises=counts[RISING] > 0,
        falls=counts[RISING] < size,
        divided=counts[DIVIDED] == size,
        buffered=counts[BUFFERED] == size,
        on_rail=counts[ON_RAIL] > 0,
    )


def _of_opamps(index: Index, o: Ints) -> dict[str, Any]:
    """What the op-amp fixes."""
    amps, opamps = index.amps, index.space.opamps
    return {
        "gain": opamps.dc_gain[o],
        "dominant": amps.dominant[o],
        "second": amps.second[o],
        "both": amps.both[o],
        "voltage_noise": opamps.voltage_noise[o] ** 2,
        "noise_corner": opamps.noise_corner[o],
        "current_noise": opamps.current_noise[o],
        "bias": opamps.bias[o],
        "vos": opamps.vos[o],
        "lower": amps.lower[:, o],
        "upper": amps.upper[:, o],
        "vref_floor": amps.vref_floor[o],
        "vref_ceiling": amps.vref_ceiling[o],
        "dark_floor": amps.dark_floor[o],
        "dark_ceiling": amps.dark_ceiling[o],
        "reference_node": amps.reference_node[o],
        "min_gain": opamps.min_gain[o],
        "buffers": opamps.buffers[o],
        "slew_rate": opamps.slew_rate[o],
        "drive": opamps.output_current[o],
    }


def _of_contexts(index: Index, boxes: Boxes, x: Span, counts: Ints) -> dict[str, Any]:
    """What the diode is in the contexts of the box, and where Vref can be."""
    amps, diodes = index.amps, index.space.diodes
    o, d = boxes.column(Boxes.OPAMP), boxes.column(Boxes.DIODE)
    x0, x1 = boxes.column(Boxes.X0), boxes.column(Boxes.X1)
    biased, unbiased = counts[BIASED] > 0, counts[BIASED] < x1 - x0
    # a diode of unknown shunt or dark current fails in the wirings that need it: elsewhere it is 0
    shunt, dark = np.nan_to_num(diodes.shunt[d]), np.nan_to_num(diodes.dark[d])
    passes = amps.passes[o, x1] > amps.passes[o, x0]
    junction_low = diodes.capacitance[d, index.bias_most.position(x)]
    junction_high = diodes.capacitance[d, index.bias_least.position(x)]
    return {
        "possible": passes & (index.diode_passes[d, x1] > index.diode_passes[d, x0]),
        "responsivity": diodes.responsivity[d],
        "pole": diodes.pole[d],
        "dark_low": np.where(unbiased, 0.0, dark),
        "shunt_low": np.where(biased, 0.0, shunt),
        "shunt_high": np.where(unbiased, shunt, 0.0),
        "cin_low": junction_low + amps.node[o],
        "cin_high": junction_high + amps.node[o],
        "junction_low": junction_low,
        "junction_high": junction_high,
        "rise_from": index.rising.least(x),
        "rise_to": -index.rising_most.least(x),
        "fall_from": -index.falling.least(x),
        "fall_to": index.falling_least.least(x),
        "source_low": index.source.least(x),
    }


def _of_passives(index: Index, boxes: Boxes, r: Span) -> dict[str, Any]:
    """Rf, Cf with the resistor's parasitic, and the low-pass, from least to most."""
    column, resistors, capacitors = boxes.column, index.resistors, index.capacitors
    return {
        "rf_low": resistors.value[column(Boxes.R0)],
        "rf_high": resistors.value[column(Boxes.R1) - 1],
        "cf_low": capacitors.value[column(Boxes.C0)] + resistors.parasitic.least(r),
        "cf_high": capacitors.value[column(Boxes.C1) - 1] - resistors.surplus.least(r),
        "lag_low": index.space.low_passes[column(Boxes.L1) - 1],
        "lag_high": index.space.low_passes[column(Boxes.L0)],
    }


def totals(index: Index, boxes: Boxes) -> dict[str, Any]:
    """Cost and supply current of `boxes`, at least."""
    column = boxes.column
    x = Span.of(column(Boxes.X0), column(Boxes.X1))
    r = Span.of(column(Boxes.R0), column(Boxes.R1))
    c = Span.of(column(Boxes.C0), column(Boxes.C1))
    counts = index.counts[:, column(Boxes.X1)] - index.counts[:, column(Boxes.X0)]
    o, opamps = boxes.column(Boxes.OPAMP), index.space.opamps
    lone = ~opamps.spare[o]
    extra = lone & (counts[BUFFERED] == boxes.column(Boxes.X1) - boxes.column(Boxes.X0))
    one, two = opamps.single[o], opamps.double[o]
    # a steep price break can make two packages cheaper than one
    mixed = np.where(lone & (counts[BUFFERED] > 0), np.minimum(one, two), one)
    prices = (
        index.space.diodes.price[boxes.column(Boxes.DIODE)],
        np.where(extra, two, mixed),
        index.resistors.price.least(r),
        index.capacitors.price.least(c),
        index.cost.least(x),
    )
    current = np.where(extra, 2.0, 1.0) * opamps.cool[o] + index.current.least(x)
    return {"supply_current": current, "cost": total_cost(prices)}
