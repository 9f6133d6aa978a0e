"""Tells which rows were left out of the catalogs on the user's word."""

from __future__ import annotations

import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING

from optimizer.cli.messages import LONGEST_WORDS
from optimizer.cli.output import write
from optimizer.errors import clean, shortened

if TYPE_CHECKING:
    from optimizer.catalog.parts import LeftOut

LISTED = 20


def tell_left_out(rows: Sequence[LeftOut], named: str = "") -> None:
    """Say on standard error which rows were left out; `named` goes on with how their files are named."""
    from optimizer.report.words import several

    lines = [f"luxsift: left out of the catalogs as source.toml says: {several(len(rows), 'row')}{named}"]
    lines += [
        f"  {clean(entry.file)}, line {entry.row}: {shortened(clean(entry.reason), LONGEST_WORDS)}"
        for entry in rows[:LISTED]
    ]
    if len(rows) > LISTED:
        lines.append(f"  ... and {len(rows) - LISTED:,} more (luxsift inspect lists them)")
    write(sys.stderr, "".join(f"{line}\n" for line in lines))
