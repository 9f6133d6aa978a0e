"""The page as one Markdown file: tables and text, drawings in words and by their numbers.

Text that comes from the user is escaped, so that no name becomes a heading, a link, a column or HTML.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from itertools import chain
from typing import Any

from optimizer.report.page.blocks import Block, Code, Facts, Figure, Formulas, Page, Section, Table, Words

_ENTITIES = {"&": "&amp;", "<": "&lt;", ">": "&gt;"}
_SIGNS = re.compile(r"[\\`*\[\]|~$@]|(?<!\w)_|_(?!\w)|:(?=//)|(?<=www)\.", re.IGNORECASE)
_LEADING = re.compile(r"^(\d{1,9}(?=[.)](?: |$))|(?=[-+=#]))")
_TICKS = re.compile(r"`+")


def to_markdown(page: Page) -> str:
    """The page as Markdown (CommonMark with tables), ending in a newline."""
    head = [f"# {escaped(page.title)}", paragraph(page.subtitle), *_pairs(page.facts)]
    sections = (_section(number, section) for number, section in enumerate(page.sections, 1))
    return "\n\n".join(chain(head, *sections)) + "\n"


def escaped(text: str) -> str:
    """`text` so that Markdown shows it as it stands, within a line."""
    plain = "".join(_ENTITIES.get(sign, sign) for sign in text)
    return _SIGNS.sub(lambda sign: f"\\{sign[0]}", plain)


def paragraph(text: str) -> str:
    """`escaped` for text that begins a line, where a number or sign would make it a list or heading."""
    return _LEADING.sub(lambda found: f"{found[0]}\\", escaped(text))


def _section(number: int, section: Section) -> Iterator[str]:
    yield f"## {number}. {escaped(section.heading)}"
    for block in section.blocks:
        yield from _block(block)
    for part in section.parts:
        yield f"### {escaped(part.heading)}"
        for block in part.blocks:
            yield from _block(block)


def _block(block: Block) -> Iterable[str]:
    return _WRITERS[type(block)](block)


def _words(block: Words) -> Iterator[str]:
    heading = f"**{escaped(block.heading)}.** " if block.heading else ""
    yield f"> {heading}{escaped(block.text)}" if heading else paragraph(block.text)


def _facts(block: Facts) -> Iterator[str]:
    yield from _pairs(block.pairs)


def _pairs(pairs: Sequence[tuple[str, str]]) -> Iterator[str]:
    yield _grid(("", ""), [[escaped(text) for text in pair] for pair in pairs], frozenset())


def _table(block: Table) -> Iterator[str]:
    yield f"**{escaped(block.caption)}**"
    rows = [[escaped(cell.text) for cell in row] for row in block.rows]
    for index in block.marked:
        rows[index][0] = f"**{rows[index][0]}**"
    yield _grid(block.headings, rows, block.numbers)


def _grid(headings: Sequence[str], rows: Iterable[Sequence[str]], numbers: frozenset[int]) -> str:
    rule = ["---:" if column in numbers else "---" for column in range(len(headings))]
    lines = [[escaped(text) for text in headings], rule, *rows]
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def _figure(block: Figure) -> Iterator[str]:
    yield f"**{escaped(block.title)}.** {escaped(block.alternative)}"
    if block.data is not None:
        yield from _table(block.data)


def _formulas(block: Formulas) -> Iterator[str]:
    for one in block.each:
        yield f"**{escaped(one.name)}: {escaped(one.value)}**"
        yield _fenced((one.formula, *one.numbers))
        yield f"Source: {escaped(one.source)}"


def _code(block: Code) -> Iterator[str]:
    yield _fenced(block.lines)


def _fenced(lines: Sequence[str]) -> str:
    text = "\n".join(lines)
    longest = max((len(ticks) for ticks in _TICKS.findall(text)), default=0)
    fence = "`" * max(3, longest + 1)
    return f"{fence}text\n{text}\n{fence}"


_WRITERS: Mapping[type, Callable[[Any], Iterable[str]]] = {
    Words: _words,
    Facts: _facts,
    Table: _table,
    Figure: _figure,
    Formulas: _formulas,
    Code: _code,
}
