"""A batch of boxes as intervals of physical values: what the bounds are computed from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import output_limits
from optimizer.search.boxes import Boxes, RangeMin, Run, Span, run_of
from optimizer.search.roles import PASSES
from optimizer.search.space import Space, total_cost

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
    falling: RangeMin
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
    dark_high: Floats
    shunt_low: Floats
    shunt_high: Floats
    cin_low: Floats
    cin_high: Floats
    reference_node: Floats
    rises: Bools
    falls: Bools
    rise_from: Floats
    fall_from: Floats
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
    supply_current: Floats
    cost: Floats


def lay_out(space: Space) -> Index:
    """Lay out `space` for boxes."""
    x = space.contexts
    bench = space.bench
    on_rail = (x.sign > 0) & ~x.divided & (bench.dark_on_rail and bench.low == 0.0)
    flags = np.array([x.biased, x.divided, x.buffered, x.sign > 0, on_rail])
    counts = np.zeros((5, x.size + 1), dtype=np.int64)
    np.cumsum(flags, axis=1, out=counts[:, 1:])
    return Index(
        space=space,
        resistors=run_of(space.resistors),
        capacitors=run_of(space.capacitors),
        amps=_amps(space),
        diode_passes=_passes(space.diode_verdicts.code),
        rising=RangeMin.of(np.where(x.sign > 0, x.vref, np.inf)),
        falling=RangeMin.of(np.where(x.sign < 0, -x.vref, np.inf)),
        bias_least=RangeMin.of(x.bias),
        bias_most=RangeMin.of(-x.bias),
        cost=RangeMin.of(x.cost),
        current=RangeMin.of(x.current),
        source=RangeMin.of(x.source),
        counts=counts,
    )


def _passes(code: NDArray[np.int8]) -> NDArray[np.int32]:
    counts = np.zeros((code.shape[0], code.shape[1] + 1), dtype=np.int32)
    np.cumsum(code == PASSES, axis=1, out=counts[:, 1:])
    return counts


def _amps(space: Space) -> Amps:
    bench, o = space.bench, space.opamps
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
            node=o.common + o.differential + bench.stray,
            reference_node=o.common + bench.stray,
            vref_floor=np.max((bench.low * ends + o.input_low) / ends, axis=0),
            vref_ceiling=np.min((bench.high * ends - o.input_high) / ends, axis=0),
            dark_floor=np.max(lower / ends, axis=0),
            dark_ceiling=np.min(upper / ends, axis=0),
            passes=_passes(space.opamp_verdicts.code),
        )


def view(index: Index, boxes: Boxes) -> View:
    """The intervals of `boxes`."""
    space, amps = index.space, index.amps
    o, d = boxes.column(Boxes.OPAMP), boxes.column(Boxes.DIODE)
    x0, x1 = boxes.column(Boxes.X0), boxes.column(Boxes.X1)
    r0, r1 = boxes.column(Boxes.R0), boxes.column(Boxes.R1)
    c0, c1 = boxes.column(Boxes.C0), boxes.column(Boxes.C1)
    x, r, c = Span.of(x0, x1), Span.of(r0, r1), Span.of(c0, c1)
    counts = index.counts[:, x1] - index.counts[:, x0]
    size = x1 - x0
    some = counts > 0
    unbiased = counts[BIASED] < size
    buffered = counts[BUFFERED] == size
    lone = ~space.opamps.spare[o]
    extra = buffered & lone
    one, two = space.opamps.single[o], space.opamps.double[o]
    # a steep price break can make two packages cheaper than one
    mixed = np.where(some[BUFFERED] & lone, np.minimum(one, two), one)
    capacitance = space.diodes.capacitance
    # a diode of unknown shunt or dark current fails in the wirings that need it: elsewhere it is 0
    shunt, dark = np.nan_to_num(space.diodes.shunt[d]), np.nan_to_num(space.diodes.dark[d])
    possible = (amps.passes[o, x1] > amps.passes[o, x0]) & (
        index.diode_passes[d, x1] > index.diode_passes[d, x0]
    )
    rise, fall = index.rising.least(x), index.falling.least(x)
    prices = (
        space.diodes.price[d],
        np.where(extra, two, mixed),
        index.resistors.price.least(r),
        index.capacitors.price.least(c),
        index.cost.least(x),
    )
    return View(
        possible=possible,
        gain=space.opamps.dc_gain[o],
        dominant=amps.dominant[o],
        second=amps.second[o],
        both=amps.both[o],
        voltage_noise=space.opamps.voltage_noise[o] ** 2,
        noise_corner=space.opamps.noise_corner[o],
        current_noise=space.opamps.current_noise[o],
        bias=space.opamps.bias[o],
        vos=space.opamps.vos[o],
        lower=amps.lower[:, o],
        upper=amps.upper[:, o],
        vref_floor=amps.vref_floor[o],
        vref_ceiling=amps.vref_ceiling[o],
        dark_floor=amps.dark_floor[o],
        dark_ceiling=amps.dark_ceiling[o],
        responsivity=space.diodes.responsivity[d],
        pole=space.diodes.pole[d],
        dark_low=np.where(unbiased, 0.0, dark),
        dark_high=np.where(some[BIASED], dark, 0.0),
        shunt_low=np.where(some[BIASED], 0.0, shunt),
        shunt_high=np.where(unbiased, shunt, 0.0),
        cin_low=capacitance[d, index.bias_most.position(x)] + amps.node[o],
        cin_high=capacitance[d, index.bias_least.position(x)] + amps.node[o],
        reference_node=amps.reference_node[o],
        rises=some[RISING],
        falls=counts[RISING] < size,
        rise_from=rise,
        fall_from=-fall,
        divided=counts[DIVIDED] == size,
        buffered=buffered,
        on_rail=some[ON_RAIL],
        source_low=index.source.least(x),
        rf_low=index.resistors.value[r0],
        rf_high=index.resistors.value[r1 - 1],
        cf_low=index.capacitors.value[c0] + index.resistors.parasitic.least(r),
        cf_high=index.capacitors.value[c1 - 1] - index.resistors.surplus.least(r),
        lag_low=space.low_passes[boxes.column(Boxes.L1) - 1],
        lag_high=space.low_passes[boxes.column(Boxes.L0)],
        min_gain=space.opamps.min_gain[o],
        buffers=space.opamps.buffers[o],
        slew_rate=space.opamps.slew_rate[o],
        supply_current=np.where(extra, 2.0, 1.0) * space.opamps.cool[o] + index.current.least(x),
        cost=total_cost(prices),
    )
