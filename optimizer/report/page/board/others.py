"""What else was looked at: the other plans as differences, each channel alone, and the pools."""

from __future__ import annotations

from collections.abc import Iterator

from optimizer.errors import clean
from optimizer.report.board.alone import alone_words
from optimizer.report.board.differences import change_rows, difference_words, number_words, proof_words
from optimizer.report.board.looked import looked_words, pool_columns
from optimizer.report.board.status import faults, notes, solved
from optimizer.report.page.blocks import Block, Part, Section, Table, Words, cells
from optimizer.report.page.board.tables import of_columns, termed
from optimizer.report.page.terms import arrows
from optimizer.review.board_dossier import BoardDossier


def others(dossier: BoardDossier) -> Section | None:
    """The section on the other plans, by what differs from this one; None where there is no other."""
    data, plan = dossier.data, dossier.plan
    rest = [other for other in data["plans"] if other["rank"] != plan["rank"]]
    if not rest:
        return None
    parts = []
    for other in rest:
        said = difference_words(plan, other, data)
        rows = tuple(cells(name, arrows(text)) for name, text in change_rows(plan, other, data))
        table = Table(
            f"What plan {other['rank']} builds in another way", ("channel", arrows("old -> new")), rows
        )
        blocks: tuple[Block, ...] = (
            Words(termed(f"{said[0].upper()}{said[1:]}.")),
            *((table,) if rows else ()),
        )
        parts.append(Part(f"Plan {other['rank']}", blocks))
    proofs = [] if "replaces" in data else [*proof_words(data), number_words(data)]
    words = tuple(Words(text, "note") for text in proofs if text)
    return Section("alternatives", "Other plans, by what differs from this one", words, tuple(parts))


def alone(dossier: BoardDossier) -> Section | None:
    """The section on why not each channel by itself; None where that is not known."""
    texts = list(alone_words(dossier.plan, dossier.data))
    if not texts or "replaces" in dossier.data:
        return None
    text = (
        "Each channel chosen by itself does not see what the others buy: part numbers, packages and price "
        "breaks that could be shared are paid for again."
    )
    return Section("alone", "Why not each channel alone", (*map(Words, texts), Words(text, "note")))


def looked(dossier: BoardDossier) -> Section:
    """The section on how the plan was found, and over what it is proven."""
    data = dossier.data
    blocks: list[Block] = [Words(text) for text in _told(dossier)]
    if data["search"]["pools"]:
        blocks.append(of_columns("The candidates of each channel", pool_columns(data)))
        if "replaces" not in data:
            blocks += [Words(text, "note") for text in looked_words(data)]
    return Section("search", "How it was found", tuple(blocks))


def _told(dossier: BoardDossier) -> Iterator[str]:
    data = dossier.data
    if "replaces" in data:
        yield (
            "Channels that do not use what is gone have one candidate, themselves; of the others, every "
            "setting was taken in that changes few enough positions to matter."
        )
    yield solved(data) or "No solver ran."
    yield from faults(data)
    yield from (clean(text) for text in notes(data))
