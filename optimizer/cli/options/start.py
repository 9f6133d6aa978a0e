"""What `luxsift start` takes."""

from __future__ import annotations

import argparse

SUMMARY = "write a commented request and small catalogs to begin from"


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = "Writes a commented request and small catalogs of invented parts; never overwrites."
    command.add_argument("folder", nargs="?", default=".", metavar="FOLDER", help="where to (here)")
