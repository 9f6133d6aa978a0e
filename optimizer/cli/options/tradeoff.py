"""What `luxsift tradeoff` takes."""

from __future__ import annotations

import argparse
from dataclasses import dataclass

from optimizer.cli.options.shared import COMMAND_LINE
from optimizer.errors import Problem, did_you_mean

SUMMARY = "say what each target costs, and which cannot hold together"
AGAINST = (
    "bandwidth", "snr", "dynamic_range", "full_scale", "phase_margin", "peaking", "slew", "offset",
    "supply_current",
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class TradeoffOptions:
    """The options of `luxsift tradeoff`; `against` is None where the table of all targets is asked for."""

    request: str
    against: str | None
    csv: str | None


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = (
        "For every target: the lowest cost if it alone is relaxed, tightened or dropped, and what part that "
        "changes. Where nothing meets: which targets cannot hold together, and the smallest relaxations."
    )
    add = command.add_argument
    add("request", metavar="REQUEST", help="the request file (TOML)")
    add("--against", metavar="TARGET", help="the exact front of cost against this target instead")
    add(
        "--csv",
        metavar="FILE.csv",
        help="write the table, or the front, as CSV in SI units; - for standard output",
    )


def tradeoff_options(parsed: argparse.Namespace) -> tuple[TradeoffOptions, list[Problem]]:
    """The options with every problem in them."""
    problems = []
    if parsed.against is not None and parsed.against not in AGAINST:
        rule = f"expected a target: {', '.join(AGAINST)}"
        remedy = did_you_mean(parsed.against, AGAINST)
        problems.append(Problem(COMMAND_LINE, None, "--against", parsed.against, rule, remedy))
    return TradeoffOptions(parsed.request, parsed.against, parsed.csv), problems
