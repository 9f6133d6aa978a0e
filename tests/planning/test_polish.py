"""Margins gained for nothing, and candidates left out that others serve as well."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import product

import pytest

from optimizer.board.solution import Plan, SolveOptions
from optimizer.board.solve import solve
from optimizer.planning import trim
from optimizer.planning.columns import Pool, assembled
from optimizer.planning.polish import polished
from optimizer.planning.told import Chosen
from optimizer.planning.trim import trimmed
from tests.planning.test_tariff import SEEDS, Whole, whole


def chosen_of(made: Whole, pools: tuple[Pool, ...]) -> Chosen | None:
    """The cheapest plan of some pools."""
    of = assembled(made.field, pools)
    found = solve(of.board, SolveOptions(20.0, "highs"))
    return Chosen(made.field, pools, of, found.plans[0]) if found.plans else None


def boards() -> Iterator[tuple[Whole, Chosen]]:
    """The boards that have a plan, with the cheapest."""
    for made in filter(None, map(whole, SEEDS)):
        chosen = chosen_of(made, made.pools)
        if chosen is not None:
            yield made, chosen


def margins(chosen: Chosen) -> list[float]:
    """The margin of every copy, kind by kind."""
    kinds = zip(chosen.pools, chosen.made.keys, chosen.plan.chosen, strict=True)
    return [pool.held[keys[j]][0] for pool, keys, options in kinds for j in options]


def active(chosen: Chosen) -> set[str]:
    """The photodiodes and op-amps that are bought."""
    board = chosen.made.board
    return {board.parts[line.part].name for line in chosen.plan.lines if board.is_active(line.part)}


def cost(plan: Plan) -> int:
    return plan.totals.cost


def test_margin_is_gained_at_no_more_cost_and_none_is_lost() -> None:
    better = 0
    for made, chosen in boards():
        after = polished(chosen, made.pools)
        assert cost(after.plan) == cost(chosen.plan)  # nothing is cheaper: the plan was the cheapest
        assert after.plan.proven == chosen.plan.proven
        assert active(after) == active(chosen)
        both = zip(sorted(margins(after)), sorted(margins(chosen)), strict=True)
        assert all(new >= old for new, old in both)
        better += margins(after) != margins(chosen)
    assert better >= 2


def test_no_single_exchange_is_left_that_gains() -> None:
    """For kinds built once: every candidate with the same active parts is dearer, or has no more margin."""
    tried = 0
    for made, chosen in boards():
        after = polished(chosen, made.pools)
        kinds = zip(after.made.keys, after.plan.chosen, after.pools, strict=True)
        for i, (keys, (j, *others), pool) in enumerate(kinds):
            if others:
                continue
            own = keys[j]
            for key, (margin, _) in pool.held.items():
                if key[:2] != own[:2] or key[5] != own[5] or margin <= pool.held[own][0]:
                    continue
                pools = [
                    Pool(p.kind, p.group, {k: p.held[k] for k in taken})
                    for p, taken in zip(made.pools, only(after, i, key), strict=True)
                ]
                instead = chosen_of(made, tuple(pools))
                assert instead is None or cost(instead.plan) > cost(after.plan)
                tried += 1
    assert tried >= 5


def only(chosen: Chosen, i: int, key: tuple) -> list[set[tuple]]:
    """By kind, what a plan takes, with another candidate for kind `i`."""
    kinds = zip(chosen.made.keys, chosen.plan.chosen, strict=True)
    used = [{keys[j] for j in options} for keys, options in kinds]
    used[i] = {key}
    return used


def test_what_is_trimmed_without_loss_costs_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(trim, "FEW", 0)
    cut = {True: 0, False: 0}
    for made, chosen in boards():
        left = trimmed(made.field, made.pools)
        smaller = sum(len(p.held) for p in left.pools) < sum(len(p.held) for p in made.pools)
        found = chosen_of(made, left.pools)
        assert found is not None
        assert cost(found.plan) >= cost(chosen.plan)
        if left.lossless:
            assert cost(found.plan) == cost(chosen.plan)
        cut[left.lossless] += smaller
    assert cut[True] >= 3


def test_few_candidates_all_stay() -> None:
    for made, _ in boards():
        left = trimmed(made.field, made.pools)
        assert left.lossless
        assert [pool.held for pool in left.pools] == [pool.held for pool in made.pools]
        assert all(mine is not its for mine, its in product(left.pools, made.pools))
