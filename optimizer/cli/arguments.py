"""The command line as a whole: which commands there are, and what is wrong with one that is not.

A command `name` is declared by `cli/options/<name>.py` (SUMMARY and `declare`, light to import) and
run by the function `name` of `cli/<name>.py`.
"""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from importlib import import_module
from typing import NoReturn

from optimizer.cli.options.shared import COMMAND_LINE
from optimizer.errors import InputError, Problem, did_you_mean

COMMANDS = ("start", "inspect", "shortlist", "board", "replace", "exposure", "whynot", "tradeoff", "justify")
EXAMPLES = """\
examples:
  luxsift start receiver             a request and small catalogs to begin from
  luxsift shortlist receiver/request.toml
  luxsift inspect catalogs/*.csv

exit status: 0 something meets the request, 1 nothing does, 2 bad input, 130 interrupted"""


class _Parser(argparse.ArgumentParser):
    """Reports a bad command line as a Problem instead of exiting on its own."""

    def error(self, message: str) -> NoReturn:
        remedy = f"see {self.prog} --help"
        raise InputError([Problem(COMMAND_LINE, None, None, None, message, remedy)])


def parser() -> argparse.ArgumentParser:
    """The parser of every command."""
    return _parsers()[0]


def _parsers() -> tuple[argparse.ArgumentParser, dict[str, argparse.ArgumentParser]]:
    """The whole parser, and those of the commands by name."""
    top = _Parser(
        prog="luxsift",
        description="Chooses photodiode, op-amp and passives for optical receivers out of parts catalogs.",
        epilog=EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    top.add_argument("--version", action="store_true", help="print the version and exit")
    commands = top.add_subparsers(dest="command", metavar="COMMAND", title="commands", parser_class=_Parser)
    each: dict[str, argparse.ArgumentParser] = {}
    for name in COMMANDS:
        declared = import_module(f"optimizer.cli.options.{name}")
        each[name] = commands.add_parser(name, help=declared.SUMMARY, allow_abbrev=False)
        declared.declare(each[name])
    return top, each


def parse(words: Sequence[str]) -> argparse.Namespace:
    """The parsed words; raises InputError where they are no command."""
    first = next((word for word in words if not word.startswith("-")), None)
    if first is not None and first not in COMMANDS:
        remedy = did_you_mean(first, COMMANDS) or "see luxsift --help"
        rule = f"expected a command: {', '.join(COMMANDS[:-1])} or {COMMANDS[-1]}"
        raise InputError([Problem(COMMAND_LINE, None, None, first, rule, remedy)])
    top, each = _parsers()
    parsed, unknown = top.parse_known_args(words)
    if unknown:
        rule, options = "there is no such argument", _options(each.get(parsed.command))
        raise InputError(
            Problem(COMMAND_LINE, None, None, word, rule, did_you_mean(word, options)) for word in unknown
        )
    return parsed


def options_of(name: str) -> list[str]:
    """The options that the command `name` takes."""
    return _options(_parsers()[1][name])


def _options(command: argparse.ArgumentParser | None) -> list[str]:
    """The options that a command takes."""
    if command is None:
        return []
    return [
        name
        for action in command._actions
        for name in action.option_strings
        if name.startswith("--") and name != "--help"
    ]
