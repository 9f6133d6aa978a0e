"""From a record's candidate back to its setting: the round trip, and everything that is gone at once."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

import numpy as np
import pytest

from optimizer.catalog.parts import Catalogs
from optimizer.record.build import plain
from optimizer.search import assemble
from optimizer.search import space as spaces
from optimizer.search.locate import POSITIONS, NotFound, locate
from optimizer.search.space import Choice, Space
from tests.search.instances import sampled, small
from tests.search.made import capacitor, catalogs, diode, listed, opamp, request, resistor


def written(space: Space, made: Catalogs, choice: Choice) -> list[dict[str, Any]]:
    """The candidates of `choice` as a record holds them, through JSON."""
    return [json.loads(json.dumps(plain(asdict(c)))) for c in assemble.candidates(space, made, choice)]


def only(asked: Any, made: Catalogs) -> tuple[Space, dict[str, Any]]:
    """The compiled space and its last setting as a candidate of a record."""
    space = spaces.build(asked, made)
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    last = [np.array([size - 1]) for size in (made.opamps.size, made.photodiodes.size, *sizes)]
    return space, written(space, made, Choice(*last))[0]


def something(seed: int) -> tuple[Space, Catalogs]:
    """The first random space from `seed` on that has anything to choose from."""
    while True:
        asked, made = small(seed)
        space = spaces.build(asked, made)
        if space.contexts.size and space.resistors.size and space.capacitors.size:
            return space, made
        seed += 100


@pytest.mark.parametrize("seed", range(12))
def test_every_setting_is_found_again(seed: int) -> None:
    space, made = something(seed)
    choice = sampled(np.random.default_rng(seed), space, 60)
    for row, candidate in enumerate(written(space, made, choice)):
        found = locate(space, made, candidate)
        expected = [int(column[row]) for column in choice.columns()]
        assert [column.tolist() for column in found.columns()] == [[index] for index in expected]


def test_values_may_differ_by_rounding() -> None:
    space, candidate = only(request(space={"low_pass": (None, 12345.678912)}), catalogs())
    row = Choice(*(np.array([size]) for size in (0, 0, 0, 1, 1, 0)))
    candidate = written(space, catalogs(), row)[0]
    assert candidate["low_pass"] == 12345.6789
    candidate["feedback_resistance"] *= 1.0 + 3e-10
    candidate["feedback_capacitance"] *= 1.0 - 3e-10
    assert locate(space, catalogs(), candidate) == row


def test_a_neighbouring_value_is_not_taken() -> None:
    space, candidate = only(request(), catalogs())
    with pytest.raises(NotFound) as caught:
        locate(
            space, catalogs(), candidate | {"feedback_resistance": 1.001 * candidate["feedback_resistance"]}
        )
    assert [position for position, _ in caught.value.missing] == ["feedback_resistance"]


LOST: list[tuple[str, Mapping[str, Any], str]] = [
    ("photodiode", {"photodiode": "YZD-9"}, "YZD-9 of Maker B is not in the catalogs"),
    (
        "opamp",
        {"opamp_maker": "Maker Z"},
        "YZA-1 of Maker Z is not in the catalogs, only one of Maker A",
    ),
    ("wiring", {"wiring": "upside-down"}, "upside-down is not among the wirings to choose from"),
    (
        "reference",
        {"reference": {"kind": "divider", "top": 4.7e3, "bottom": 22e3}},
        "the divider of 4.7 kohm over 22 kohm is not among the references to choose from",
    ),
    ("reference", {"reference": {"kind": "buried", "top": None, "bottom": None}}, "buried is not among"),
    ("feedback_resistance", {"feedback_resistance": 33e6}, "33 Mohm of YZR-1 is not among the resistors"),
    ("feedback_resistance", {"resistor_family": "YZR-9"}, "of YZR-9 is not among the resistors"),
    (
        "feedback_capacitance",
        {"feedback_capacitance": 3.3e-12},
        "3.3 pF of YZC-1 is not among the capacitors",
    ),
    (
        "feedback_capacitance",
        {"capacitor_family": "YZC-9"},
        "10 pF of YZC-9 is not among the capacitors to choose from, where this value comes from YZC-1",
    ),
    ("low_pass", {"low_pass": 99.0}, "a low-pass of 99 Hz is not among the choices"),
]


@pytest.mark.parametrize(("position", "changes", "words"), LOST)
def test_what_is_gone_is_named(position: str, changes: Mapping[str, Any], words: str) -> None:
    made = catalogs()
    space, candidate = only(request(), made)
    with pytest.raises(NotFound) as caught:
        locate(space, made, {**candidate, **changes})
    ((where, said),) = caught.value.missing
    assert where == position
    assert words in said


def test_all_that_is_gone_is_named_at_once_and_in_order() -> None:
    made = catalogs()
    space, candidate = only(request(), made)
    gone = {
        "low_pass": 5e3,
        "photodiode": "A",
        "opamp": "B",
        "wiring": "C",
        "reference": {"kind": "divider", "top": 1.0, "bottom": 2.0},
        "resistor_family": "D",
        "capacitor_family": "E",
    }
    with pytest.raises(NotFound) as caught:
        locate(space, made, {**candidate, **gone})
    assert tuple(position for position, _ in caught.value.missing) == POSITIONS
    assert all(words in str(caught.value) for _, words in caught.value.missing)


def test_a_reference_that_a_wiring_no_longer_admits_is_a_reference() -> None:
    made = catalogs()
    old = spaces.build(request(supply={"low": -5.0}), made)
    choice = Choice(*(np.array([k]) for k in (0, 0, _ground_biased(old), 0, 0, 0)))
    candidate = written(old, made, choice)[0]
    now = spaces.build(request(), made)  # a single supply leaves a diode at V- no bias
    with pytest.raises(NotFound) as caught:
        locate(now, made, candidate)
    assert caught.value.missing == (("reference", "ground cannot stand with rising-biased"),)


def _ground_biased(space: Space) -> int:
    x = space.contexts
    return int(np.flatnonzero(x.biased & ~x.divided & (x.sign > 0))[0])


def test_no_capacitor_and_no_low_pass_are_choices_that_can_be_gone() -> None:
    made = catalogs()
    space, candidate = only(request(), made)
    without = candidate | {"feedback_capacitance": 0.0, "capacitor_family": None}
    assert locate(space, made, without).capacitor.tolist() == [0]
    stricter = spaces.build(request(space={"no_capacitor": False, "low_pass": (1e3,)}), made)
    with pytest.raises(NotFound) as caught:
        locate(stricter, made, without)
    assert caught.value.missing == (
        ("feedback_capacitance", "a receiver without feedback capacitor is not among the choices"),
        ("low_pass", "no low-pass is not among the choices"),
    )


def test_families_of_one_name_are_told_apart_by_the_recorded_figures() -> None:
    twins = [
        resistor(maker="Maker C", **listed(470e3), price=[(1.0, 0.02)], parasitic_capacitance=0.05e-12),
        resistor(maker="Maker D", **listed(470e3), price=[(1.0, 0.01)], parasitic_capacitance=0.2e-12),
    ]
    made = catalogs(resistors=[*twins, resistor(family="YZR-2")])
    space = spaces.build(request(), made)
    rows = np.flatnonzero(space.resistors.value == 470e3)
    twin = [int(row) for row in rows if space.resistors.names[space.resistors.family[row]] == "YZR-1"]
    assert len(twin) == 2
    for row in twin:
        choice = Choice(*(np.array([k]) for k in (0, 0, 0, row, 1, 0)))
        assert locate(space, made, written(space, made, choice)[0]) == choice


def test_two_makers_of_one_part_are_two_parts() -> None:
    made = catalogs(opamps=[opamp(), opamp(maker="Maker X")], photodiodes=[diode(), diode(maker="Maker Y")])
    space, candidate = only(request(), made)
    found = locate(space, made, candidate)
    assert (found.opamp.tolist(), found.diode.tolist()) == ([1], [1])


def test_a_dearer_capacitor_family_is_found_where_all_are_kept() -> None:
    made = catalogs(capacitors=[capacitor(), capacitor(family="YZC-2", price=[(1.0, 0.5)])])
    whole = spaces.build_whole(request(), made)
    dear = int(np.flatnonzero((whole.capacitors.family == 1) & (whole.capacitors.value == 4.7e-12))[0])
    choice = Choice(*(np.array([k]) for k in (0, 0, 0, 0, dear, 0)))
    candidate = written(whole, made, choice)[0]
    assert locate(whole, made, candidate) == choice
    with pytest.raises(NotFound, match="where this value comes from YZC-1"):
        locate(spaces.build(request(), made), made, candidate)


def test_names_cannot_drive_a_terminal() -> None:
    made = catalogs()
    space, candidate = only(request(), made)
    with pytest.raises(NotFound) as caught:
        locate(space, made, candidate | {"opamp": "\x1b[31mred", "photodiode": "two\nlines"})
    assert "\x1b" not in str(caught.value)
    assert "\n" not in str(caught.value)
