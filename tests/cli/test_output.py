"""A stream that cannot be written: one line, exit status 2; and standard output asked for as a file."""

from __future__ import annotations

import csv
import io
import os
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

FULL = Path("/dev/full")  # Linux: every write fails as on a full disk
MADE_UP = (
    "import sys, optimizer.search\n"
    "from tests.made_up import MISS, outcome\n"
    "optimizer.search.shortlist = lambda *a, **k: outcome(near_misses=(MISS,))\n"
    "from optimizer.cli import main\n"
    "sys.exit(main(sys.argv[1:]))"
)


def run(words: list[str], **streams: int) -> tuple[int, str, str]:
    """Run the command line with the search stood in for: status, standard output, standard error."""
    command = [sys.executable, "-c", MADE_UP, *words]
    pipes = {"stdout": subprocess.PIPE, "stderr": subprocess.PIPE} | streams
    done = subprocess.run(command, check=False, **pipes)  # type: ignore[call-overload]
    return done.returncode, (done.stdout or b"").decode(), (done.stderr or b"").decode()


@pytest.fixture
def full() -> Iterator[int]:
    handle = os.open(FULL, os.O_WRONLY)
    yield handle
    os.close(handle)


@pytest.mark.parametrize("words", [["shortlist", "REQUEST"], ["--help"], ["--version"]])
def test_a_full_disk_is_one_line_and_exit_2(request_file: Path, full: int, words: list[str]) -> None:
    words = [str(request_file) if word == "REQUEST" else word for word in words]
    status, _out, err = run(words, stdout=full)
    assert err == "luxsift: standard output: cannot be written: No space left on device\n"
    assert status == 2


def test_a_record_that_does_not_fit_still_prints_the_table(request_file: Path, full: int) -> None:
    status, _out, err = run(["shortlist", str(request_file), "--save", "-"], stdout=full)
    assert "YZD-21" in err
    assert err.endswith("luxsift: standard output: cannot be written: No space left on device\n")
    assert status == 2


def test_a_standard_error_that_is_full_leaves_the_status(full: int) -> None:
    assert run(["shortlist", "nowhere.toml"], stderr=full) == (2, "", "")


def test_csv_to_standard_output_sends_all_else_to_standard_error(request_file: Path, tmp_path: Path) -> None:
    status, out, err = run(["shortlist", str(request_file), "--csv", "-"])
    assert status == 0
    rows = list(csv.DictReader(io.StringIO(out)))
    assert [(row["meets"], row["photodiode"]) for row in rows] == [("yes", "YZD-21"), ("no", "YZD-30")]
    assert "Caution" in err
    file = tmp_path / "x.csv"
    run(["shortlist", str(request_file), "--csv", str(file)])
    assert file.read_bytes().decode() == out


def test_only_one_file_goes_to_standard_output(request_file: Path) -> None:
    status, out, err = run(["shortlist", str(request_file), "--csv", "-", "--save", "-"])
    assert (status, out) == (2, "")
    assert "--csv: found '-', standard output is taken by --save already" in err
    assert err.count("\n") == 2
