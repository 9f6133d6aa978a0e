"""What an interrupted search can still say for certain."""

from __future__ import annotations

from rich.text import Text

from optimizer.record import Record
from optimizer.report.notes import footnotes
from optimizer.report.paragraphs import styled
from optimizer.report.table import ranked_table
from optimizer.report.words import count


def interrupted(record: Record, width: int) -> list[Text]:
    """What had been proved when the search was stopped, and the best rows found so far."""
    data, search = record.data, record.data["search"]
    decided = sum(search["dropped"].values()) + len(data["candidates"])
    out = styled(f"luxsift: interrupted after {search['seconds']:.3g} s; nothing was saved.", width, "bold")
    out += styled(
        f"Decided so far: {count(decided)} of {count(search['pairs'])} pairs, of which "
        f"{count(sum(search['dropped'].values()))} are proved out of the ranking.",
        width,
    )
    rows = data["candidates"]
    if not rows:
        return out + styled("Nothing found so far meets the request, which proves nothing yet.", width)
    text = "Best so far; each row meets the request, but the ranking is NOT proven, better ones may exist:"
    table = ranked_table(rows, data["request"], width)
    return [*out, *styled(text, width), *table, *footnotes(rows, data["request"], width)]
