"""Random requests and catalogs for the search: small ones to evaluate whole, full ones to sample."""

from __future__ import annotations

import tempfile
from collections.abc import Mapping
from dataclasses import replace
from functools import lru_cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from optimizer import study
from optimizer.catalog.parts import Catalogs, Parts
from optimizer.figures import evaluate
from optimizer.request.types import RANKINGS, Ambient, Converter, Request, Targets
from optimizer.search import space as spaces
from optimizer.search.plain import judge
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from tests.benchmarks.synthetic import write_catalogs, write_request

KINDS = ("easy-by-cost", "dual-by-cost", "fast-by-cost")
SERIES = ("E3", "E6", "E12")


@lru_cache(maxsize=16)
def drawn(seed: int, kind: str, opamps: int, photodiodes: int) -> tuple[Request, Catalogs]:
    """A synthetic request of `kind` with synthetic catalogs."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        write_catalogs(folder, opamps=opamps, photodiodes=photodiodes, seed=seed)
        loaded = study.load(write_request(folder, kind))
    return loaded.request, loaded.catalogs


def some(parts: Parts, rows: NDArray[np.int64]) -> Parts:
    """The parts at `rows`."""

    def columns(table: Mapping[str, NDArray[np.generic]]) -> dict[str, NDArray[np.generic]]:
        return {name: column[rows] for name, column in table.items()}

    points = {name: tuple(column[i] for i in rows) for name, column in parts.points.items()}
    return replace(
        parts,
        text=columns(parts.text),
        number=columns(parts.number),
        points=points,
        assumed=columns(parts.assumed),
    )


def varied(rng: np.random.Generator, request: Request) -> Request:
    """`request` with its supply, ambient, converter, load and other circumstances drawn anew."""
    light, supply = request.light, request.supply
    factor = 10.0 ** rng.uniform(-1.0, 1.0)
    return replace(
        request,
        quantity=int(rng.choice([1, 50, 500])),
        light=replace(
            light,
            weakest=light.weakest * factor,
            strongest=light.strongest * factor,
            background=float(rng.choice([0.0, 0.3])) * light.weakest,
        ),
        supply=replace(
            supply,
            tolerance=float(rng.choice([0.0, 0.05])),
            guard=float(rng.choice([0.0, 0.05])),
            load=[None, 10e3][rng.integers(2)],
            load_to=[0.0, None][rng.integers(2)],
        ),
        ambient=Ambient(-20.0, 60.0, True) if rng.random() < 0.5 else Ambient(),
        converter=_converter(rng, request),
    )


def _converter(rng: np.random.Generator, request: Request) -> Converter | None:
    high, low = request.supply.high, request.supply.low
    return [None, Converter(14, low, high, True), Converter(16, max(low, 0.0), 0.8 * high)][rng.integers(3)]


def small(seed: int) -> tuple[Request, Catalogs]:
    """A request and catalogs small enough to evaluate every combination, with targets near what is there."""
    rng = np.random.default_rng(seed)
    request, catalogs = drawn(int(rng.integers(6)), str(rng.choice(KINDS)), 90, 70)
    low = 10.0 ** rng.uniform(3.5, 6.5)
    small_cap = 10.0 ** rng.uniform(-12.3, -10.5)
    old = request.space
    space = replace(
        old,
        divider=replace(old.divider, series="E3", low=10e3, high=float(rng.choice([22e3, 47e3]))),
        resistance=(low, low * float(rng.choice([3.0, 10.0, 30.0]))),
        capacitance=(small_cap, small_cap * float(rng.choice([3.0, 10.0]))),
        no_capacitor=bool(rng.random() < 0.8),
        low_pass=_low_passes(rng),
        dark_on_rail=bool(rng.random() < 0.3),
    )
    ranking = replace(
        request.ranking,
        by=str(rng.choice(RANKINGS)),
        show=int(rng.integers(1, 8)),
        comfort=float(rng.choice([0.05, 0.3, 0.5, 1.0])),
    )
    request = replace(varied(rng, request), space=space, ranking=ranking, targets=Targets())
    catalogs = _thinned(rng, catalogs)
    return with_targets(rng, request, catalogs, keep=0.7), catalogs


def _low_passes(rng: np.random.Generator) -> tuple[float | None, ...]:
    cutoff = float(10.0 ** rng.uniform(3.0, 6.0))
    return [(None,), (cutoff, None), (cutoff,), (cutoff, 3.0 * cutoff)][rng.integers(4)]


def _thinned(rng: np.random.Generator, catalogs: Catalogs) -> Catalogs:
    """A few parts, and a few families in coarse series."""
    size = catalogs.resistors.size
    resistors = some(catalogs.resistors, np.sort(rng.choice(size, 4, replace=False)))
    series = np.where(resistors.text["series"] == "list", "list", rng.choice(SERIES, 4))
    resistors = replace(resistors, text={**resistors.text, "series": series})
    size = catalogs.capacitors.size
    bypass = catalogs.capacitors.number["to"] >= 100e-9
    kept = np.union1d(rng.choice(size, 3, replace=False), rng.choice(np.flatnonzero(bypass), 1))
    capacitors = some(catalogs.capacitors, kept)
    opamps = some(catalogs.opamps, np.sort(rng.choice(catalogs.opamps.size, 16, replace=False)))
    diodes = some(catalogs.photodiodes, np.sort(rng.choice(catalogs.photodiodes.size, 12, replace=False)))
    return replace(catalogs, opamps=opamps, photodiodes=diodes, resistors=resistors, capacitors=capacitors)


def sampled(rng: np.random.Generator, space: Space, count: int) -> Choice:
    """Random settings of pairs whose parts pass alone (all pairs where none does)."""
    opamps = np.flatnonzero(space.opamp_verdicts.alone == PASSES)
    diodes = np.flatnonzero(space.diode_verdicts.alone == PASSES)
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    return Choice(
        rng.choice(opamps if opamps.size else np.arange(space.opamps.gbw.size), count),
        rng.choice(diodes if diodes.size else np.arange(space.diodes.price.size), count),
        *(rng.integers(size, size=count) for size in sizes),
    )


def with_targets(rng: np.random.Generator, request: Request, catalogs: Catalogs, *, keep: float) -> Request:
    """`request` with targets at and around the figures of one random eligible setting.

    Each is stated with probability `keep`; most are eased a little, some are made harder.
    """
    space = spaces.build(replace(request, targets=Targets(bandwidth=1.0)), catalogs)
    if not (space.contexts.size and space.resistors.size and space.capacitors.size):
        return request
    with np.errstate(all="ignore"):
        choice = sampled(rng, space, 4000)
        judged = judge(space, choice, "cost")
        good = np.flatnonzero(judged.reach == PASSES)
        if not good.size:
            return request
        row = choice.take(good[[rng.integers(good.size)]])
        figures = evaluate(space.bench, spaces.settings(space, row)).figures
    return replace(request, targets=_around(rng, figures, keep))


AROUND = (
    "bandwidth",
    "snr",
    "dynamic_range",
    "phase_margin",
    "peaking",
    "offset",
    "supply_current",
    "cost",
)


def _around(rng: np.random.Generator, figures: Mapping[str, NDArray[np.float64]], keep: float) -> Targets:
    stated: dict[str, float] = {}
    for name in (
        "bandwidth",
        "snr",
        "dynamic_range",
        "phase_margin",
        "peaking",
        "offset",
        "supply_current",
        "cost",
    ):
        value = float(figures[name][0])
        if rng.random() > keep or not np.isfinite(value):
            continue
        ease = float(rng.choice([0.9, 1.0, 1.1, 1.3, 2.0]))
        if name in ("snr", "dynamic_range"):
            stated[name] = value - 20.0 * float(np.log10(ease))
        elif name == "phase_margin":
            stated[name] = max(value - 40.0 * (ease - 1.0), 1.0)
        elif name == "bandwidth":
            stated[name] = value / ease
        elif name == "peaking":
            stated[name] = value * ease + 0.1
        else:
            stated[name] = value * ease
    if "bandwidth" in stated and rng.random() < 0.4:
        stated["slew"] = float(rng.choice([0.5, 1.5]))
    return Targets(**stated)
