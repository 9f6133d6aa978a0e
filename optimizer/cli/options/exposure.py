"""What `luxsift exposure` takes."""

from __future__ import annotations

import argparse

SUMMARY = "say which parts of saved records have no substitute, or are running out"


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = (
        "Lists every part that the chosen rows and plans of saved records use, the worst first: status, "
        "stock against what the builds need, lead time, makers, and how many substitutes there are. Ends "
        "with 1 where a part has no substitute, is obsolete, or is no longer in the catalogs."
    )
    records = "records, as shortlist --save or board --save writes them"
    command.add_argument("records", nargs="+", metavar="RECORD", help=records)
    csv = "write the parts as CSV; - is standard output, all else then goes to standard error"
    command.add_argument("--csv", metavar="FILE.csv", help=csv)
