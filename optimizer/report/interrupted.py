"""What an interrupted search can still say for certain."""

from __future__ import annotations

from typing import TYPE_CHECKING

from rich.text import Text

from optimizer.record import Record
from optimizer.report.notes import footnotes
from optimizer.report.paragraphs import styled
from optimizer.report.table import ranked_table
from optimizer.report.words import count

if TYPE_CHECKING:
    from optimizer.search.result import Progress

PROVEN = "The ranking above is proven; near misses and counts were not finished."
NONE_PROVEN = "Nothing meets the request, which is proven; near misses and counts were not finished."
OPEN = "Best so far; each row meets the request, but the ranking is NOT proven, better ones may exist:"
NONE_YET = "Nothing found so far meets the request, which proves nothing yet."
NOT_DRAWN = "No random receivers were drawn, so the yields are unknown and change no rank."
LOST = (
    "Nothing is proven yet, and what the workers had found by then is lost; one worker alone would show the "
    "best rows so far."
)


def interrupted(record: Record, last: Progress | None, width: int, *, workers: int = 1) -> list[Text]:
    """What had been proved at the `last` report of the search, and the best rows found by then.

    Several `workers` hand over what they found at their end only.
    """
    data, rows = record.data, record.candidates
    seconds, proven = data["search"]["seconds"], data["search"]["proven"]
    out = styled(f"luxsift: interrupted after {seconds:.3g} s; nothing was saved.", width, "bold")
    table = (
        ranked_table(rows, data["request"], width) + footnotes(rows, data["request"], width) if rows else []
    )
    if rows and data["request"].get("tolerance"):
        table += styled(NOT_DRAWN, width)
    if proven:
        return out + table + styled(PROVEN if rows else NONE_PROVEN, width)
    if workers > 1 and not rows:
        return out + styled(LOST, width)
    return out + styled(_proved(last), width) + styled(OPEN if rows else NONE_YET, width) + table


def _proved(last: Progress | None) -> str:
    if last is None:
        return "Nothing had been proved yet."
    decided = f"{count(last.decided)} of the {count(last.pairs)} pairs whose parts are eligible"
    return f"Proved so far: {decided} are decided and cannot add to the rows found; the others are open."
