"""What holds of every answer about a tiny board, against every plan of it tried one by one."""

from __future__ import annotations

from collections.abc import Iterator

from optimizer.planning import plan
from optimizer.planning.audit import audited
from optimizer.planning.outline import Outline
from optimizer.planning.plan import BoardPlan, Planned
from tests.planning.brute import Active, Brute

MOST = 2500
"""Ways to give every copy of a board a way to be built, above which it is not tried."""


def tiny_enough(brute: Brute) -> bool:
    """Whether something meets every channel, and all can be tried."""
    return 0 < brute.assignments <= MOST


def active_of(one: BoardPlan) -> Active:
    """The photodiodes and op-amps of a plan."""
    lines = [line for line in one.bill if line.role in ("opamp", "photodiode")]
    return frozenset((line.role, line.maker, line.part) for line in lines)


def several_rails(outline: Outline) -> bool:
    """Whether op-amps on different supplies are planned apart: then nothing is proven of all plans."""
    return len({(c.study.request.supply.high, c.study.request.supply.low) for c in outline.channels}) > 1


def wrongs(brute: Brute, planned: Planned) -> list[str]:
    """Everything of an answer that trying every plan shows to be wrong."""
    return [*_of_status(brute, planned), *_of_plans(brute, planned)]


def _of_status(brute: Brute, planned: Planned) -> Iterator[str]:
    cost, first = brute.cost, planned.plans[0] if planned.plans else None
    if planned.status == plan.INFEASIBLE and cost is not None:
        yield f"called infeasible, yet there is a plan at {cost}"
    if planned.status == plan.OPTIMAL and first is None:
        yield "proven without a plan"
    if cost is None:
        if first is not None:
            yield "a plan where there is none"
        return
    if planned.floor is not None and planned.floor > cost:
        yield f"the floor {planned.floor} is above {cost}"
    if first is None and not several_rails(brute.outline):
        yield f"no plan was found, yet there is one at {cost}"
    if first is not None and first.cost < cost:
        yield f"the plan at {first.cost} is below {cost}"
    if first is not None and first.proven == plan.CATALOGS and first.cost != cost:
        yield f"proven at {first.cost}, yet there is one at {cost}"
    if planned.only and len(brute.best) > len(planned.plans):
        yield f"the only {len(planned.plans)} plans, of {len(brute.best)}"
    if planned.faults:
        yield f"faults: {planned.faults}"


def _of_plans(brute: Brute, planned: Planned) -> Iterator[str]:
    seen: set[Active] = set()
    for one in planned.plans:
        audited(brute.outline, one)
        active = active_of(one)
        best = {other: cost for other, cost in brute.best.items() if other not in seen}
        if active not in best:
            yield f"plan {one.rank} has active parts that no plan has, or that one before it had"
            continue
        if one.cost < best[active]:
            yield f"plan {one.rank} costs {one.cost}, those parts at least {best[active]}"
        if one.bound > min(best.values()) and one.proven == plan.CATALOGS:
            yield f"plan {one.rank} has the bound {one.bound}, the best left costs {min(best.values())}"
        yield from _of_totals(brute, one)
        seen.add(active)
    costs = [one.cost for one in planned.plans]
    if costs != sorted(costs):
        yield "the plans are not in order"


def _of_totals(brute: Brute, one: BoardPlan) -> Iterator[str]:
    """Totals that no plan of the same active parts and cost has."""
    names = ("supply_current", "area", "line_items", "opamp_parts")
    values = {name: one.total(name).value for name in names}
    alike = [t for t in brute.tried if t.active == active_of(one) and t.cost == one.cost and brute.keeps(t)]
    if not any(
        all(value is None or abs(getattr(t, n) - value) <= 1e-9 * abs(value) for n, value in values.items())
        for t in alike
    ):
        yield f"plan {one.rank} has the totals {values}, as no plan of its parts and cost"
