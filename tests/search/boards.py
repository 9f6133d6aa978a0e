"""Boards with something withdrawn, small enough to evaluate every choice."""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import asdict, dataclass, replace
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.record.build import plain as as_json
from optimizer.request.types import WIRINGS, Divider, Request, Tolerance
from optimizer.search import assemble, plain
from optimizer.search import space as spaces
from optimizer.search.change.positions import Fitted, Out, Plan, board_of
from optimizer.search.space import Space
from optimizer.search.spread.corners import judged_whole
from tests.search import made
from tests.search.instances import sampled, some, with_targets

OUTLINES = ("P-1", "P-2", "")
ODDS = (0.75, 0.17, 0.08)
FAMILY_ODDS = (0.5, 0.4, 0.1)
SHOW = 3
KEYS = ("package", "pinout", "maker")


@dataclass(frozen=True)
class Case:
    """A candidate of the record, what is gone, and the catalogs as they are now."""

    request: Request
    catalogs: Catalogs
    candidate: dict[str, Any]
    gone: frozenset[tuple[str, str]]  # (catalog, maker/name)
    keep: frozenset[str]


def case(seed: int) -> Case:
    """The first case from `seed` on that has a candidate."""
    while True:
        found = _case(np.random.default_rng(seed))
        if found is not None:
            return found
        seed += 1000


def _case(rng: np.random.Generator) -> Case | None:
    asked, everything = _request(rng), _catalogs(rng)
    asked = with_targets(rng, asked, everything, keep=float(rng.choice([0.3, 0.7])))
    candidate = _candidate(rng, asked, everything)
    if candidate is None:
        return None
    gone = _gone(rng, candidate, everything)
    if rng.random() < 0.3:
        everything = replace(everything, resistors=_repriced(rng, everything.resistors))
    if rng.random() < 0.4:
        everything = _without(everything, gone)
    if rng.random() < 0.3:
        candidate = _as_before_outlines(candidate)
        # which families a divider came from is then known only while they are there
        if candidate["reference"]["kind"] == "divider" and any(role in FAMILIES for role, _ in gone):
            return None
    keep = frozenset(_kept(rng, candidate, gone))
    return Case(asked, everything, candidate, gone, keep)


FAMILIES = ("resistors", "capacitors")


def _repriced(rng: np.random.Generator, parts: Parts) -> Parts:
    """The families after prices have moved, so that a board's own need not be the cheapest."""
    prices = tuple(((1.0, float(rng.choice([0.01, 0.02, 0.1]))),) for _ in range(parts.size))
    return replace(parts, points={**parts.points, "price": prices})


def _request(rng: np.random.Generator) -> Request:
    def pick(*choices: Any) -> Any:
        return choices[int(rng.integers(len(choices)))]

    return made.request(
        quantity=pick(1, 100),
        supply={"low": pick(0.0, 0.0, -5.0)},
        space={
            "references": pick(("divider",), ("ground", "divider")),
            "wirings": pick(WIRINGS, WIRINGS, WIRINGS[:2], WIRINGS[1::2]),
            "low_pass": pick((None,), (None, 30e3)),
            "dark_on_rail": pick(False, True),
            "no_capacitor": pick(False, True, True),
            "divider": Divider(series="E3", low=10e3, high=22e3, bypass=100e-9),
            "status": pick(("active",), ("active", "obsolete")),
        },
        ranking={"by": pick("cost", "margin", "snr", "supply_current"), "comfort": pick(0.05, 0.3, 0.5)},
        tolerance=pick(
            *[Tolerance()] * 8, Tolerance(method="corners", gbw=0.2, dark_current=0.5, stated=True)
        ),
    )


def _catalogs(rng: np.random.Generator) -> Catalogs:
    def pick(*choices: Any) -> Any:
        return choices[int(rng.integers(len(choices)))]

    def outline() -> dict[str, str]:
        if rng.random() < 0.12:
            return {"package": "", "pinout": ""}
        return {"package": str(rng.choice(OUTLINES, p=ODDS)), "pinout": str(rng.choice(OUTLINES, p=ODDS))}

    amps = [
        made.opamp(
            part=f"YZA-{k}",
            maker=f"Maker {'ABC'[k % 3]}",
            channels=pick(1.0, 1.0, 2.0),
            price=[(1.0, pick(0.5, 1.0, 2.0))],
            gbw=pick(3e6, 10e6, 20e6),
            voltage_noise=pick(4e-9, 8e-9),
            quiescent_current=pick(0.5e-3, 1e-3),
            stock=pick(made.NAN, made.NAN, 500.0, 50.0),
            status=pick("active", "active", "active", "obsolete"),
            min_gain=pick(1.0, 1.0, 1.0, 5.0),
            **outline(),
        )
        for k in range(5)
    ]
    sensors = [
        made.diode(
            part=f"YZD-{k}",
            price=[(1.0, pick(1.0, 3.0))],
            capacitance=pick([(0.0, 20e-12)], [(0.0, 40e-12)]),
            status=pick("active", "active", "active", "obsolete"),
            **outline(),
        )
        for k in range(3)
    ]
    return made.catalogs(amps, sensors, *_families(rng))


def _families(rng: np.random.Generator) -> tuple[list[made.Row], list[made.Row]]:
    """Families of resistors and of capacitors."""

    def pick(*choices: Any) -> Any:
        return choices[int(rng.integers(len(choices)))]

    def several(*values: float) -> list[float]:
        kept = [value for value in values if rng.random() < 0.7]
        return kept or [values[0]]

    resistors = [
        made.resistor(
            family=f"YZR-{k}",
            maker=pick("Maker C", "Maker D", ""),
            package=str(rng.choice(OUTLINES, p=FAMILY_ODDS)),
            price=[(1.0, pick(0.01, 0.02, 0.1))],
            parasitic_capacitance=pick(0.05e-12, 0.1e-12),
            tolerance=pick(0.01, 0.05),
            tempco=0.0,
            **made.listed(*several(10e3, 22e3), *several(220e3, 470e3, 1e6)),
        )
        for k in range(3)
    ]
    capacitors = [
        made.capacitor(
            family=f"YZC-{k}",
            package=str(rng.choice(OUTLINES, p=FAMILY_ODDS)),
            price=[(1.0, pick(0.01, 0.03, 0.3))],
            tolerance=pick(0.02, 0.1),
            **made.listed(*several(1e-12, 2.2e-12, 4.7e-12), *several(100e-9)),
        )
        for k in range(3)
    ]
    return resistors, capacitors


def _candidate(rng: np.random.Generator, asked: Request, every: Catalogs) -> dict[str, Any] | None:
    """A setting as a record holds it: one that meets where there is one, else an eligible one."""
    space = spaces.build_whole(asked, every)
    if not (space.contexts.size and space.resistors.size and space.capacitors.size):
        return None
    with np.errstate(all="ignore"):
        choice = sampled(rng, space, 3000)
        judged = judged_whole(space, plain.judge(space, choice, "cost"), "cost")
    good = np.flatnonzero(judged.meets)
    good = good if good.size else np.flatnonzero(judged.admitted)
    if not good.size:
        return None
    row = choice.take(np.array([rng.choice(good)]))
    written = as_json(asdict(assemble.candidates(space, every, row)[0]))
    return dict(json.loads(json.dumps(written | written.pop("outlines"))))


def uses_of(candidate: dict[str, Any]) -> Iterator[tuple[str, str, str]]:
    """(use, catalog, maker/name) of each part of a candidate."""
    yield "photodiode", "photodiodes", f"{candidate['photodiode_maker']}/{candidate['photodiode']}"
    yield "opamp", "opamps", f"{candidate['opamp_maker']}/{candidate['opamp']}"
    for use, role, name in (
        ("feedback_resistance", "resistors", "resistor"),
        ("feedback_capacitance", "capacitors", "capacitor"),
        ("divider", "resistors", "divider"),
        ("bypass", "capacitors", "bypass"),
    ):
        if candidate.get(f"{name}_family") is not None:
            yield use, role, f"{candidate.get(f'{name}_maker') or ''}/{candidate[f'{name}_family']}"


def _gone(rng: np.random.Generator, candidate: dict[str, Any], every: Catalogs) -> frozenset[tuple[str, str]]:
    used = [(role, name) for _, role, name in uses_of(candidate)]
    picked = {used[int(rng.integers(len(used)))] for _ in range(int(rng.choice([1, 1, 2])))}
    for role in ("opamps", "photodiodes"):
        parts: Parts = getattr(every, role)
        dead = np.flatnonzero(parts.text["status"] == "obsolete")
        picked |= {(role, f"{parts.text['maker'][row]}/{parts.text['part'][row]}") for row in dead}
    return frozenset(picked)


def _without(every: Catalogs, gone: frozenset[tuple[str, str]]) -> Catalogs:
    """The catalogs after what is gone has vanished from them."""
    kept = {
        role: some(getattr(every, role), np.flatnonzero(~missing(getattr(every, role), role, gone)))
        for role in ("opamps", "photodiodes", "resistors", "capacitors")
    }
    return replace(every, **kept)


def missing(parts: Parts, role: str, gone: frozenset[tuple[str, str]]) -> Any:
    column = "family" if role in FAMILIES else "part"
    names = zip(parts.text["maker"], parts.text[column], strict=True)
    return np.array([(role, f"{maker}/{name}") in gone for maker, name in names], dtype=bool)


def _as_before_outlines(candidate: dict[str, Any]) -> dict[str, Any]:
    """The candidate in a record of an earlier version, which names no outlines."""
    known = ("photodiode_maker", "opamp_maker", "resistor_family", "capacitor_family")
    new = {k for k in candidate if k.endswith(KEYS) or k in ("divider_family", "bypass_family")}
    return {k: v for k, v in candidate.items() if k not in new - set(known)}


def _kept(
    rng: np.random.Generator, candidate: dict[str, Any], gone: frozenset[tuple[str, str]]
) -> Iterator[str]:
    lost = {use for use, role, name in uses_of(candidate) if (role, name) in gone}
    for position in (
        "photodiode",
        "opamp",
        "wiring",
        "reference",
        "feedback_resistance",
        "feedback_capacitance",
    ):
        if position not in lost and rng.random() < 0.08:
            yield position


def plan_of(one: Case, space: Space) -> Plan:
    """The case as the search takes it."""
    board = board_of(space, one.catalogs, one.candidate)
    rows = {
        role: missing(getattr(one.catalogs, role), role, one.gone)
        for role in ("opamps", "photodiodes", "resistors", "capacitors")
    }
    roles = {"photodiode": "photodiodes", "opamp": "opamps", "feedback_resistance": "resistors"}
    roles |= {"feedback_capacitance": "capacitors", "divider": "resistors", "bypass": "capacitors"}
    lost = {use for use, part in board.parts.items() if _is_lost(roles[use], part, one)}
    return Plan(board, frozenset(lost), Out(**rows), one.keep)


def _is_lost(role: str, part: Fitted, one: Case) -> bool:
    if part.maker is not None:
        return (role, f"{part.maker}/{part.name}") in one.gone
    return any(r == role and name.split("/")[1] == part.name for r, name in one.gone)
