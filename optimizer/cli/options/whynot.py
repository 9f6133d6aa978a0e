"""What `luxsift whynot` takes."""

from __future__ import annotations

import argparse
from dataclasses import dataclass

SUMMARY = "say why a part (or two together) is not the answer to a request"


@dataclass(frozen=True, slots=True)
class WhynotOptions:
    """The request and the names of the parts asked about, as typed."""

    request: str
    names: tuple[str, ...]


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = (
        "Puts a part to every check and target of a request, with numbers: what stops it, by how much, what "
        "it reaches of each target alone and together, and the setting with which it comes closest."
    )
    add = command.add_argument
    add("request", metavar="REQUEST", help="the request file (TOML)")
    add(
        "part", metavar="PART", help="an op-amp, photodiode, resistor or capacitor family: NAME or MAKER/NAME"
    )
    add("other", nargs="?", metavar="PART", help="a part of another role, to look at both together")


def whynot_options(parsed: argparse.Namespace) -> WhynotOptions:
    """The options of the command."""
    names = (parsed.part,) if parsed.other is None else (parsed.part, parsed.other)
    return WhynotOptions(parsed.request, names)
