"""The request: a TOML file read into frozen values in SI, or into every problem in its way."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from optimizer.request.types import Request

__all__ = ["read_request"]


def read_request(path: str | Path) -> Request:
    """Read a request file; keys that it leaves out take their defaults.

    Args:
        path: the TOML file, UTF-8.

    Returns:
        The request, in SI (temperatures in C, angles in deg, gains in dB).

    Raises:
        InputError: with every problem of the file: what cannot be read as TOML, unknown, missing and
            impossible keys, each with its line.
    """
    from optimizer.request.draft import read  # the types alone are light to import

    return read(path)
