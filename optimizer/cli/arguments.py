"""What may stand on the command line; light to import, so that --help answers at once."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, NoReturn

from optimizer.errors import InputError, Problem, did_you_mean
from optimizer.request.types import RANKINGS

COMMAND_LINE = "command line"
SHORTLIST = ("--by", "--show", "--choose", "--save", "--csv", "--workers", "--quiet")
MOST_ROWS, MOST_WORKERS = 1_000_000, 256
STANDARD_OUTPUT = "-"
SAVE = "write the record; - is standard output, all else then goes to standard error"
EXAMPLES = """\
examples:
  luxsift start receiver             a request and small catalogs to begin from
  luxsift shortlist receiver/request.toml
  luxsift inspect catalogs/*.csv

exit status: 0 something meets the request, 1 nothing does, 2 bad input, 130 interrupted"""


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


class _Parser(argparse.ArgumentParser):
    """Reports a bad command line as a Problem instead of exiting on its own."""

    def error(self, message: str) -> NoReturn:
        remedy = f"see {self.prog} --help"
        raise InputError([Problem(COMMAND_LINE, None, None, None, message, remedy)])


def _command(commands: Any, name: str, words: str) -> argparse.ArgumentParser:
    command: argparse.ArgumentParser = commands.add_parser(name, help=words, allow_abbrev=False)
    return command


def parser() -> argparse.ArgumentParser:
    """The parser of every command."""
    top = _Parser(
        prog="luxsift",
        description="Chooses photodiode, op-amp and passives for optical receivers out of parts catalogs.",
        epilog=EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    top.add_argument("--version", action="store_true", help="print the version and exit")
    commands = top.add_subparsers(dest="command", metavar="COMMAND", title="commands", parser_class=_Parser)
    _start(_command(commands, "start", "write a commented request and small catalogs to begin from"))
    _inspect(_command(commands, "inspect", "say what catalogs hold and what looks wrong in them"))
    _shortlist(_command(commands, "shortlist", "rank the parts that meet a request (the main job)"))
    return top


def parse(words: Sequence[str]) -> argparse.Namespace:
    """The parsed words; raises InputError where they are no command."""
    known = ("start", "inspect", "shortlist")
    first = next((word for word in words if not word.startswith("-")), None)
    if first is not None and first not in known:
        remedy = did_you_mean(first, known) or "see luxsift --help"
        rule = "expected a command: start, inspect or shortlist"
        raise InputError([Problem(COMMAND_LINE, None, None, first, rule, remedy)])
    parsed, unknown = parser().parse_known_args(words)
    if unknown:
        rule, options = "there is no such argument", SHORTLIST if parsed.command == "shortlist" else ()
        raise InputError(
            Problem(COMMAND_LINE, None, None, word, rule, did_you_mean(word, options)) for word in unknown
        )
    return parsed


def shortlist_options(parsed: argparse.Namespace) -> tuple[ShortlistOptions, list[Problem]]:
    """The options with every problem in them; an option with a problem takes its usual value."""
    problems: list[Problem] = []
    options = ShortlistOptions(
        request=parsed.request,
        by=_ranking(parsed.by, problems),
        show=_whole("--show", parsed.show, problems),
        choose=_whole("--choose", parsed.choose, problems) or 1,
        workers=_whole("--workers", parsed.workers, problems, most=MOST_WORKERS) or 1,
        save=parsed.save,
        csv=parsed.csv,
        quiet=parsed.quiet,
    )
    return options, problems


def _whole(name: str, text: str | None, problems: list[Problem], *, most: int = MOST_ROWS) -> int | None:
    if text is None:
        return None
    number = int(text) if text.isascii() and text.isdigit() and len(text) <= 9 else 0
    if 1 <= number <= most:
        return number
    rule = f"expected a whole number from 1 to {most:,}"
    problems.append(Problem(COMMAND_LINE, None, name, text, rule))
    return None


def _ranking(by: str | None, problems: list[Problem]) -> str | None:
    if by is None or by in RANKINGS:
        return by
    rule = f"expected one of {', '.join(RANKINGS)}"
    problems.append(Problem(COMMAND_LINE, None, "--by", by, rule, did_you_mean(by, RANKINGS)))
    return None


def _start(command: argparse.ArgumentParser) -> None:
    command.description = "Writes a commented request and small catalogs of invented parts; never overwrites."
    command.add_argument("folder", nargs="?", default=".", metavar="FOLDER", help="where to (here)")


def _inspect(command: argparse.ArgumentParser) -> None:
    command.description = "Says what catalogs hold: counts, missing data, unusual values, duplicates."
    command.add_argument("catalogs", nargs="+", metavar="CATALOG", help="a catalog file")


def _shortlist(command: argparse.ArgumentParser) -> None:
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
