"""The record as a terminal shows it; draws, computes no physics."""

from __future__ import annotations

from optimizer.report.compose import report, table_only
from optimizer.report.terminal import to_text

__all__ = ["report", "table_only", "to_text"]
