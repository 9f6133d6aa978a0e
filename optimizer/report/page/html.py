"""The page as one HTML file that fetches nothing and runs nothing; by Jinja2, everything escaped."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

from optimizer.errors import MissingExtraError
from optimizer.report.page.blocks import Figure, Page
from optimizer.report.paragraphs import bound

if TYPE_CHECKING:
    from markupsafe import Markup

TEMPLATES = Path(__file__).parent / "template"
SHORT, MIDDLING, UNBROKEN, LONG = 10, 16, 18, 40  # characters
NEEDS = 'an HTML page needs Jinja2 and matplotlib: pip install "luxsift[report]", or write it as .md'


def to_html(page: Page) -> str:
    """The page as HTML; raises MissingExtraError where the extra `report` is not installed."""
    check_installed()
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    environment = Environment(
        loader=FileSystemLoader(TEMPLATES),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters |= {"bound": bound, "wrapping": _wrapping}
    template = environment.get_template("page.html.j2")
    return template.render(page=page, style=_style(), drawn=_drawn, kind=_kind)


def check_installed() -> None:
    """Raise MissingExtraError where what draws the page is not installed."""
    try:
        import jinja2
        import matplotlib  # noqa: F401 - only whether it is there
    except ImportError:
        raise MissingExtraError(NEEDS) from None
    assert jinja2


def _style() -> Markup:
    """The style sheet, which is the page's own and holds nothing of the user's."""
    from markupsafe import Markup

    return Markup((TEMPLATES / "page.css").read_text("utf-8"))


def _drawn(figure: Figure) -> Markup:
    """The figure's SVG, in which matplotlib has escaped every text."""
    from markupsafe import Markup

    return Markup(figure.draw(figure.key))


def _wrapping(text: str) -> str:
    """How a cell may be folded: not at all, on paper only, between words (if long not narrowly), anywhere."""
    if len(text) <= SHORT:
        return "short"
    if max(len(word) for word in text.split()) > UNBROKEN:
        return "unbroken"
    return "middling" if len(text) <= MIDDLING else "long" if len(text) > LONG else ""


def _kind(block: Any) -> str:
    """The name of the macro that writes `block`."""
    return type(block).__name__.lower()
