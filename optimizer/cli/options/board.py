"""What `luxsift board` takes."""

from __future__ import annotations

import argparse
from dataclasses import dataclass

from optimizer.cli.options.shared import COMMAND_LINE, SAVE, STANDARD_OUTPUT, one_of, whole
from optimizer.errors import Problem
from optimizer.planning.outline import SOLVERS

SUMMARY = "plan several receivers on one board together"


@dataclass(frozen=True, slots=True)
class BoardOptions:
    """The options of `luxsift board`; None where the board file's own value stands."""

    board: str
    plans: int | None
    time: float | None
    solver: str | None
    save: str | None
    csv: str | None
    quiet: bool

    @property
    def piped(self) -> bool:
        """Whether a file that is asked for goes to standard output, so that all else must not."""
        return STANDARD_OUTPUT in (self.save, self.csv)


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = (
        "Chooses the parts of all channels of a board together, at the lowest cost of the whole build, and "
        "says how far that is proven."
    )
    add = command.add_argument
    add("board", metavar="BOARD", help="the board file (TOML), which names the requests of its channels")
    add("--plans", metavar="N", help="ranked plans to find (the board file's)")
    add("--time", metavar="T", help="seconds to plan in, such as 90 or '90 s' (the board file's)")
    add("--solver", metavar="NAME", help=f"{', '.join(SOLVERS)} (the board file's)")
    add("--save", metavar="FILE.json", help=SAVE)
    add("--csv", metavar="FILE.csv", help="write the bill of materials as CSV in SI units; - as above")
    add("--quiet", action="store_true", help="print only the plan, its bill of materials and errors")


def board_options(parsed: argparse.Namespace) -> tuple[BoardOptions, list[Problem]]:
    """The options with every problem in them; an option with a problem counts as not given."""
    problems: list[Problem] = []
    options = BoardOptions(
        board=parsed.board,
        plans=whole("--plans", parsed.plans, problems),
        time=_seconds(parsed.time, problems),
        solver=one_of("--solver", parsed.solver, SOLVERS, problems),
        save=parsed.save,
        csv=parsed.csv,
        quiet=parsed.quiet,
    )
    return options, problems


def _seconds(text: str | None, problems: list[Problem]) -> float | None:
    from optimizer.planning.values import seconds
    from optimizer.toml.schema import Refused

    if text is None:
        return None
    try:
        return seconds(text)
    except Refused as refused:
        problems += [
            Problem(COMMAND_LINE, None, "--time", fault.cell, fault.rule, fault.remedy)
            for fault in refused.faults
        ]
        return None
