"""The decision: in a sentence, in figures, in parts to build; and every target held to its limit."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.cells import named
from optimizer.report.changes import changes, cost_words
from optimizer.report.chosen import parts_list
from optimizer.report.corner import at_corner, corner_words, graded_value, has_corner
from optimizer.report.notes import ORDERS
from optimizer.report.page.blocks import Block, Cell, Facts, Part, Section, Table, Words, cells
from optimizer.report.page.terms import arrows, counted, joined, merged, money, term
from optimizer.report.words import beside, count, figure, margin_words, side, spoken, told_apart
from optimizer.review.dossier import Dossier
from optimizer.vocabulary import VOCABULARY

STRIP = ("bandwidth", "snr", "dynamic_range", "supply_current", "transresistance")


def decision(dossier: Dossier) -> Section:
    """The section on what is to be built, and why."""
    row, request = dossier.candidate, dossier.request
    blocks: list[Block] = list(_changed(dossier))
    blocks.append(Words(sentence(row, request), "lead"))
    blocks.append(Words(_standing(dossier)))
    blocks.append(Facts(tuple(_strip(dossier)), "strip", "Key figures"))
    parts = parts_list(row, request)
    rows = tuple(cells(*pair) for pair in merged(parts))
    build = Part("What to build", (Table("The receiver, part by part", ("position", "part"), rows),))
    return Section("decision", "Decision", tuple(blocks), (build, *_replaced(dossier), *_alternates(dossier)))


def _replaced(dossier: Dossier) -> Iterator[Part]:
    """What the candidate stands in for, where it is a substitute."""
    old, row = dossier.data.get("replaces", {}).get("candidate"), dossier.candidate
    if old is None or "changed" not in row:
        return
    rows = tuple(cells(name, arrows(said)) for name, said in changes(old, row, row["changed"]))
    caption = "What changes against the receiver that it replaces"
    said = f"Kind of change: {clean(row['change'])}. Cost: {arrows(cost_words(old, row, dossier.request))}."
    yield Part("What it replaces", (Words(said), Table(caption, ("position", arrows("old -> new")), rows)))


def _alternates(dossier: Dossier) -> Iterator[Part]:
    """The op-amps of other makers that may stand in, where the request asks for second sources."""
    others = dossier.candidate.get("alternates")
    if not others:
        return
    rows = tuple(
        cells(
            clean(other["opamp"]),
            clean(other["opamp_maker"]),
            money(other["cost"], dossier.data),
            f"{term(other['limiting'])}, {margin_words(other['margin'])}",
        )
        for other in others
    )
    headings = ("op-amp", "maker", "cost of the receiver", "limited by")
    caption = "Op-amps in the same package and pinout that meet every target, nothing else changed"
    yield Part("Second sources", (Table(caption, headings, rows, numbers=frozenset({2})),))


def sentence(row: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    """The decision in a sentence: parts, whether all is met, and what limits it."""
    targets = {target["name"]: target for target in row["targets"]}
    limiting = targets[row["limiting"]]
    met = "meets its one graded target" if len(targets) == 1 else f"meets all {counted(len(targets))} targets"
    values = (graded_value(limiting), limiting["value"])
    (value, nominal), limit = told_apart(limiting["name"], values, limiting["limit"], request)
    corner, held = "", value
    if at_corner(limiting):
        corner, held = " at its worst corner", f"{value} there, {nominal} at nominal"
    return (
        f"Build the receiver with photodiode {named(row, 'photodiode')} and op-amp {named(row, 'opamp')}, "
        f"wired {row['wiring']}: it {met}, limited by {term(limiting['name'])} with "
        f"{margin_words(limiting['margin'])}{corner} ({held}, {side(limiting['name'])} {limit})."
    )


def _changed(dossier: Dossier) -> Iterator[Words]:
    """What has changed since, where anything has; the candidate's own figures have not, by then."""
    if not dossier.changed:
        return
    files = joined([clean(change.file) for change in dossier.changed])
    verb = "is" if len(dossier.changed) == 1 else "are"
    text = (
        f"{files} {verb} not what the search read when the record was made. This candidate was computed "
        "again from the files as they are now and its figures are the same, but the other rows and the "
        "ranking are those of the record: run the search again before relying on them."
    )
    yield Words(text, "alert", "Inputs have changed")


def _standing(dossier: Dossier) -> str:
    """Where the candidate stands among the rows, and how sure the ranking is."""
    data, row = dossier.data, dossier.candidate
    rows, order = data["candidates"], ORDERS[data["request"]["ranking"]["by"]]
    many = len(rows)
    what, met = "receiver", " that meet the request"
    if "replaces" in data:
        what, met, order = "substitute", "", "the least change first"
    where = f"It is row {row['rank']} of the {counted(many)} {what}s shown{met}, {order}"
    if many == 1:
        where = f"It is the only {what} shown{met.replace('meet', 'meets')}"
    text = f"{where}; {_certainty(data)}"
    first = rows[0]
    if row["rank"] != first["rank"] and "replaces" not in data:
        by = data["request"]["ranking"]["by"]
        text += f" Row 1, {named(first, 'photodiode')} with {named(first, 'opamp')}, stands first"
        text += f" with {_ranked_by(first, by, data)} against {_ranked_by(row, by, data)}."
    return text


def _certainty(data: Mapping[str, Any]) -> str:
    search = data["search"]
    if search["proven"]:
        combinations = spoken(search["combinations"])
        return f"the ranking is proven, the same as evaluating all {combinations} combinations."
    return "the ranking is not proven: the search was stopped before it could exclude the rest."


def _ranked_by(row: Mapping[str, Any], by: str, data: Mapping[str, Any]) -> str:
    if by == "margin":
        return f"a margin of {margin_words(row['margin'])}"
    if by == "cost":
        return f"a cost of {money(row['figures']['cost'], data)}"
    return f"{term(by)} {figure(by, row['figures'][by], data['request'])}"


def _strip(dossier: Dossier) -> Iterator[tuple[str, str]]:
    row, data, request = dossier.candidate, dossier.data, dossier.request
    targets = row["targets"]
    met = sum(target["margin"] >= 0.0 for target in targets)
    yield "targets met", f"{met} of {len(targets)}"
    yield "limiting target", f"{term(row['limiting'])}, {margin_words(row['margin'])}"
    yield f"cost at {count(request['quantity'])} built", money(row["figures"]["cost"], data)
    nominal = ", nominal" if any(has_corner(target) for target in targets) else ""
    for name in STRIP:
        yield f"{term(name)}{nominal}", figure(name, row["figures"][name], request)


def compliance(dossier: Dossier) -> Section:
    """The section that holds every target to its limit."""
    row, request = dossier.candidate, dossier.request
    targets = row["targets"]
    cornered = any(has_corner(target) for target in targets)
    values = ("nominal", "worst corner") if cornered else ("value",)
    table = Table(
        "Every graded target, its limit, and the margin between",
        ("target", *values, "limit", "margin", "verdict"),
        tuple(_held(target, row["limiting"], request, cornered=cornered) for target in targets),
        numbers=frozenset(range(1, len(values) + 2)),
        marked=frozenset(i for i, target in enumerate(targets) if target["name"] == row["limiting"]),
    )
    blocks: list[Block] = [
        Words(_limiting(row, request)),
        table,
        Words(_key(request, cornered=cornered), "note"),
    ]
    if cornered:
        places = tuple(cells(term(target["name"]), _where(target)) for target in targets)
        blocks.append(Table("Where each target is worst", ("target", "worst corner"), places))
    return Section("compliance", "Compliance", tuple(blocks))


def _limiting(row: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    target = next(target for target in row["targets"] if target["name"] == row["limiting"])
    value, limit = beside(target["name"], graded_value(target), target["limit"], request)
    corner = f" {at_corner(target)}" if at_corner(target) else ""
    meaning = VOCABULARY[target["name"]].meaning.rstrip(".")
    return (
        f"The limiting target is {term(target['name'])}: {meaning[0].lower()}{meaning[1:]}. It is {value}"
        f"{corner} and must be {side(target['name'])} {limit}. Of all margins, its "
        f"{margin_words(target['margin'])} is the smallest."
    )


def _where(target: Mapping[str, Any]) -> str:
    return corner_words(target["corner"]) if target.get("corner") else "no corner is worse than nominal"


def _key(request: Mapping[str, Any], *, cornered: bool) -> str:
    comfort = show(request["ranking"]["comfort"], "fraction")
    where = " Margins are those of the worst corner; all other figures on this page are nominal."
    return (
        "A margin is a fraction of the limit, so that unlike quantities compare; 0 is exactly met. From "
        f"{comfort} up a margin is comfortable, and all such rank alike.{where if cornered else ''}"
    )


def _held(
    target: Mapping[str, Any], limiting: str, request: Mapping[str, Any], *, cornered: bool
) -> tuple[Cell, ...]:
    name, comfort = target["name"], request["ranking"]["comfort"]
    values = (target["value"], graded_value(target)) if cornered else (target["value"],)
    said, limit = told_apart(name, values, target["limit"], request)
    meets = target["margin"] >= 0.0
    verdict = "\u2713 meets" if meets else "\u2717 misses"
    if name == limiting:
        verdict += ", limiting"
    elif target["margin"] >= comfort:
        verdict += ", comfortable"
    return (
        Cell(term(name), tone="strong"),
        *cells(*said, f"{side(name)} {limit}"),
        Cell(margin_words(target["margin"]), bar=bar(target["margin"], comfort)),
        Cell(verdict, tone="good" if meets else "bad"),
    )


def bar(margin: float, comfort: float) -> float:
    """The length of a margin's bar: 0 where it is missed or just met, 1 where it is comfortable."""
    return max(0.0, min(1.0, margin / comfort))
