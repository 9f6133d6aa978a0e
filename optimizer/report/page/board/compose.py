"""The page about a board as a whole: which sections, in which order."""

from __future__ import annotations

from optimizer.errors import clean
from optimizer.report.board.amounts import of_cents
from optimizer.report.page.blocks import Page
from optimizer.report.page.board.channels import channels, worked
from optimizer.report.page.board.decision import decision
from optimizer.report.page.board.grounds import asked, limits, sources
from optimizer.report.page.board.others import alone, looked, others
from optimizer.report.page.board.plan import bill, plan, totals
from optimizer.report.page.board.tables import priced
from optimizer.report.page.compose import moment
from optimizer.report.page.supply import supplied
from optimizer.report.words import count
from optimizer.review.board_dossier import BoardDossier


def compose_board(dossier: BoardDossier) -> Page:
    """Everything that the page says about the dossier's plan."""
    data, row = dossier.data, dossier.plan
    sections = (
        decision(dossier),
        plan(dossier),
        bill(dossier),
        totals(dossier),
        channels(dossier),
        alone(dossier),
        others(dossier),
        looked(dossier),
        asked(dossier),
        worked(dossier),
        supplied(dossier.supply),
        limits(dossier),
        sources(dossier),
    )
    facts = (
        ("plan", f"{row['rank']} of {len(data['plans'])}"),
        ("build", f"{count(data['board']['quantity'])} boards, {priced(of_cents(row['cost']), data)}"),
        ("record made", moment(data["created"])),
        ("luxsift", clean(data["version"])),
    )
    return Page(
        title=clean(data["name"]) or "Board",
        subtitle="The whole board",
        about="Board",
        facts=facts,
        sections=tuple(section for section in sections if section is not None),
    )
