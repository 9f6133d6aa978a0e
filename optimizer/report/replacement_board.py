"""What replaces parts that are gone from a board, as a terminal shows it: the fewest changes first."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.record import BoardRecord
from optimizer.record.build import candidate_row, plain
from optimizer.report.beside import beside_lines
from optimizer.report.board.amounts import CENTS, money, of_cents
from optimizer.report.board.channels import counts_of, requests_used
from optimizer.report.board.packages import spare_words
from optimizer.report.board.status import faults
from optimizer.report.board.totals import total_columns
from optimizer.report.cautions import board_cautions, left_out
from optimizer.report.changed import changed_lines
from optimizer.report.changes import ARROW, changes
from optimizer.report.misses import missed_words, worst_first
from optimizer.report.paragraphs import styled
from optimizer.report.reasons import WORDS
from optimizer.report.replacement import gone_lines, labelled
from optimizer.report.stepped import joined, stacked
from optimizer.report.words import count, ranges
from optimizer.review.board_gone import Hit
from optimizer.review.board_replacement import BoardReplacement, ChannelLack, stale_of

Data = Mapping[str, Any]
Lines = list[Text]

POSITIONS = (
    "Positions: what each copy of a channel chooses (photodiode, wiring, reference with its divider, Rf, Cf, "
    "low-pass), each op-amp package, each shared level. Copies that use a shared level do not count again "
    "when it changes; a package that gives way to another is one position, and so is one more."
)
BEYOND = "With no limits on the board, one of few changes would come to:"
BAD = "bold red"


def board_replacement_lines(answer: BoardReplacement, record: BoardRecord, width: int) -> Lines:
    """Everything about the answer, `record` being its record, for a terminal of `width` columns."""
    data = record.data
    requests = requests_used(data)
    models = dict.fromkeys(left_out(request) for request in requests)
    return joined(
        [
            _headline(answer, data, width),
            *(_row(plan, answer, data, width) for plan in data["plans"]),
            *_beside(data, width),
            _totals(data, width),
            _none(answer, data, width),
            styled(POSITIONS, width),
            [line for text in models for line in styled(text, width)],
            styled(f"Caution: {board_cautions(requests)}", width),
        ]
    )


def _headline(answer: BoardReplacement, data: Data, width: int) -> Lines:
    out = styled(clean(data["name"]), width, "bold")
    out += gone_lines(answer.gone.parts, answer.keep, width)
    for hit in stale_of(answer.gone):
        out += styled(_stale(hit), width)
    out += changed_lines(answer.opened.changed, width)
    out += [line for text in faults(data) for line in styled(text, width, BAD)]
    found = len(data["plans"])
    if not found:
        return out + styled(_no_board(answer), width, BAD)
    currency = f", money in {clean(data['currency'])}" if data.get("currency") else ""
    what = "One board does" if found == 1 else f"{count(found)} boards with different active parts do"
    order = "fewest changed positions first, then lowest cost"
    out += styled(f"{what} without it, {order}{currency}; plan {answer.old['rank']} is replaced", width)
    return out + styled(_proof(answer), width)


def _no_board(answer: BoardReplacement) -> str:
    if answer.lacks or (answer.everything and answer.found.complete):
        return "No board without it meets everything, every other channel kept as it is."
    return "No board without it was found that meets everything; that is not proven, for the time ended."


def _stale(hit: Hit) -> str:
    why = ", ".join(hit.stale)
    return f"{clean(hit.receiver.channel)} no longer holds as it stands ({why}), so it may change too"


def _proof(answer: BoardReplacement) -> str:
    """How far the first row is proven."""
    first = answer.substitutes[0]
    kept = "keeping every channel that does not use what is gone"
    if first.fewest and first.cheapest:
        return f"Proven, {kept}: no board changes fewer positions, and none that changes as few costs less."
    if first.fewest:
        return f"Proven, {kept}: no board changes fewer positions. One that changes as few may cost less."
    return "NOT PROVEN: a board that changes fewer positions, or costs less, may have been missed."


def _row(plan: Data, answer: BoardReplacement, data: Data, width: int) -> Lines:
    chosen = plan["rank"] == data["chosen"]
    many = "1 position changes" if plan["changes"] == 1 else f"{plan['changes'] or 'no'} positions change"
    head = f"{'>' if chosen else ' '} {plan['rank']}  {many}"
    rows = [row for change in plan["changed"] for row in change_rows(change, data)]
    rows.append(("cost", cost_words(answer.old, plan, data["board"]["quantity"])))
    rows.append(("amplifiers", spare_words(plan)))
    return styled(head, width, "bold" if chosen else "") + labelled(rows, width, 5)


def change_rows(change: Data, data: Data) -> Iterator[tuple[str, str]]:
    """What changes in one place, as 'old -> new' beside its name."""
    if change["where"] == "channel":
        name = _copies(change, data)
        said = changes(change["old"], change["new"], _but_packages(change["positions"]))
        for place, (position, words) in enumerate(said):
            if position != "op-amp packages":
                yield ("" if place else name), f"{position} {words}"
    elif change["where"] == "packages":
        yield "packages", ARROW.join(_packages(change[side]) for side in ("old", "new"))
    else:
        yield "levels", ARROW.join(_level(change[side]) for side in ("old", "new"))


def _but_packages(positions: Sequence[str]) -> list[str]:
    return [position for position in positions if position != "opamp"]


def _copies(change: Data, data: Data) -> str:
    """The channel, with its copies where not all of them change so."""
    name, copies = clean(change["channel"]), change["copies"]
    many = counts_of(data)[change["channel"]]
    if len(copies) < many:
        return f"{name} {', '.join(ranges(sorted(copies)))}"
    return name if many == 1 else f"{name} x{many}"


def _packages(parts: Sequence[Sequence[str]]) -> str:
    """'2 YZA-21 (Maker)', 'none'."""
    counted = Counter((part, maker) for part, maker in parts)
    said = [f"{count(n)} {clean(part)} ({clean(maker)})" for (part, maker), n in sorted(counted.items())]
    return ", ".join(said) or "none"


def _level(level: Data | None) -> str:
    if level is None:
        return "none"
    if "top" not in level:
        return clean(level["name"])
    top, bottom = (show(level[end], "resistance") for end in ("top", "bottom"))
    family = f"{clean(level['resistor_family'])}, {clean(level['capacitor_family'])}"
    return f"{clean(level['name'])}, {show(level['voltage'], 'voltage')}, {top} over {bottom} ({family})"


def cost_words(old: Data, new: Data, quantity: int) -> str:
    """The cost of both plans a board, and how much more or less that is a build."""
    before, after = (plan["cost"] for plan in (old, new))
    said = ARROW.join(money(cents / CENTS / quantity) for cents in (before, after))
    if before == after:
        return f"{said} a board, the same"
    word, more = ("more" if after > before else "less"), abs(after - before)
    each = money(more / CENTS / quantity)
    return f"{said} a board, {each} {word}; {of_cents(more)} {word} for {count(quantity)} built"


def _beside(data: Data, width: int) -> Iterator[Lines]:
    """Of each channel that the first row changes, every target before and after."""
    if not data["plans"]:
        return
    first = data["plans"][0]
    for change in first["changed"]:
        if change["where"] == "channel":
            request = data["requests"][_request_of(change["channel"], data)]
            title = f"{_copies(change, data)}: targets before, and in row {first['rank']}"
            held = {target["name"] for target in change["new"]["targets"]}
            before = [target for target in change["old"]["targets"] if target["name"] in held]
            yield styled(title, width, "bold") + beside_lines(before, [change["new"]], request, width)


def _request_of(channel: str, data: Data) -> str:
    return next(str(one["request"]) for one in data["board"]["channels"] if one["name"] == channel)


def _totals(data: Data, width: int) -> Lines:
    if not data["plans"]:
        return []
    first = data["plans"][0]
    title = Text(f"Row {first['rank']}: totals against limits", "bold")
    return [title, *stacked(total_columns(first), width)]


def _none(answer: BoardReplacement, data: Data, width: int) -> Lines:
    """Why there is no board: channels that nothing meets, else limits that are in the way."""
    out: Lines = []
    for lack in answer.lacks:
        request = data["requests"][_request_of(lack.channel, data)]
        for text in _lack(lack, request):
            out += styled(text, width, indent="  ")
    if answer.beyond is not None:
        plan = plain(_totals_of(answer))
        out += styled(BEYOND, width)
        out += stacked(total_columns(plan), width)
        out += styled(
            "To plan all channels anew, exclude the part in the requests and run luxsift board.", width
        )
    return out


def _totals_of(answer: BoardReplacement) -> dict[str, Any]:
    assert answer.beyond is not None
    plan = answer.beyond.plan
    totals = [
        {"name": total.name, "value": total.value, "limit": total.limit, "margin": total.margin}
        for total in plan.totals
    ]
    return {"totals": totals, "limiting": plan.limiting}


def _lack(lack: ChannelLack, request: Data) -> Iterator[str]:
    name = clean(lack.channel)
    if lack.nearest is None:
        key = lack.stopped.partition(":")[0]
        why = f"the one that gets furthest fails at {key} ({WORDS.get(key, key)})" if key else "none is left"
        yield f"{name}: nothing is eligible, whatever changes: {why}"
        return
    row = plain(candidate_row(lack.nearest, 0) | {"missed": lack.nearest.missed})
    said = "; ".join(missed_words(target, request) for target in worst_first(row))
    yield f"{name}: nothing meets its request, whatever changes. The nearest, {clean(row['photodiode'])} with"
    yield f"  {clean(row['opamp'])}: {said}"
