"""What came of planning, in honest words: how far the first plan is proven, by what, and what went wrong."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.planning.plan import CATALOGS, INFEASIBLE, INTERRUPTED, OPTIMAL, POOLS, UNPROVEN
from optimizer.quantities import show
from optimizer.report.board.amounts import CENTS, money, of_cents
from optimizer.report.stepped import in_currency
from optimizer.report.words import count, percent, several

Data = Mapping[str, Any]

SOLVERS: Mapping[str, str] = {"cbc": "CBC", "highs": "HiGHS"}
ADMITTED = "everything that the requests admit"
"""Over what a plan is proven where no pool was cut."""
CONSIDERED = "the candidates looked at"
PROVEN: Mapping[str, str] = {
    CATALOGS: f"Proven: no plan over {ADMITTED}",
    POOLS: f"Proven over {CONSIDERED}, which are not all: no plan over them",
}


def subject(data: Data) -> str:
    """What is to be built, for how much: '400 boards of 6 channels: 7.14 a board, 2856.00 in all, in EUR'."""
    board = data["board"]
    channels = sum(channel["count"] for channel in board["channels"])
    kinds = len(board["channels"])
    of_kinds = f" of {several(kinds, 'kind')}" if kinds < channels else ""
    built = f"{several(board['quantity'], 'board')} of {several(channels, 'channel')}{of_kinds}"
    if not data["plans"]:
        return built
    cost = data["plans"][0]["cost"]
    each = money(cost / CENTS / board["quantity"])
    currency = f",{in_currency(data)}" if data.get("currency") else ""
    return f"{built}: {each} a board, {of_cents(cost)} in all{currency}"


def verdict(data: Data) -> str:
    """How far the first plan is proven; where there is none, what that means."""
    if not data["plans"]:
        return _none(data)
    first = data["plans"][0]
    if is_proven(data):
        beyond = _at_all(first, data) if first["proven"] == POOLS else ""
        return f"{PROVEN[first['proven']]} costs less.{beyond}"
    return f"NOT PROVEN: {_stopped(data)}. {could_save(first, data)}{_at_all(first, data)}"


def is_proven(data: Data) -> bool:
    """Whether there is a first plan and it is proven to be the cheapest, over something."""
    plans = data["plans"]
    return bool(plans and data["search"]["status"] == OPTIMAL and plans[0]["proven"] != UNPROVEN)


def _stopped(data: Data) -> str:
    status, limit = data["search"]["status"], f"the time limit of {_seconds(data)}"
    if status == INTERRUPTED:
        return "interrupted"
    if data["search"]["faults"]:
        return f"ended by what is said below, or by {limit}"
    if data["search"]["notes"] and data["search"]["seconds"] < data["board"]["solve"]["time"]:
        return "for what is noted below"
    return f"stopped by {limit}"


def _seconds(data: Data) -> str:
    return show(data["board"]["solve"]["time"], "time")


def could_save(plan: Data, data: Data) -> str:
    """What a better plan could save at most, by the bound."""
    bound, over = _bound(plan, data)
    if bound <= 0:
        return "No bound was found, so how much could be saved is not known."
    if bound >= plan["cost"]:
        return f"The bound is its own cost, over {over}: none costs less."
    return f"The bound is {_at_most(plan, bound, data)} could be saved over {over}."


def _bound(plan: Data, data: Data) -> tuple[int, str]:
    """The plan's own bound with what it holds over; that over everything where it is as good."""
    floor = _floor(data)
    return (floor, ADMITTED) if floor >= plan["bound"] else (plan["bound"], _bounded(data))


def _floor(data: Data) -> int:
    """What no plan at all costs less than; 0 where that is not known."""
    return data["search"].get("floor") or 0


def _at_most(plan: Data, bound: int, data: Data) -> str:
    """'7.06 a board, so at most 0.08 a board (12.34 a build, 1 %)'."""
    gap, quantity = plan["cost"] - bound, data["board"]["quantity"]
    least, each = (money(cents / CENTS / quantity) for cents in (bound, gap))
    share = percent(gap / plan["cost"])
    return f"{least} a board, so at most {each} a board ({of_cents(gap)} a build, {share})"


def _at_all(plan: Data, data: Data) -> str:
    """What could be saved by any plan at all, where the plan's bound is over less than that; else ''."""
    floor = _floor(data)
    if not 0 < floor < plan["bound"] or _bounded(data) == ADMITTED:
        return ""
    return f" Over {ADMITTED} no plan costs less than {_at_most(plan, floor, data)} could be saved."


def _bounded(data: Data) -> str:
    """Over what the bound holds."""
    return ADMITTED if over_everything(data) else CONSIDERED


def over_everything(data: Data) -> bool:
    """Whether nothing that matters was left out of what was looked at."""
    pools = data["search"]["pools"]
    return bool(pools) and all(pool["complete"] for pool in pools)


def _none(data: Data) -> str:
    status, refusal = data["search"]["status"], data["refusal"]
    if refusal is not None and refusal["hopeless"]:
        return "There is no plan: a channel that nothing meets by itself cannot be on any board."
    if status == INFEASIBLE:
        return "No plan meets the board, which is proven."
    if refusal is not None and refusal["limits"] + refusal["channels"]:
        return f"No plan was found: {CONSIDERED}, which are not all, give none. Others might."
    why = f"{_stopped(data)}, which" if status == INTERRUPTED else f"{_stopped(data)}; that"
    return f"No plan was found: {why} proves nothing, for there may be one."


def solved(data: Data) -> str:
    """By which solver, in what time; '' where no solver ran."""
    search = data["search"]
    if search["solver"] in ("", "none"):
        return ""
    solver = SOLVERS.get(search["solver"], clean(search["solver"]))
    return f"Planned in {search['seconds']:.3g} s with {solver}."


def faults(data: Data) -> Iterator[str]:
    """What went wrong with a solver."""
    for fault in data["search"]["faults"]:
        yield f"A solver failed: {clean(fault)}"


def notes(data: Data) -> Iterator[str]:
    """What else is to be said of how the plans were found, and what was left out of the catalogs."""
    yield from (clean(note) for note in data["search"]["notes"])
    rows = sum(entry["rows"] for entry in data.get("left_out", ()))
    if rows:
        files = ", ".join(f"{clean(e['file'])} ({count(e['rows'])})" for e in data["left_out"])
        yield f"Left out of the catalogs as source.toml says: {several(rows, 'row')}, {files}."
