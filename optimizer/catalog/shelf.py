"""Catalogs of several requests, each set of files read once."""

from __future__ import annotations

import os
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from optimizer.catalog.parts import Catalogs
from optimizer.catalog.reader import ReadOptions, read_catalogs

Files = Mapping[str, tuple[str, ...]]


@dataclass(slots=True)
class CatalogShelf:
    """Catalogs that have been read, by their places, what fills their blanks, and their currency."""

    kept: dict[Any, tuple[int, Catalogs]] = field(default_factory=dict)

    def read(self, files: Files, options: ReadOptions) -> Catalogs:
        """The catalogs of `files`. Where rows were left out, that may be for the build quantity's sake."""
        places = tuple(
            (role, name, os.path.realpath(options.folder / name))
            for role, names in files.items()
            for name in names
        )
        key = (places, tuple(sorted(options.assume.items())), options.currency)
        quantity, catalogs = self.kept.get(key, (options.quantity, None))
        if catalogs is None or (catalogs.left_out and quantity != options.quantity):
            catalogs = read_catalogs(files, options)
            self.kept[key] = (options.quantity, catalogs)
        return catalogs
