"""`luxsift tradeoff`: read, ask what the targets cost, print."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

from optimizer.cli.messages import StudyError
from optimizer.cli.options.shared import COMMAND_LINE, STANDARD_OUTPUT
from optimizer.cli.options.tradeoff import TradeoffOptions, tradeoff_options
from optimizer.cli.output import write, write_lines
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.progress import watch
from optimizer.errors import InputError, OutputError, Problem

if TYPE_CHECKING:
    from optimizer.search.weigh.front import Front
    from optimizer.search.weigh.tradeoff import Tradeoff
    from optimizer.study import Study

MEETS, NOTHING_MEETS = 0, 1


def tradeoff(parsed: argparse.Namespace) -> int:
    """Print what the targets of a request cost; raises InputError and OutputError."""
    options, problems = tradeoff_options(parsed)
    study = _load(options, problems)
    what = "sets of limits" if options.against is None else "points"
    with watch(quiet=False, what=what) as watcher:
        found = _asked(study, options, watcher)
    failure = _save(found, options.csv)
    _print(found, _about(study, found), options)
    if failure is not None:
        raise failure
    return MEETS if _meets(found) else NOTHING_MEETS


def _load(options: TradeoffOptions, problems: list[Problem]) -> Study:
    from optimizer.study import load

    study, inputs = None, [Path(options.request)]
    try:
        study = load(options.request)
        inputs += input_files(study.request)
        problems += _no_figure(study, options.against)
    except InputError as error:
        problems += error.problems
    problems += output_problems([("--csv", options.csv)], inputs)
    if problems or study is None:
        raise StudyError(problems, options.request)
    return study


def _no_figure(study: Study, against: str | None) -> list[Problem]:
    """Why there is no figure to hold the cost against."""
    if against != "slew" or study.request.targets.bandwidth is not None:
        return []
    rule = "slew needs a bandwidth target, and the request states none"
    return [Problem(COMMAND_LINE, None, "--against", against, rule)]


def _asked(study: Study, options: TradeoffOptions, watcher: Any) -> Tradeoff | Front:
    if options.against is None:
        from optimizer.search.weigh.tradeoff import tradeoff as table

        return table(study.request, study.catalogs, progress=watcher)
    from optimizer.search.weigh.front import front

    return front(study.request, study.catalogs, options.against, progress=watcher)


def _meets(found: Tradeoff | Front) -> bool:
    from optimizer.search.weigh.front import Front

    return found.meets if isinstance(found, Front) else found.base is not None


def _about(study: Study, found: Tradeoff | Front) -> dict[str, Any]:
    """Name, request, currency and impossibilities, by the keys of a record."""
    from optimizer.record.build import build
    from optimizer.search.result import Outcome

    outcome = Outcome((), (), 0, 0, 0, 0.0, True, impossible=found.impossible)
    return dict(build(study, outcome, None).data)


def _save(found: Tradeoff | Front, csv: str | None) -> OutputError | None:
    """Write the CSV that is asked for; the error comes back, so that the table is still printed."""
    if csv is None:
        return None
    from optimizer.record import write_text
    from optimizer.report.tradeoff_csv import front_csv, tradeoff_csv
    from optimizer.search.weigh.front import Front

    text = front_csv(found) if isinstance(found, Front) else tradeoff_csv(found)
    try:
        if csv == STANDARD_OUTPUT:
            write(sys.stdout, text)
        else:
            write_text(csv, text)
    except OutputError as error:
        return error
    return None


def _print(found: Tradeoff | Front, about: dict[str, Any], options: TradeoffOptions) -> None:
    from optimizer.report.front import front_lines
    from optimizer.report.terminal import width_of
    from optimizer.report.tradeoff import tradeoff_lines
    from optimizer.search.weigh.front import Front

    stream = sys.stderr if options.csv == STANDARD_OUTPUT else sys.stdout
    width = width_of(stream)
    drawn = (
        front_lines(found, about, width) if isinstance(found, Front) else tradeoff_lines(found, about, width)
    )
    write_lines(stream, drawn)
