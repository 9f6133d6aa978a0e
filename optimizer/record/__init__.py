"""What a run decided: built, shown as tables, written and read again."""

from __future__ import annotations

from optimizer.record.build import build, choice_problem
from optimizer.record.files import read, write, write_text
from optimizer.record.model import FORMAT, Record

__all__ = ["FORMAT", "Record", "build", "choice_problem", "read", "write", "write_text"]
