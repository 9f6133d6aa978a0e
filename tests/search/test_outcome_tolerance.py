"""What [tolerance] changes in the outcome: whose yields are drawn, what they change in the order, and
which families take no part for a blank."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from optimizer import search
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Ambient, Request, Tolerance
from optimizer.search import crew
from optimizer.search.result import Candidate, Outcome, Simulated, Unusable
from optimizer.search.spread import yields
from optimizer.search.unusable import unusable
from tests.search import made
from tests.search.made import capacitor, diode, listed, opamp, resistor

SPREAD = 0.1
TO_SPARE = {"YZD-1": 0.02, "YZD-2": 0.2, "YZD-3": -0.03, "YZD-4": 0.05, "YZD-5": 0.14}
"""Full scale left at the responsivity of each diode; YZD-3 misses it."""
PRICES = {"YZD-1": 1.0, "YZD-2": 2.0, "YZD-3": 1.5, "YZD-4": 4.0, "YZD-5": 5.0}
LEAST = 0.2
"""Responsivity of the diode that just meets full scale [A/W]."""
FULL_SCALE = 4.95
"""Volts below V+ less output_high, guard aside, that the strongest light may drive the output to."""


def parts(**families: Any) -> Catalogs:
    """Diodes that differ in responsivity and price; one Rf, no Cf."""
    diodes = [
        diode(
            part=part,
            price=[(1.0, PRICES[part])],
            responsivity=[(400e-9, LEAST / (1.0 + spare)), (900e-9, LEAST / (1.0 + spare))],
            shunt_resistance=np.inf,
        )
        for part, spare in TO_SPARE.items()
    ]
    exact = opamp(
        bias_current=0.0, offset_voltage=0.0, offset_drift=0.0, open_loop_gain=1e12, output_high=0.05
    )
    families = {"resistors": [resistor(tolerance=0.0, **listed(1e6))]} | families
    return made.catalogs(opamps=[exact], photodiodes=diodes, **families)


def asked(tolerance: Tolerance, **changes: Any) -> Request:
    """Rails on both sides, one wiring, and a light that takes a diode of LEAST A/W to its full scale.

    The output may swing FULL_SCALE volts, of which 1 Mohm and LEAST A/W need a light of 24.75 uW.
    """
    strongest = FULL_SCALE / (1e6 * LEAST)
    return made.request(
        supply={"low": -5.0},
        light={"weakest": 1e-9, "strongest": strongest * (1.0 - 1e-9)},
        space={"wirings": ("rising-unbiased",), "references": ("ground",), "capacitance": (1.0, 2.0)},
        tolerance=tolerance,
        **changes,
    )


def drawn(**stated: Any) -> Tolerance:
    return Tolerance(responsivity=SPREAD, stated=True, **stated)


def names(outcome: Outcome) -> list[str]:
    return [candidate.photodiode for candidate in outcome.candidates]


def expected(part: str) -> float:
    """The share of uniform responsivities at which full scale holds: it goes with 1/responsivity."""
    return min((TO_SPARE[part] + SPREAD) / (2.0 * SPREAD), 1.0)


def test_yields_are_those_computed_by_hand() -> None:
    outcome = search.shortlist(asked(drawn()), parts())
    assert names(outcome) == ["YZD-1", "YZD-2", "YZD-4", "YZD-5"]
    for candidate in outcome.candidates:
        found = candidate.simulated
        assert found is not None
        assert found.yield_ == pytest.approx(expected(candidate.photodiode), abs=0.02)
        assert found.failures.keys() <= {"full_scale"}


@pytest.mark.parametrize(
    ("wanted", "order"),
    [
        (None, [1, 2, 4, 5]),
        (0.5, [1, 2, 4, 5]),
        (0.7, [2, 4, 5, 1]),
        (0.9, [2, 5, 1, 4]),
        (0.9999, [1, 2, 4, 5]),
    ],
)
def test_those_that_do_not_reach_the_yield_stand_last_and_keep_their_order(
    wanted: float | None, order: list[int]
) -> None:
    """Shares by hand: 0.6, 1, 0.75, 1. No 10,000 draws show 0.9999: all passing, they show 0.99962."""
    outcome = search.shortlist(asked(drawn(yield_=wanted)), parts())
    assert names(outcome) == [f"YZD-{k}" for k in order]


def test_the_order_of_reached_and_unknown_yields() -> None:
    plain = search.shortlist(asked(drawn()), parts()).candidates[0]
    rows = [
        replace(plain, photodiode=name, simulated=simulated)
        for name, simulated in [
            ("unknown", Simulated(draws=0, unknown=("resistor.tolerance",))),
            ("low end below", Simulated(draws=100, passed=95, yield_=0.95, low=0.888, high=0.978)),
            ("exactly", Simulated(draws=100, passed=99, yield_=0.99, low=0.9, high=0.998)),
            ("not drawn", None),
            ("above", Simulated(draws=100, passed=100, yield_=1.0, low=0.963, high=1.0)),
        ]
    ]
    order = [row.photodiode for row in yields.ordered(rows, 0.9)]
    assert order == ["exactly", "above", "unknown", "low end below", "not drawn"]
    assert yields.ordered(rows, None) == tuple(rows)


def test_the_yield_changes_neither_which_rows_are_shown_nor_why_others_drop_out() -> None:
    """The bar is that of the search: the second cheapest, whatever its yield. YZD-3, cheaper, misses."""
    ranking = {"show": 2}
    without = search.shortlist(asked(Tolerance(), ranking=ranking), parts())
    outcome = search.shortlist(asked(drawn(yield_=0.9), ranking=ranking), parts())
    assert names(without) == ["YZD-1", "YZD-2"]
    assert names(outcome) == ["YZD-2", "YZD-1"]
    assert outcome.dropped == without.dropped
    assert outcome.dropped == {"missed_target": 1, "cannot_beat": 2}


def test_only_candidates_are_drawn_and_only_where_tolerances_are_stated() -> None:
    outcome = search.shortlist(asked(drawn(draws=100)), parts())
    assert all(candidate.simulated is not None for candidate in outcome.candidates)
    assert [miss.photodiode for miss in outcome.near_misses] == ["YZD-3"]
    assert outcome.near_misses[0].simulated is None
    plain = search.shortlist(asked(Tolerance()), parts())
    assert all(candidate.simulated is None for candidate in plain.candidates)


def test_an_unknown_spread_is_unknown_and_stands_last() -> None:
    """YZD-3 meets full scale with the smaller, dear resistor alone; the others take the cheap one."""
    families = [
        resistor(family="YZR-1", tolerance=None, **listed(1e6)),
        resistor(family="YZR-2", tolerance=0.0, price=[(1.0, 9.0)], **listed(0.96e6)),
    ]
    first, *others = search.shortlist(asked(drawn(yield_=0.5)), parts(resistors=families)).candidates
    assert (first.photodiode, first.resistor_family) == ("YZD-3", "YZR-2")
    assert [row.photodiode for row in others] == ["YZD-1", "YZD-2", "YZD-4", "YZD-5"]
    for row in others:
        assert row.resistor_family == "YZR-1"
        assert row.simulated == Simulated(draws=0, unknown=("resistor.tolerance",))


def test_any_number_of_workers_draws_the_same() -> None:
    request = asked(drawn(yield_=0.7))
    alone, shared = (search.shortlist(request, parts(), workers=workers) for workers in (1, 2))
    assert shared.candidates == alone.candidates


def test_an_interrupted_search_draws_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    hunted = crew.Crew.hunt

    def stop(self: crew.Crew, *args: Any, **kwargs: Any) -> Any:
        if self.met:
            raise KeyboardInterrupt
        return hunted(self, *args, **kwargs)

    monkeypatch.setattr(crew.Crew, "hunt", stop)
    with pytest.raises(search.Interrupted) as caught:
        search.shortlist(asked(drawn(yield_=0.7)), parts())
    assert names(caught.value.outcome) == ["YZD-1", "YZD-2", "YZD-4", "YZD-5"]
    assert all(candidate.simulated is None for candidate in caught.value.outcome.candidates)


# Corners beside draws


def cornered(catalogs: Catalogs, stated: dict[str, float], targets: dict[str, float]) -> Candidate:
    """The best candidate at corners of `stated` spreads."""
    tolerance = Tolerance(method="corners", stated=True, **stated)  # type: ignore[arg-type]
    request = made.request(
        supply={"low": -5.0},
        light={"weakest": 30e-9, "strongest": 3e-6},
        space={"wirings": ("rising-unbiased",), "references": ("ground",)},
        targets=targets,
        tolerance=tolerance,
    )
    return search.shortlist(request, catalogs).candidates[0]


def passives(resistance: float, capacitance: float, tolerance: float) -> dict[str, Any]:
    return {
        "resistors": [resistor(tolerance=tolerance, parasitic_capacitance=0.0, **listed(resistance))],
        "capacitors": [capacitor(tolerance=tolerance, **listed(capacitance))],
    }


def test_no_uniform_draw_of_a_monotonic_figure_is_beyond_its_worst_corner_and_some_come_near() -> None:
    """Full scale goes with 1/(responsivity Rf), the offset with the bias current and Rf."""
    biased = opamp(bias_current=20e-9, offset_voltage=0.0, offset_drift=0.0)
    parts = made.catalogs(opamps=[biased], **passives(470e3, 10e-12, 0.05))
    stated = {"responsivity": 0.1, "bias_current": 0.2}
    found = cornered(parts, stated, {"offset": 20e-3})
    targets = {target.name: target for target in found.targets}
    assert found.simulated is not None
    full_scale, offset = targets["full_scale"], targets["offset"]
    assert full_scale.corner == {"feedback_resistance": 0.05, "responsivity": 0.1, "bias_current": 0.2}
    assert offset.corner == {"feedback_resistance": 0.05, "bias_current": 0.2}
    for target, side in ((full_scale, 1.0), (offset, -1.0)):
        drawn, nominal, worst = found.simulated.worst[target.name], target.value, target.worst
        assert drawn is not None
        assert nominal is not None
        assert worst is not None
        assert side * drawn >= side * worst
        assert abs(drawn - worst) < 0.1 * abs(nominal - worst)


def test_between_the_corners_a_figure_can_be_worse_and_the_draws_find_it() -> None:
    """A lead network (1 + s k T)/(1 + s T) turns the phase by asin((k - 1)/(k + 1)) at most, at
    1/(2 pi T sqrt(k)), where its gain is sqrt(k) (textbook result, from memory). The noise gain is one, and
    a gain bandwidth of 1/(2 pi T), between the ends of its spread, crosses it there.
    """
    node, placed = 46e-12, 4.7e-12  # diode at 0 V, both input capacitances and stray; Cf
    k = (node + placed) / placed
    amplifier = opamp(gbw=5.0 / (2.0 * np.pi * 1e6 * placed), open_loop_gain=1e7)
    parts = made.catalogs(
        opamps=[amplifier], photodiodes=[diode(shunt_resistance=np.inf)], **passives(1e6, placed, 0.0)
    )
    found = cornered(parts, {"gbw": 0.96}, {"phase_margin": 20.0})
    margin = next(target for target in found.targets if target.name == "phase_margin")
    least = 90.0 - np.degrees(np.arcsin((k - 1.0) / (k + 1.0)))
    assert found.simulated is not None
    assert found.simulated.worst["phase_margin"] == pytest.approx(least, abs=0.05)
    assert margin.worst is not None
    assert margin.worst > least + 3.0


def test_the_worst_value_is_found_too_where_margins_are_as_large_as_they_are_told_apart() -> None:
    """Margins end at 1000: all corners of a tiny cost in current have that, yet not the same value."""
    parts = made.catalogs(**passives(470e3, 10e-12, 0.05))
    found = cornered(parts, {"responsivity": 0.1}, {"bandwidth": 1e3, "slew": 1e-3})
    slew = next(target for target in found.targets if target.name == "slew")
    assert slew.margin == 1000.0
    assert slew.value is not None
    assert slew.worst is not None
    assert slew.corner == {"feedback_resistance": 0.05, "responsivity": 0.1}
    assert slew.worst == pytest.approx(slew.value / (1.05 * 1.1), rel=1e-4)


# Families that take no part


CORNERS = Tolerance(method="corners", gbw=0.1, stated=True)
WARM = Ambient(-20.0, 60.0, stated=True)


def left_out(request: Request, **families: Any) -> tuple[Unusable, ...]:
    return unusable(request, made.catalogs(**families))


def blanks(request: Request, **changes: Any) -> tuple[str, ...]:
    """What `unusable` says of one more resistor family with `changes`."""
    families = [resistor(tolerance=0.01, tempco=1e-4), resistor(family="YZR-9", **changes)]
    found = [one for one in left_out(request, resistors=families) if one.family == "YZR-9"]
    assert len(found) <= 1
    return found[0].blank if found else ()


def test_a_family_without_a_price_is_named() -> None:
    assert blanks(made.request(), price=None) == ("price",)
    assert blanks(made.request()) == ()


def test_spreads_that_corners_need_are_named() -> None:
    assert blanks(made.request(tolerance=CORNERS)) == ("tolerance",)
    assert blanks(made.request(tolerance=CORNERS, ambient=WARM)) == ("tolerance", "tempco")
    assert blanks(made.request(tolerance=CORNERS, ambient=WARM), tolerance=0.01) == ("tempco",)
    assert blanks(made.request(tolerance=CORNERS), tolerance=0.01) == ()
    assert blanks(made.request(tolerance=replace(CORNERS, method="nominal"))) == ()


def test_what_the_family_offers_may_be_unknown() -> None:
    assert blanks(made.request(), series=None) == ("series",)
    assert blanks(made.request(), to=None) == ("to",)
    assert blanks(made.request(), series="list", values=None, price=None) == ("values", "price")


def test_families_that_could_offer_nothing_anyhow_are_not_named() -> None:
    below = {"from": 10.0, "to": 99.0}
    assert blanks(made.request(), price=None, **below) == ()
    assert blanks(made.request(space={"exclude": ("YZR-9",)}), price=None) == ()
    divider = listed(10e3)
    assert blanks(made.request(), price=None, **divider) == ("price",)
    assert blanks(made.request(space={"references": ("ground",)}), price=None, **divider) == ()


def test_a_bypass_needs_a_price_but_no_tolerance() -> None:
    request = made.request(tolerance=CORNERS)
    known = {"resistors": [resistor(tolerance=0.01)]}
    bypass = capacitor(**listed(100e-9))
    assert left_out(request, capacitors=[bypass], **known) == ()
    assert left_out(request, capacitors=[bypass | {"price": None}], **known)[0].blank == ("price",)
    placed = capacitor(**listed(2e-12))
    assert left_out(request, capacitors=[placed], **known) == (
        Unusable("capacitor", "YZC-1", "Maker C", ("tolerance",)),
    )


def test_the_families_that_are_named_are_those_that_the_search_leaves_out() -> None:
    families = [resistor(), resistor(family="YZR-0", tolerance=0.01, price=[(1.0, 5.0)])]
    tables = {"resistors": families, "capacitors": [capacitor(tolerance=0.05)]}
    outcome = search.shortlist(made.request(tolerance=CORNERS), made.catalogs(**tables))
    assert {candidate.resistor_family for candidate in outcome.candidates} == {"YZR-0"}
    assert [(one.role, one.family, one.blank) for one in outcome.unusable] == [
        ("resistor", "YZR-1", ("tolerance",))
    ]


def test_they_are_named_too_where_without_them_nothing_is_possible() -> None:
    outcome = search.shortlist(made.request(tolerance=CORNERS), made.catalogs())
    assert outcome.impossible
    assert {one.family for one in outcome.unusable} == {"YZR-1", "YZC-1"}
