"""Damaged input at the command line: never a traceback, never a silent drop, the file is named."""

from __future__ import annotations

import contextlib
import io
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import optimizer.search
from optimizer.cli import main
from optimizer.cli.start import STARTER
from tests.made_up import outcome

CUTS = st.tuples(st.integers(0, 10**6), st.integers(0, 12), st.binary(max_size=12))


@pytest.fixture(scope="module")
def clean(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("clean")
    with contextlib.redirect_stdout(io.StringIO()):
        main(["start", str(folder)])
    return folder


def run(words: list[str]) -> tuple[int, str, str]:
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        status = main(words)
    return status, out.getvalue(), err.getvalue()


def damaged(whole: bytes, cuts: list[tuple[int, int, bytes]]) -> bytes:
    for at, length, new in cuts:
        start = at % (len(whole) + 1)
        whole = whole[:start] + new + whole[start + length :]
    return whole


@pytest.mark.parametrize("file", STARTER)
@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(cuts=st.lists(CUTS, min_size=1, max_size=3))
def test_damaged_files_are_named(clean: Path, file: str, cuts: list[tuple[int, int, bytes]]) -> None:
    path = clean / file
    whole = path.read_bytes()
    path.write_bytes(damaged(whole, cuts))
    try:
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(optimizer.search, "shortlist", lambda *_a, **_k: outcome(), raising=False)
            patch.setattr(optimizer.search, "Interrupted", KeyboardInterrupt, raising=False)
            status, out, err = run(["shortlist", str(clean / "request.toml")])
    finally:
        path.write_bytes(whole)
    assert status in (0, 2)
    assert (status == 2) == ("problem" in err)
    if status == 2:
        assert out == ""
        assert any(name in err for name in STARTER)
