"""Whether a JSON document has the shape of a board's record, before anything relies on it."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from optimizer.errors import Problem, did_you_mean
from optimizer.record.check import (
    LIGHT,
    NUMBER,
    RANKING,
    REQUEST,
    SPACE,
    TEXT,
    Shape,
    candidate_problems,
    shape_problems,
)
from optimizer.record.model import BOARD_FORMAT

POSITIONS = (
    "photodiode",
    "opamp",
    "wiring",
    "reference",
    "feedback_resistance",
    "feedback_capacitance",
    "low_pass",
)
"""What a copy of a channel chooses, as a substitute says what it changes."""
FAMILY = BOARD_FORMAT.partition("/")[0]
MAYBE = (*NUMBER, type(None))
TOP: Shape = {
    "name": (str,),
    "created": (str,),
    "version": (str,),
    "board": (dict,),
    "requests": (dict,),
    "chosen": (int, type(None)),
    "inputs": (list,),
    "search": (dict,),
    "plans": (list,),
    "alone": (dict, type(None)),
    "refusal": (dict, type(None)),
}
BOARD: Shape = {
    "quantity": (int,),
    "channels": (list,),
    "limits": (dict,),
    "costs": (dict,),
    "rules": (dict,),
    "solve": (dict,),
}
CHANNEL: Shape = {"name": (str,), "request": (str,), "count": (int,)}
COSTS: Shape = {"line_item": NUMBER, "placement": NUMBER}
RULES: Shape = {"opamp_sources": (int,), "opamp_parts": (int,)}
SOLVE: Shape = {"plans": (int,), "time": NUMBER, "solver": (str,)}
SEARCH: Shape = {
    "status": (str,),
    "solver": (str,),
    "seconds": NUMBER,
    "bound": (int, type(None)),
    "proven": (str,),
    "pools": (list,),
}
POOL: Shape = {
    "channel": (str,),
    "combinations": (int,),
    "pairs": (int,),
    "kept": (int,),
    "complete": (bool,),
    "left_out": (int, type(None)),
}
PLAN: Shape = {
    "rank": (int,),
    "cost": (int,),
    "bound": (int,),
    "proven": (str,),
    "totals": (list,),
    "limiting": TEXT,
    "channels": (list,),
    "packages": (list,),
    "levels": (list,),
    "bill": (list,),
}
TOTAL: Shape = {"name": (str,), "value": MAYBE, "limit": MAYBE, "margin": MAYBE}
BUILT: Shape = {
    "channel": (str,),
    "copies": (list,),
    "request": (str,),
    "level": TEXT,
    "opamp": (str,),
    "opamp_maker": (str,),
    "candidate": (dict,),
}
PACKAGE: Shape = {"opamp": (str,), "maker": (str,), "amplifiers": (int,), "places": (list,)}
PLACE: Shape = {"channel": TEXT, "copy": (int,), "level": TEXT}
LEVEL: Shape = {
    "name": (str,),
    "voltage": NUMBER,
    "top": NUMBER,
    "bottom": NUMBER,
    "bypass": NUMBER,
    "resistor_family": (str,),
    "capacitor_family": (str,),
    "opamp": (str,),
    "channels": (list,),
}
LINE: Shape = {
    "role": (str,),
    "part": (str,),
    "maker": (str,),
    "value": MAYBE,
    "package": TEXT,
    "pieces": (int,),
    "buy": (int,),
    "unit_price": NUMBER,
    "cost": NUMBER,
    "area": MAYBE,
}
ALONE: Shape = {"cost": (int,), "line_items": (int,), "packages": (int,), "over": (list,)}
REFUSAL: Shape = {
    "hopeless": (list,),
    "limits": (list,),
    "channels": (list,),
    "smallest": (bool,),
    "relaxations": (list,),
}


# What only substitutes for another plan have.
CHANGES: Shape = {"changes": (int,), "fewest": (bool,), "cheapest": (bool,), "changed": (list,)}
CHANGE: Shape = {
    "where": (str,),
    "count": (int,),
    "channel": TEXT,
    "copies": (list,),
    "positions": (list,),
}
SIDES: Mapping[str, Shape] = {
    "channel": {"old": (dict,), "new": (dict,)},
    "packages": {"old": (list,), "new": (list,)},
    "levels": {"old": (dict, type(None)), "new": (dict, type(None))},
}
REPLACES: Shape = {"plan": (dict,), "gone": (list,), "out": (list,), "keep": (list,)}
LOST: Shape = {"part": (str,), "why": (str,)}


def is_board(data: Any) -> bool:
    """Whether a document says that it is a board's record, of whatever version."""
    said = data.get("format") if isinstance(data, dict) else None
    return isinstance(said, str) and said.partition("/")[0] == FAMILY


def board_problems(file: str, data: Any) -> list[Problem]:
    """Everything that keeps `data` from being a board's record of this format, in reading order."""
    if not is_board(data):
        said = data.get("format") if isinstance(data, dict) else None
        cell = None if said is None else str(said)[:60]
        remedy = "board records are written by luxsift board BOARD.toml --save FILE"
        return [Problem(file, None, "format", cell, f"expected a board's record, {BOARD_FORMAT!r}", remedy)]
    if data["format"] != BOARD_FORMAT:
        remedy = "another version of luxsift wrote it; plan the board again"
        return [Problem(file, None, "format", data["format"], f"expected {BOARD_FORMAT!r}", remedy)]
    return list(shape_problems(file, "", data, TOP) or _inner(file, data))


def _inner(file: str, data: Mapping[str, Any]) -> Iterator[Problem]:
    board = list(_board(file, data["board"]))
    yield from board
    yield from _requests(file, data["requests"])
    yield from _search(file, data["search"])
    if data["alone"] is not None:
        yield from shape_problems(file, "alone", data["alone"], ALONE)
    if data["refusal"] is not None:
        yield from shape_problems(file, "refusal", data["refusal"], REFUSAL)
    if "replaces" in data:
        yield from _replaces(file, data["replaces"])
    for index, plan in enumerate(data["plans"]):
        shape = list(_plan(file, f"plans[{index}]", plan))
        yield from shape
        if not shape and not board:
            yield from _names(file, f"plans[{index}]", plan, data)


def _board(file: str, board: Mapping[str, Any]) -> Iterator[Problem]:
    own = shape_problems(file, "board", board, BOARD)
    yield from own
    if own:
        return
    for table, shape in (("costs", COSTS), ("rules", RULES), ("solve", SOLVE)):
        yield from shape_problems(file, f"board.{table}", board[table], shape)
    limits = board["limits"]
    yield from shape_problems(file, "board.limits", limits, dict.fromkeys(limits, NUMBER))
    yield from _each(file, "board.channels", board["channels"], CHANNEL)
    if board["quantity"] < 1:
        yield Problem(file, None, "board.quantity", str(board["quantity"]), "expected a whole number from 1")


def _requests(file: str, requests: Mapping[str, Any]) -> Iterator[Problem]:
    for name, request in requests.items():
        where = f"requests.{name}"
        own = shape_problems(file, where, request, REQUEST)
        yield from own
        for table, shape in () if own else (("light", LIGHT), ("space", SPACE), ("ranking", RANKING)):
            yield from shape_problems(file, f"{where}.{table}", request[table], shape)


def _search(file: str, search: Mapping[str, Any]) -> Iterator[Problem]:
    own = shape_problems(file, "search", search, SEARCH)
    yield from own or _each(file, "search.pools", search["pools"], POOL)


def _plan(file: str, where: str, plan: Any) -> Iterator[Problem]:
    own = shape_problems(file, where, plan, PLAN)
    yield from own
    if own:
        return
    for key, shape in (("totals", TOTAL), ("levels", LEVEL), ("bill", LINE)):
        yield from _each(file, f"{where}.{key}", plan[key], shape)
    for index, built in enumerate(plan["channels"]):
        yield from _built(file, f"{where}.channels[{index}]", built)
    for index, package in enumerate(plan["packages"]):
        place = f"{where}.packages[{index}]"
        own = shape_problems(file, place, package, PACKAGE)
        yield from own or _each(file, f"{place}.places", package["places"], PLACE)
    if not CHANGES.keys().isdisjoint(plan):
        yield from _changes(file, where, plan)


def _changes(file: str, where: str, plan: Mapping[str, Any]) -> Iterator[Problem]:
    """What is wrong with what a substitute says that it changes."""
    own = shape_problems(file, where, plan, CHANGES)
    yield from own
    for index, change in enumerate(() if own else plan["changed"]):
        place = f"{where}.changed[{index}]"
        shape = shape_problems(file, place, change, CHANGE)
        yield from shape
        if shape:
            continue
        if change["where"] not in SIDES:
            rule = f"expected one of {', '.join(SIDES)}"
            yield Problem(file, None, f"{place}.where", change["where"], rule)
            continue
        sides = shape_problems(file, place, change, SIDES[change["where"]])
        yield from sides or _sides(file, place, change)


def _sides(file: str, place: str, change: Mapping[str, Any]) -> Iterator[Problem]:
    """What is wrong with what stood and what stands in one place."""
    for side in ("old", "new"):
        value, where = change[side], f"{place}.{side}"
        if change["where"] == "channel":
            yield from candidate_problems(file, where, value)
            yield from _positions(file, place, change)
        elif change["where"] == "levels":
            yield from () if value is None else shape_problems(file, where, value, {"name": (str,)})
            if value is not None and "top" in value:
                yield from shape_problems(file, where, value, LEVEL)
        else:
            for index, part in enumerate(value):
                named = isinstance(part, list) and len(part) == 2 and all(isinstance(n, str) for n in part)
                if not named:
                    rule = "expected a part and its maker"
                    yield Problem(file, None, f"{where}[{index}]", str(part)[:60], rule)


def _positions(file: str, place: str, change: Mapping[str, Any]) -> Iterator[Problem]:
    for index, copy in enumerate(change["copies"]):
        if not isinstance(copy, int) or isinstance(copy, bool):
            yield Problem(file, None, f"{place}.copies[{index}]", str(copy)[:60], "expected a whole number")
    for index, name in enumerate(change["positions"]):
        if name not in POSITIONS:
            rule = f"expected one of {', '.join(POSITIONS)}"
            yield Problem(file, None, f"{place}.positions[{index}]", str(name)[:60], rule)


def _replaces(file: str, table: Any) -> Iterator[Problem]:
    """What is wrong with what a record says of the plan that its own replace."""
    own = shape_problems(file, "replaces", table, REPLACES)
    yield from own
    if own:
        return
    yield from shape_problems(file, "replaces.plan", table["plan"], {"rank": (int,), "cost": (int,)})
    yield from _each(file, "replaces.gone", table["gone"], LOST)
    for key in ("out", "keep"):
        for index, name in enumerate(table[key]):
            if not isinstance(name, str):
                yield Problem(file, None, f"replaces.{key}[{index}]", str(name)[:60], "expected text")


def _built(file: str, where: str, built: Any) -> Iterator[Problem]:
    own = shape_problems(file, where, built, BUILT)
    yield from own
    if own:
        return
    yield from candidate_problems(file, f"{where}.candidate", built["candidate"])
    for index, copy in enumerate(built["copies"]):
        if not isinstance(copy, int) or isinstance(copy, bool):
            yield Problem(file, None, f"{where}.copies[{index}]", str(copy)[:60], "expected a whole number")


def _each(file: str, where: str, entries: Iterable[Any], shape: Shape) -> Iterator[Problem]:
    for index, entry in enumerate(entries):
        yield from shape_problems(file, f"{where}[{index}]", entry, shape)


def _names(file: str, where: str, plan: Mapping[str, Any], data: Mapping[str, Any]) -> Iterator[Problem]:
    """Names in a plan that stand for nothing, and copies of channels that are not built once each."""
    counts = {channel["name"]: channel["count"] for channel in data["board"]["channels"]}
    levels = {level["name"] for level in plan["levels"]}
    built: dict[str, list[int]] = {name: [] for name in counts}
    for index, entry in enumerate(plan["channels"]):
        place = f"{where}.channels[{index}]"
        yield from _unknown(file, f"{place}.channel", entry["channel"], counts)
        yield from _unknown(file, f"{place}.request", entry["request"], data["requests"])
        if entry["level"] is not None:
            yield from _unknown(file, f"{place}.level", entry["level"], levels)
        built.get(entry["channel"], []).extend(entry["copies"])
    for name, copies in built.items():
        if sorted(copies) != list(range(1, counts[name] + 1)):
            rule = f"expected each of the {counts[name]} copies of channel {name!r} once"
            yield Problem(file, None, f"{where}.channels", str(sorted(copies))[:60], rule)
    for index, change in enumerate(plan.get("changed", ())):
        if change["where"] == "channel":
            yield from _unknown(file, f"{where}.changed[{index}].channel", str(change["channel"]), counts)
    for index, package in enumerate(plan["packages"]):
        for at, served in enumerate(package["places"]):
            place = f"{where}.packages[{index}].places[{at}]"
            if served["channel"] is not None:
                yield from _unknown(file, f"{place}.channel", served["channel"], counts)
            if served["level"] is not None:
                yield from _unknown(file, f"{place}.level", served["level"], levels)


def _unknown(file: str, where: str, name: str, known: Iterable[str]) -> Iterator[Problem]:
    names = list(known)
    if name not in names:
        yield Problem(
            file, None, where, name, "the record holds nothing of that name", did_you_mean(name, names)
        )
