"""`luxsift inspect`: what catalogs hold and what looks wrong in them."""

from __future__ import annotations

import argparse
import sys

from optimizer.cli.output import write, write_lines
from optimizer.errors import InputError, MissingExtraError, Problem


def inspect(parsed: argparse.Namespace) -> int:
    """Print what each catalog holds; raises InputError with the problems of those that are unusable."""
    from optimizer.catalog.inspect import inspect_file
    from optimizer.report.inspection import inspection_lines
    from optimizer.report.terminal import width_of

    problems: list[Problem] = []
    between = ""
    for file in dict.fromkeys(parsed.catalogs):
        try:
            found = inspect_file(file)
        except InputError as error:
            problems += error.problems
        except MissingExtraError as error:
            problems.append(Problem(file, None, None, None, str(error)))
        else:
            problems += found.problems
            write(sys.stdout, between)
            write_lines(sys.stdout, inspection_lines(found, width_of(sys.stdout)))
            between = "\n"
    if problems:
        raise InputError(problems)
    return 0
