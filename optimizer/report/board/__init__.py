"""The plan of a whole board as a terminal, a page and a CSV file show it.

The modules prepare columns of cells and sentences out of a board's record; `compose` draws them.
"""

from __future__ import annotations

from optimizer.report.board.compose import brief, of_planned, report

__all__ = ["brief", "of_planned", "report"]
