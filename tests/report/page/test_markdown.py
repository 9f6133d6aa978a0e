"""The Markdown of the page: whole tables, and no name that becomes anything but text."""

from __future__ import annotations

import re
import sys

import pytest

from optimizer.report.page import compose, to_markdown
from optimizer.report.page.markdown import escaped, paragraph
from optimizer.review.dossier import Dossier


@pytest.fixture(scope="module")
def text(full: Dossier) -> str:
    return to_markdown(compose(full))


def outside_fences(text: str) -> str:
    return re.sub(r"(?ms)^(`{3,})text\n.*?^\1$", "", text)


def test_headings_are_those_of_the_page(text: str, full: Dossier) -> None:
    page = compose(full)
    assert text.startswith(f"# {page.title}\n")
    found = re.findall(r"(?m)^## (\d+)\. (.*)$", outside_fences(text))
    assert found == [(str(i), section.heading) for i, section in enumerate(page.sections, 1)]


def test_every_row_of_a_table_has_the_cells_of_its_heading(text: str) -> None:
    grids = re.findall(r"(?m)(?:^\|.*\|\n)+", outside_fences(text))
    assert len(grids) > 20
    for grid in grids:
        widths = {len(re.findall(r"(?<!\\)\|", line)) for line in grid.splitlines()}
        assert len(widths) == 1


def test_drawings_are_said_in_words_with_their_numbers(text: str, full: Dossier) -> None:
    assert "![" not in text
    assert "<svg" not in text
    assert "**Budget of the integrated output noise, at the weakest light.** The noise" in text
    assert "| frequency | open-loop gain | noise gain |" in text


def test_it_needs_no_extra(full: Dossier, text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("jinja2", "matplotlib", "markupsafe"):
        monkeypatch.setitem(sys.modules, name, None)
    assert to_markdown(compose(full)) == text


def test_awkward_names_are_text_and_nothing_else(hostile: Dossier) -> None:
    text = outside_fences(to_markdown(compose(hostile)))
    assert "<" not in text
    assert not re.search(r"(?<!\\)(`|!\[|\]\()", text)
    assert "&lt;script&gt;alert(1)&lt;/script&gt;" in text
    assert "c\\*\\*d\\*\\*" in text
    assert "http://" not in text
    grids = re.findall(r"(?m)(?:^\|.*\|\n)+", text)
    for grid in grids:
        assert len({len(re.findall(r"(?<!\\)\|", line)) for line in grid.splitlines()}) == 1


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("a_b current_noise", "a_b current_noise"),
        ("_a_ b", "\\_a\\_ b"),
        ("x | y", "x \\| y"),
        ("<b>&", "&lt;b&gt;&amp;"),
        ("[a](b) `c` *d* ~e~ $f$", "\\[a\\](b) \\`c\\` \\*d\\* \\~e\\~ \\$f\\$"),
        ("http://x www.y a@b", "http\\://x www\\.y a\\@b"),
        ("back\\slash", "back\\\\slash"),
    ],
)
def test_escaped(text: str, expected: str) -> None:
    assert escaped(text) == expected


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("- item", "\\- item"),
        ("# heading", "\\# heading"),
        ("1. one", "1\\. one"),
        ("12) two", "12\\) two"),
        ("0.5 mm", "0.5 mm"),
        ("1,948 of 2,000", "1,948 of 2,000"),
        ("> quote", "&gt; quote"),
    ],
)
def test_a_paragraph_begins_no_list(text: str, expected: str) -> None:
    assert paragraph(text) == expected
