"""luxsift: photodiode, op-amp and passives for optical receivers, chosen by an exact search.

>>> import optimizer as lux
>>> lux.shortlist(lux.read_request("request.toml")).table  # doctest: +SKIP
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.errors import InputError, LuxsiftError, MissingExtraError, OutputError, Problem

if TYPE_CHECKING:
    from optimizer.record import Record
    from optimizer.request.types import Request

    __version__: str

__all__ = [
    "InputError",
    "LuxsiftError",
    "MissingExtraError",
    "OutputError",
    "Problem",
    "Record",
    "__version__",
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


def __getattr__(name: str) -> object:
    """Load what is heavy or slow only when it is asked for (PEP 562)."""
    if name == "Record":
        from optimizer.record import Record

        return Record
    if name == "__version__":
        from optimizer.record.build import installed_version

        return installed_version()
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
