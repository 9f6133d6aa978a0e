"""A drawing inside a page: its colours are the page's, its names its own, its texts harmless."""

from __future__ import annotations

import re
from xml.etree import ElementTree

import pytest

from optimizer.report.page.draw.canvas import LINES, PROPERTIES, canvas, grid, settings, svg, units


def drawn(title: str = "title", key: str = "one") -> str:
    with settings():
        figure = canvas(2.0)
        axes = figure.add_subplot()
        axes.set_title(title)
        axes.semilogx([1.0, 10.0, 1e5], [1.0, 2.0, 1.5], color=LINES[1], marker="o", label="line")
        axes.fill_between([1.0, 10.0], [0.0, 1.0], hatch="//", color=LINES[0])
        units(axes.xaxis, "frequency")
        grid(axes)
        axes.legend()
        return svg(figure, key)


def test_every_colour_is_a_property_of_the_page() -> None:
    text = drawn()
    colours = set(re.findall(r"(?:fill|stroke|color)(?:: |=\")([^;\"]+)", text))
    assert colours - {"none"}
    for colour in colours - {"none"}:
        name = re.fullmatch(r"var\((--[a-z0-9-]+)\)", colour)
        assert colour.startswith("url(#one-") or (name and name[1] in PROPERTIES.values()), colour


def test_names_begin_with_the_key_and_every_reference_is_met() -> None:
    root = ElementTree.fromstring(drawn(key="two"))
    names = [element.get("id") for element in root.iter() if element.get("id")]
    assert names
    assert len(names) == len(set(names))
    assert all(name.startswith("two-") for name in names if name)
    text = drawn(key="two")
    referred = set(re.findall(r"url\(#([^)]+)\)", text)) | set(re.findall(r'href="#([^"]+)"', text))
    assert referred == set(names)


def test_it_fetches_nothing_and_styles_nothing_but_itself() -> None:
    text = drawn()
    assert not re.search(r"http|<style|<metadata|font-family|xmlns|DejaVu", text)


def test_the_same_drawing_gives_the_same_text() -> None:
    assert drawn() == drawn()


def test_settings_are_put_back() -> None:
    import matplotlib as mpl

    before = dict(mpl.rcParams)
    drawn()
    assert dict(mpl.rcParams) == before


@pytest.mark.parametrize(
    "name", ["<script>alert(1)</script>", "$\\frac{1}{0}$", "a & b", "#010101", "</svg>"]
)
def test_a_text_stays_a_text(name: str) -> None:
    root = ElementTree.fromstring(drawn(title=name))
    assert name in [element.text for element in root.iter("text")]
    assert not list(root.iter("script"))


def test_the_axis_speaks_in_engineering_quantities() -> None:
    root = ElementTree.fromstring(drawn())
    said = {element.text for element in root.iter("text")}
    assert {"1 Hz", "100 kHz"} <= said
