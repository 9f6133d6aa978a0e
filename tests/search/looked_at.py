"""What `whynot` must find, by evaluating every setting of every pair in plain Python.

A part that the request refuses is let in by changing its catalog row, not its verdict.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import isnan, nan

import numpy as np

from optimizer import margins
from optimizer.catalog.parts import Catalogs, Parts
from optimizer.figures import CHECKS, evaluate
from optimizer.request.types import Request
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.inquiry.best import Best
from optimizer.search.inquiry.finding import Finding
from optimizer.search.inquiry.lookup import Part, every
from optimizer.search.inquiry.whynot import whynot
from optimizer.search.roles import PASSES
from optimizer.search.space import Space
from optimizer.vocabulary import VOCABULARY
from tests.search.instances import small, some
from tests.search.made import awkward
from tests.search.whole import Name, Row, between, named, ranked, rows_of

MOST = 120_000
"""Settings of the pairs of an instance; larger ones are left out, to keep the suite short."""
SEEN: Counter[str] = Counter()
ACTIVE = ("opamps", "photodiodes")
ACTIVE_STATUS, NEVER_COLD, NEVER_HOT = "active", -273.0, 1000.0


@dataclass(frozen=True)
class Setting:
    """One eligible setting: its pair, its row for the contract's order, and the value of each target."""

    pair: tuple[int, int]
    row: Row
    values: dict[str, float]


def instance(seed: int) -> tuple[Request, Catalogs]:
    """A few parts, some of them with spoilt values, and a request for them."""
    if seed % 2:
        return awkward(seed)
    rng = np.random.default_rng(seed)
    request, catalogs = small(seed)
    opamps = some(catalogs.opamps, np.sort(rng.choice(catalogs.opamps.size, 4, replace=False)))
    diodes = some(catalogs.photodiodes, np.sort(rng.choice(catalogs.photodiodes.size, 4, replace=False)))
    return request, replace(catalogs, opamps=opamps, photodiodes=diodes)


def subjects(seed: int, catalogs: Catalogs) -> tuple[Part, ...]:
    """One part, or a pair of parts of different roles."""
    rng = np.random.default_rng(seed)
    parts = list(every(catalogs))
    roles = rng.permutation(["opamps", "photodiodes", "opamps", "photodiodes", "resistors", "capacitors"])
    wanted = list(dict.fromkeys(roles.tolist()))[: int(rng.integers(1, 3))]
    chosen = []
    for role in wanted:
        ours = [part for part in parts if part.role == role]
        chosen.append(ours[int(rng.integers(len(ours)))])
    return tuple(chosen)


def let_in(parts: Parts, row: int) -> Parts:
    """`parts` with one row that nothing but its electrical values can refuse."""
    status, number = parts.text["status"].copy(), {name: c.copy() for name, c in parts.number.items()}
    status = status.astype(f"<U{max(status.dtype.itemsize // 4, len(ACTIVE_STATUS))}")
    status[row] = ACTIVE_STATUS
    number["stock"][row] = nan
    for name, value in (("temp_min", NEVER_COLD), ("temp_max", NEVER_HOT)):
        if not isnan(number[name][row]):
            number[name][row] = value
    return replace(parts, text={**parts.text, "status": status}, number=number)


def admitted(request: Request, catalogs: Catalogs, asked: Sequence[Part]) -> tuple[Space, Catalogs]:
    """The space in which the parts asked about are let in; found by changing the catalogs, not verdicts."""
    stated = spaces.build_whole(request, catalogs)
    for part in asked:
        verdicts = {"opamps": stated.opamp_verdicts, "photodiodes": stated.diode_verdicts}.get(part.role)
        if verdicts is not None and verdicts.alone[part.row] < PASSES:
            catalogs = replace(catalogs, **{part.role: let_in(getattr(catalogs, part.role), part.row)})
    capacitor = any(part.role == "capacitors" for part in asked)
    build = spaces.build_whole if capacitor else spaces.build
    return build(request, catalogs), catalogs


def partners(stated: Space, asked: Sequence[Part]) -> tuple[list[int], list[int]]:
    """The op-amps and photodiodes to be paired."""
    rows = {part.role: part.row for part in asked}
    tables = {"opamps": stated.opamp_verdicts, "photodiodes": stated.diode_verdicts}
    found = [
        [rows[role]] if role in rows else np.flatnonzero(tables[role].alone == PASSES).tolist()
        for role in ACTIVE
    ]
    return found[0], found[1]


def every_setting(space: Space, catalogs: Catalogs, pair: tuple[int, int]) -> list[Setting]:
    """Every eligible setting of one pair."""
    rows, places = rows_of(space, catalogs, pair)
    if not rows:
        return []
    columns = []
    for choice in plain.every_choice(space, *pair):
        with np.errstate(all="ignore"):
            figures = evaluate(space.bench, spaces.settings(space, choice)).figures
        columns.append(
            np.column_stack([np.broadcast_to(figures[n], choice.opamp.shape) for n in space.limits])
        )
    table = np.concatenate(columns)[places]
    values = [dict(zip(space.limits, line, strict=True)) for line in table.tolist()]
    return [Setting(pair, row, value) for row, value in zip(rows, values, strict=True)]


def of_families(found: list[Setting], asked: Sequence[Part]) -> list[Setting]:
    """Those that use the families asked about; `named` holds them at places 7 and 9."""
    places = {"resistors": 7, "capacitors": 9}
    for part in asked:
        if part.role in places:
            found = [one for one in found if one.row.name[places[part.role]] == part.name]
    return found


def is_small(space: Space, pairs: int) -> bool:
    each = space.contexts.size * space.resistors.size * space.capacitors.size * space.low_passes.size
    return 0 < each * max(pairs, 1) <= MOST


def best_of(found: list[Setting], name: str) -> float | None:
    """The best value of one target; NaN where it exists in no setting."""
    values = [one.values[name] for one in found]
    known = [value for value in values if not isnan(value)]
    if not known:
        return nan if values else None
    return max(known) if VOCABULARY[name].better == "higher" else min(known)


def same(said: Best, expected: float | None, name: str) -> bool:
    """Whether a best value is proven, and right to a few ten-millionths."""
    if said.bound is not None or (said.value is None) != (expected is None):
        return False
    if said.value is None or expected is None:
        return True
    if isnan(said.value) or isnan(expected):
        return isnan(said.value) and isnan(expected)
    scale = {"phase_margin": 30.0, "snr": 9.0, "dynamic_range": 9.0}.get(name, abs(expected))
    better = 1.0 if VOCABULARY[name].better == "higher" else -1.0
    short = better * (expected - said.value)
    return -1e-12 * scale <= short <= 2e-7 * scale


def differences(request: Request, catalogs: Catalogs, asked: Sequence[Part]) -> list[str]:
    """What the finding says otherwise than evaluating every setting."""
    stated = spaces.build_whole(request, catalogs)
    if min(stated.contexts.size, stated.resistors.size, stated.capacitors.size) == 0:
        return []
    space, changed = admitted(request, catalogs, asked)
    opamps, diodes = partners(space, asked)
    if not is_small(space, len(opamps) * len(diodes)) or not is_small(stated, stated.opamps.gbw.size * 4):
        return []
    finding = whynot(request, catalogs, [part.full for part in asked])
    if finding.impossible:
        SEEN["impossible"] += 1
        return []
    found = {
        (o, d): of_families(every_setting(space, changed, (o, d)), asked) for o in opamps for d in diodes
    }
    every_one = [one for rows in found.values() for one in rows]
    wrong = _wrong_verdict(finding, stated, space, asked)
    stopped = any(subject.stopped for subject in finding.subjects)
    if stopped or not every_one:
        SEEN["stopped" if stopped else "none eligible"] += 1
        return wrong + (["something found"] if finding.reaches or finding.largest or finding.meets else [])
    SEEN["waived" if not finding.admitted else "admitted"] += 1
    if finding.eligible != sum(bool(rows) for rows in found.values()):
        wrong.append("eligible pairs")
    wrong += _wrong_reaches(finding, space, every_one)
    return wrong + _wrong_settings(finding, (request, catalogs), (stated, space), found)


def _wrong_verdict(finding: Finding, stated: Space, space: Space, asked: Sequence[Part]) -> list[str]:
    """Whether each part is let in, and by what it is stopped, as the verdicts of both spaces say."""
    wrong = []
    for subject, part in zip(finding.subjects, asked, strict=True):
        if part.role not in ACTIVE:
            continue
        field = "opamp_verdicts" if part.role == "opamps" else "diode_verdicts"
        before, after = (int(getattr(s, field).alone[part.row]) for s in (stated, space))
        if subject.eligible != (before == PASSES):
            wrong.append("eligible")
        if subject.stopped != (None if after == PASSES else CHECKS[after]):
            wrong.append(f"stopped by {subject.stopped}, not {CHECKS[after] if after < PASSES else None}")
        if bool(subject.waived) and before == PASSES:
            wrong.append("waived without need")
    return wrong


def _wrong_reaches(finding: Finding, space: Space, found: list[Setting]) -> list[str]:
    wrong = []
    names = tuple(space.limits)
    for k, said in enumerate(finding.reaches):
        others = [one for one in found if all(m >= 0.0 for i, m in enumerate(one.row.margins) if i != k)]
        if not same(said.alone, best_of(found, said.name), said.name):
            wrong.append(f"{said.name} alone: {said.alone}, not {best_of(found, said.name)}")
        if not same(said.together, best_of(others, said.name), said.name):
            wrong.append(f"{said.name} together: {said.together}, not {best_of(others, said.name)}")
        SEEN["never" if not others else "together"] += 1
    return wrong + ([] if [said.name for said in finding.reaches] == list(names) else ["targets"])


def _wrong_settings(
    finding: Finding,
    asked: tuple[Request, Catalogs],
    both: tuple[Space, Space],
    found: dict[tuple[int, int], list[Setting]],
) -> list[str]:
    """The settings of largest margin and best rank, and the place in the shortlist."""
    stated, space = both
    wrong = []
    assert finding.largest is not None
    rows = [[one.row for one in ours] for ours in found.values() if ours]
    largest = nearest_of(rows, space)
    least = min(largest.margins)
    if least >= space.comfort:
        SEEN["comfortable"] += 1
        largest = nearest_of(
            rows, replace(space, comfort=margins.LARGEST, request=_comfortless(space.request))
        )
    if named(finding.largest) != largest.name or finding.largest.margin != min(largest.margins):
        wrong.append(f"largest margin {finding.largest.margin}, not {min(largest.margins)}")
    met = [m for ours in rows if (m := [row for row in ours if min(row.margins) >= 0.0])]
    by = space.request.ranking.by
    first = first_of(met, by, space)
    if (None if finding.best is None else named(finding.best)) != (None if first is None else first.name):
        wrong.append("best setting")
    if first is not None:
        wrong += _wrong_place(finding, asked, stated, first)
    SEEN["meets" if first is not None else "misses"] += 1
    return wrong


def _comfortless(request: Request) -> Request:
    return replace(request, ranking=replace(request.ranking, comfort=margins.LARGEST))


def first_of(pairs: list[list[Row]], by: str, space: Space) -> Row | None:
    """The first of the best settings of pairs, by the contract's order."""
    firsts = [min(ours, key=lambda row: (*ranked(row, by, space), *row.ties)) for ours in pairs]
    return min(firsts, key=lambda row: between(row, by, space)) if firsts else None


def nearest_of(pairs: list[list[Row]], space: Space) -> Row:
    found = first_of(pairs, "margin", space)
    assert found is not None
    return found


def _wrong_place(finding: Finding, asked: tuple[Request, Catalogs], stated: Space, first: Row) -> list[str]:
    request, catalogs = asked
    stated = spaces.build(request, catalogs)
    by, show = request.ranking.by, request.ranking.show
    opamps, diodes = partners(stated, ())
    table = []
    for o in opamps:
        for d in diodes:
            met = [row for row in rows_of(stated, catalogs, (o, d))[0] if min(row.margins) >= 0.0]
            if met:
                table.append(min(met, key=lambda row: (*ranked(row, by, stated), *row.ties)))
    table = sorted(table, key=lambda row: between(row, by, stated))[:show]
    before = sum(between(row, by, stated) < between(first, by, stated) for row in table)
    place = finding.place
    assert place is not None
    listed = before < len(table) and table[before].name == first.name
    top: Name | None = table[0].name if table else None
    said = (place.rank, place.rows, place.listed, None if place.first is None else named(place.first))
    SEEN["listed" if listed else "not listed"] += 1
    expected = (before + 1 if before < show else None, len(table), listed, top)
    return [] if said == expected else [f"place {said}, not {expected}"]
