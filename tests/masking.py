"""What differs from run to run in a report, masked: seconds, and how many settings were evaluated."""

from __future__ import annotations

import re
import textwrap

WIDTH = 80
_COVERED = re.compile(r"^Covered .+?(?=\n\n|\Z)", re.DOTALL | re.MULTILINE)
_PLANNED = re.compile(r"^(Planned in) \S+ s", re.MULTILINE)
_VARYING = re.compile(r" in \S+ s, [\d,]+ of them evaluated,")


def masked(text: str) -> str:
    """`text` with `...` for these numbers; their paragraph is folded anew, as they fold it differently."""
    return _PLANNED.sub(r"\1 ... s", _COVERED.sub(_mask_paragraph, text))


def _mask_paragraph(found: re.Match[str]) -> str:
    line = " ".join(found.group().split())
    line = _VARYING.sub(" in ... s, ... of them evaluated,", line)
    end = "\n" if found.group().endswith("\n") else ""
    return "\n".join(textwrap.wrap(line, WIDTH)) + end
