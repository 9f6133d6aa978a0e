"""Why not a part: every number of the finding against evaluating every setting of every pair."""

from __future__ import annotations

from dataclasses import replace
from math import nan

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins
from optimizer.request.types import Ambient, Resilience, Tolerance
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.inquiry.eligibility import FAILED
from optimizer.search.inquiry.finding import CORNERS
from optimizer.search.inquiry.lookup import Part
from optimizer.search.inquiry.whynot import SETTING, whynot
from optimizer.search.result import SOURCES
from optimizer.search.weigh.valued import valued
from optimizer.vocabulary import VOCABULARY
from tests.search import made
from tests.search.looked_at import SEEN, differences, instance, partners, same, subjects
from tests.search.made import awkward


@settings(max_examples=50, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_equals_every_setting(seed: int) -> None:
    request, catalogs = instance(seed)
    asked = subjects(seed, catalogs)
    assert differences(request, catalogs, asked) == [], [part.full for part in asked]


def test_the_instances_are_worth_testing() -> None:
    """Every way that a finding can end is among them."""
    SEEN.clear()
    for seed in range(40):
        request, catalogs = instance(seed)
        assert differences(request, catalogs, subjects(seed, catalogs)) == [], seed
    for kind in (
        "stopped",
        "none eligible",
        "waived",
        "admitted",
        "never",
        "together",
        "comfortable",
        "not listed",
    ):
        assert SEEN[kind] >= 1, SEEN
    for kind in ("meets", "misses", "listed"):
        assert SEEN[kind] >= 3, SEEN


# What is set aside


REFUSED = {
    "status": ({"status": "obsolete"}, {}),
    "stock": ({"stock": 40.0}, {"quantity": 300}),
    "temperature": ({"temp_max": 50.0}, {"ambient": Ambient(-20.0, 60.0, stated=True)}),
    "excluded by name": ({}, {"space": {"exclude": ("YZA-1",)}}),
    "excluded by full name": ({}, {"space": {"exclude": ("Maker A/YZA-1",)}}),
    "not required": ({}, {"space": {"require": ("YZA-2",)}}),
    "excluded by maker": ({"maker": "Maker X"}, {"space": {"makers": ("Maker A", "Maker B")}}),
    "excluded by package": ({"package": "QFN-16"}, {"space": {"packages": ("SOIC-8", "TO-5")}}),
}


@pytest.mark.parametrize("name", REFUSED)
def test_a_refused_part_is_looked_at_as_if_it_were_admitted(name: str) -> None:
    changes, stated = REFUSED[name]
    rows = (made.opamp(**changes), made.opamp(part="YZA-2", price=[(1.0, 1.0)]))
    targets = {"bandwidth": 20e3, "snr": 30.0}
    refused = whynot(made.request(targets=targets, **stated), made.catalogs(rows), ["YZA-1"])
    usual = {key: value for key, value in stated.items() if key != "space"}
    welcome = whynot(
        made.request(targets=targets, **usual), made.catalogs((made.opamp(), rows[1])), ["YZA-1"]
    )
    (subject,) = refused.subjects
    key = name.split(maxsplit=1)[0] if name != "not required" else "excluded"
    assert subject.waived == (key,)
    assert [check.key for check in subject.checks if check.verdict == FAILED] == [key]
    assert not refused.meets
    assert welcome.meets
    assert refused.best is not None
    assert refused.best.figures == getattr(welcome.best, "figures", None)
    assert refused.reaches == welcome.reaches
    assert refused.place is not None
    assert not refused.place.listed


def test_a_photodiode_refused_for_its_area_is_looked_at() -> None:
    asked = made.request(light={"area_from": 1e-6, "area_to": 2e-6}, targets={"bandwidth": 20e3})
    finding = whynot(asked, made.catalogs(), ["YZD-1"])
    assert finding.subjects[0].waived == ("excluded",)
    assert finding.best is not None
    assert not finding.meets


def test_admitting_a_part_admits_no_partner() -> None:
    """Both are obsolete; asked about alone, the op-amp finds no photodiode."""
    table = made.catalogs((made.opamp(status="obsolete"),), (made.diode(status="obsolete"),))
    alone = whynot(made.request(), table, ["YZA-1"])
    assert (alone.pairs, alone.best) == (0, None)
    both = whynot(made.request(), table, ["YZA-1", "YZD-1"])
    assert (both.pairs, both.meets) == (1, False)
    assert both.best is not None


def test_an_excluded_family_is_looked_at_alone() -> None:
    families = (made.resistor(), made.resistor(family="YZR-2", parasitic_capacitance=0.0))
    asked = made.request(space={"exclude": ("YZR-2",)}, targets={"bandwidth": 20e3})
    finding = whynot(asked, made.catalogs(resistors=families), ["YZR-2"])
    assert finding.subjects[0].waived == ("excluded",)
    assert finding.best is not None
    assert finding.best.resistor_family == "YZR-2"
    assert not finding.meets


def test_a_dearer_family_of_capacitors_is_searched_where_it_is_asked_about() -> None:
    families = (made.capacitor(), made.capacitor(family="YZC-2", price=[(1.0, 0.5)]))
    finding = whynot(made.request(targets={"cost": 9.0}), made.catalogs(capacitors=families), ["YZC-2"])
    assert finding.best is not None
    assert finding.best.capacitor_family == "YZC-2"
    assert finding.place is not None
    assert not finding.place.listed


# Corners, second sources


@settings(max_examples=6, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_corners_are_graded(seed: int) -> None:
    """Largest margin and best values against every corner of every setting."""
    rng = np.random.default_rng(seed)
    request, catalogs = awkward(2 * seed + 1)
    spread = {"gbw": 0.3, "responsivity": 0.1} if rng.random() < 0.5 else {"voltage_noise": 0.2}
    request = replace(request, tolerance=Tolerance(method="corners", stated=True, **spread))
    for table in (catalogs.resistors, catalogs.capacitors):
        table.number["tolerance"] = np.full(table.size, 0.01)  # type: ignore[index]
    catalogs.resistors.number["tempco"] = np.zeros(catalogs.resistors.size)  # type: ignore[index]
    space = spaces.build(request, catalogs)
    opamps, diodes = partners(space, ())
    if not (opamps and diodes):
        return
    part = Part("opamps", opamps[0], str(catalogs.opamps.text["part"][opamps[0]]), "Maker A")
    finding = whynot(request, catalogs, [part.name])
    names = tuple(space.limits)
    found = [valued(space, c, names) for d in diodes for c in plain.every_choice(space, part.row, d)]
    table = np.concatenate([one.values for one in found])
    if not table.size:
        assert finding.largest is None
        assert finding.impossible or finding.stopped_by in (CORNERS, *SETTING)
        return
    assert finding.largest is not None
    graded = np.column_stack([margins.margin(n, table[:, k], space.limits[n]) for k, n in enumerate(names)])
    assert finding.largest.margin == graded.min(axis=1).max()
    for k, said in enumerate(finding.reaches):
        others = np.all(np.delete(graded, k, axis=1) >= 0.0, axis=1)
        for best_, column in ((said.alone, table[:, k]), (said.together, table[others, k])):
            known = column[~np.isnan(column)]
            sign = 1.0 if VOCABULARY[said.name].better == "higher" else -1.0
            expected = nan if column.size else None
            assert same(best_, sign * float((sign * known).max()) if known.size else expected, said.name)


def test_second_sources_count_for_the_best_setting_alone() -> None:
    outline = {"package": "SOIC-8", "pinout": "single"}
    lone = made.catalogs((made.opamp(**outline),))
    asked = made.request(targets={"bandwidth": 20e3}, resilience=Resilience(opamp_sources=2))
    finding = whynot(asked, lone, ["YZA-1"])
    assert (finding.best, finding.stopped_by) == (None, SOURCES)
    assert finding.largest is not None
    assert finding.largest.margin >= 0.0
    second = made.opamp(part="YZA-2", maker="Maker B", **outline)
    assert whynot(asked, made.catalogs((made.opamp(**outline), second)), ["YZA-1"]).meets


def test_what_no_part_could_meet_is_said_alone() -> None:
    finding = whynot(made.request(supply={"guard": 3.0}), made.catalogs(), ["YZA-1"])
    assert finding.impossible
    assert not finding.meets
    assert finding.reaches == ()
