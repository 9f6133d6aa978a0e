"""What the board's report prints for planned boards, held to its width."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from rich.cells import cell_len
from rich.text import Text

from optimizer.planning.outline import Outline
from optimizer.planning.plan import BoardPlan, Planned
from optimizer.record.board import build
from optimizer.record.model import BoardRecord
from optimizer.report import to_text
from optimizer.report.board import report
from tests.planning import made_plan

Draw = Callable[[BoardRecord, int], list[Text]]


def record(planned: Planned | None = None, outline: Outline | None = None) -> BoardRecord:
    """The record of a planned board; by default of the made-up one."""
    return build(outline or made_plan.outline(), planned or made_plan.planned())


def data(planned: Planned | None = None, outline: Outline | None = None) -> Mapping[str, Any]:
    """The same as its JSON document."""
    return record(planned, outline).data


def of_plans(*plans: BoardPlan, **changes: Any) -> Mapping[str, Any]:
    """The document with these plans."""
    return data(made_plan.planned(plans=plans, **changes))


def printed(
    planned: Planned | None = None, width: int = 80, *, outline: Outline | None = None, draw: Draw = report
) -> str:
    """The whole text, no line wider than `width`."""
    text = to_text(draw(record(planned, outline), width), colour=False)
    assert max(cell_len(line) for line in text.split("\n")) <= width
    return text


def words(planned: Planned | None = None, width: int = 80, **options: Any) -> str:
    """The same as one line of words."""
    return " ".join(printed(planned, width, **options).split())


def sections(text: str) -> dict[str, list[str]]:
    """The lines below each first line, between empty lines."""
    blocks = [block.split("\n") for block in text.strip("\n").split("\n\n")]
    return {block[0]: block[1:] for block in blocks}
