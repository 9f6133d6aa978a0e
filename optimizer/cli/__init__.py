"""The command line: arguments, progress, messages, exit statuses."""

from __future__ import annotations

from optimizer.cli.entry import main

__all__ = ["main"]
