"""Which input files are not what they were when a record was made."""

from __future__ import annotations

from collections.abc import Sequence

from rich.text import Text

from optimizer.errors import clean
from optimizer.report.paragraphs import styled
from optimizer.review.reopen import Changed


def changed_lines(changed: Sequence[Changed], width: int) -> list[Text]:
    """One sentence on what has changed since."""
    if not changed:
        return styled("No input file has changed since the record was made.", width)
    files = ", ".join(f"{clean(change.file)} ({_how(change)})" for change in changed)
    return styled(f"Changed since the record was made: {files}", width)


def _how(change: Changed) -> str:
    if change.then is None:
        return "new"
    return "gone" if change.now is None else "other contents"
