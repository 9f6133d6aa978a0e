"""`luxsift replace` on a board's record: what takes the place of parts that are gone, on the whole board."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.answer import answered
from optimizer.cli.options.replace import ReplaceOptions
from optimizer.cli.outputs import Output, output_problems
from optimizer.cli.reopened import board_files, reopened_board
from optimizer.cli.steps import steps
from optimizer.errors import InputError, Problem

if TYPE_CHECKING:
    from optimizer.review.board import ReopenedBoard

MEETS, NOTHING_MEETS = 0, 1


def replace_board(options: ReplaceOptions, problems: list[Problem]) -> int:
    """Find and print the boards that change least; raises InputError and OutputError."""
    opened = opened_for(options.record, options.request, [("--save", options.save)], problems)
    from optimizer.record.files import to_json
    from optimizer.report.replacement_board import board_replacement_lines
    from optimizer.review.board import plan_of
    from optimizer.review.board_replacement import board_record_of, board_replacement
    from optimizer.review.withdrawal import Wish

    plan = plan_of(opened.record, options.rank)
    with steps("steps", total=2 + len(plan["channels"])) as step:
        wish = Wish(options.gone, options.keep)
        answer = board_replacement(opened, plan, wish, show=options.show, tell=step)
    record = board_record_of(answer)
    saved = [(options.save, lambda: to_json(record))]
    answered(saved, lambda width: board_replacement_lines(answer, record, width), piped=options.piped)
    return MEETS if record.plans else NOTHING_MEETS


def opened_for(
    record: str, board: str | None, outputs: list[Output], problems: list[Problem]
) -> ReopenedBoard:
    """The board's record with its files; raises every problem of them, of `outputs`, and those there are."""
    opened, inputs = None, [Path(record)]
    try:
        opened = reopened_board(record, board)
        inputs += board_files(opened)
    except InputError as error:
        problems += error.problems
    problems += output_problems(outputs, inputs)
    if problems or opened is None:
        raise InputError(problems)
    return opened
