"""`luxsift justify`: a record, its study as it is now, and the page on one of its candidates."""

from __future__ import annotations

import argparse
from pathlib import Path

from optimizer.cli.answer import tell_changed
from optimizer.cli.justify_board import justify_board
from optimizer.cli.options.justify import justify_options
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.reopened import reopened
from optimizer.cli.steps import steps
from optimizer.errors import InputError, Problem

DONE = 0


def justify(parsed: argparse.Namespace) -> int:
    """Write the page that `parsed` asks for; raises InputError, OutputError, MissingExtraError."""
    options, problems = justify_options(parsed)
    output = [("--output", options.output)]
    _refuse([*problems, *output_problems(output, [Path(options.record)])])
    from optimizer.record import says_board
    from optimizer.report import page

    if not options.markdown:
        page.check_installed()
    if says_board(options.record):
        return justify_board(options)
    from optimizer.record import write_text
    from optimizer.review.dossier import gather, place_of
    from optimizer.review.weighing import steps as name_steps
    from optimizer.review.weighing import unknown_parts, weigh

    found = reopened(options.record, options.request)
    request = found.study.request
    unknown = unknown_parts(found.study.catalogs, options.compare)
    _refuse([*output_problems(output, [request.path, *input_files(request)]), *unknown])
    dossier = gather(found, place_of(options.record, found, options.output), options.rank)
    with steps("steps", len(name_steps(options.compare))) as tell:
        dossier = weigh(dossier, options.compare, tell)
    composed = page.compose(dossier)
    write_text(options.output, page.to_markdown(composed) if options.markdown else page.to_html(composed))
    tell_changed(found.changed)
    return DONE


def _refuse(problems: list[Problem]) -> None:
    if problems:
        raise InputError(problems)
