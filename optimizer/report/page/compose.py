"""The page as a whole: which sections, in which order."""

from __future__ import annotations

from datetime import UTC, datetime

from optimizer.errors import clean
from optimizer.report.page.alternatives import alternatives
from optimizer.report.page.asked import asked
from optimizer.report.page.behaviour import behaviour
from optimizer.report.page.blocks import Page
from optimizer.report.page.decision import compliance, decision
from optimizer.report.page.formulas import formulas
from optimizer.report.page.grounds import limits, sources
from optimizer.report.page.prices import prices
from optimizer.report.page.spread import spread
from optimizer.report.page.supply import exposure
from optimizer.report.words import count
from optimizer.review.dossier import Dossier


def compose(dossier: Dossier) -> Page:
    """Everything that the page says about the dossier's candidate."""
    data, row = dossier.data, dossier.candidate
    sections = (
        decision(dossier),
        compliance(dossier),
        asked(dossier.request),
        formulas(dossier),
        behaviour(dossier),
        spread(dossier),
        alternatives(dossier),
        prices(dossier),
        exposure(dossier),
        limits(dossier),
        sources(dossier),
    )
    facts = (
        ("row", f"{row['rank']} of {len(data['candidates'])}"),
        ("build", f"{count(dossier.request['quantity'])} receivers"),
        ("record made", moment(data["created"])),
        ("luxsift", clean(data["version"])),
    )
    return Page(
        title=clean(data["name"]) or "Receiver",
        subtitle=f"{clean(row['photodiode'])} with {clean(row['opamp'])}",
        facts=facts,
        sections=tuple(section for section in sections if section is not None),
    )


def moment(created: str) -> str:
    """A time stamp as people write it, in UTC; as it stands where it is none."""
    try:
        moment = datetime.fromisoformat(created)
    except ValueError:
        return clean(created)
    return moment.astimezone(UTC).strftime("%Y-%m-%d %H:%M UTC") if moment.tzinfo else clean(created)
