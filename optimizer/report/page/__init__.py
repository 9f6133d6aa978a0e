"""The page that a design review works from: composed once, written as HTML or as Markdown."""

from __future__ import annotations

from optimizer.report.page.compose import compose
from optimizer.report.page.html import check_installed, to_html
from optimizer.report.page.markdown import to_markdown

__all__ = ["check_installed", "compose", "to_html", "to_markdown"]
