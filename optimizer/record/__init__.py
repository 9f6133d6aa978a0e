"""What a run decided: built, shown as tables, written and read again."""

from __future__ import annotations

from optimizer.record.build import build, choice_problem
from optimizer.record.files import read, read_any, read_board, says_board, write, write_text
from optimizer.record.model import BOARD_FORMAT, FORMAT, BoardRecord, Record

__all__ = [
    "BOARD_FORMAT",
    "FORMAT",
    "BoardRecord",
    "Record",
    "build",
    "choice_problem",
    "read",
    "read_any",
    "read_board",
    "says_board",
    "write",
    "write_text",
]
