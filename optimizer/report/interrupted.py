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

PROVEN = "The ranking below is proven; near misses and counts were not finished:"
OPEN = "Best so far; each row meets the request, but the ranking is NOT proven, better ones may exist:"


def interrupted(record: Record, last: Progress | None, width: int) -> list[Text]:
    """What had been proved at the `last` report of the search, and the best rows found by then."""
    data, seconds = record.data, record.data["search"]["seconds"]
    out = styled(f"luxsift: interrupted after {seconds:.3g} s; nothing was saved.", width, "bold")
    out += styled(_proved(last), width)
    rows = data["candidates"]
    if not rows:
        return out + styled("Nothing found so far meets the request, which proves nothing yet.", width)
    table = ranked_table(rows, data["request"], width) + footnotes(rows, data["request"], width)
    return out + styled(PROVEN if data["search"]["proven"] else OPEN, width) + table


def _proved(last: Progress | None) -> str:
    if last is None:
        return "Nothing had been proved yet."
    decided = f"{count(last.decided)} of the {count(last.pairs)} pairs whose parts are eligible"
    return f"Proved so far: {decided} are decided and cannot add to the rows found; the others are open."
