"""The page about a board's plan that a design review works from."""

from __future__ import annotations

from optimizer.report.page.board.compose import compose_board

__all__ = ["compose_board"]
