"""`luxsift replace` on a board's record: what takes the place of parts that are gone, on the whole board."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.options.replace import ReplaceOptions
from optimizer.cli.output import write, write_lines
from optimizer.cli.outputs import Output, output_problems
from optimizer.cli.reopened import board_files, reopened_board
from optimizer.cli.steps import steps
from optimizer.errors import InputError, OutputError, Problem

if TYPE_CHECKING:
    from optimizer.record import BoardRecord
    from optimizer.review.board import ReopenedBoard
    from optimizer.review.board_replacement import BoardReplacement

MEETS, NOTHING_MEETS = 0, 1


def replace_board(options: ReplaceOptions, problems: list[Problem]) -> int:
    """Find and print the boards that change least; raises InputError and OutputError."""
    opened = opened_for(options.record, options.request, [("--save", options.save)], problems)
    from optimizer.review.board import plan_of
    from optimizer.review.board_replacement import board_record_of, board_replacement
    from optimizer.review.withdrawal import Wish

    plan = plan_of(opened.record, options.rank)
    with steps("steps", total=2 + len(plan["channels"])) as step:
        wish = Wish(options.gone, options.keep)
        answer = board_replacement(opened, plan, wish, show=options.show, tell=step)
    record = board_record_of(answer)
    failure = _save(record, options)
    _print(answer, record, options)
    if failure is not None:
        raise failure
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


def _save(record: BoardRecord, options: ReplaceOptions) -> OutputError | None:
    """Write the record where it is asked for; the error comes back, so that the answer is still printed."""
    from optimizer import record as records
    from optimizer.record.files import to_json

    try:
        if options.piped:
            write(sys.stdout, to_json(record))
        elif options.save is not None:
            records.write(record, options.save)
    except OutputError as error:
        return error
    return None


def _print(answer: BoardReplacement, record: BoardRecord, options: ReplaceOptions) -> None:
    from optimizer.report.replacement_board import board_replacement_lines
    from optimizer.report.terminal import width_of

    stream = sys.stderr if options.piped else sys.stdout
    write_lines(stream, board_replacement_lines(answer, record, width_of(stream)))
