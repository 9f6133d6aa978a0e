"""The declared space of one request and its catalogs, compiled into arrays; and settings drawn from it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.figures import Bench, Settings
from optimizer.physics.constants import ZERO_CELSIUS
from optimizer.request.types import Request
from optimizer.search import contexts as context_room
from optimizer.search import roles, values

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Choice:
    """Settings by index: op-amp, photodiode, context, resistor, capacitor, low-pass (arrays alike)."""

    opamp: Ints
    diode: Ints
    context: Ints
    resistor: Ints
    capacitor: Ints
    low_pass: Ints

    def take(self, rows: NDArray[np.int64] | NDArray[np.bool_]) -> Choice:
        """The settings at `rows`."""
        return Choice(*(column[rows] for column in self.columns()))

    def columns(self) -> tuple[Ints, ...]:
        """The six index arrays."""
        return (self.opamp, self.diode, self.context, self.resistor, self.capacitor, self.low_pass)


@dataclass(frozen=True, slots=True)
class Space:
    """Everything a search needs, in SI; nothing here changes during a search.

    `limits` are those of the graded targets, `musts` those of targets that must be met without being
    graded; margins from `comfort` up rank alike. `order_opamps`, `order_diodes`: rank of each part by
    name, then maker. `combinations` counts the declared space. `footprint` and `makers` number the
    packages with pinout (-1: one is blank) and the makers of op-amps; settings must be served by
    op-amps of `sources` makers in the same footprint.
    """

    request: Request
    bench: Bench
    limits: Mapping[str, float]
    opamps: roles.OpAmps
    diodes: roles.Diodes
    contexts: context_room.Contexts
    resistors: values.Passives
    capacitors: values.Passives
    low_passes: Floats
    opamp_verdicts: roles.Verdicts
    diode_verdicts: roles.Verdicts
    order_opamps: Ints
    order_diodes: Ints
    combinations: int
    comfort: float
    footprint: Ints
    makers: Ints
    sources: int
    musts: Mapping[str, float] = field(default_factory=dict)


def bench_of(request: Request) -> Bench:
    """What the request fixes, in the form that the figures take."""
    supply, light, space = request.supply, request.light, request.space
    converter = request.converter
    return Bench(
        high=supply.high,
        low=supply.low,
        tolerance=supply.tolerance,
        guard=supply.guard,
        kelvin=request.ambient.hottest + ZERO_CELSIUS,
        weakest=light.weakest,
        strongest=light.strongest,
        background=light.background,
        noise_from=space.noise_from,
        bypass=space.divider.bypass,
        bandwidth_target=request.targets.bandwidth,
        converter=None if converter is None else (converter.low, converter.high, converter.bits),
        converter_follows=converter is not None and converter.follows_supply,
        load=supply.load,
        load_to=supply.load_to,
        dark_on_rail=space.dark_on_rail,
    )


def build(request: Request, catalogs: Catalogs) -> Space:
    """Compile `request` and `catalogs`; of capacitors that differ in price only, the cheapest stays."""
    whole = build_whole(request, catalogs)
    return replace(whole, capacitors=values.cheapest(whole.capacitors, request))


def build_whole(request: Request, catalogs: Catalogs) -> Space:
    """Compile `request` and `catalogs` with every capacitor family that the request admits."""
    bench = bench_of(request)
    levels = values.divider_levels(request, catalogs.resistors, catalogs.capacitors)
    contexts = context_room.build(request, levels)
    ambient = request.ambient
    distance = max(abs(ambient.coldest - 25.0), abs(ambient.hottest - 25.0))
    opamps = roles.opamps(catalogs.opamps, request, distance)
    diodes = roles.diodes(catalogs.photodiodes, request, contexts)
    resistors = values.resistors(catalogs.resistors, request)
    capacitors = values.capacitors(catalogs.capacitors, request)
    low_passes = values.low_passes(request)
    combinations = catalogs.opamps.size * catalogs.photodiodes.size * context_room.declared(request, levels)
    combinations *= resistors.declared * capacitors.declared * low_passes.size
    return Space(
        request=request,
        bench=bench,
        limits=margins.limits(request),
        opamps=opamps,
        diodes=diodes,
        contexts=contexts,
        resistors=resistors,
        capacitors=capacitors,
        low_passes=low_passes,
        opamp_verdicts=roles.judge_opamps(catalogs.opamps, request, contexts, bench=bench, arrays=opamps),
        diode_verdicts=roles.judge_diodes(catalogs.photodiodes, request, contexts, bench=bench),
        order_opamps=_ranks(catalogs.opamps.text["part"], catalogs.opamps.text["maker"]),
        order_diodes=_ranks(catalogs.photodiodes.text["part"], catalogs.photodiodes.text["maker"]),
        combinations=combinations,
        comfort=request.ranking.comfort,
        footprint=_footprints(catalogs.opamps.text["package"], catalogs.opamps.text["pinout"]),
        makers=_numbered(catalogs.opamps.text["maker"]),
        sources=request.resilience.opamp_sources,
    )


def _ranks(part: NDArray[np.str_], maker: NDArray[np.str_]) -> Ints:
    ranks = np.empty(part.size, dtype=np.int64)
    ranks[np.lexsort((maker, part))] = np.arange(part.size)
    return ranks


def _numbered(words: NDArray[np.str_]) -> Ints:
    return np.asarray(np.unique(words, return_inverse=True)[1], dtype=np.int64).reshape(words.shape)


def _footprints(package: NDArray[np.str_], pinout: NDArray[np.str_]) -> Ints:
    """A number for each package with its pinout; -1 where one of them is blank."""
    numbers = _numbered(package) * (pinout.size + 1) + _numbered(pinout)
    return np.where((package == "") | (pinout == ""), -1, numbers)


def total_cost(parts: tuple[Floats, Floats, Floats, Floats, Floats]) -> Floats:
    """Cost of diode, op-amp packages, resistor, capacitor and divider, added in this order always.

    Rounded addition is monotone, so the sum of lower bounds in the same order is a lower bound.
    """
    diode, opamp, resistor, capacitor, divider = parts
    return diode + opamp + resistor + capacitor + divider


def settings(space: Space, c: Choice) -> Settings:
    """The choices `c` with all values filled in, ready to evaluate."""
    o, d, x = space.opamps, space.diodes, space.contexts
    biased, buffered = x.biased[c.context], x.buffered[c.context]
    extra = buffered & ~o.spare[c.opamp]
    packages = np.where(extra, o.double[c.opamp], o.single[c.opamp])
    prices = (
        d.price[c.diode],
        packages,
        space.resistors.price[c.resistor],
        space.capacitors.price[c.capacitor],
        x.cost[c.context],
    )
    return Settings(
        dc_gain=o.dc_gain[c.opamp],
        gbw=o.gbw[c.opamp],
        second_pole=o.second_pole[c.opamp],
        min_gain=o.min_gain[c.opamp],
        slew_rate=o.slew_rate[c.opamp],
        voltage_noise=o.voltage_noise[c.opamp],
        noise_corner=o.noise_corner[c.opamp],
        current_noise=o.current_noise[c.opamp],
        bias=o.bias[c.opamp],
        vos=o.vos[c.opamp],
        output_low=o.output_low[c.opamp],
        output_high=o.output_high[c.opamp],
        common=o.common[c.opamp],
        differential=o.differential[c.opamp],
        stray=np.full(c.opamp.shape, space.request.space.stray),
        output_current=o.output_current[c.opamp],
        buffers=o.buffers[c.opamp],
        responsivity=d.responsivity[c.diode],
        capacitance=d.capacitance[c.diode, c.context],
        dark=np.where(biased, d.dark[c.diode], 0.0),
        shunt=np.where(biased, 0.0, d.shunt[c.diode]),
        pole=d.pole[c.diode],
        sign=x.sign[c.context],
        vref=x.vref[c.context],
        biased=biased,
        divided=x.divided[c.context],
        buffered=buffered,
        source=x.source[c.context],
        reverse_bias=x.bias[c.context],
        rf=space.resistors.value[c.resistor],
        cf=space.capacitors.value[c.capacitor] + space.resistors.parasitic[c.resistor],
        low_pass=space.low_passes[c.low_pass],
        supply_current=packages_current(space, c) + x.current[c.context],
        cost=total_cost(prices),
    )


def packages_current(space: Space, c: Choice) -> Floats:
    """Supply current [A] of the op-amp packages of each choice."""
    extra = space.contexts.buffered[c.context] & ~space.opamps.spare[c.opamp]
    return np.where(extra, 2.0, 1.0) * space.opamps.cool[c.opamp]


def own_code(space: Space, c: Choice) -> Ints:
    """The first check that op-amp or diode of each choice fails by itself; PASSES where none."""
    return np.minimum(
        space.opamp_verdicts.code[c.opamp, c.context], space.diode_verdicts.code[c.diode, c.context]
    )
