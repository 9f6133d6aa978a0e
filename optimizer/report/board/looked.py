"""What was looked at for each channel, what was left out, and how often plans were improved."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.planning.plan import INFEASIBLE
from optimizer.report.layout import Column
from optimizer.report.words import count, several, spoken

Data = Mapping[str, Any]


def pool_columns(data: Data) -> list[Column]:
    """One row for each channel's pool of candidates."""
    pools = data["search"]["pools"]
    return [
        Column("channel", tuple(clean(pool["channel"]) for pool in pools), gives=True),
        Column("combinations", tuple(spoken(pool["combinations"]) for pool in pools), right=True),
        Column("pairs", tuple(count(pool["pairs"]) for pool in pools), right=True),
        Column("candidates", tuple(count(pool["kept"]) for pool in pools), right=True),
        Column("left out", tuple(left_out_words(pool) for pool in pools), gives=True, least=20),
    ]


def left_out_words(pool: Data) -> str:
    """'nothing that matters', or how many settings that could matter at most."""
    if pool["complete"]:
        return "nothing that matters"
    if pool["left_out"] is None:
        return "cut: not counted"
    return f"cut: at most {several(pool['left_out'], 'setting')}"


def looked_words(data: Data) -> Iterator[str]:
    """What the columns stand for."""
    pools, rounds, plans = data["search"]["pools"], data["search"].get("rounds", 0), data["plans"]
    yield (
        "Pairs: eligible photodiodes with op-amps, packages of one family counted once; candidates: their "
        "settings that meet the request and went to the solver."
    )
    if any(pool["complete"] for pool in pools):
        cannot = "be part of a plan cheaper than the first" if plans else "make a plan possible"
        yield f"Nothing that matters: what was left out cannot {cannot}."
    if any(not pool["complete"] for pool in pools) and data["search"]["status"] != INFEASIBLE:
        could = "be part of a cheaper plan" if plans else "make a plan possible"
        yield f"Cut: some of what was left out could {could}."
    if rounds:
        yield f"Candidates were added in {several(rounds, 'round')} of search through every setting."
