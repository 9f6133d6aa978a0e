"""`luxsift board`: read the board file, plan, print, save."""

from __future__ import annotations

import argparse
import sys
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.answer import File, answered
from optimizer.cli.board_progress import stages
from optimizer.cli.left_out import tell_left_out
from optimizer.cli.options.board import BoardOptions, board_options
from optimizer.cli.output import write
from optimizer.cli.outputs import input_files, output_problems
from optimizer.errors import InputError, Problem

if TYPE_CHECKING:
    from optimizer.catalog.parts import LeftOut
    from optimizer.planning.outline import Outline
    from optimizer.planning.plan import BoardPlan, Planned
    from optimizer.record import BoardRecord

MEETS, NO_PLAN, INTERRUPTED = 0, 1, 130
CUT_SHORT = (
    "luxsift: interrupted after planning, while the answer was being written; "
    "a file is written whole or not at all\n"
)


def board(parsed: argparse.Namespace) -> int:
    """Plan the board that `parsed` names; raises InputError and OutputError."""
    options, problems = board_options(parsed)
    outline = _load(options, problems)
    from optimizer.planning.plan_board import plan_board

    left_out = _left_out(outline)
    if left_out and not options.quiet:
        tell_left_out(left_out)
    with stages(outline.quantity, quiet=options.quiet) as tell:
        planned = plan_board(outline, tell)
    try:
        return _answer(outline, planned, options)
    except KeyboardInterrupt:
        write(sys.stderr, CUT_SHORT)
        return INTERRUPTED


def _load(options: BoardOptions, problems: list[Problem]) -> Outline:
    """The board with the options put in force; raises every problem of both at once."""
    from optimizer.planning.reading import read_board

    outline, inputs = None, [Path(options.board)]
    try:
        outline = _with_options(read_board(options.board), options)
    except InputError as error:
        problems += error.problems
    if outline is not None:
        requests = [channel.study.request for channel in outline.channels]
        inputs += [request.path for request in requests]
        inputs += [file for request in requests for file in input_files(request)]
    problems += output_problems([("--save", options.save), ("--csv", options.csv)], inputs)
    if problems or outline is None:
        raise InputError(problems)
    return outline


def _with_options(outline: Outline, options: BoardOptions) -> Outline:
    solve = outline.solve
    stated = replace(
        solve,
        plans=options.plans or solve.plans,
        time=options.time or solve.time,
        solver=options.solver or solve.solver,
    )
    return replace(outline, solve=stated)


def _left_out(outline: Outline) -> list[LeftOut]:
    """The rows that were left out of the catalogs, each once, their files named as seen from here."""
    return list(
        dict.fromkeys(
            replace(row, file=str(channel.study.request.path.parent / row.file))
            for channel in outline.channels
            for row in channel.study.catalogs.left_out
        )
    )


def _answer(outline: Outline, planned: Planned, options: BoardOptions) -> int:
    """Write the files, print the plans, say how it ended; one interrupted without a plan has no files."""
    from optimizer.planning import plan
    from optimizer.record.board import build
    from optimizer.record.files import to_json
    from optimizer.report.board import brief, report

    record = build(outline, planned)
    interrupted = planned.status == plan.INTERRUPTED
    files: list[File] = [(options.save, lambda: to_json(record)), (options.csv, lambda: _bill(record))]
    draw = brief if options.quiet else report
    asked = [] if interrupted and not planned.plans else files
    answered(asked, lambda width: draw(record, width), piped=options.piped)
    if interrupted:
        return INTERRUPTED
    return MEETS if planned.plans and _meets(planned.plans[0]) else NO_PLAN


def _meets(plan: BoardPlan) -> bool:
    """Whether a plan keeps every limit: one that is not known to be kept counts as missed."""
    limited = [total for total in plan.totals if total.limit is not None]
    return all(total.margin is not None and total.margin >= 0 for total in limited)


def _bill(record: BoardRecord) -> str:
    """The bill of materials of the chosen plan as CSV; its headings alone where there is none."""
    from optimizer.report.board.bill_csv import text

    return text(record.chosen or {"bill": []}, record.data)
