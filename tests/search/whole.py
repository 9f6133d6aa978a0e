"""The shortlist by evaluating everything, ranked and counted in plain Python from the contract's text.

Only the figures, the checks and the declared choices are the engine's; order, near misses, reasons and
blocking targets are worked out here once more, without its keys.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from math import inf, isnan
from typing import Any

import numpy as np

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.figures import CHECKS, evaluate
from optimizer.request.types import WIRINGS, Request
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.result import Candidate
from optimizer.search.roles import PASSES, Verdicts

Name = tuple[Any, ...]


@dataclass(frozen=True)
class Row:
    """One eligible setting: what it is called, its place among equals, and what ranks it."""

    name: Name
    ties: Name
    ranked: dict[str, float]
    margins: tuple[float, ...]
    pair: Name


@dataclass
class Whole:
    """What must come out."""

    candidates: list[Name] = field(default_factory=list)
    near_misses: list[Name] = field(default_factory=list)
    meeting: int = 0
    reached: Counter[str] = field(default_factory=Counter)
    blocking: tuple[str, ...] = ()


def named(c: Candidate) -> Name:
    """A candidate by everything that was chosen."""
    reference = (c.reference.kind, c.reference.top, c.reference.bottom)
    passives = (c.feedback_resistance, c.resistor_family, c.feedback_capacitance, c.capacitor_family)
    parts = (c.photodiode, c.photodiode_maker, c.opamp, c.opamp_maker)
    return (*parts, c.wiring, reference, *passives, c.low_pass)


def everything(request: Request, catalogs: Catalogs) -> Whole:
    """Evaluate, rank and count every setting of every pair."""
    space = spaces.build(request, catalogs)
    result = Whole()
    by, show = request.ranking.by, request.ranking.show
    met: list[Row] = []
    near: list[Row] = []
    blocking: set[str] = set()
    for o in range(catalogs.opamps.size):
        for d in range(catalogs.photodiodes.size):
            key, rows = _pair(space, catalogs, o, d)
            if key:
                result.reached[key] += 1
                continue
            good = [row for row in rows if min(row.margins) >= 0.0]
            pool, rule = (good, by) if good else (rows, "margin")
            best = min(pool, key=lambda row: (*ranked(row, rule, space), *row.ties))
            (met if good else near).append(best)
            blocking |= _blocking(rows, tuple(space.limits))
    result.meeting = len(met)
    met.sort(key=lambda row: between(row, by, space))
    near.sort(key=lambda row: between(row, "margin", space))
    result.candidates = [row.name for row in met[:show]]
    result.near_misses = [row.name for row in near[: show - len(result.candidates)]]
    result.reached["missed_target"] = len(near) - len(result.near_misses)
    if not met:
        result.blocking = tuple(name for name in space.limits if name in blocking)
    return result


def ranked(row: Row, by: str, space: spaces.Space) -> Name:
    """The contract's order within a pair, up to the last ties."""
    comfort = space.request.ranking.comfort
    cut = sorted(min(m, comfort) for m in row.margins)
    worse_first = tuple(-m for m in cut)
    cost = row.ranked["cost"]
    if by == "cost":
        return (cost, *worse_first)
    return (_first(row, by, cut[0]), cost, *worse_first)


def between(row: Row, by: str, space: spaces.Space) -> Name:
    """The contract's order between pairs."""
    least = min(*row.margins, space.request.ranking.comfort)
    return (_first(row, by, least), row.ranked["cost"], -least, *row.pair)


def _first(row: Row, by: str, least: float) -> float:
    if by == "margin":
        return -least
    value = row.ranked[by]
    return inf if isnan(value) else -value if by == "snr" else value


def _blocking(rows: list[Row], names: tuple[str, ...]) -> set[str]:
    """Targets that alone keep a setting of this pair out."""
    found = set()
    for row in rows:
        missed = [name for name, margin in zip(names, row.margins, strict=True) if margin < 0.0]
        if len(missed) == 1:
            found.add(missed[0])
    return found


def _pair(space: spaces.Space, catalogs: Catalogs, o: int, d: int) -> tuple[str, list[Row]]:
    """Why the pair drops out, or its eligible settings."""
    amp, sensor = space.opamp_verdicts, space.diode_verdicts
    alone = [(int(v.code[i].max()), _column(v, i)) for v, i in ((amp, o), (sensor, d))]
    if min(alone)[0] < PASSES:
        code, column = min(alone, key=lambda one: one[0])
        return CHECKS[code] + (f":{column}" if column else ""), []
    reach = max(int(plain.judge(space, c, "cost").reach.max()) for c in plain.every_choice(space, o, d))
    rows, _ = rows_of(space, catalogs, (o, d))
    if reach == PASSES:
        return "", rows
    column = _joint_column(space, o, d) if CHECKS[reach] == "missing" else ""
    return CHECKS[reach] + (f":{column}" if column else ""), []


def rows_of(space: spaces.Space, catalogs: Catalogs, pair: tuple[int, int]) -> tuple[list[Row], list[int]]:
    """The eligible settings of one pair, and the place of each among all its settings."""
    rows: list[Row] = []
    places: list[int] = []
    before = 0
    for choice in plain.every_choice(space, *pair):
        with np.errstate(all="ignore"):
            judged = plain.judge(space, choice, "cost")
            figures = evaluate(space.bench, spaces.settings(space, choice)).figures
        table = margins.margins(figures, space.limits)
        for i in np.flatnonzero(judged.reach == PASSES):
            one = {name: float(figures[name][i]) for name in ("cost", "snr", "supply_current")}
            rows.append(_row(space, catalogs, choice, int(i), (one, tuple(table[i].tolist()))))
            places.append(before + int(i))
        before += judged.reach.size
    return rows, places


def _column(verdicts: Verdicts, part: int) -> str:
    """The unknown column of a part that gets no further, in the context where it gets furthest."""
    code = verdicts.code[part]
    if code.max() != CHECKS.index("missing"):
        return ""
    return verdicts.columns[int(verdicts.blank[part][code == code.max()].min())]


def _joint_column(space: spaces.Space, o: int, d: int) -> str:
    missing = CHECKS.index("missing")
    for verdicts, part, other in (
        (space.opamp_verdicts, o, space.diode_verdicts.code[d]),
        (space.diode_verdicts, d, space.opamp_verdicts.code[o]),
    ):
        here = (verdicts.code[part] == missing) & (other >= missing)
        if here.any():
            return verdicts.columns[int(verdicts.blank[part][here].min())]
    raise AssertionError("no context gets as far as `missing`")


def _row(
    space: spaces.Space,
    catalogs: Catalogs,
    choice: spaces.Choice,
    i: int,
    graded: tuple[Any, tuple[float, ...]],
) -> Row:
    o, d, x, r, c, low = (int(column[i]) for column in choice.columns())
    contexts = space.contexts
    divided = bool(contexts.divided[x])
    wiring = int(contexts.wiring[x])
    rf, cf = float(space.resistors.value[r]), float(space.capacitors.value[c])
    family = space.resistors.names[space.resistors.family[r]]
    placed = space.capacitors.names[space.capacitors.family[c]] if space.capacitors.family[c] >= 0 else None
    lag = float(space.low_passes[low])
    cutoff = None if lag == 0.0 else float(f"{1.0 / (2.0 * np.pi * lag):.9g}")
    ends = (float(contexts.top[x]), float(contexts.bottom[x])) if divided else (None, None)
    reference = ("divider" if divided else "ground", *ends)
    amps, sensors = catalogs.opamps.text, catalogs.photodiodes.text
    pair = (str(sensors["part"][d]), str(amps["part"][o]), str(sensors["maker"][d]), str(amps["maker"][o]))
    parts = (pair[0], pair[2], pair[1], pair[3])
    return Row(
        name=(*parts, WIRINGS[wiring], reference, rf, family, cf, placed, cutoff),
        ties=(
            rf,
            cf,
            wiring,
            divided,
            float(contexts.vref[x]),
            inf if lag == 0.0 else cutoff,
            family,
            placed or "",
        ),
        ranked=graded[0],
        margins=graded[1],
        pair=pair,
    )
