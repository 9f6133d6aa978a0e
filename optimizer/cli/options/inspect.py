"""What `luxsift inspect` takes."""

from __future__ import annotations

import argparse

SUMMARY = "say what catalogs hold and what looks wrong in them"


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = "Says what catalogs hold: counts, missing data, unusual values, duplicates."
    command.add_argument("catalogs", nargs="+", metavar="CATALOG", help="a catalog file")
