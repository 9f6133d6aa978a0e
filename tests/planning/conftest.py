from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.errors import InputError, Problem
from optimizer.planning.outline import Outline
from optimizer.planning.reading import read_board
from tests.planning.written import Fails, Reads, write_inputs


@pytest.fixture
def read(tmp_path: Path) -> Reads:
    """Reads a board file of some text beside the requests and catalogs of `write_inputs`."""
    write_inputs(tmp_path)

    def run(text: str | bytes) -> Outline:
        path = tmp_path / "board.toml"
        path.write_bytes(text.encode() if isinstance(text, str) else text)
        return read_board(path)

    return run


@pytest.fixture
def fail(read: Reads) -> Fails:
    def run(text: str | bytes) -> tuple[Problem, ...]:
        with pytest.raises(InputError) as caught:
            read(text)
        return caught.value.problems

    return run
