"""Whether a JSON document has the shape of a record, before anything relies on it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.errors import Problem
from optimizer.record.model import FORMAT
from optimizer.vocabulary import VOCABULARY

Shape = Mapping[str, tuple[type, ...]]
NUMBER = (int, float)
TOP: Shape = {
    "name": (str,),
    "created": (str,),
    "version": (str,),
    "request": (dict,),
    "chosen": (int, type(None)),
    "inputs": (list,),
    "search": (dict,),
    "candidates": (list,),
    "near_misses": (list,),
}
SEARCH: Shape = {
    "combinations": (int,),
    "evaluated": (int,),
    "seconds": NUMBER,
    "proven": (bool,),
    "dropped": (dict,),
}
REQUEST: Shape = {"quantity": (int,), "light": (dict,), "space": (dict,), "ranking": (dict,)}
LIGHT: Shape = {"wavelength": NUMBER, "strongest": (*NUMBER, str)}
SPACE: Shape = {"low_pass": (list,)}
RANKING: Shape = {"by": (str,), "show": (int,), "comfort": NUMBER}
CANDIDATE: Shape = {
    "rank": (int,),
    "photodiode": (str,),
    "opamp": (str,),
    "photodiode_maker": (str,),
    "opamp_maker": (str,),
    "wiring": (str,),
    "reference": (dict,),
    "feedback_resistance": NUMBER,
    "resistor_family": (str,),
    "feedback_capacitance": NUMBER,
    "capacitor_family": (str, type(None)),
    "low_pass": (*NUMBER, type(None)),
    "figures": (dict,),
    "targets": (list,),
    "limiting": (str,),
    "margin": NUMBER,
    "assumed": (list,),
}
TEXT = (str, type(None))
# Keys that a candidate need not have: outlines of its parts, and what it changes where it is a substitute.
OUTLINES: Shape = dict.fromkeys(
    (
        "photodiode_package",
        "photodiode_pinout",
        "opamp_package",
        "opamp_pinout",
        "resistor_maker",
        "resistor_package",
        "capacitor_maker",
        "capacitor_package",
        "divider_family",
        "divider_maker",
        "divider_package",
        "bypass_family",
        "bypass_maker",
        "bypass_package",
    ),
    TEXT,
) | {"change": (str,), "changed": (list,)}
REPLACES: Shape = {"candidate": (dict,), "gone": (list,), "out": (list,), "keep": (list,)}
REFERENCE: Shape = {
    "kind": (str,),
    "voltage": NUMBER,
    "top": (*NUMBER, type(None)),
    "bottom": (*NUMBER, type(None)),
    "buffered": (bool,),
    "extra_package": (bool,),
}
TARGET: Shape = {"name": (str,), "value": (*NUMBER, type(None)), "limit": NUMBER, "margin": NUMBER}
# What only some records have: with corners graded, with parts drawn at random.
CORNER: Shape = {"worst": (*NUMBER, type(None)), "corner": (dict,)}
YIELD: Shape = {
    "draws": (int,),
    "passed": (int,),
    "yield": (*NUMBER, type(None)),
    "low": (*NUMBER, type(None)),
    "high": (*NUMBER, type(None)),
    "failures": (dict,),
    "worst": (dict,),
    "unknown": (list,),
    "meets": (bool, type(None)),
}
WORDS = {str: "text", int: "a whole number", float: "a number", dict: "a table", list: "a list"}
WORDS |= {bool: "true or false", type(None): "null"}


def document_problems(file: str, data: Any) -> list[Problem]:
    """Everything that keeps `data` from being a record of this format, in reading order."""
    said = data.get("format") if isinstance(data, dict) else None
    if said != FORMAT:
        return [Problem(file, None, "format", None if said is None else str(said), *_other(said))]
    return list(shape_problems(file, "", data, TOP) or _inner(file, data))


def _other(said: object) -> tuple[str, str]:
    family = FORMAT.partition("/")[0]
    if isinstance(said, str) and said.partition("/")[0] == family:
        return f"expected {FORMAT!r}", "another version of luxsift wrote it; run the request again"
    return f"expected a record, {FORMAT!r}", "records are written by luxsift shortlist REQUEST --save FILE"


def _inner(file: str, data: Mapping[str, Any]) -> Iterator[Problem]:
    yield from shape_problems(file, "search", data["search"], SEARCH)
    request = shape_problems(file, "request", data["request"], REQUEST)
    yield from request
    for table, shape in () if request else (("light", LIGHT), ("space", SPACE), ("ranking", RANKING)):
        yield from shape_problems(file, f"request.{table}", data["request"][table], shape)
    if "replaces" in data:
        yield from _replaces(file, data["replaces"])
    for group in ("candidates", "near_misses"):
        for index, entry in enumerate(data[group]):
            yield from candidate_problems(file, f"{group}[{index}]", entry)


def _replaces(file: str, table: Any) -> Iterator[Problem]:
    """What is wrong with what a record says of the candidate that its own replace."""
    own = shape_problems(file, "replaces", table, REPLACES)
    yield from own
    for index, name in enumerate(() if own else table["out"]):
        if not isinstance(name, str):
            yield Problem(file, None, f"replaces.out[{index}]", str(name)[:60], "expected text")


def candidate_problems(file: str, where: str, entry: Any) -> Iterator[Problem]:
    """What is wrong with one candidate of a record, at `where` in its document."""
    own = shape_problems(file, where, entry, CANDIDATE)
    if isinstance(entry, dict):
        stated = {key: kinds for key, kinds in OUTLINES.items() if key in entry}
        own += shape_problems(file, where, entry, stated)
    yield from own
    if own:
        return
    yield from shape_problems(file, f"{where}.reference", entry["reference"], REFERENCE)
    figures = dict.fromkeys(VOCABULARY, (*NUMBER, type(None)))
    yield from shape_problems(file, f"{where}.figures", entry["figures"], figures)
    for index, target in enumerate(entry["targets"]):
        place = f"{where}.targets[{index}]"
        cornered = isinstance(target, dict) and not CORNER.keys().isdisjoint(target)
        yield from shape_problems(file, place, target, {**TARGET, **CORNER} if cornered else TARGET)
        if cornered and isinstance(target.get("corner"), dict):
            yield from _numbers(file, f"{place}.corner", target["corner"], NUMBER)
    if "yield" in entry:
        yield from _drawn(file, f"{where}.yield", entry["yield"])


def _drawn(file: str, where: str, drawn: Any) -> Iterator[Problem]:
    own = shape_problems(file, where, drawn, YIELD)
    yield from own
    if not own:
        yield from _numbers(file, f"{where}.failures", drawn["failures"], (int,))
        yield from _numbers(file, f"{where}.worst", drawn["worst"], (*NUMBER, type(None)))


def _numbers(file: str, where: str, table: Mapping[str, Any], kinds: tuple[type, ...]) -> list[Problem]:
    """Everything in `table` that is none of `kinds`, whatever its keys."""
    return shape_problems(file, where, table, dict.fromkeys(table, kinds))


def shape_problems(file: str, where: str, table: Any, shape: Shape) -> list[Problem]:
    """Every key of `shape` that `table`, at `where` in a document, lacks or holds something else under."""
    if not isinstance(table, dict):
        return [Problem(file, None, where or None, None, "expected a table")]
    found = []
    for key, kinds in shape.items():
        place = f"{where}.{key}" if where else key
        if key not in table:
            found.append(Problem(file, None, place, None, "the record lacks this key"))
        elif not _is_one_of(table[key], kinds):
            rule = f"expected {' or '.join(WORDS[kind] for kind in kinds)}"
            found.append(Problem(file, None, place, str(table[key])[:60], rule))
    return found


def _is_one_of(value: object, kinds: tuple[type, ...]) -> bool:
    return isinstance(value, kinds) and (bool in kinds or not isinstance(value, bool))
