"""`luxsift shortlist`: read, search, print, save."""

from __future__ import annotations

import argparse
import sys
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.answer import File, answered, shown
from optimizer.cli.left_out import tell_left_out
from optimizer.cli.messages import StudyError, where_from
from optimizer.cli.options.shared import COMMAND_LINE
from optimizer.cli.options.shortlist import ShortlistOptions, shortlist_options
from optimizer.cli.output import write
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.progress import watch
from optimizer.errors import InputError, Problem

if TYPE_CHECKING:
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
    from optimizer.record.files import to_json
    from optimizer.report import report, table_only
    from optimizer.report.csv_file import csv_text

    rows = len(outcome.candidates)
    beyond = rows and options.choose > rows
    record = records.build(study, outcome, None if beyond else options.choose)
    files: list[File] = [(options.save, lambda: to_json(record)), (options.csv, lambda: csv_text(record))]
    draw = table_only if options.quiet else report
    answered([] if beyond else files, lambda width: draw(record, width), piped=options.piped)
    if beyond:
        raise InputError([records.choice_problem(options.choose, rows)])
    return MEETS if rows else NOTHING_MEETS


def _tell_interrupted(study: Study, outcome: Outcome, last: Progress | None, workers: int) -> None:
    from optimizer.record import build
    from optimizer.report.interrupted import interrupted

    record = build(study, outcome, None)
    shown(lambda width: interrupted(record, last, width, workers=workers), piped=True)
