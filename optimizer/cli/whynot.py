"""`luxsift whynot`: read, look into one part or two, print."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from optimizer.cli.answer import shown
from optimizer.cli.messages import StudyError
from optimizer.cli.options.whynot import whynot_options
from optimizer.cli.steps import steps
from optimizer.errors import InputError

if TYPE_CHECKING:
    from optimizer.study import Study

MEETS, MISSES = 0, 1


def whynot(parsed: argparse.Namespace) -> int:
    """Print what was found out about the parts that `parsed` names; raises InputError."""
    options = whynot_options(parsed)
    study = _load(options.request)
    from optimizer.record.whynot import as_record
    from optimizer.report.whynot import whynot_lines
    from optimizer.search.inquiry.whynot import steps as name_steps
    from optimizer.search.inquiry.whynot import whynot as look_into

    todo = name_steps(study.request)
    with steps("steps", len(todo)) as tell:
        finding = look_into(study.request, study.catalogs, options.names, tell=tell)
    record = as_record(study, finding)
    shown(lambda width: whynot_lines(finding, record.data, width), piped=False)
    return MEETS if finding.meets else MISSES


def _load(request: str) -> Study:
    from optimizer.study import load

    try:
        return load(request)
    except InputError as error:
        raise StudyError(error.problems, request) from None
