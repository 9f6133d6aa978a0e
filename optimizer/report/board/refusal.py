"""Why there is no plan: channels that nothing meets, else what is in conflict and what would help."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.planning.plan import NOTHING
from optimizer.report.board.amounts import amount, told_apart
from optimizer.report.board.status import CONSIDERED
from optimizer.report.conflicts import listed
from optimizer.report.layout import Column
from optimizer.report.misses import blocking_lines, near_miss_lines
from optimizer.report.notes import footnotes, impossible_lines
from optimizer.report.paragraphs import styled
from optimizer.report.reasons import reason_lines

Data = Mapping[str, Any]

BAD = "bold red"


def as_shortlist(hopeless: Data, data: Data) -> dict[str, Any]:
    """A channel that nothing meets, as the record of its own shortlist has it."""
    misses, dropped = hopeless["near_misses"], hopeless["dropped"]
    return {
        "request": data["requests"][hopeless["request"]],
        "candidates": [],
        "near_misses": misses,
        "search": {
            "impossible": hopeless["impossible"],
            "blocking": hopeless["blocking"],
            "dropped": dropped,
            "pairs": sum(dropped.values()) + len(misses),
        },
    }


def hopeless_lines(hopeless: Data, data: Data, width: int) -> list[list[Text]]:
    """A channel that nothing meets by itself, with the sections that its own shortlist would show."""
    alone, request = as_shortlist(hopeless, data), data["requests"][hopeless["request"]]
    channel, file = clean(hopeless["channel"]), clean(hopeless["request"])
    head = styled(f"Nothing meets the request of {channel}, {file}.", width, BAD)
    misses = near_miss_lines(alone, width) + footnotes(hopeless["near_misses"], request, width)
    why = impossible_lines(alone, width) + blocking_lines(alone, width)
    return [head + why, misses, reason_lines(alone, width)]


def conflict_words(data: Data) -> str:
    """Which limits and channels cannot be met together, and over what; '' where nothing is known of it."""
    said = _conflict(data["refusal"])
    return f"{_among(data)}{said}" if said else ""


def eased_title(data: Data) -> str:
    """What stands over the relaxations."""
    return f"{_among(data)}one limit alone eased" if _among(data) else "One limit alone eased"


def _among(data: Data) -> str:
    """Over what the refusal holds, where that is not everything."""
    return f"Among {CONSIDERED}: " if data["search"]["status"] == NOTHING else ""


def _conflict(refusal: Data) -> str:
    limits, channels = ([clean(name) for name in refusal[key]] for key in ("limits", "channels"))
    if not limits and not channels:
        return ""
    subject = _subject(limits, channels)
    if len(limits) + len(channels) == 1:
        return f"{subject} cannot be met, whatever the rest."
    fewer = "no fewer are in conflict" if refusal["smallest"] else "perhaps fewer are in conflict"
    return f"{subject} cannot be met together; {fewer}."


def _subject(limits: list[str], channels: list[str]) -> str:
    """The limits with the channels: 'cost and area with turbidity and level'."""
    said = listed(limits) if limits else ""
    if not channels:
        return f"The limits on {said}" if len(limits) > 1 else f"The limit on {said}"
    if not limits:
        return f"The channel {channels[0]}" if len(channels) == 1 else f"The channels {listed(channels)}"
    return f"{said} with {listed(channels)}"


def relaxation_columns(refusal: Data) -> list[Column]:
    """One row for each limit that, eased alone, lets a plan through."""
    helpful = [one for one in refusal["relaxations"] if one["least"] is not None]
    said = [told_apart(one["name"], one["least"], one["limit"]) for one in helpful]
    return [
        Column("limit", tuple(clean(one["name"]) for one in helpful)),
        Column("stated", tuple(limit for _, limit in said), right=True),
        Column("lets a plan through", tuple(least for least, _ in said), right=True),
        Column("", tuple(LEAST if one["proven"] else WILL_DO for one in helpful), gives=True, least=20),
    ]


LEAST, WILL_DO = "the least that does", "will do; a lesser change might"


def helpless_words(data: Data) -> Iterator[str]:
    """The limits of which none helps, and those of which none was found that does."""
    for proven in (True, False):
        names = [
            f"{clean(one['name'])} ({amount(one['name'], one['limit'])})"
            for one in data["refusal"]["relaxations"]
            if one["least"] is None and one["proven"] == proven
        ]
        if names and proven:
            easing = f"{_among(data)}easing" if _among(data) else "Easing"
            yield f"{easing} one of these alone, however far, lets no plan through: {', '.join(names)}."
        elif names:
            yield f"Of these no value that lets a plan through was found in the time: {', '.join(names)}."
