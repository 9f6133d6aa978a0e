"""`luxsift tradeoff`: read, ask what the targets cost, print."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING, Any

from optimizer.cli.answer import answered
from optimizer.cli.messages import StudyError
from optimizer.cli.options.shared import COMMAND_LINE, STANDARD_OUTPUT
from optimizer.cli.options.tradeoff import TradeoffOptions, tradeoff_options
from optimizer.cli.outputs import input_files, output_problems
from optimizer.cli.progress import watch
from optimizer.errors import InputError, Problem

if TYPE_CHECKING:
    from rich.text import Text

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
    about = _about(study, found)
    written = [(options.csv, lambda: _csv(found))]
    piped = options.csv == STANDARD_OUTPUT
    answered(written, lambda width: _drawn(found, about, width), piped=piped)
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


def _csv(found: Tradeoff | Front) -> str:
    from optimizer.report.tradeoff_csv import front_csv, tradeoff_csv
    from optimizer.search.weigh.front import Front

    return front_csv(found) if isinstance(found, Front) else tradeoff_csv(found)


def _drawn(found: Tradeoff | Front, about: dict[str, Any], width: int) -> list[Text]:
    from optimizer.report.front import front_lines
    from optimizer.report.tradeoff import tradeoff_lines
    from optimizer.search.weigh.front import Front

    if isinstance(found, Front):
        return front_lines(found, about, width)
    return tradeoff_lines(found, about, width)
