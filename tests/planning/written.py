"""Boards, requests and catalogs in a folder, to be read and to be spoilt."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from optimizer.errors import Problem
from optimizer.planning.outline import Outline
from tests.test_study import CATALOGS, REQUEST

Reads = Callable[[str | bytes], Outline]
Fails = Callable[[str | bytes], tuple[Problem, ...]]

MINIMAL = """\
[[channels]]
request = "turbidity.toml"
"""

FULL = """\
name = "river sonde, optical board"
quantity = 400

[[channels]]
name = "turbidity"
request = "turbidity.toml"
count = 2

[[channels]]
name = "colour"
request = "other/colour.toml"

[limits]
cost = 60.00
supply_current = "25 mA"
area = "450 mm2"
line_items = 16

[costs]
line_item = 15.00
placement = 0.01

[rules]
opamp_sources = 2
opamp_parts = 3

[solve]
plans = 4
time = "90 s"
solver = "cbc"
"""


def write_inputs(folder: Path) -> None:
    """Write catalogs, two requests that name them (turbidity.toml, other/colour.toml), and a board."""
    (folder / "parts").mkdir()
    for role, text in CATALOGS.items():
        (folder / "parts" / f"{role}.csv").write_text(text)
    (folder / "turbidity.toml").write_text(REQUEST)
    (folder / "other").mkdir()
    (folder / "other" / "colour.toml").write_text(REQUEST.replace('"parts/', '"../parts/'))
    (folder / "inner.toml").write_text(MINIMAL)
