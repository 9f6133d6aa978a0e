"""`luxsift shortlist`: read, search, print, save."""

from __future__ import annotations

import argparse
import sys
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.left_out import tell_left_out
from optimizer.cli.messages import StudyError, where_from
from optimizer.cli.options.shared import COMMAND_LINE, STANDARD_OUTPUT
from optimizer.cli.options.shortlist import ShortlistOptions, shortlist_options
from optimizer.cli.output import write, write_lines
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.progress import watch
from optimizer.errors import InputError, OutputError, Problem

if TYPE_CHECKING:
    from optimizer.record import Record
    from optimizer.search.result import Outcome, Progress
    from optimizer.study import Study

MEETS, NOTHING_MEETS, INTERRUPTED = 0, 1, 130
CUT_SHORT = (
    "luxsift: interrupted after the search, while its answer was being written; "
    "a file is written whole or not at all\n"
)


def shortlist(parsed: argparse.Namespace) -> int:
    """Run the search that `parsed` asks for; raises InputError and OutputError."""
    options, problems = shortlist_options(parsed)
    study = _load(options, problems)
    from optimizer.search import Interrupted
    from optimizer.search import shortlist as search

    left_out = study.catalogs.left_out
    if left_out and not options.quiet:
        tell_left_out(left_out, where_from(options.request, {entry.file for entry in left_out}))
    try:
        with watch(quiet=options.quiet) as watcher:
            outcome = search(study.request, study.catalogs, workers=options.workers, progress=watcher)
    except Interrupted as stop:
        _tell_interrupted(study, stop.outcome, watcher.last, options.workers)
        return INTERRUPTED
    try:
        return _answer(study, outcome, options)
    except KeyboardInterrupt:
        write(sys.stderr, CUT_SHORT)
        return INTERRUPTED


def _load(options: ShortlistOptions, problems: list[Problem]) -> Study:
    """The study with the options put in force; raises every problem of both at once."""
    from optimizer.study import load

    study, inputs = None, [Path(options.request)]
    try:
        study = _with_options(load(options.request), options)
    except InputError as error:
        problems += error.problems
    if study is not None:
        problems += _choice_problems(study, options)
        inputs += input_files(study.request)
    problems += output_problems([("--save", options.save), ("--csv", options.csv)], inputs)
    if problems or study is None:
        raise StudyError(problems, options.request)
    return study


def _with_options(study: Study, options: ShortlistOptions) -> Study:
    ranking = study.request.ranking
    ranking = replace(ranking, by=options.by or ranking.by, show=options.show or ranking.show)
    return replace(study, request=replace(study.request, ranking=ranking))


def _choice_problems(study: Study, options: ShortlistOptions) -> list[Problem]:
    show = study.request.ranking.show
    if options.choose <= show:
        return []
    rule = f"expected one of the {show} rows to be shown"
    remedy = f"or --show {options.choose}"
    return [Problem(COMMAND_LINE, None, "--choose", str(options.choose), rule, remedy)]


def _answer(study: Study, outcome: Outcome, options: ShortlistOptions) -> int:
    from optimizer import record as records

    shown = len(outcome.candidates)
    beyond = shown and options.choose > shown
    record = records.build(study, outcome, None if beyond else options.choose)
    if beyond:
        _print(record, options)
        raise InputError([records.choice_problem(options.choose, shown)])
    failure = _save(record, options)
    _print(record, options)
    if failure is not None:
        raise failure
    return MEETS if shown else NOTHING_MEETS


def _save(record: Record, options: ShortlistOptions) -> OutputError | None:
    """Write the files that are asked for; the error comes back, so that the table is still printed."""
    from optimizer import record as records
    from optimizer.record.files import to_json
    from optimizer.report.csv_file import csv_text, write_csv

    try:
        if options.save == STANDARD_OUTPUT:
            write(sys.stdout, to_json(record))
        elif options.save is not None:
            records.write(record, options.save)
        if options.csv == STANDARD_OUTPUT:
            write(sys.stdout, csv_text(record))
        elif options.csv is not None:
            write_csv(record, options.csv)
    except OutputError as error:
        return error
    return None


def _print(record: Record, options: ShortlistOptions) -> None:
    from optimizer.report import report, table_only
    from optimizer.report.terminal import width_of

    stream = sys.stderr if options.piped else sys.stdout
    draw = table_only if options.quiet else report
    write_lines(stream, draw(record, width_of(stream)))


def _tell_interrupted(study: Study, outcome: Outcome, last: Progress | None, workers: int) -> None:
    from optimizer.record import build
    from optimizer.report.interrupted import interrupted
    from optimizer.report.terminal import width_of

    record = build(study, outcome, None)
    write_lines(sys.stderr, interrupted(record, last, width_of(sys.stderr), workers=workers))
