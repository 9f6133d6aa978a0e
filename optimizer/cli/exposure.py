"""`luxsift exposure`: many records, their catalogs as they are now, and what hangs on each part."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.answer import answered
from optimizer.cli.options.shared import STANDARD_OUTPUT
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.steps import steps
from optimizer.errors import InputError, Problem

if TYPE_CHECKING:
    from optimizer.review.shelf import Taken

SAFE, EXPOSED = 0, 1


def exposure(parsed: argparse.Namespace) -> int:
    """Print what hangs on each part of the records; raises InputError and OutputError."""
    taken = _taken(parsed)
    from optimizer.report.exposure import exposure_csv, exposure_lines
    from optimizer.review.exposure import exposure as looked_at

    with steps("records", total=len(taken)) as step:
        found = looked_at(taken, step)
    records = len({one.name for one in taken})
    written = [(parsed.csv, lambda: exposure_csv(found))]
    piped = parsed.csv == STANDARD_OUTPUT
    answered(written, lambda width: exposure_lines(found, records, width), piped=piped)
    return EXPOSED if any(one.alone or one.lost for one in found.parts) else SAFE


def _taken(parsed: argparse.Namespace) -> list[Taken]:
    """The records with their studies; raises every problem of them and of the options at once."""
    from optimizer.review.shelf import take_up

    taken: list[Taken] = []
    problems: list[Problem] = []
    inputs = [Path(record) for record in parsed.records]
    try:
        with steps("records read", total=len(parsed.records)) as step:
            taken = take_up(parsed.records, step)
    except InputError as error:
        problems += error.problems
    for one in taken:
        request = one.reopened.study.request
        inputs += [request.path, *input_files(request), *([one.board.path] if one.board else [])]
    problems += output_problems([("--csv", parsed.csv)], dict.fromkeys(inputs))
    if problems:
        raise InputError(problems)
    return taken
