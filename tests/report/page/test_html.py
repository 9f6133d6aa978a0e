"""The HTML of the page: one file, nothing fetched or run, sound for keyboard and screen reader."""

from __future__ import annotations

import re
import sys
from dataclasses import dataclass, field
from html.parser import HTMLParser
from itertools import pairwise

import pytest

from optimizer.errors import MissingExtraError
from optimizer.report.page import compose, to_html
from optimizer.report.page.terms import term
from optimizer.review.dossier import Dossier
from tests.report.page.made import MARKUP, SCRIPT

VOID = {"meta", "link", "br", "path", "rect", "use"}


@dataclass
class Element:
    tag: str
    attributes: dict[str, str | None]
    parent: Element | None = None
    text: str = ""
    children: list[Element] = field(default_factory=list)

    def all(self, tag: str = "") -> list[Element]:
        found = [self] if tag in ("", self.tag) else []
        return found + [one for child in self.children for one in child.all(tag)]

    def whole(self) -> str:
        return self.text + "".join(child.whole() for child in self.children)

    def within(self, tag: str) -> bool:
        return self.parent is not None and (self.parent.tag == tag or self.parent.within(tag))


class Tree(HTMLParser):
    """The page as a tree of elements."""

    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.root = self.here = Element("", {})

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        element = Element(tag, dict(attrs), self.here)
        self.here.children.append(element)
        if tag not in VOID:
            self.here = element

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.here.children.append(Element(tag, dict(attrs), self.here))

    def handle_endtag(self, tag: str) -> None:
        if tag in VOID:
            return
        assert self.here.tag == tag, f"</{tag}> closes <{self.here.tag}>"
        assert self.here.parent is not None
        self.here = self.here.parent

    def handle_data(self, data: str) -> None:
        self.here.text += data


def tree(text: str) -> Element:
    parser = Tree()
    parser.feed(text)
    parser.close()
    assert parser.here is parser.root
    return parser.root


@pytest.fixture(scope="module")
def root(html: str) -> Element:
    return tree(html)


def test_nothing_is_fetched_and_nothing_runs(root: Element, html: str) -> None:
    assert not root.all("script")
    assert not [one for one in root.all() if any(name.startswith("on") for name in one.attributes)]
    policy = next(m for m in root.all("meta") if m.attributes.get("http-equiv") == "Content-Security-Policy")
    assert policy.attributes["content"] == "default-src 'none'; style-src 'unsafe-inline'; img-src data:"
    for one in root.all():
        for name in ("href", "src", "data", "action", "srcset"):
            target = one.attributes.get(name)
            assert target is None or target.startswith("#") or target == "data:,", target
    assert "http://" not in html.replace("http-equiv", "")
    assert "https://" not in html
    style = root.all("style")[0].whole()
    assert not re.search(r"@import|url\(|@font-face", style)


def test_it_has_language_title_and_landmarks(root: Element) -> None:
    (page,) = root.all("html")
    assert page.attributes["lang"] == "en"
    assert root.all("title")[0].whole().startswith("light gate, receive channel")
    for landmark in ("header", "nav", "main"):
        assert len(root.all(landmark)) == 1
    skip = root.all("a")[0]
    assert skip.attributes["href"] == "#decision"


def test_headings_go_down_one_level_at_a_time(root: Element) -> None:
    levels = [int(one.tag[1]) for one in root.all() if re.fullmatch("h[1-6]", one.tag)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after <= before + 1 for before, after in pairwise(levels))


def test_names_are_unique_and_every_link_leads_somewhere(root: Element) -> None:
    names = [one.attributes["id"] for one in root.all() if "id" in one.attributes]
    assert len(names) == len(set(names))
    for one in root.all():
        target = one.attributes.get("href")
        if target and target.startswith("#"):
            assert target[1:] in names
        for name in ("aria-labelledby", "aria-describedby"):
            assert set((one.attributes.get(name) or "").split()) <= set(names)


def test_every_drawing_has_a_text_alternative(root: Element) -> None:
    by_name = {one.attributes.get("id"): one for one in root.all()}
    drawings = [one for one in root.all() if one.attributes.get("role") == "img"]
    assert len(drawings) == len(root.all("figure")) == 8
    for one in drawings:
        said = " ".join(by_name[name].whole() for name in (one.attributes["aria-labelledby"] or "").split())
        assert len(said) > 80
        assert re.search(r"\d", said)
    for one in root.all("svg"):
        assert one.attributes["aria-hidden"] == "true"


def test_every_table_has_a_caption_and_scopes(root: Element) -> None:
    assert len(root.all("table")) > 12
    for table in root.all("table"):
        assert table.all("caption")[0].whole().strip()
        heads = table.all("th")
        assert {head.attributes.get("scope") for head in heads} == {"col", "row"}
        width = len(table.all("thead")[0].all("th"))
        for row in table.all("tbody")[0].all("tr"):
            assert len(row.all("th")) == 1
            assert len(row.all("td")) == width - 1


def test_what_may_be_wide_scrolls_in_a_region_that_the_keyboard_reaches(root: Element) -> None:
    for one in root.all():
        if one.tag in ("table", "pre") or one.attributes.get("role") == "img":
            region = one.parent
            assert region is not None
            assert region.attributes["role"] == "region"
            assert region.attributes["tabindex"] == "0"
            assert region.attributes["aria-label"]


def test_worked_formulas_are_open(root: Element) -> None:
    formulas = [one for one in root.all("details") if one.attributes.get("class") != "data"]
    assert len(formulas) > 30
    assert all("open" in one.attributes for one in formulas)


def test_the_limiting_target_is_marked_in_the_matrix(root: Element, full: Dossier) -> None:
    matrix = next(one for one in root.all("section") if one.attributes["id"] == "compliance").all("table")[0]
    (marked,) = (row for row in matrix.all("tr") if row.attributes.get("class") == "marked")
    assert marked.all("th")[0].whole() == term(full.candidate["limiting"])


def test_the_same_dossier_gives_the_same_page(full: Dossier, html: str) -> None:
    assert to_html(compose(full)) == html


def test_awkward_names_are_text_and_nothing_else(hostile: Dossier) -> None:
    root = tree(to_html(compose(hostile)))
    assert not root.all("script")
    assert not root.all("b")
    assert not root.all("img")
    assert root.all("h1")[0].whole() == "<script>alert(2)</script>"
    lead = next(one for one in root.all("p") if one.attributes.get("class") == "lead").whole()
    assert SCRIPT in lead
    assert MARKUP in lead
    drawn = {text.whole() for text in root.all("text")}
    assert any(name.startswith("> 1: <script>") for name in drawn)


@pytest.mark.parametrize("missing", ["jinja2", "matplotlib"])
def test_without_the_extra_it_says_what_to_install(
    dossier: Dossier, monkeypatch: pytest.MonkeyPatch, missing: str
) -> None:
    monkeypatch.setitem(sys.modules, missing, None)
    with pytest.raises(MissingExtraError, match=r'pip install "luxsift\[report\]"'):
        to_html(compose(dossier))
