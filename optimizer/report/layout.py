"""Columns of text on a terminal: aligned by display width, folded rather than cut."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from rich.cells import cell_len, chop_cells

from optimizer.report.paragraphs import UNBROKEN

GAP = 2
WORDS = re.compile(r"(?<= )(?=[^ ])")
JOINTS = re.compile(r"(?<=\w[-_])(?=\w)")


@dataclass(frozen=True, slots=True)
class Column:
    """A heading over cells; a line break in either starts a new line. `gives` columns may be folded;
    those of running text are laid out for lines of `least` columns, and take more where there is room.
    """

    heading: str
    cells: tuple[str, ...]
    right: bool = False
    gives: bool = False
    least: int | None = None

    @property
    def width(self) -> int:
        """The display width that holds every line unfolded."""
        return max(cell_len(line) for cell in (self.heading, *self.cells) for line in cell.split("\n"))

    @property
    def needed(self) -> int:
        """The display width that the column is to be given at least."""
        return self.width if self.least is None else min(self.width, max(self.least, cell_len(self.heading)))


def total(columns: Sequence[Column]) -> int:
    """The display width that the columns need side by side."""
    return sum(column.needed for column in columns) + GAP * (len(columns) - 1)


def fit(columns: Sequence[Column], width: int, least: int = 8) -> list[int]:
    """Widths that sum to `width` where they can: running text shrinks first, to what it needs, then the
    widest `gives` columns, to `least` or their heading.
    """
    widths = [column.width for column in columns]
    folds = [max(least, *(cell_len(line) for line in column.heading.split("\n"))) for column in columns]
    room = width - GAP * (len(columns) - 1)
    while sum(widths) > room:
        able = [i for i, column in enumerate(columns) if widths[i] > column.needed]
        able = able or [i for i, column in enumerate(columns) if column.gives and widths[i] > folds[i]]
        if not able:
            break
        widths[max(able, key=lambda i: widths[i])] -= 1
    return widths


def lines(columns: Sequence[Column], widths: Sequence[int], row: int) -> Iterator[str]:
    """The lines of one row, `row` -1 being the headings (set at the bottom)."""
    texts = [column.heading if row < 0 else column.cells[row] for column in columns]
    stacks = [_folded(text, width) for text, width in zip(texts, widths, strict=True)]
    height = max(len(stack) for stack in stacks)
    for level in range(height):
        cells = []
        for column, width, stack in zip(columns, widths, stacks, strict=True):
            at = level - (height - len(stack)) if row < 0 else level
            cells.append(_padded(stack[at] if 0 <= at < len(stack) else "", width, column.right))
        yield (" " * GAP).join(cells).rstrip()


def _folded(text: str, width: int) -> list[str]:
    """`text` in lines no wider than `width`: parted at spaces; inside a word that is wider at its hyphens
    and underscores, at need anywhere.
    """
    whole = (piece for line in text.split("\n") for piece in _wrapped(line, width))
    return [line.replace(UNBROKEN, " ") for line in whole]


def _wrapped(line: str, width: int) -> list[str]:
    if cell_len(line) <= width:
        return [line]
    wrapped = [""]
    for piece in _pieces(line, width):
        if cell_len((wrapped[-1] + piece).rstrip()) <= width:
            wrapped[-1] += piece
            continue
        word = piece.rstrip()
        *full, last = chop_cells(word, width) or [""]
        wrapped += [*full, last + piece[len(word) :]]
    return [part.rstrip() for part in wrapped if part.strip()] or [""]


def _pieces(line: str, width: int) -> Iterator[str]:
    """The words with the space behind each, those wider than a line in parts."""
    for word in WORDS.split(line):
        yield from [word] if cell_len(word.rstrip()) <= width else JOINTS.split(word)


def _padded(text: str, width: int, right: bool) -> str:
    space = " " * max(0, width - cell_len(text))
    return space + text if right else text + space
