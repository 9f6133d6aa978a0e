"""A board as planning returns it: real candidates of the starter's catalogs, put together by hand.

Six channels of three kinds: two gates on their own dividers in one dual op-amp, three colour channels and one
ambient channel around a shared level, whose five amplifiers leave one of three duals spare. The photodiode is
bought up to a price break, and the supply current is just below its limit. `planned()` has five plans.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from typing import Any

from optimizer.board.prices import in_cents, purchase
from optimizer.catalog.parts import Source
from optimizer.planning.outline import Costs, Limits, Outline, Wanted
from optimizer.planning.plan import (
    CATALOGS,
    INFEASIBLE,
    NOTHING,
    OPTIMAL,
    POOLS,
    TOTALS,
    Alone,
    BoardPlan,
    Build,
    Hopeless,
    Level,
    LineItem,
    Package,
    Place,
    Planned,
    Pool,
    Refusal,
    Relaxation,
    Total,
)
from optimizer.request.types import Light, Request, Targets
from optimizer.search import shortlist
from optimizer.search.result import Candidate, Outcome
from optimizer.study import Study, load

QUANTITY = 150
LEVEL = "level 1"
COUNTS = {"gate": 2, "colour": 3, "ambient": 1}
LIMITS = Limits(cost=9.5, supply_current=2.2e-3, area=500e-6, line_items=14)
COSTS = Costs(line_item=15.0, placement=0.01)
AREAS = {
    **{"SMD 3x2": 8e-6, "SMD 4x3": 14e-6, "SMD 5x4": 23e-6, "SOT-23-5": 9e-6, "MSOP-8": 15e-6},
    **{"SOIC-8": 30e-6, "0603": 3e-6, "1206": 8e-6},
}
"""Areas by package, invented here: the starter's catalogs state none."""

SMALLEST = {"YZA-12": "YZA-11", "YZA-22": "YZA-21"}
"""The smallest package of the same amplifier."""

FOLDER = Path(__file__).parents[2] / "optimizer" / "starter"


@cache
def studies() -> Mapping[str, Study]:
    """The studies of the three kinds of channel, over the starter's catalogs."""
    study = load(FOLDER / "request.toml")
    return {
        name: replace(study, request=request, request_source=Source(f"{name}.toml", "cd" * 32, 0))
        for name, request in _requests(study.request)
    }


def _requests(starter: Request) -> Iterator[tuple[str, Request]]:
    both = {"phase_margin": 60.0, "supply_current": 3e-3}
    colour = {
        "light": Light(660e-9, "power", 10e-9, 1e-6, 5e-9),
        "targets": Targets(bandwidth=2e3, snr=49.4, offset=40e-3, **both),
    }
    ambient = {
        "light": Light(550e-9, "power", 1e-9, 0.5e-6),
        "targets": Targets(bandwidth=200.0, snr=40.0, **both),
    }
    changes: Mapping[str, tuple[str, Mapping[str, Any]]] = {
        "gate": ("rising-biased", {}),
        "colour": ("rising-unbiased", colour),
        "ambient": ("rising-unbiased", ambient),
    }
    for name, (wiring, own) in changes.items():
        space = replace(starter.space, wirings=(wiring,), references=("divider",))
        path, ranking = Path("made-up") / f"{name}.toml", replace(starter.ranking, show=20)
        usual = {"name": name, "path": path, "quantity": QUANTITY, "space": space, "ranking": ranking}
        yield name, replace(starter, **usual | own)


def outline(**changes: Any) -> Outline:
    """The board file that the plans are made for, with `changes`."""
    channels = tuple(Wanted(name, f"{name}.toml", count, studies()[name]) for name, count in COUNTS.items())
    usual = Outline(
        name="sorting line, optical board",
        path=Path("made-up/board.toml"),
        source=Source("board.toml", "ef" * 32, 0),
        channels=channels,
        quantity=QUANTITY,
        currency="EUR",
        limits=LIMITS,
        costs=COSTS,
    )
    return replace(usual, **changes)


@cache
def _outcome(channel: str) -> Outcome:
    study = studies()[channel]
    return shortlist(study.request, study.catalogs)


def candidate(channel: str, photodiode: str, opamp: str) -> Candidate:
    """The best setting of a pair in the shortlist of a channel, which has it."""
    return next(
        one for one in _outcome(channel).candidates if (one.photodiode, one.opamp) == (photodiode, opamp)
    )


@dataclass(frozen=True, slots=True)
class Layout:
    """A board by hand: builds, the part of each package with what it serves, and shared levels."""

    builds: tuple[Build, ...]
    packages: tuple[Package, ...]
    levels: tuple[Level, ...]


def layout(gate: tuple[str, str], colour: tuple[str, str], ambient: tuple[str, str]) -> Layout:
    """A board of (photodiode, op-amp) for each kind; colour and ambient share a level of their op-amp."""
    chosen = {"gate": gate, "colour": colour, "ambient": ambient}
    builds = tuple(build(name, *pair, tuple(_copies(name))) for name, pair in chosen.items())
    _, shared, other = builds
    assert shared.candidate.reference.top == other.candidate.reference.top
    wanted = [(pair[1], Place(name, copy)) for name, pair in chosen.items() for copy in _copies(name)]
    return Layout(builds, tuple(_packed([*wanted, (colour[1], Place(None, 0, LEVEL))])), (_shared(shared),))


def build(channel: str, photodiode: str, opamp: str, copies: tuple[int, ...]) -> Build:
    """Copies of a channel, served by a package; the candidate has the smallest of the same amplifier."""
    level = None if channel == "gate" else LEVEL
    one = candidate(channel, photodiode, SMALLEST.get(opamp, opamp))
    return Build(channel, copies, one, level, opamp, one.opamp_maker)


def _copies(channel: str) -> range:
    return range(1, COUNTS[channel] + 1)


def _shared(one: Build) -> Level:
    reference, families = one.candidate.reference, one.candidate.outlines
    return Level(
        LEVEL,
        reference.voltage,
        reference.top or 0.0,
        reference.bottom or 0.0,
        100e-9,
        families["divider_family"] or "",
        families["bypass_family"] or "",
        one.opamp,
        ("colour", "ambient"),
    )


def _packed(wanted: Iterable[tuple[str, Place]]) -> Iterator[Package]:
    """Packages of each part, filled in turn."""
    opamps = studies()["gate"].catalogs.opamps
    places: dict[str, list[Place]] = {}
    for part, place in wanted:
        places.setdefault(part, []).append(place)
    for part, every in places.items():
        row = opamps.text["part"].tolist().index(part)
        holds, maker = int(opamps.number["channels"][row]), str(opamps.text["maker"][row])
        for first in range(0, len(every), holds):
            yield Package(part, maker, holds, tuple(every[first : first + holds]))


Key = tuple[str, str, float | None]


def bill(board: Layout) -> tuple[LineItem, ...]:
    """The parts of a board, each bought at the price that comes cheapest."""
    pieces: Counter[Key] = Counter(("opamp", package.opamp, None) for package in board.packages)
    for built in board.builds:
        for key in _parts_of(built):
            pieces[key] += len(built.copies)
    for level in board.levels:
        pieces.update(
            [
                ("resistor", level.resistor_family, level.top),
                ("resistor", level.resistor_family, level.bottom),
                ("capacitor", level.capacitor_family, level.bypass),
            ]
        )
    roles = ("photodiode", "opamp", "resistor", "capacitor")
    ordered = sorted(pieces, key=lambda key: (roles.index(key[0]), key[1], key[2] or 0.0))
    return tuple(_line(key, pieces[key]) for key in ordered)


def _parts_of(built: Build) -> Iterator[Key]:
    one = built.candidate
    yield "photodiode", one.photodiode, None
    yield "resistor", one.resistor_family, one.feedback_resistance
    if one.capacitor_family:
        yield "capacitor", one.capacitor_family, one.feedback_capacitance
    if built.level is None and one.reference.kind == "divider":
        yield "resistor", one.outlines["divider_family"] or "", one.reference.top
        yield "resistor", one.outlines["divider_family"] or "", one.reference.bottom
        yield "capacitor", one.outlines["bypass_family"] or "", 100e-9


def _line(key: Key, pieces: int) -> LineItem:
    role, part, value = key
    parts = getattr(studies()["gate"].catalogs, f"{role}s")
    row = parts.text["part" if "part" in parts.text else "family"].tolist().index(part)
    package = str(parts.text["package"][row])
    bought = purchase(parts.points["price"][row], QUANTITY, pieces, None)
    assert bought is not None
    return LineItem(
        role,
        part,
        str(parts.text["maker"][row]),
        value,
        package,
        pieces,
        bought.quantity,
        bought.unit,
        bought.cents / 100,
        AREAS[package],
    )


def plan(board: Layout, rank: int = 1, *, wanted: Outline | None = None, **changes: Any) -> BoardPlan:
    """The plan of a board for `wanted`, its totals worked out here, with `changes`."""
    wanted = wanted or outline()
    lines = bill(board)
    cost = _cents(lines, wanted.costs)
    totals = tuple(_totals(board, lines, cost, wanted.limits))
    limited = [total for total in totals if total.margin is not None]
    usual = BoardPlan(
        rank,
        board.builds,
        board.packages,
        board.levels,
        lines,
        totals,
        min(limited, key=lambda total: total.margin or 0.0).name if limited else None,
        cost,
        cost,
        CATALOGS,
    )
    return replace(usual, **changes)


def _cents(lines: tuple[LineItem, ...], costs: Costs) -> int:
    """Parts, line items and placements of the whole build."""
    placed = sum(line.pieces for line in lines) * in_cents(costs.placement * QUANTITY)
    return sum(in_cents(line.cost) for line in lines) + len(lines) * in_cents(costs.line_item) + placed


def _totals(board: Layout, lines: tuple[LineItem, ...], cost: int, limits: Limits) -> Iterator[Total]:
    opamps = studies()["gate"].catalogs.opamps
    quiescent = dict(
        zip(opamps.text["part"].tolist(), opamps.number["quiescent_current"].tolist(), strict=True)
    )
    levels = {one.level: one.candidate for one in board.builds if one.level is not None}
    own = [one.candidate for one in board.builds if one.level is None for _ in one.copies]
    dividers = [*own, *levels.values()]
    values: Mapping[str, float] = {
        "cost": cost / 100 / QUANTITY,
        "supply_current": sum(one.amplifiers * quiescent[one.opamp] for one in board.packages)
        + sum(5.0 / ((one.reference.top or 0.0) + (one.reference.bottom or 0.0)) for one in dividers),
        "area": sum(line.pieces * (line.area or 0.0) for line in lines),
        "line_items": len(lines),
        "opamp_parts": len({package.opamp for package in board.packages}),
        "packages": len(board.packages),
        "placements": sum(line.pieces for line in lines),
    }
    for name in TOTALS:
        yield Total(name, values[name], getattr(limits, name, None))


FIVE = (
    {"gate": ("YZD-01", "YZA-22"), "colour": ("YZD-01", "YZA-12"), "ambient": ("YZD-01", "YZA-12")},
    {"gate": ("YZD-01", "YZA-22"), "colour": ("YZD-01", "YZA-12"), "ambient": ("YZD-03", "YZA-12")},
    {"gate": ("YZD-01", "YZA-21"), "colour": ("YZD-01", "YZA-12"), "ambient": ("YZD-01", "YZA-12")},
    {"gate": ("YZD-03", "YZA-22"), "colour": ("YZD-01", "YZA-12"), "ambient": ("YZD-01", "YZA-12")},
    {"gate": ("YZD-01", "YZA-22"), "colour": ("YZD-07", "YZA-12"), "ambient": ("YZD-01", "YZA-12")},
)


def layouts() -> tuple[Layout, ...]:
    """Five boards with different photodiodes or op-amps."""
    return tuple(layout(**pairs) for pairs in FIVE)


@cache
def plans() -> tuple[BoardPlan, ...]:
    """Their plans, the cheapest first."""
    every = sorted((plan(board) for board in layouts()), key=lambda one: one.cost)
    scopes = (CATALOGS, *[POOLS] * (len(every) - 1))
    return tuple(
        replace(one, rank=rank, proven=scope)
        for rank, (one, scope) in enumerate(zip(every, scopes, strict=True), 1)
    )


def pools() -> tuple[Pool, ...]:
    """What was looked at: one pool complete, one cut, one cut by nobody knows how much."""
    return (
        Pool("gate", 1_234_567_890, 48, 312, complete=True),
        Pool("colour", 987_654_321, 48, 1_500, complete=False, left_out=23_456),
        Pool("ambient", 987_654_321, 48, 1_500, complete=False, left_out=None),
    )


def planned(**changes: Any) -> Planned:
    """Five plans, the first proven over everything that the requests admit, with `changes`."""
    first = plans()[0]
    usual = Planned(
        OPTIMAL,
        plans(),
        tuple(replace(pool, complete=True, left_out=0) for pool in pools()),
        "highs",
        2.345,
        rounds=2,
        floor=first.cost,
        alone=Alone(first.cost + 31_250, 15, 6, ("line_items",)),
    )
    return replace(usual, **changes)


@cache
def hopeless() -> Hopeless:
    """The ambient channel, asked for more than any part can do."""
    study = studies()["ambient"]
    targets = replace(study.request.targets, snr=58.0)
    found = shortlist(replace(study.request, targets=targets), study.catalogs)
    assert not found.candidates
    assert found.near_misses
    near = found.near_misses[:3]
    return Hopeless("ambient", "ambient.toml", found.impossible, found.blocking, near, found.dropped)


def refused(refusal: Refusal | None = None, **changes: Any) -> Planned:
    """No plan: limits and channels in conflict, and what each limit would have to be."""
    usual = Refusal(
        limits=("cost", "line_items"),
        channels=("gate", "colour"),
        smallest=True,
        relaxations=(
            Relaxation("cost", 9.5, 9.83, proven=True),
            Relaxation("supply_current", 2.2e-3, None, proven=True),
            Relaxation("area", 500e-6, None, proven=False),
            Relaxation("line_items", 14, 15, proven=False),
        ),
    )
    return planned(status=INFEASIBLE, plans=(), alone=None, refusal=refusal or usual, **changes)


def nothing_found(**changes: Any) -> Planned:
    """No plan within the time, which proves nothing."""
    return planned(**{"status": NOTHING, "plans": (), "alone": None, "rounds": 0, "floor": None} | changes)
