"""Substitutes for small boards worked out plainly: by name, one setting at a time.

Only figures, checks and declared choices are the engine's. What a choice changes, what that amounts to,
where a divider's parts come from, and the order of substitutes are written here once more.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from optimizer.catalog.parts import Parts
from optimizer.figures import evaluate
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.space import Space
from optimizer.search.spread.corners import judged_whole
from tests.search import whole
from tests.search.board_changes import (
    Bought,
    Setting,
    alike,
    change_of,
    cheapest,
    frozen,
    lost,
    new_of,
    old_of,
    positions,
    price,
)
from tests.search.boards import FAMILIES, SHOW, Case, missing


@dataclass
class Answer:
    """By change: the best rows as (names, positions changed, cost), the nearest, the check reached, and

    the op-amps and photodiodes that meet at all.
    """

    rows: dict[str, list[tuple[Any, set[str], float]]] = field(default_factory=dict)
    nearest: dict[str, Any] = field(default_factory=dict)
    reach: dict[str, int] = field(default_factory=dict)
    able: dict[str, list[set[str]]] = field(default_factory=dict)


Member = tuple[set[str], whole.Row]


def answer(one: Case) -> Answer:
    """Every choice evaluated, classified and ranked."""
    found = Answer()
    space, members = _members(one, found.reach)
    by = one.request.ranking.by
    for change, rows in members.items():
        meeting = [(changed, row) for changed, row in rows if min(row.margins) >= 0.0]
        found.rows[change] = _best(meeting, by, space)[:SHOW]
        found.able[change] = [{row.pair[place] for _, row in meeting} for place in (1, 0)]
        found.nearest[change] = _best([(set(), row) for _, row in rows], "margin", space)[0][0]
    return found


def served(one: Case, use: str) -> tuple[set[str], set[str]]:
    """Names of the parts that can serve in `use` as drop-ins, and of the others with values changed."""
    found: dict[str, set[str]] = {"drop-in": set(), "values": set()}
    place = {"photodiode": 0, "opamp": 2, "feedback_resistance": 7, "feedback_capacitance": 9}.get(use)
    for only in [None] if place is not None else _every_family(one, use):
        _, members = _members(one, {}, only, in_place=True)
        for change, names in found.items():
            for _, row in members.get(change, []):
                if min(row.margins) >= 0.0:
                    names.add(row.name[place] if place is not None else only[1][0])
    return found["drop-in"], found["values"] - found["drop-in"] - {None}


def _every_family(one: Case, use: str) -> list[tuple[str, Any]]:
    """(catalog, (name, maker)) of every family that fits where the divider's or bypass's is."""
    role, old = ("resistors" if use == "divider" else "capacitors"), old_of(one)[use]
    parts: Parts = getattr(one.catalogs, role)
    names = zip(parts.text["family"].tolist(), parts.text["maker"].tolist(), strict=True)
    return [(role, name) for name in names if not lost(one, role, name) and alike(one, role, old, name)]


Only = tuple[str, Any] | None
"""A catalog, and the one family of it that a divider may be bought from."""


def _members(
    one: Case, reached: dict[str, int], only: Only = None, *, in_place: bool = False
) -> tuple[Space, dict[str, list[Member]]]:
    """Every eligible setting by its change; `reached` takes the check that each change gets to.

    `in_place`: only what keeps the parts that are not gone, and comes from families that fit.
    """
    members: dict[str, list[Member]] = defaultdict(list)
    old = old_of(one)
    space, tables = _tables(one, old, only)
    for o in np.flatnonzero(~missing(one.catalogs.opamps, "opamps", one.gone)):
        for d in np.flatnonzero(~missing(one.catalogs.photodiodes, "photodiodes", one.gone)):
            if in_place and not _keeps(one, old, (int(o), int(d))):
                continue
            ways = (True,) if in_place else (False, True)
            every = _settings(one, old, (space, tables, ways), (int(o), int(d)))
            for change, changed, (reach, admitted), row in every:
                reached[change] = max(reached.get(change, -1), reach)
                if admitted:
                    members[change].append((changed, row))
    return space, members


def _keeps(one: Case, old: Setting, pair: tuple[int, int]) -> bool:
    """Whether a pair keeps what is not gone."""
    for role, row in zip(("opamp", "photodiode"), pair, strict=True):
        text = getattr(one.catalogs, f"{role}s").text
        name = (str(text["part"][row]), str(text["maker"][row]))
        if name != old[role] and not lost(one, f"{role}s", old[role]):
            return False
    return True


def _best(rows: list[Member], by: str, space: Space) -> list[tuple[Any, set[str], float]]:
    """One row a pair, its best; then the pairs in order: fewest changed positions first, always."""
    pairs: dict[Any, tuple[Any, Member]] = {}
    for changed, row in rows:
        key = (len(changed), *whole.ranked(row, by, space), *row.ties)
        if row.pair not in pairs or key < pairs[row.pair][0]:
            pairs[row.pair] = (key, (changed, row))
    order = sorted((one for _, one in pairs.values()), key=lambda one: _between(one, by, space))
    return [(row.name, changed, row.ranked["cost"]) for changed, row in order]


def _between(one: Member, by: str, space: Space) -> tuple[Any, ...]:
    return (len(one[0]), *whole.between(one[1], by, space))


Tables = list[dict[bool, Bought | None]]


def _tables(one: Case, old: Setting, only: Only) -> tuple[Space, Tables]:
    """The space with no gone family in it; by context, what its divider is bought from.

    False: the cheapest of all. True: the cheapest that fits the board, its own parts where they stay.
    """
    names = [name for role, name in one.gone if role in FAMILIES]
    asked = replace(
        one.request, space=replace(one.request.space, exclude=(*one.request.space.exclude, *names))
    )
    space = spaces.build_whole(asked, one.catalogs)
    x = space.contexts
    tables: Tables = []
    for row in range(x.size):
        if not x.divided[row]:
            tables.append({False: (None, None, 0.0), True: (None, None, 0.0)})
            continue
        pair = (float(x.top[row]), float(x.bottom[row]))
        tables.append({fitting: _bought(one, old, (pair, fitting), only) for fitting in (False, True)})
    return space, tables


def _bought(one: Case, old: Setting, wanted: tuple[tuple[float, float], bool], only: Only) -> Bought | None:
    """The board's own families where they can stay; else the cheapest, or the cheapest that fits."""
    pair, fitting = wanted
    stays = old["level"][1:] == pair and not lost(one, "resistors", old["divider"])
    resistor = _source(one, "resistors", set(pair), (old["divider"], stays, fitting), only)
    here = old["bypass"] is not None and not lost(one, "capacitors", old["bypass"])
    value = {one.request.space.divider.bypass}
    bypass = _source(one, "capacitors", value, (old["bypass"], here, fitting), only)
    if resistor is None or bypass is None:
        return None
    prices = [
        price(
            one, parts, int(np.flatnonzero((parts.text["family"] == n[0]) & (parts.text["maker"] == n[1]))[0])
        )
        for parts, n in ((one.catalogs.resistors, resistor), (one.catalogs.capacitors, bypass))
    ]
    return resistor, bypass, 2.0 * prices[0] + prices[1]


def _source(one: Case, role: str, wanted: set[float], how: tuple[Any, bool, bool], only: Only) -> Any:
    own, stays, fitting = how
    if stays:
        found = cheapest(one, role, wanted, lambda name: name == own)
        return found or cheapest(one, role, wanted, lambda _: True)
    if only is not None and only[0] == role:
        return cheapest(one, role, wanted, lambda name: name == only[1])
    must = fitting and own is not None
    return cheapest(one, role, wanted, lambda name: not must or alike(one, role, own, name))


def _settings(
    one: Case, old: Setting, compiled: tuple[Space, Tables, tuple[bool, ...]], pair: tuple[int, int]
) -> Iterator[tuple[str, set[str], tuple[int, bool], whole.Row]]:
    """Each setting of a pair: change, positions changed, check reached and whether it is admitted, row."""
    space, tables, ways = compiled
    by = one.request.ranking.by
    for fitting in ways:
        costs = [np.nan if table[fitting] is None else table[fitting][2] for table in tables]
        spreads = [_spread(one, table[fitting]) for table in tables]
        contexts = replace(space.contexts, cost=np.array(costs), spread=np.array(spreads))
        priced = replace(space, contexts=contexts)
        for choice in plain.every_choice(priced, *pair):
            with np.errstate(all="ignore"):
                judged = judged_whole(priced, plain.judge(priced, choice, by), by)
                figures = evaluate(priced.bench, spaces.settings(priced, choice)).figures
            table = judged.margin_columns
            for i in range(choice.opamp.size):
                bought = tables[int(choice.context[i])][fitting]
                if bought is None:
                    continue
                new = new_of(one, priced, choice, i, bought)
                change, changed = change_of(one, old, new), positions(one, old, new)
                if (change in ("drop-in", "values")) != fitting or frozen(one, old, new):
                    continue
                ranks = {name: float(figures[name][i]) for name in ("cost", "snr", "supply_current")}
                ranks["snr"] = -float(judged.primary[i]) if by == "snr" else ranks["snr"]
                row = whole._row(priced, one.catalogs, choice, i, (ranks, tuple(table[i].tolist())))
                yield change, changed, (int(judged.reach[i]), bool(judged.admitted[i])), row


def _spread(one: Case, bought: Bought | None) -> float:
    """The tolerance of a divider's resistors; the tempco of the boards is 0."""
    if bought is None or bought[0] is None:
        return 0.0
    parts = one.catalogs.resistors
    here = (parts.text["family"] == bought[0][0]) & (parts.text["maker"] == bought[0][1])
    return float(parts.number["tolerance"][np.flatnonzero(here)[0]])


def each_gone(one: Case) -> Iterator[tuple[str, Case]]:
    """The case with each part of the candidate gone in turn, and for what it is used first."""
    dead = {
        (role, f"{maker}/{part}")
        for role in ("opamps", "photodiodes")
        for maker, part, status in zip(
            *(getattr(one.catalogs, role).text[column] for column in ("maker", "part", "status")), strict=True
        )
        if status == "obsolete"
    }
    old, seen = old_of(one), set()
    for use, role, key in (
        ("photodiode", "photodiodes", "photodiode"),
        ("opamp", "opamps", "opamp"),
        ("feedback_resistance", "resistors", "resistor"),
        ("feedback_capacitance", "capacitors", "capacitor"),
        ("divider", "resistors", "divider"),
        ("bypass", "capacitors", "bypass"),
    ):
        if old[key] is not None and (role, old[key]) not in seen:
            seen.add((role, old[key]))
            name, maker = old[key]
            yield use, replace(one, gone=frozenset({(role, f"{maker}/{name}")} | dead), keep=frozenset())
