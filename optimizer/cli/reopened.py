"""A saved record opened for a command, its problems said as seen from its request's folder or from here."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.messages import StudyError
from optimizer.cli.outputs import input_files

if TYPE_CHECKING:
    from optimizer.review.board import ReopenedBoard
    from optimizer.review.reopen import Reopened


def reopened(record: str, request: str | None) -> Reopened:
    """The record at that path with its study as it is now; raises InputError, StudyError."""
    from optimizer.review.reopen import ReopenError, reopen

    try:
        return reopen(record, request)
    except ReopenError as error:
        raise StudyError(error.problems, str(error.request)) from None


def reopened_board(record: str, board: str | None) -> ReopenedBoard:
    """The board's record at that path with its files as they are now; raises InputError."""
    from optimizer import record as records
    from optimizer.review.board import reopen_board

    return reopen_board(records.read_board(record), record, board)


def board_files(opened: ReopenedBoard) -> list[Path]:
    """Every file that a board is read from: its own, its requests, their catalogs."""
    requests = [channel.study.request for channel in opened.outline.channels]
    files = [opened.outline.path, *(request.path for request in requests)]
    return files + [file for request in requests for file in input_files(request)]
