"""What `luxsift shortlist` takes."""

from __future__ import annotations

import argparse
from dataclasses import dataclass

from optimizer.cli.options.shared import MOST_WORKERS, SAVE, STANDARD_OUTPUT, ranking, whole
from optimizer.errors import Problem
from optimizer.request.types import RANKINGS

SUMMARY = "rank the parts that meet a request (the main job)"


@dataclass(frozen=True, slots=True)
class ShortlistOptions:
    """The options of `luxsift shortlist`; None where the request's own value stands."""

    request: str
    by: str | None
    show: int | None
    choose: int
    workers: int
    save: str | None
    csv: str | None
    quiet: bool

    @property
    def piped(self) -> bool:
        """Whether a file that is asked for goes to standard output, so that all else must not."""
        return STANDARD_OUTPUT in (self.save, self.csv)


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = "Searches every combination the request allows and prints the proven ranking."
    add = command.add_argument
    add("request", metavar="REQUEST", help="the request file (TOML)")
    add("--by", metavar="WHAT", help=f"rank by {', '.join(RANKINGS)} (the request's)")
    add("--show", metavar="N", help="rows to show (the request's)")
    add("--choose", metavar="N", help="the row to mark as chosen (1)")
    add("--save", metavar="FILE.json", help=SAVE)
    add("--csv", metavar="FILE.csv", help="write candidates and near misses as CSV; - as above")
    add("--workers", metavar="N", help="processes to search with (1); the result is the same")
    add("--quiet", action="store_true", help="print only the table, errors and impossibilities")


def shortlist_options(parsed: argparse.Namespace) -> tuple[ShortlistOptions, list[Problem]]:
    """The options with every problem in them; an option with a problem takes its usual value."""
    problems: list[Problem] = []
    options = ShortlistOptions(
        request=parsed.request,
        by=ranking(parsed.by, problems),
        show=whole("--show", parsed.show, problems),
        choose=whole("--choose", parsed.choose, problems) or 1,
        workers=whole("--workers", parsed.workers, problems, most=MOST_WORKERS) or 1,
        save=parsed.save,
        csv=parsed.csv,
        quiet=parsed.quiet,
    )
    return options, problems
