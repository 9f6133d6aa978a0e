"""Eligibility by numbers: a part's checks against its verdicts, and the nearest setting against all."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence

import numpy as np
import pytest

from optimizer.errors import InputError
from optimizer.figures import CHECKS, evaluate
from optimizer.request.types import Ambient
from optimizer.search import plain, reach
from optimizer.search import space as spaces
from optimizer.search.inquiry import eligibility
from optimizer.search.inquiry.eligibility import FAILED, NOT_CHECKED, PARTLY, PASSED, UNKNOWN
from optimizer.search.inquiry.families import family_checks
from optimizer.search.inquiry.lookup import every, lookup
from optimizer.search.inquiry.nearest import NUMBERS
from optimizer.search.inquiry.whynot import SETTING, whynot
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from tests.search import made
from tests.search.looked_at import instance
from tests.search.made import awkward


@pytest.mark.parametrize("seed", range(40))
def test_rulings_together_are_the_verdict(seed: int) -> None:
    """For every part in every context: the first check failed, and the first column that is unknown."""
    request, catalogs = instance(seed)
    space = spaces.build(request, catalogs)
    for part in every(catalogs):
        table = {"opamps": space.opamp_verdicts, "photodiodes": space.diode_verdicts}.get(part.role)
        if table is None:
            continue
        found = eligibility.rulings(space, catalogs, part)
        assert [ruling.key for ruling in found] == [key for key in CHECKS if key in {r.key for r in found}]
        assert eligibility.code(found).tolist() == table.code[part.row].tolist(), part
        if table.column[part.row]:
            blank = next(ruling for ruling in found if ruling.key == "missing").facts["columns"]
            assert isinstance(blank, tuple)
            assert table.column[part.row] in blank


@pytest.mark.parametrize("seed", range(0, 40, 2))
def test_a_family_passes_its_checks_where_it_is_in_the_space(seed: int) -> None:
    request, catalogs = instance(seed)
    space = spaces.build_whole(request, catalogs)
    for part in every(catalogs):
        if part.role not in ("resistors", "capacitors"):
            continue
        passes = all(check.verdict == PASSED for check in family_checks(request, catalogs, part))
        assert passes == (part.row in getattr(space, part.role).rows), part


@pytest.mark.parametrize(
    ("changes", "stated", "key", "verdict", "facts"),
    [
        ({"stock": float("nan")}, {"quantity": 7}, "stock", NOT_CHECKED, {"needed": 7.0}),
        ({"stock": 9.0}, {"quantity": 7}, "stock", PARTLY, {"stock": 9.0, "with_buffer": 14.0}),
        ({"temp_min": 0.0}, {}, "temperature", NOT_CHECKED, {"low": 0.0}),
        ({"temp_min": None}, {"ambient": Ambient(-5.0, 50.0, stated=True)}, "temperature", UNKNOWN, {}),
        ({"supply_max": 5.2}, {"supply": {"tolerance": 0.05}}, "supply", FAILED, {"high": 5.2, "most": 5.25}),
        ({"supply_min": None}, {}, "supply", UNKNOWN, {"nominal": 5.0}),
        ({"slew_rate": None}, {"targets": {"bandwidth": 1e3, "slew": 1.0}}, "missing", FAILED, {}),
        ({"slew_rate": None}, {}, "missing", PASSED, {"columns": ()}),
        ({"input_low": 1.0}, {}, "input_range", PARTLY, {"low": 1.0, "high": 4.0}),
        ({"output_low": 3.0, "output_high": 2.5}, {}, "window", FAILED, {"width": -0.5}),
    ],
)
def test_checks_of_an_opamp(changes: dict, stated: dict, key: str, verdict: str, facts: dict) -> None:  # type: ignore[type-arg]
    check = _check(made.request(**stated), made.catalogs((made.opamp(**changes),)), "YZA-1", key)
    assert check.verdict == verdict
    assert check.facts == check.facts | facts


@pytest.mark.parametrize(
    ("changes", "stated", "key", "verdict", "facts"),
    [
        ({}, {}, "wavelength", PASSED, {"low": 400e-9, "high": 1100e-9, "wavelength": 850e-9}),
        ({}, {"light": {"wavelength": 300e-9}}, "wavelength", FAILED, {"wavelength": 300e-9}),
        ({"reverse_max": 1.0}, {}, "reverse_bias", PARTLY, {"reverse_max": 1.0, "largest": 5.0}),
        ({}, {"space": {"wirings": ("rising-unbiased",)}}, "reverse_bias", NOT_CHECKED, {}),
        ({"dark_current": None}, {}, "missing", PARTLY, {"columns": ("dark_current",), "unbiased": ()}),
        (
            {"dark_current": None},
            {"space": {"wirings": ("rising-unbiased",)}},
            "missing",
            PASSED,
            {"columns": ()},
        ),
        ({}, {"light": {"area_to": 2e-6}}, "excluded", FAILED, {"area": 4e-6, "area_to": 2e-6}),
    ],
)
def test_checks_of_a_photodiode(changes: dict, stated: dict, key: str, verdict: str, facts: dict) -> None:  # type: ignore[type-arg]
    check = _check(made.request(**stated), made.catalogs(photodiodes=(made.diode(**changes),)), "YZD-1", key)
    assert check.verdict == verdict
    assert check.facts == check.facts | facts


def _check(request, catalogs, name: str, key: str) -> eligibility.Check:  # type: ignore[no-untyped-def]
    space = spaces.build(request, catalogs)
    (part,) = lookup(catalogs, [name])
    return next(r.check() for r in eligibility.rulings(space, catalogs, part) if r.key == key)


# Names


def test_a_part_is_known_by_its_name_or_with_its_maker() -> None:
    table = made.catalogs((made.opamp(), made.opamp(maker="Maker Z")))
    assert lookup(table, ["Maker Z/YZA-1"])[0].row == 1
    assert [part.role for part in lookup(table, ["YZR-1", "Maker A/YZA-1"])] == ["resistors", "opamps"]


@pytest.mark.parametrize(
    ("names", "said"),
    [
        (["YZA-3"], "no such part or family (did you mean 'YZA-1'?)"),
        (
            ["YZA-1"],
            "2 have it: an op-amp, 'Maker A/YZA-1'; an op-amp, 'Maker Z/YZA-1' (name it as",
        ),
        (["Maker A/YZA-1", "Maker Z/YZA-1"], "expected parts of different roles: each of these is an op-amp"),
        (["YZD-1", "YZD-1"], "each of these is a photodiode"),
        (["nil", "none"], "found 'none', the catalogs hold no such part or family"),
    ],
)
def test_names_that_will_not_do(names: list[str], said: str) -> None:
    table = made.catalogs((made.opamp(), made.opamp(maker="Maker Z")))
    with pytest.raises(InputError) as caught:
        lookup(table, names)
    assert said in str(caught.value)


# Checks of the setting


@pytest.mark.parametrize("seed", range(40))
def test_numbers_say_what_the_checks_say(seed: int) -> None:
    """A check fails exactly where its numbers say that something is short."""
    request, catalogs = awkward(seed)
    space = spaces.build(request, catalogs)
    if not space.contexts.size:
        return
    rng = np.random.default_rng(seed)
    sizes = (catalogs.opamps.size, catalogs.photodiodes.size, space.contexts.size, space.resistors.size)
    sizes = (*sizes, space.capacitors.size, space.low_passes.size)
    choice = Choice(*(rng.integers(size, size=3000) for size in sizes))
    s = spaces.settings(space, choice)
    with np.errstate(all="ignore"):
        fails = evaluate(space.bench, s).fails
        for key, mask in fails.items():
            if key == "load" and space.bench.load is None:
                continue
            short = NUMBERS[key](space.bench, s)["short"]
            known = ~np.isnan(short)
            told = short >= 0.0 if key in ("gain", "unstable") else short > 0.0
            assert (told == mask)[known].all(), key


def test_the_nearest_setting_is_the_nearest() -> None:
    """Where no setting is eligible, its numbers are the least short of all that get as far."""
    checked = Counter[str]()
    for seed in range(150):
        request, catalogs = awkward(seed)
        space = spaces.build(request, catalogs)
        if not space.contexts.size:
            continue
        for o in np.flatnonzero(space.opamp_verdicts.alone == PASSES).tolist():
            diodes = np.flatnonzero(space.diode_verdicts.alone == PASSES)
            reached = reach.furthest(space, np.full(diodes.size, o), diodes)
            if not diodes.size or reached.max() == PASSES or CHECKS[int(reached.max())] not in SETTING:
                continue
            key = CHECKS[int(reached.max())]
            if key == "unstable":
                continue
            finding = whynot(request, catalogs, [str(catalogs.opamps.text["part"][o])])
            if finding.impossible:
                continue
            said = next(check for check in finding.settings if check.verdict == FAILED)
            assert said.key == key
            assert said.facts["short"] == _least_short(space, o, diodes.tolist(), key)
            checked[key] += 1
    assert len(checked) >= 3, checked


def _least_short(space: Space, opamp: int, diodes: Sequence[int], key: str) -> float:
    least = np.inf
    for diode in diodes:
        for choice in plain.every_choice(space, opamp, diode):
            here = choice.take(reach.first_failed(space, choice) == CHECKS.index(key))
            if here.opamp.size:
                with np.errstate(all="ignore"):
                    short = NUMBERS[key](space.bench, spaces.settings(space, here))["short"]
                least = min(least, float(short.min()))
    return least


def test_parts_that_pass_nowhere_together_are_told() -> None:
    """The op-amp takes ground alone, the photodiode no wiring without bias, and none biases on ground."""
    amp = made.opamp(input_low=-1.0, input_high=5.0)
    asked = made.request(space={"wirings": ("rising-unbiased", "rising-biased")})
    table = made.catalogs((amp,), (made.diode(shunt_resistance=None),))
    finding = whynot(asked, table, ["YZA-1", "YZD-1"])
    assert finding.eligible == 0
    assert [(check.key, check.verdict) for check in finding.settings] == [("input_range", FAILED)]
    assert [(one.wiring, one.ground, one.passing) for one in finding.wired] == [
        ("rising-unbiased", False, 0),
        ("rising-biased", None, 0),
    ]
    assert finding.stopped_by == "input_range"
