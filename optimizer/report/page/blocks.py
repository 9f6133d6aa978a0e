"""What a page is made of: sections of plain blocks, which HTML and Markdown each write in their way."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class Words:
    """A paragraph. `tone` is '' for running text, 'lead', 'note', 'caution' or 'alert'."""

    text: str
    tone: str = ""
    heading: str = ""


@dataclass(frozen=True, slots=True)
class Facts:
    """Labels with what they stand for; `tone` 'strip' sets them side by side, 'plain' below each other."""

    pairs: tuple[tuple[str, str], ...]
    tone: str = "plain"
    label: str = ""


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell; `bar` is a margin to draw beside the text, `tone` 'good', 'bad', 'strong' or ''."""

    text: str
    bar: float | None = None
    tone: str = ""


@dataclass(frozen=True, slots=True)
class Table:
    """A captioned table; the first cell of each row names it. `numbers` are the right-aligned columns."""

    caption: str
    headings: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]
    numbers: frozenset[int] = frozenset()
    marked: frozenset[int] = frozenset()


@dataclass(frozen=True, slots=True)
class Figure:
    """A drawing with its caption, a text alternative that holds the numbers, and its data.

    `draw(key)` gives the drawing as SVG whose identifiers begin with `key`.
    """

    key: str
    title: str
    alternative: str
    draw: Callable[[str], str]
    data: Table | None = None
    least: int = 560


@dataclass(frozen=True, slots=True)
class Formula:
    """One figure worked by hand: its formula, the numbers put in, the value, and where it comes from."""

    name: str
    formula: str
    numbers: tuple[str, ...]
    value: str
    source: str


@dataclass(frozen=True, slots=True)
class Formulas:
    """Worked formulas, one after another."""

    each: tuple[Formula, ...]


@dataclass(frozen=True, slots=True)
class Code:
    """Lines to type at a shell."""

    lines: tuple[str, ...]


Block = Words | Facts | Table | Figure | Formulas | Code


@dataclass(frozen=True, slots=True)
class Part:
    """A headed part of a section."""

    heading: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class Section:
    """A numbered section; `key` names it in links."""

    key: str
    heading: str
    blocks: tuple[Block, ...]
    parts: tuple[Part, ...] = ()


@dataclass(frozen=True, slots=True)
class Page:
    """The whole: its title block, and its sections in order. `about`: a receiver or a board."""

    title: str
    subtitle: str
    facts: tuple[tuple[str, str], ...]
    sections: tuple[Section, ...] = field(default=())
    about: str = "Receiver"


def cells(*texts: str) -> tuple[Cell, ...]:
    """A row of plain cells."""
    return tuple(Cell(text) for text in texts)
