"""`luxsift replace`: a record, its catalogs as they are now, and what takes the place of a part."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.answer import answered
from optimizer.cli.messages import StudyError
from optimizer.cli.options.replace import ReplaceOptions, replace_options
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.reopened import reopened
from optimizer.cli.replace_board import replace_board
from optimizer.cli.steps import steps
from optimizer.errors import InputError, Problem

if TYPE_CHECKING:
    from optimizer.review.reopen import Reopened

MEETS, NOTHING_MEETS = 0, 1


def replace(parsed: argparse.Namespace) -> int:
    """Find and print the substitutes that `parsed` asks for; raises InputError and OutputError."""
    options, problems = replace_options(parsed)
    from optimizer.record import says_board

    if says_board(options.record):
        return replace_board(options, problems)
    found = _reopened(options, problems)
    from optimizer.record.files import to_json
    from optimizer.report.replacement import replacement_lines
    from optimizer.review.reopen import chosen_of
    from optimizer.review.replacement import record_of, replacement
    from optimizer.review.withdrawal import Wish

    old = chosen_of(found.record, options.rank)
    with steps("kinds of change", total=4) as step:
        answer = replacement(found, old, Wish(options.gone, options.keep), show=options.show, tell=step)
    record = record_of(answer)
    saved = [(options.save, lambda: to_json(record))]
    answered(saved, lambda width: replacement_lines(answer, record, width), piped=options.piped)
    return MEETS if record.candidates else NOTHING_MEETS


def _reopened(options: ReplaceOptions, problems: list[Problem]) -> Reopened:
    """The record with its study; raises every problem of both and of the options at once."""
    found, place = None, None
    inputs = [Path(options.record)]
    try:
        found = reopened(options.record, options.request)
        inputs += [found.study.request.path, *input_files(found.study.request)]
    except InputError as error:
        problems += error.problems
        place = error.request if isinstance(error, StudyError) else None
    problems += output_problems([("--save", options.save)], inputs)
    if problems and place is not None:
        raise StudyError(problems, place)
    if problems or found is None:
        raise InputError(problems)
    return found
