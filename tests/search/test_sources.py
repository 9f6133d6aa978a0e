"""Second sources: the search against counting, for every combination, the makers that can serve it."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from numpy.typing import NDArray

from optimizer import search
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request, Resilience
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.result import Alternate, Candidate
from optimizer.search.roles import PASSES
from optimizer.search.space import Space
from tests.search.instances import small, some
from tests.search.whole import Name, Row, between, named, ranked, rows_of

MOST = 250_000
SEEN: Counter[str] = Counter()


def sourced(seed: int) -> tuple[Request, Catalogs]:
    """A small instance whose op-amps come in few footprints from few makers, some of them blank."""
    rng = np.random.default_rng(seed)
    request, catalogs = small(seed)
    size = 12
    opamps = some(catalogs.opamps, np.sort(rng.choice(catalogs.opamps.size, size, replace=False)))
    text = {
        "package": rng.choice(["SOT23-5", "SOIC-8", ""], size, p=[0.8, 0.1, 0.1]),
        "pinout": rng.choice(["single", "dual", ""], size, p=[0.85, 0.1, 0.05]),
        "maker": rng.choice(["Maker A", "Maker B", "Maker C"], size),
    }
    opamps = replace(opamps, text={**opamps.text, **text})
    diodes = some(catalogs.photodiodes, np.sort(rng.choice(catalogs.photodiodes.size, 4, replace=False)))
    request = replace(request, resilience=Resilience(opamp_sources=int(rng.choice([2, 2, 3]))))
    return _eased(rng, request), replace(catalogs, opamps=opamps, photodiodes=diodes)


def _eased(rng: np.random.Generator, request: Request) -> Request:
    """`request` with some targets dropped, so that several op-amps may serve."""
    names = ("bandwidth", "snr", "dynamic_range", "offset", "cost", "supply_current", "phase_margin")
    dropped = {name: None for name in names if rng.random() < 0.7}
    if "bandwidth" in dropped:
        dropped["slew"] = None
    return replace(request, targets=replace(request.targets, **dropped))


def serving(space: Space, diode: int) -> NDArray[np.bool_]:
    """Whether each op-amp meets everything with `diode`, by op-amp and combination."""
    rows = []
    for opamp in range(space.opamps.gbw.size):
        found = [plain.judge(space, choice, "cost") for choice in plain.every_choice(space, opamp, diode)]
        rows.append(np.concatenate([judged.meets for judged in found]))
    return np.array(rows)


def admitted(space: Space, catalogs: Catalogs, need: int, meets: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Where the makers of op-amps in the same package and pinout that meet are `need` or more."""
    text = catalogs.opamps.text
    ok = np.zeros_like(meets)
    for o in range(meets.shape[0]):
        alike = [
            p
            for p in range(meets.shape[0])
            if p == o
            or (
                text["package"][o] == text["package"][p] != ""
                and text["pinout"][o] == text["pinout"][p] != ""
            )
        ]
        makers = [str(text["maker"][p]) for p in alike]
        for place in np.flatnonzero(meets[o]):
            serve = {maker for maker, p in zip(makers, alike, strict=True) if meets[p, place]}
            ok[o, place] = len(serve) >= need
    return ok


def everything(request: Request, catalogs: Catalogs, space: Space) -> tuple[list[Name], list[Name]]:
    by, show = request.ranking.by, request.ranking.show
    met: list[Row] = []
    near: list[Row] = []
    for d in np.flatnonzero(space.diode_verdicts.alone == PASSES):
        ok = admitted(space, catalogs, request.resilience.opamp_sources, serving(space, int(d)))
        for o in np.flatnonzero(space.opamp_verdicts.alone == PASSES):
            rows, places = rows_of(space, catalogs, (int(o), int(d)))
            good = [row for row, place in zip(rows, places, strict=True) if ok[o, place]]
            pool, rule = (good, by) if good else (rows, "margin")
            if pool:
                best = min(pool, key=lambda row: (*ranked(row, rule, space), *row.ties))
                (met if good else near).append(best)
    met.sort(key=lambda row: between(row, by, space))
    near.sort(key=lambda row: between(row, "margin", space))
    shown = [row.name for row in met[:show]]
    return shown, [row.name for row in near[: show - len(shown)]]


@cache
def differences(seed: int) -> list[str]:
    request, catalogs = sourced(seed)
    space = spaces.build(request, catalogs)
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    if not 0 < int(np.prod(sizes)) * catalogs.opamps.size * catalogs.photodiodes.size <= MOST:
        return []
    outcome = search.shortlist(request, catalogs)
    met, near = everything(request, catalogs, space)
    if outcome.impossible:
        return ["called impossible, yet something meets"] if met else []
    SEEN["met"] += bool(met)
    SEEN["single source"] += any(min(t.margin for t in c.targets) >= 0.0 for c in outcome.near_misses)
    wrong = []
    need = request.resilience.opamp_sources
    if any(len({c.opamp_maker, *(a.opamp_maker for a in c.alternates)}) < need for c in outcome.candidates):
        wrong.append("alternates are too few")
    if any(c.missed != ("opamp_sources",) for c in outcome.near_misses if c.margin >= 0.0):
        wrong.append("a near miss that misses nothing")
    if [named(c) for c in outcome.candidates] != met:
        wrong.append("candidates")
    if [named(c) for c in outcome.near_misses] != near:
        wrong.append("near misses")
    if sum(outcome.dropped.values()) + len(met) + len(near) != outcome.pairs:
        wrong.append("the counts do not add up")
    return wrong


@pytest.mark.parametrize("seed", range(100, 160))
def test_equals_counting_the_makers_of_every_combination(seed: int) -> None:
    assert differences(seed) == []


def test_the_instances_are_worth_testing() -> None:
    for seed in range(100, 160):
        differences(seed)
    assert min(SEEN["met"], SEEN["single source"]) >= 5, SEEN


def test_alternates_are_all_op_amps_that_serve_and_say_how() -> None:
    """Each alternate, required alone with all else fixed, is what the search itself finds."""
    checked = 0
    for seed in range(100, 130):
        request, catalogs = sourced(seed)
        outcome = search.shortlist(request, catalogs)
        for candidate in outcome.candidates[:1]:
            for other in candidate.alternates:
                alone = _only(request, candidate, other)
                found = search.shortlist(alone, catalogs).candidates
                settings_ = (candidate.wiring, candidate.feedback_resistance, candidate.feedback_capacitance)
                same = [
                    c for c in found if (c.wiring, c.feedback_resistance, c.feedback_capacitance) == settings_
                ]
                assert same
                assert (other.cost, other.limiting, other.margin) == (
                    same[0].figures["cost"],
                    same[0].limiting,
                    same[0].margin,
                )
                checked += 1
    assert checked >= 5


def _only(request: Request, candidate: Candidate, other: Alternate) -> Request:
    """`request` with nothing to choose but the op-amp `other` on the candidate's board."""
    space = replace(
        request.space,
        wirings=(candidate.wiring,),
        references=(candidate.reference.kind,),
        require=(
            f"{other.opamp_maker}/{other.opamp}",
            f"{candidate.photodiode_maker}/{candidate.photodiode}",
            *request.space.require,
        ),
        resistance=(candidate.feedback_resistance, candidate.feedback_resistance),
        no_capacitor=not candidate.feedback_capacitance,
        low_pass=(candidate.low_pass,),
    )
    if candidate.feedback_capacitance:
        space = replace(space, capacitance=(candidate.feedback_capacitance, candidate.feedback_capacitance))
    divider = request.space.divider
    if candidate.reference.kind == "divider":
        ends = sorted((candidate.reference.top or 0.0, candidate.reference.bottom or 0.0))
        space = replace(space, divider=replace(divider, low=ends[0], high=ends[1]))
    return replace(request, space=space, resilience=Resilience())
