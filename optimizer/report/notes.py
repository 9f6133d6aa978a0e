"""Headline, footnotes of the table's marks, and what the search covered."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.quantities import KINDS, show
from optimizer.report.cells import ASSUMED, LINEAR
from optimizer.report.paragraphs import styled
from optimizer.report.words import count, ranges, several, share, spoken
from optimizer.report.yields import BELOW, blanks, is_below, is_unknown
from optimizer.vocabulary import COLUMNS

RANKS_NAMED = 8  # numbers of one footnote; beyond, the rows are only counted
ORDERS = {
    "cost": "lowest cost first",
    "margin": "largest margin first",
    "snr": "highest SNR first",
    "supply_current": "lowest supply current first",
}


def headline(record: Mapping[str, Any], width: int) -> list[Text]:
    """The request's name, how many rows meet it, and in which order they stand."""
    rows, request = record["candidates"], record["request"]
    out = styled(clean(record["name"]), width, "bold")
    if record["search"].get("impossible"):
        return out
    corners = at_every_corner(request)
    if not rows:
        return out + styled(f"Nothing meets the request{corners}.", width, "bold red")
    plural = f"{len(rows)} receivers that meet" if len(rows) > 1 else "One receiver that meets"
    currency = f", cost in {record['currency']}" if record.get("currency") else ""
    quantity = f" at {count(request['quantity'])} built"
    order = ORDERS[request["ranking"]["by"]]
    out += styled(f"{plural} the request{corners}, {order}{currency}{quantity}", width)
    return out + styled(_reached(rows, request), width)


def at_every_corner(request: Mapping[str, Any]) -> str:
    """' at every corner' where `request` grades corners, else ''."""
    return " at every corner" if request.get("tolerance", {}).get("method") == "corners" else ""


def _reached(rows: Sequence[Mapping[str, Any]], request: Mapping[str, Any]) -> str:
    """How many rows reach the yield that is asked for; '' where all do, or none is asked for."""
    below = sum(is_below(row) for row in rows)
    if not below:
        return ""
    wanted = share(request["tolerance"]["yield"])
    if below == len(rows):
        which = "None of them" if below > 1 else "It"
        return f"{which} is {'' if below > 1 else 'not '}shown to reach the yield of {wanted} asked for."
    reaches = "1 of them is" if len(rows) - below == 1 else f"{len(rows) - below} of them are"
    return f"{reaches} shown to reach the yield of {wanted} asked for; the others stand last."


def impossible_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """What no part could meet, with the reasons; empty where there is no such thing."""
    reasons: Sequence[str] = record["search"].get("impossible", ())
    if not reasons:
        return []
    out = styled("No part could meet this request, so nothing was searched:", width, "bold red")
    return out + [line for reason in reasons for line in styled(f"- {clean(reason)}", width, indent="  ")]


def footnotes(rows: Sequence[Mapping[str, Any]], request: Mapping[str, Any], width: int) -> list[Text]:
    """What the marks in a table of `rows` stand for; empty where none is set."""
    out = []
    assumed = sorted({name for row in rows for name in row["assumed"]})
    if assumed:
        where = "; ".join(f"{name}{filled(name, request)} ({_ranks(rows, name)})" for name in assumed)
        out += styled(
            f"{ASSUMED} assumed where the catalog leaves a blank: {clean(where)}", width, indent="  "
        )
    if any(row.get("linear_model") for row in rows):
        text = f"{LINEAR} of the linear model: the dark output rests on the lower rail (dark_on_rail)"
        out += styled(text, width, indent="  ")
    return out + _yield_notes(rows, request, width)


def _yield_notes(rows: Sequence[Mapping[str, Any]], request: Mapping[str, Any], width: int) -> list[Text]:
    """Which rows do not reach the yield asked for, and why the yields of some are unknown."""
    out = []
    below = [row["rank"] for row in rows if is_below(row)]
    if below:
        wanted = share(request["tolerance"]["yield"])
        text = f"{BELOW} the yield's 95 % interval begins below the {wanted} asked for"
        unknown = ", or the yield is unknown" if any(map(is_unknown, rows)) else ""
        out += styled(f"{text}{unknown} ({rank_words(below, len(rows))})", width, indent="  ")
    for names in sorted({blanks(row["yield"]) for row in rows if is_unknown(row)}):
        ranks = [row["rank"] for row in rows if is_unknown(row) and blanks(row["yield"]) == names]
        out += styled(f"yield unknown: {names} ({rank_words(ranks, len(rows))})", width, indent="  ")
    return out


def covered(record: Mapping[str, Any], width: int) -> list[Text]:
    """How much was covered, and whether the ranking is proven."""
    return styled(coverage(record), width)


def coverage(record: Mapping[str, Any]) -> str:
    """`covered` as one paragraph."""
    search = record["search"]
    pairs = f" of {count(search['pairs'])} pairs" if search.get("pairs") else ""
    text = f"Covered {spoken(search['combinations'])} combinations{pairs} in {search['seconds']:.3g} s"
    text += f", {count(search['evaluated'])} of them evaluated, the others excluded by proven bounds. "
    if search["proven"]:
        text += "The ranking is proven: the same as evaluating every combination."
    else:
        text += "NOT PROVEN: the search was stopped before it could exclude the rest."
    left_out = sum(entry["rows"] for entry in record.get("left_out", ()))
    if left_out:
        files = ", ".join(f"{clean(e['file'])} ({count(e['rows'])})" for e in record["left_out"])
        text += f" Left out of the catalogs as source.toml says: {several(left_out, 'row')}, {files}."
    return text


def filled(name: str, request: Mapping[str, Any]) -> str:
    """What `name` ("opamp.output_low") was filled with: ' = 50 mV'; '' where that is not known."""
    role, _, column = name.partition(".")
    known = COLUMNS.get(f"{role}s", {}).get(column)
    if known is None:
        return ""
    value = request.get("assume", {}).get(f"{role}s", {}).get(column)
    if value is None:
        return f" = {known.default_text}" if known.default_text else ""
    kind = "level" if known.kind == "gain" else known.kind
    return f" = {value}" if isinstance(value, str) or kind not in KINDS else f" = {show(value, kind)}"


def _ranks(rows: Sequence[Mapping[str, Any]], name: str) -> str:
    return rank_words([row["rank"] for row in rows if name in row["assumed"]], len(rows))


def rank_words(ranks: Sequence[int], rows: int) -> str:
    """The ranks of some of `rows` rows: 'row 3', 'rows 1, 4-8', 'every row', 'in 20 rows'."""
    if len(ranks) == rows > 1:
        return "every row"
    runs = ranges(ranks)
    if sum(run.count("-") + 1 for run in runs) > RANKS_NAMED:
        return f"in {count(len(ranks))} rows"
    return f"row {ranks[0]}" if len(ranks) == 1 else f"rows {', '.join(runs)}"
