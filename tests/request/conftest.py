from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.errors import InputError, Problem
from optimizer.request import read_request
from optimizer.request.types import Request
from tests.request.made import Fails, Reads


@pytest.fixture
def read(tmp_path: Path) -> Reads:
    def run(text: str | bytes) -> Request:
        path = tmp_path / "bench.toml"
        path.write_bytes(text.encode() if isinstance(text, str) else text)
        return read_request(path)

    return run


@pytest.fixture
def fail(read: Reads) -> Fails:
    def run(text: str | bytes) -> tuple[Problem, ...]:
        with pytest.raises(InputError) as caught:
            read(text)
        return caught.value.problems

    return run
