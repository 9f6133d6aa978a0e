"""A record that `shortlist` saved beside its request and catalogs: searched once, written where asked."""

from __future__ import annotations

import json
import tempfile
from functools import cache
from pathlib import Path

from optimizer.cli import main

NAME = "record.json"


def saved_in(folder: Path) -> Path:
    """Write the starter's request and catalogs into `folder`, and their record, whose path comes back."""
    assert main(["start", str(folder)]) == 0
    record = json.loads(_text()) | {"request_file": (folder / "request.toml").as_posix()}
    path = folder / NAME
    path.write_text(json.dumps(record, indent=2), "utf-8")
    return path


@cache
def _text() -> str:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        assert main(["start", str(folder)]) == 0
        words = ["shortlist", str(folder / "request.toml"), "--quiet", "--save", str(folder / NAME)]
        assert main(words) == 0
        return (folder / NAME).read_text("utf-8")
