"""A saved record opened for a command, its problems said as seen from its request's folder."""

from __future__ import annotations

from typing import TYPE_CHECKING

from optimizer.cli.messages import StudyError

if TYPE_CHECKING:
    from optimizer.review.reopen import Reopened


def reopened(record: str, request: str | None) -> Reopened:
    """The record at that path with its study as it is now; raises InputError, StudyError."""
    from optimizer.review.reopen import ReopenError, reopen

    try:
        return reopen(record, request)
    except ReopenError as error:
        raise StudyError(error.problems, str(error.request)) from None
