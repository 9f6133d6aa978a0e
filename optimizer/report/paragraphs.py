"""Running text folded to the terminal."""

from __future__ import annotations

import re
import textwrap
from itertools import pairwise

from rich.text import Text

UNBROKEN = "\u00a0"  # stands for the space between a number and its unit while text is folded
NUMBER = re.compile(r"\(?-?[0-9.,]+")
BODIES = ("IEC", "ISO", "EN")


def paragraph(text: str, width: int, indent: str = "") -> list[str]:
    """`text` folded to `width`; a number is never parted from its unit or per cent sign."""
    kept = bound(text)
    folded = textwrap.wrap(
        kept,
        max(width, 20),
        subsequent_indent=indent,
        break_on_hyphens=False,
    )
    return [line.replace(UNBROKEN, " ") for line in folded]


def styled(text: str, width: int, style: str = "", indent: str = "") -> list[Text]:
    """`paragraph` as lines to print."""
    return [Text(line, style) for line in paragraph(text, width, indent)]


def bound(text: str) -> str:
    """`text` with an unbroken space wherever a number stands before its unit."""
    words = text.split(" ")
    joined = words[0]
    for before, word in pairwise(words):
        unit = NUMBER.fullmatch(before) and not before.endswith(",") and len(word) <= 6
        joined += (UNBROKEN if unit or before.lstrip("(") in BODIES else " ") + word
    return joined
