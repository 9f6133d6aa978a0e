"""The rules of a board, one at a time: second sources, packages, supplies, levels, what is not known."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from optimizer.catalog.parts import Catalogs
from optimizer.errors import InputError
from optimizer.planning import plan
from optimizer.planning.outline import Costs, Limits, Outline, Rules
from optimizer.planning.plan import BoardPlan, Planned
from optimizer.planning.plan_board import plan_board
from optimizer.request.types import Divider, Request
from tests.planning.brute import Brute
from tests.planning.held import wrongs
from tests.planning.tiny import outline_of
from tests.search.made import Row, capacitor, catalogs, diode, listed, opamp, request, resistor

RESISTORS = [resistor(board_area=1e-6, **listed(10e3, 220e3))]
CAPACITORS = [capacitor(board_area=1e-6, **listed(2.2e-12, 100e-9))]
SINGLE: Row = {"channels": 1.0, "package": "SOT-23", "pinout": "usual", "board_area": 9e-6}
DUAL: Row = {"channels": 2.0, "package": "SOIC-8", "pinout": "usual", "board_area": 30e-6}
DIODE = diode(board_area=16e-6)


def amplifier(part: str, price: float, **changes: Any) -> Row:
    """An op-amp at one price, in a single package unless `changes` say otherwise."""
    own = {"part": part, "family": part, "price": [(1.0, price)], "output_low": 0.0}
    return opamp(**{**own, **SINGLE, **changes})


def parts(*opamps: Row, photodiodes: tuple[Row, ...] = (DIODE,)) -> Catalogs:
    """Catalogs of these op-amps, one photodiode, and one value of each passive besides a divider's."""
    return catalogs(opamps, photodiodes, RESISTORS, CAPACITORS)


def asked(**changes: Any) -> Request:
    """A request that rises from ground, or from what `changes` of its space say."""
    space = {
        "references": ("ground",),
        "wirings": ("rising-unbiased",),
        "dark_on_rail": True,
        "no_capacitor": False,
        "divider": Divider(series="E3", low=10e3, high=10e3, bypass=100e-9),
        "resistance": (200e3, 250e3),
    }
    return request(**{**changes, "space": space | changes.get("space", {})})


SHARED = {"references": ("divider",)}
"""Changes of the space of a request that needs a buffered level."""


def planned(outline: Outline) -> Planned:
    """The answer, held to trying every plan."""
    answer = plan_board(outline)
    assert wrongs(Brute(outline), answer) == []
    return answer


def first(outline: Outline) -> BoardPlan:
    answer = planned(outline)
    assert answer.plans
    return answer.plans[0]


def opamps_of(one: BoardPlan) -> dict[str, int]:
    """The op-amps of a plan, and how many packages of each."""
    return {line.part: line.pieces for line in one.bill if line.role == "opamp"}


class TestPackages:
    BOTH = (
        amplifier("YZA-1", 1.0, family="YZA"),
        amplifier("YZA-2", 1.2, **(DUAL | {"family": "YZA"})),
    )

    def test_two_channels_share_a_dual(self) -> None:
        one = first(outline_of([("one", 2, asked(), parts(*self.BOTH))]))
        assert opamps_of(one) == {"YZA-2": 1}
        assert one.spare == 0

    def test_a_buffer_takes_the_spare_amplifier(self) -> None:
        one = first(outline_of([("one", 1, asked(space=SHARED), parts(*self.BOTH))]))
        assert opamps_of(one) == {"YZA-2": 1}
        assert len(one.levels) == 1

    def test_one_level_and_one_buffer_serve_three_copies(self) -> None:
        one = first(outline_of([("one", 3, asked(space=SHARED), parts(*self.BOTH))]))
        assert opamps_of(one) == {"YZA-2": 2}
        assert len(one.levels) == 1
        assert {line.pieces for line in one.bill if line.value == 10e3} == {2}

    def test_a_package_that_one_channel_refuses_does_not_serve_it(self) -> None:
        small = asked(space={"packages": ("SOT-23", "TO-5")})
        held = parts(*self.BOTH)
        one = first(outline_of([("one", 1, asked(), held), ("two", 1, small, held)]))
        serving = {p.channel: package.opamp for package in one.packages for p in package.places}
        assert serving["two"] == "YZA-1"
        assert opamps_of(one) == {"YZA-1": 2}

    def test_copies_of_who_accepts_both_share_a_dual_beside_one_who_refuses_it(self) -> None:
        small = asked(space={"packages": ("SOT-23", "TO-5")})
        held = parts(*self.BOTH)
        one = first(outline_of([("one", 2, asked(), held), ("two", 1, small, held)]))
        assert opamps_of(one) == {"YZA-1": 1, "YZA-2": 1}

    def test_members_that_differ_electrically_are_graded_each(self) -> None:
        slow = amplifier("YZA-2", 0.5, **(DUAL | {"family": "YZA", "gbw": 20e3}))
        fast = asked(targets={"bandwidth": 50e3})
        one = first(outline_of([("one", 2, fast, parts(self.BOTH[0], slow))]))
        assert opamps_of(one) == {"YZA-1": 2}

    def test_a_target_on_the_supply_current_is_graded_in_the_smallest_package(self) -> None:
        lean = asked(targets={"supply_current": 1.5e-3})
        one = first(outline_of([("one", 2, lean, parts(*self.BOTH))]))
        assert opamps_of(one) == {"YZA-2": 1}

    def test_makers_of_one_family_name_are_two_amplifiers(self) -> None:
        other = amplifier("YZA-2", 0.2, **(DUAL | {"family": "YZA", "maker": "Maker E", "min_gain": 60.0}))
        one = first(outline_of([("one", 2, asked(), parts(self.BOTH[0], other))]))
        assert opamps_of(one) == {"YZA-1": 2}


class TestOpampParts:
    """Two channels whose cheapest op-amps differ: the one is too slow for the other, that too dear for it."""

    HELD = parts(amplifier("YZA-1", 0.5, gbw=0.2e6), amplifier("YZA-2", 2.0, gbw=40e6))

    def board(self, most: int) -> Outline:
        fast = asked(targets={"bandwidth": 150e3})
        channels = [("slow", 1, asked(), self.HELD), ("fast", 1, fast, self.HELD)]
        return outline_of(channels, rules=Rules(opamp_parts=most))

    def test_without_a_limit_each_takes_its_own(self) -> None:
        assert opamps_of(first(self.board(0))) == {"YZA-1": 1, "YZA-2": 1}

    def test_with_one_part_number_they_share(self) -> None:
        one = first(self.board(1))
        assert opamps_of(one) == {"YZA-2": 2}
        assert one.total("opamp_parts").margin == 0.0

    def test_a_limit_that_cannot_be_kept(self) -> None:
        apart = asked(targets={"bandwidth": 150e3})
        slow = asked(space={"exclude": ("YZA-2",)})
        channels = [("slow", 1, slow, self.HELD), ("fast", 1, apart, self.HELD)]
        answer = planned(outline_of(channels, rules=Rules(opamp_parts=1)))
        assert answer.status == plan.INFEASIBLE
        assert answer.refusal is not None
        assert answer.refusal.limits == ("opamp_parts",)
        assert {(r.name, r.least) for r in answer.refusal.relaxations} == {("opamp_parts", 2.0)}


class TestSecondSources:
    RULES = Rules(opamp_sources=2)

    def board(self, *opamps: Row, target: float | None = None, count: int = 1) -> Outline:
        changes: dict[str, Any] = {} if target is None else {"targets": {"cost": target}}
        return outline_of([("one", count, asked(**changes), parts(*opamps))], rules=self.RULES)

    def test_an_op_amp_of_another_maker_in_the_same_package_and_pinout_serves(self) -> None:
        one = first(
            self.board(
                amplifier("YZA-1", 0.5),
                amplifier("YZA-2", 1.0, package="MSOP-8"),
                amplifier("YZA-3", 1.1, package="MSOP-8", maker="Maker E"),
            )
        )
        assert opamps_of(one) == {"YZA-2": 1}
        (build,) = one.builds
        assert [(a.opamp, a.opamp_maker) for a in build.candidate.alternates] == [("YZA-3", "Maker E")]

    @pytest.mark.parametrize(
        "changes",
        [{"maker": "Maker A"}, {"package": "MSOP-8"}, {"pinout": "other"}, {"pinout": ""}, {"gbw": 1e3}],
    )
    def test_nothing_else_does(self, changes: Row) -> None:
        other = amplifier("YZA-2", 1.0, **({"maker": "Maker E"} | changes))
        board = self.board(amplifier("YZA-1", 0.5, pinout=changes.get("pinout") or "usual"), other)
        if changes.get("pinout"):
            board = self.board(amplifier("YZA-1", 0.5), other)
        wanted = asked(targets={"bandwidth": 50e3})
        channel = board.channels[0]
        study = replace(channel.study, request=replace(wanted, quantity=board.quantity))
        answer = planned(replace(board, channels=(replace(channel, study=study),)))
        assert answer.status == plan.INFEASIBLE
        assert answer.refusal is not None
        assert [one.channel for one in answer.refusal.hopeless] == ["one"]

    def test_an_alternate_must_keep_the_cost_target_too(self) -> None:
        """The dear diode would save a part number, but with it the alternate is over the target."""
        sensors = (
            diode(part="YZD-1", price=[(1.0, 3.0)], board_area=16e-6),
            diode(part="YZD-2", price=[(1.0, 2.0)], board_area=16e-6),
        )
        held = parts(amplifier("YZA-1", 0.5), amplifier("YZA-2", 1.5, maker="Maker E"), photodiodes=sensors)
        limited = asked(targets={"cost": 4.0})
        dear = asked(space={"exclude": ("YZD-2",)})
        outline = outline_of(
            [("limited", 1, limited, held), ("dear", 1, dear, held)],
            rules=self.RULES,
            costs=Costs(line_item=50.0),
        )
        one = first(outline)
        assert one.total("line_items").value == 5.0
        assert one.proven == plan.CATALOGS

    def test_a_dual_is_sourced_as_a_dual(self) -> None:
        one = first(
            self.board(
                amplifier("YZA-1", 0.9, family="YZA"),
                amplifier("YZA-2", 1.0, **(DUAL | {"family": "YZA"})),
                amplifier("YZB-1", 0.9, family="YZB", maker="Maker E"),
                count=2,
            )
        )
        assert "YZA-2" not in opamps_of(one)


class TestSupplies:
    HELD = parts(
        amplifier("YZA-1", 1.0, family="YZA"),
        amplifier("YZA-2", 1.2, **(DUAL | {"family": "YZA"})),
    )

    def board(self, **changes: Any) -> Outline:
        low = asked(supply={"high": 3.3}, space=SHARED)
        channels = [("low", 1, low, self.HELD), ("high", 1, asked(space=SHARED), self.HELD)]
        return outline_of(channels, **changes)

    def test_neither_a_package_nor_a_level_serves_two_supplies(self) -> None:
        one = first(self.board())
        users = [{p.channel for p in package.places} - {None} for package in one.packages]
        assert all(len(names) <= 1 for names in users)
        assert sorted(level.channels for level in one.levels) == [("high",), ("low",)]
        assert len({build.level for build in one.builds}) == 2

    def test_a_part_number_of_both_is_one_line_item(self) -> None:
        one = first(self.board(costs=Costs(line_item=20.0)))
        assert len([line for line in one.bill if line.role == "opamp"]) == 1

    def test_nothing_is_called_proven(self) -> None:
        answer = planned(self.board())
        assert answer.plans[0].proven == plan.UNPROVEN
        assert answer.status != plan.OPTIMAL
        assert answer.notes

    def test_where_no_op_amp_serves_both_it_may_be(self) -> None:
        low = amplifier("YZB-1", 0.9, supply_max=3.6)
        high = amplifier("YZA-1", 1.0, supply_min=4.5)
        held = parts(low, high)
        channels = [("low", 1, asked(supply={"high": 3.3}), held), ("high", 1, asked(), held)]
        answer = planned(outline_of(channels))
        assert answer.plans[0].proven == plan.CATALOGS
        assert not answer.notes


class TestUnknown:
    CHEAP_BUT = amplifier("YZA-1", 0.2, board_area=None)
    KNOWN = amplifier("YZA-2", 1.0)

    def board(self, *opamps: Row, limits: Limits) -> Outline:
        return outline_of([("one", 1, asked(), parts(*opamps))], limits=limits)

    def test_an_unknown_area_is_no_part_of_a_board_whose_area_is_limited(self) -> None:
        one = first(self.board(self.CHEAP_BUT, self.KNOWN, limits=Limits(area=100e-6)))
        assert opamps_of(one) == {"YZA-2": 1}

    def test_without_the_limit_it_is_and_the_total_is_unknown(self) -> None:
        one = first(self.board(self.CHEAP_BUT, self.KNOWN, limits=Limits()))
        assert opamps_of(one) == {"YZA-1": 1}
        assert one.total("area").value is None

    def test_an_unknown_quiescent_current_likewise(self) -> None:
        unknown = amplifier("YZA-1", 0.2, quiescent_current=None)
        limited = first(self.board(unknown, self.KNOWN, limits=Limits(supply_current=10e-3)))
        free = first(self.board(unknown, self.KNOWN, limits=Limits()))
        assert opamps_of(limited) == {"YZA-2": 1}
        assert opamps_of(free) == {"YZA-1": 1}
        assert free.total("supply_current").value is None

    def test_where_nothing_is_known_there_is_no_plan_and_no_traceback(self) -> None:
        answer = planned(self.board(self.CHEAP_BUT, limits=Limits(area=100e-6)))
        assert not answer.plans
        assert answer.status == plan.INFEASIBLE
        assert answer.refusal is not None
        assert answer.refusal.limits == ("area",)
        assert answer.refusal.channels == ("one",)
        assert "one" in answer.notes[0]

    def test_passives_too(self) -> None:
        held = catalogs(
            [self.KNOWN],
            [DIODE],
            [
                resistor(family="YZR-1", price=[(1.0, 0.01)], **listed(220e3)),
                resistor(family="YZR-2", board_area=1e-6, **listed(220e3)),
            ],
            CAPACITORS,
        )
        one = first(outline_of([("one", 1, asked(), held)], limits=Limits(area=100e-6)))
        assert [line.part for line in one.bill if line.role == "resistor"] == ["YZR-2"]


class TestDisagreement:
    def test_every_part_on_which_two_catalogs_disagree_is_named(self) -> None:
        held = parts(amplifier("YZA-1", 1.0), amplifier("YZA-2", 1.0), amplifier("YZA-3", 1.0))
        other = parts(
            amplifier("YZA-1", 1.1),
            amplifier("YZA-2", 1.0, stock=500.0),
            amplifier("YZA-3", 1.0),
            photodiodes=(DIODE | {"board_area": 17e-6},),
        )
        with pytest.raises(InputError) as caught:
            plan_board(outline_of([("one", 1, asked(), held), ("two", 1, asked(), other)]))
        said = {problem.cell: problem.rule for problem in caught.value.problems}
        assert set(said) == {"Maker A/YZA-1", "Maker A/YZA-2", "Maker B/YZD-1"}
        assert said["Maker A/YZA-1"].endswith("price")
        assert said["Maker A/YZA-2"].endswith("stock")
        assert said["Maker B/YZD-1"].endswith("board area")

    def test_an_electrical_value_too(self) -> None:
        held, other = parts(amplifier("YZA-1", 1.0)), parts(amplifier("YZA-1", 1.0, quiescent_current=5e-4))
        with pytest.raises(InputError) as caught:
            plan_board(outline_of([("one", 1, asked(), held), ("two", 1, asked(), other)]))
        assert [p.rule.endswith("quiescent current") for p in caught.value.problems] == [True]

    def test_a_part_that_only_one_catalog_holds_is_no_disagreement(self) -> None:
        held = parts(amplifier("YZA-1", 1.0))
        other = parts(amplifier("YZA-2", 2.0), amplifier("YZA-1", 1.0))
        channels = [("one", 1, asked(), held), ("two", 1, asked(), other)]
        assert opamps_of(first(outline_of(channels))) == {"YZA-1": 2}


def test_a_channel_keeps_its_own_cost_target_though_sharing_would_save_the_board_money() -> None:
    sensors = (
        diode(part="YZD-1", price=[(1.0, 3.0)], board_area=16e-6),
        diode(part="YZD-2", price=[(1.0, 2.0)], board_area=16e-6),
    )
    held = parts(amplifier("YZA-1", 0.5), photodiodes=sensors)
    limited, dear = asked(targets={"cost": 3.0}), asked(space={"exclude": ("YZD-2",)})
    channels = [("limited", 1, limited, held), ("dear", 1, dear, held)]
    one = first(outline_of(channels, costs=Costs(line_item=50.0)))
    assert {line.part for line in one.bill if line.role == "photodiode"} == {"YZD-1", "YZD-2"}
