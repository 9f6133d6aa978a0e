"""`luxsift exposure`: many records, their catalogs as they are now, and what hangs on each part."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.options.shared import STANDARD_OUTPUT
from optimizer.cli.output import write, write_lines
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.steps import steps
from optimizer.errors import InputError, OutputError, Problem

if TYPE_CHECKING:
    from optimizer.review.exposure import Exposures
    from optimizer.review.shelf import Taken

SAFE, EXPOSED = 0, 1


def exposure(parsed: argparse.Namespace) -> int:
    """Print what hangs on each part of the records; raises InputError and OutputError."""
    taken = _taken(parsed)
    from optimizer.review.exposure import exposure as looked_at

    with steps("records", total=len(taken)) as step:
        found = looked_at(taken, step)
    failure = _save(found, parsed.csv)
    _print(found, len({one.name for one in taken}), parsed.csv)
    if failure is not None:
        raise failure
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


def _save(found: Exposures, csv: str | None) -> OutputError | None:
    """Write the CSV that is asked for; the error comes back, so that the table is still printed."""
    from optimizer.record import write_text
    from optimizer.report.exposure import exposure_csv

    try:
        if csv == STANDARD_OUTPUT:
            write(sys.stdout, exposure_csv(found))
        elif csv is not None:
            write_text(csv, exposure_csv(found))
    except OutputError as error:
        return error
    return None


def _print(found: Exposures, records: int, csv: str | None) -> None:
    from optimizer.report.exposure import exposure_lines
    from optimizer.report.terminal import width_of

    stream = sys.stderr if csv == STANDARD_OUTPUT else sys.stdout
    write_lines(stream, exposure_lines(found, records, width_of(stream)))
