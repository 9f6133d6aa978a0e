"""What `luxsift replace` takes."""

from __future__ import annotations

import argparse
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from optimizer.cli.options.shared import COMMAND_LINE, SAVE, STANDARD_OUTPUT, whole
from optimizer.errors import Problem, did_you_mean

SUMMARY = "find what replaces a part that is gone, by how much of the board changes"
SHOW = 3
KEEPABLE = ("photodiode", "opamp", "wiring", "reference", "feedback_resistance", "feedback_capacitance")


@dataclass(frozen=True, slots=True)
class ReplaceOptions:
    """The options of `luxsift replace`; None where the record's own choice stands."""

    record: str
    gone: tuple[str, ...]
    keep: tuple[str, ...]
    rank: int | None
    show: int
    request: str | None
    save: str | None

    @property
    def piped(self) -> bool:
        """Whether the record goes to standard output, so that all else must not."""
        return self.save == STANDARD_OUTPUT


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = (
        "Takes a row of a saved record without the parts that are gone (named, obsolete or missing in the "
        "catalogs) and ranks what takes their place, the least change of the board first. Of a board's "
        "record it takes a plan, and changes as few positions of the whole board as it can."
    )
    add = command.add_argument
    add("record", metavar="RECORD", help="a record, as shortlist --save or board --save writes it")
    gone = "parts or families that are gone (those that are obsolete, or missing, in the catalogs)"
    add("--gone", nargs="+", action="extend", default=[], metavar="PART", help=gone)
    keep = f"positions to leave as they are: {', '.join(KEEPABLE)}"
    add("--keep", nargs="+", action="extend", default=[], metavar="NAME", help=keep)
    add("--rank", metavar="N", help="the row or plan to replace (the record's chosen one)")
    add("--show", metavar="N", help=f"rows for each kind of change, or boards ({SHOW})")
    add("--request", metavar="FILE", help="where the record's request or board file is, if moved")
    add("--save", metavar="FILE.json", help=SAVE)


def replace_options(parsed: argparse.Namespace) -> tuple[ReplaceOptions, list[Problem]]:
    """The options with every problem in them; an option with a problem takes its usual value."""
    problems = list(_keep_problems(parsed.keep))
    options = ReplaceOptions(
        record=parsed.record,
        gone=tuple(dict.fromkeys(parsed.gone)),
        keep=tuple(dict.fromkeys(name for name in parsed.keep if name in KEEPABLE)),
        rank=whole("--rank", parsed.rank, problems),
        show=whole("--show", parsed.show, problems) or SHOW,
        request=parsed.request,
        save=parsed.save,
    )
    return options, problems


def _keep_problems(names: Sequence[str]) -> Iterator[Problem]:
    for name in names:
        if name not in KEEPABLE:
            rule = f"expected one of {', '.join(KEEPABLE)}"
            yield Problem(COMMAND_LINE, None, "--keep", name, rule, did_you_mean(name, KEEPABLE))
