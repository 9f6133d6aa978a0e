"""What each choice costs a board, case by case."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

import numpy as np
import pytest

from optimizer.catalog.parts import Catalogs
from optimizer.record.build import plain
from optimizer.request.types import Request
from optimizer.search import assemble
from optimizer.search.change import dividers
from optimizer.search.change.positions import (
    DROP_IN,
    FOOTPRINT,
    OUT,
    REDESIGN,
    SAME,
    VALUES,
    Grades,
    Out,
    Plan,
    board_of,
    graded,
    positions_of,
)
from optimizer.search.query import whole
from optimizer.search.space import Choice, Space
from tests.search.made import capacitor, catalogs, diode, listed, opamp, request, resistor

FITS = {"package": "SOIC-8", "pinout": "single-8"}
ONE = (0, 0, 0, 0, 0, 0)


def written(space: Space, made: Catalogs, row: tuple[int, ...]) -> dict[str, Any]:
    """A setting as a candidate of a record."""
    choice = Choice(*(np.array([index]) for index in row))
    candidate: dict[str, Any] = plain(asdict(assemble.candidates(space, made, choice)[0]))
    return candidate | candidate.pop("outlines") | {"rank": 1}


def out(made: Catalogs, **rows: list[int]) -> Out:
    """What is out, by catalog."""
    roles = ("opamps", "photodiodes", "resistors", "capacitors")
    masks = {role: np.zeros(getattr(made, role).size, dtype=bool) for role in roles}
    for role, gone in rows.items():
        masks[role][gone] = True
    return Out(**masks)


def judged(
    made: Catalogs, withdrawn: set[str], row: tuple[int, ...] = ONE, asked: Request | None = None, **gone: Any
) -> tuple[Space, Plan, Grades]:
    """The grades of everything against the setting `row`, with `gone` out."""
    space = whole(asked or request(), made)
    board = board_of(space, made, written(space, made, row))
    plan = Plan(board, frozenset(withdrawn), out(made, **gone))
    left = dividers.left(space, made, plan)
    return left, plan, graded(left, made, plan)


@pytest.mark.parametrize(
    ("changes", "grade"),
    [
        (FITS, DROP_IN),
        ({"package": "SOIC-8", "pinout": "other-8"}, FOOTPRINT),
        ({"package": "MSOP-8", "pinout": "single-8"}, FOOTPRINT),
        ({"package": "SOIC-8", "pinout": ""}, FOOTPRINT),
        ({"package": "", "pinout": ""}, FOOTPRINT),
    ],
)
def test_a_withdrawn_part_gives_way_by_its_outline(changes: dict[str, str], grade: int) -> None:
    made = catalogs(opamps=[opamp(**FITS), opamp(part="YZA-2", **changes)])
    _, _, grades = judged(made, {"opamp"}, opamps=[0])
    assert grades.opamp.grade.tolist() == [OUT, grade]
    assert grades.opamp.changed.tolist() == [0, 1]


def test_blank_outlines_are_never_equal() -> None:
    blank = {"package": "", "pinout": ""}
    made = catalogs(photodiodes=[diode(**blank), diode(part="YZD-2", **blank)])
    _, _, grades = judged(made, {"photodiode"}, photodiodes=[0])
    assert grades.diode.grade.tolist() == [OUT, FOOTPRINT]


def test_a_part_that_is_not_withdrawn_stays_or_it_is_a_redesign() -> None:
    made = catalogs(opamps=[opamp(**FITS), opamp(part="YZA-2", **FITS)])
    _, _, grades = judged(made, {"photodiode"})
    assert grades.opamp.grade.tolist() == [SAME, REDESIGN]


def test_the_same_part_of_another_maker_is_another_part() -> None:
    made = catalogs(opamps=[opamp(**FITS), opamp(maker="Maker Z", **FITS)])
    _, _, grades = judged(made, {"opamp"}, opamps=[0])
    assert grades.opamp.grade.tolist() == [OUT, DROP_IN]


def test_another_number_of_packages_is_a_redesign() -> None:
    made = catalogs(
        opamps=[opamp(channels=2.0, **FITS), opamp(part="YZA-2", channels=1.0, **FITS)],
        capacitors=[capacitor()],
    )
    space = whole(request(), made)
    buffered = int(np.flatnonzero(space.contexts.buffered)[0])
    _, _, grades = judged(made, {"opamp"}, (0, 0, buffered, 0, 0, 0), opamps=[0])
    assert grades.opamp.grade.tolist() == [OUT, REDESIGN]


RESISTORS = [
    resistor(family="YZR-1", package="0603", **listed(220e3, 470e3)),
    resistor(family="YZR-2", package="0603", **listed(220e3, 470e3)),
    resistor(family="YZR-3", package="0402", **listed(220e3)),
    resistor(family="YZR-4", package="", **listed(220e3)),
    resistor(family="YZR-D", package="0603", **listed(10e3, 22e3, 47e3)),
]


def test_a_withdrawn_family_gives_way_to_the_same_value_in_its_package() -> None:
    _, _, grades = judged(catalogs(resistors=RESISTORS), {"feedback_resistance"}, resistors=[0])
    assert grades.resistor.grade.tolist() == [OUT, OUT, DROP_IN, VALUES, FOOTPRINT, FOOTPRINT]
    assert grades.resistor.changed.tolist() == [0, 1, 1, 1, 1, 1]


def test_without_being_withdrawn_another_family_is_another_value() -> None:
    _, _, grades = judged(catalogs(resistors=RESISTORS), {"opamp"}, opamps=[0])
    assert grades.resistor.grade.tolist() == [SAME, VALUES, VALUES, VALUES, FOOTPRINT, FOOTPRINT]


def test_a_family_of_unknown_package_still_fits_where_it_was() -> None:
    rows = [resistor(package="", **listed(220e3, 470e3)), *RESISTORS[3:]]
    _, _, grades = judged(catalogs(resistors=rows), {"opamp"}, opamps=[0])
    assert grades.resistor.grade.tolist() == [SAME, VALUES, FOOTPRINT]


def test_a_capacitor_can_be_left_out_but_not_placed_without_a_footprint() -> None:
    made = catalogs(capacitors=[capacitor(package="0402", **listed(1e-12, 100e-9))])
    _, _, placed = judged(made, {"opamp"}, (0, 0, 0, 0, 1, 0), opamps=[0])
    assert placed.capacitor.grade.tolist() == [VALUES, SAME]
    _, _, bare = judged(made, {"opamp"}, (0, 0, 0, 0, 0, 0), opamps=[0])
    assert bare.capacitor.grade.tolist() == [SAME, FOOTPRINT]


def test_another_low_pass_is_a_redesign() -> None:
    asked = request(space={"low_pass": (None, 30e3)})
    _, _, grades = judged(catalogs(), {"opamp"}, (0, 0, 0, 0, 0, 1), asked, opamps=[0])
    assert grades.low_pass.grade.tolist() == [REDESIGN, SAME]


def test_contexts_hold_two_positions() -> None:
    made = catalogs(resistors=[resistor(package="0603")], capacitors=[capacitor(package="0402")])
    space = whole(request(), made)
    x = space.contexts
    own = int(np.flatnonzero(x.divided & x.biased)[0])
    left, plan, grades = judged(made, {"opamp"}, (0, 0, own, 0, 0, 0), opamps=[0])
    rows = Choice(*(np.full(x.size, 0) for _ in range(2)), np.arange(x.size), *(np.full(x.size, 0),) * 3)
    for context, names in enumerate(positions_of(left, plan.board, grades, rows)):
        rewired = x.wiring[context] != x.wiring[own]
        level = x.divided[context] and x.top[context] == x.top[own] and x.bottom[context] == x.bottom[own]
        moved = not level or x.buffered[context]
        assert names == (("wiring",) if rewired else ()) + (("reference",) if moved else ())
        expected = SAME if context == own else VALUES if x.divided[context] and not rewired else REDESIGN
        assert grades.context.grade[context] == expected


def test_a_withdrawn_divider_is_bought_from_what_fits() -> None:
    """The cheapest family of all is in another package; the one that fits is dearer."""
    rows = [
        resistor(family="YZR-1", package="0603", price=[(1.0, 0.01)], **listed(10e3, 22e3, 47e3)),
        resistor(family="YZR-2", package="0402", price=[(1.0, 0.02)], **listed(10e3, 22e3, 47e3)),
        resistor(family="YZR-3", package="0603", price=[(1.0, 0.03)], **listed(10e3, 22e3, 47e3)),
        resistor(family="YZR-F", package="0603", **listed(220e3)),
    ]
    made = catalogs(resistors=rows)
    space = whole(request(), made)
    own = int(np.flatnonzero(space.contexts.divided)[0])
    left, plan, grades = judged(made, {"divider"}, (0, 0, own, 0, 0, 0), resistors=[0])
    assert left.contexts.resistors[own] == 1
    assert grades.context.grade[own] == FOOTPRINT
    assert left.contexts.cost[own] == pytest.approx(2 * 0.02 + 0.03)
    fitting = dividers.fitting(space, made, plan)
    assert fitting.contexts.resistors[own] == 2
    assert fitting.contexts.cost[own] == pytest.approx(2 * 0.03 + 0.03)
    assert graded(fitting, made, plan).context.grade[own] == DROP_IN


def test_a_divider_that_stays_keeps_its_family_when_another_gets_cheaper() -> None:
    rows = [
        resistor(family="YZR-1", package="0603", price=[(1.0, 0.01)]),
        resistor(family="YZR-2", package="0402", price=[(1.0, 0.02)]),
    ]
    before = catalogs(resistors=rows)
    space = whole(request(), before)
    own = int(np.flatnonzero(space.contexts.divided)[0])
    candidate = written(space, before, (0, 0, own, 0, 0, 0))
    now = catalogs(resistors=[rows[0] | {"price": [(1.0, 0.05)]}, rows[1]])
    space = whole(request(), now)
    assert space.contexts.resistors[own] == 1
    kept = dividers.recorded(space, now, candidate)
    assert kept.contexts.resistors[own] == 0
    assert kept.contexts.cost[own] == pytest.approx(2 * 0.05 + 0.03)
    others = np.arange(space.contexts.size) != own
    same_level = (space.contexts.top == space.contexts.top[own]) & (
        space.contexts.bottom == space.contexts.bottom[own]
    )
    assert np.array_equal(kept.contexts.cost[others & ~same_level], space.contexts.cost[others & ~same_level])


def test_outlines_come_from_the_catalog_or_else_from_the_record() -> None:
    made = catalogs(opamps=[opamp(**FITS)])
    space = whole(request(), made)
    candidate = written(space, made, ONE)
    filled = catalogs(opamps=[opamp(package="MSOP-8", pinout="single-8")])
    assert board_of(space, filled, candidate).parts["opamp"].package == "MSOP-8"
    vanished = catalogs(opamps=[opamp(part="YZA-9")])
    assert board_of(space, vanished, candidate).parts["opamp"].package == "SOIC-8"
