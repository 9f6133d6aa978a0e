"""luxsift: photodiode, op-amp and passives for optical receivers, chosen by an exact search.

>>> import optimizer as lux
>>> lux.shortlist(lux.read_request("request.toml")).table  # doctest: +SKIP
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.errors import InputError, LuxsiftError, MissingExtraError, OutputError, Problem

if TYPE_CHECKING:
    from optimizer.record import BoardRecord, Record
    from optimizer.request.types import Request

    __version__: str

__all__ = [
    "BoardRecord",
    "InputError",
    "LuxsiftError",
    "MissingExtraError",
    "OutputError",
    "Problem",
    "Record",
    "__version__",
    "plan_board",
    "read_request",
    "shortlist",
]


def read_request(path: str | Path) -> Request:
    """Read a request file (TOML); raises InputError with every problem in it."""
    from optimizer.request import read_request as read

    return read(path)


def shortlist(request: Request | str | Path, *, workers: int = 1) -> Record:
    """Search the catalogs that `request` (or the file at that path) names.

    The record's first candidate is marked as chosen; the result does not depend on `workers`.
    Raises InputError with every problem in the request and its catalogs.
    """
    from optimizer import record, search, study

    if workers < 1:
        rule = "expected a whole number from 1 up"
        raise InputError([Problem("optimizer.shortlist", None, "workers", str(workers), rule)])
    loaded = study.load(request)
    return record.build(loaded, search.shortlist(loaded.request, loaded.catalogs, workers=workers))


def plan_board(path: str | Path) -> BoardRecord:
    """Plan the board that a file (TOML) describes, in the time that it states.

    The record holds the ranked plans, or why there is none. Raises InputError with every problem in the
    board file, its requests and their catalogs.
    """
    from optimizer.planning.plan_board import plan_board as plan
    from optimizer.planning.reading import read_board
    from optimizer.record.board import build

    outline = read_board(path)
    return build(outline, plan(outline))


def __getattr__(name: str) -> object:
    """Load what is heavy or slow only when it is asked for (PEP 562)."""
    if name in {"BoardRecord", "Record"}:
        from optimizer import record

        return getattr(record, name)
    if name == "__version__":
        from optimizer.record.build import installed_version

        return installed_version()
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
