"""The decision on a board: in a sentence, in figures, how sure it is, and what it replaces."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.report.board.alone import alone_words
from optimizer.report.board.amounts import CENTS, amount, money, of_cents
from optimizer.report.board.status import could_save, verdict
from optimizer.report.changes import NAMES
from optimizer.report.page.blocks import Block, Facts, Part, Section, Table, Words, cells
from optimizer.report.page.board.tables import called, priced
from optimizer.report.page.terms import arrows, counted, joined, merged, term
from optimizer.report.replacement_board import change_rows, cost_words
from optimizer.report.words import count, margin_words, several
from optimizer.review.board_dossier import BoardDossier
from optimizer.review.withdrawal import WHY

Data = Mapping[str, Any]


def decision(dossier: BoardDossier) -> Section:
    """The section on what is to be built, and why."""
    blocks: list[Block] = list(_changed(dossier))
    blocks.append(Words(sentence(dossier), "lead"))
    blocks.append(Words(_proof(dossier)))
    if dossier.plan["rank"] == dossier.data["chosen"] == 1 and "replaces" not in dossier.data:
        blocks += [Words(text) for text in alone_words(dossier.plan, dossier.data)]
    blocks.append(Facts(tuple(_strip(dossier)), "strip", "Key figures"))
    return Section("decision", "Decision", tuple(blocks), tuple(_replaced(dossier)))


def sentence(dossier: BoardDossier) -> str:
    """The decision in a sentence: what is built, for how much, whether all limits are kept, what limits."""
    data, plan = dossier.data, dossier.plan
    board = data["board"]
    channels = sum(channel["count"] for channel in board["channels"])
    each = money(plan["cost"] / CENTS / board["quantity"])
    built = f"Build {several(board['quantity'], 'board')} of {several(channels, 'channel')} as plan"
    price = f"at {priced(each, data)} a board"
    return f"{built} {plan['rank']}, {price}: every channel meets its request{_limited(plan)}."


def _limited(plan: Data) -> str:
    stated = [total for total in plan["totals"] if total["limit"] is not None]
    if not stated:
        return ", and no limit is stated on the board as a whole"
    kept = {1: "its one limit", 2: "both limits"}.get(len(stated), f"all {counted(len(stated))} limits")
    nearest = next((total for total in stated if total["name"] == plan["limiting"]), None)
    if nearest is None or nearest["margin"] is None:
        return f", and the board has {counted(len(stated))} of its own"
    limiting = f"{called(nearest['name'])} being the nearest ({margin_words(nearest['margin'])})"
    return f", and the board keeps {kept}, {limiting}"


def _proof(dossier: BoardDossier) -> str:
    """How far it is proven, in the words of the report; another plan than the first by what it could save."""
    data, plan = dossier.data, dossier.plan
    if "replaces" in data:
        many = several(plan.get("changes", 0), "position")
        kept = "keeping every channel that does not use what is gone"
        if not plan.get("fewest"):
            return f"It changes {many}. That no board changes fewer, or costs less, is not proven."
        if not plan.get("cheapest"):
            less = "one that changes as few may cost less"
            return f"It changes {many}, which is proven the fewest, {kept}; {less}."
        return (
            f"It changes {many}, which is proven the fewest, and of the boards that change as few the "
            f"cheapest, {kept}."
        )
    if plan["rank"] == data["plans"][0]["rank"]:
        return verdict(data)
    return f"It is plan {plan['rank']} of {len(data['plans'])}, not the cheapest. {could_save(plan, data)}"


def _changed(dossier: BoardDossier) -> Iterator[Words]:
    """What has changed since, where anything has; the plan's own figures have not, by then."""
    if not dossier.changed:
        return
    files = joined([clean(change.file) for change in dossier.changed])
    verb = "is" if len(dossier.changed) == 1 else "are"
    text = (
        f"{files} {verb} not what planning read when the record was made. This plan was computed and priced "
        "again from the files as they are now and its figures are the same, but what is said of other plans, "
        "and what is proven, is that of the record: plan the board again before relying on it."
    )
    yield Words(text, "alert", "Inputs have changed")


def _strip(dossier: BoardDossier) -> Iterator[tuple[str, str]]:
    data, plan = dossier.data, dossier.plan
    yield "channels that meet", f"{_copies(plan)} of {_copies(plan)}"
    nearest = next((total for total in plan["totals"] if total["name"] == plan["limiting"]), None)
    if nearest is not None and nearest["margin"] is not None:
        yield "limiting budget", f"{called(nearest['name'])}, {margin_words(nearest['margin'])}"
    yield f"cost of {count(data['board']['quantity'])} boards", priced(of_cents(plan["cost"]), data)
    for total in plan["totals"]:
        if total["name"] in ("cost", "supply_current", "line_items", "packages"):
            yield called(total["name"]), amount(total["name"], total["value"])
    yield "spare amplifiers", count(sum(package["spare"] for package in plan["packages"]))


def _copies(plan: Data) -> int:
    return sum(len(built["copies"]) for built in plan["channels"])


def _replaced(dossier: BoardDossier) -> Iterator[Part]:
    """What the plan stands in for, where it does."""
    replaces, plan = dossier.data.get("replaces"), dossier.plan
    if replaces is None or "changed" not in plan:
        return
    lost = dict.fromkeys(
        f"{clean(part['part'])} ({WHY.get(part['why'], part['why'])})" for part in replaces["gone"]
    )
    kept = joined([NAMES.get(name, term(name)) for name in replaces["keep"]])
    gone = f"Gone: {joined(list(lost)) or 'nothing by name'}." + (f" Kept as it is: {kept}." if kept else "")
    rows = [row for change in plan["changed"] for row in change_rows(change, dossier.data)]
    rows.append(("cost", cost_words(replaces["plan"], plan, dossier.data["board"]["quantity"])))
    table = Table(
        "What changes against the plan that it replaces",
        ("where", arrows("old -> new")),
        tuple(cells(name, arrows(said)) for name, said in merged(rows)),
    )
    yield Part("What it replaces", (Words(gone), table))
