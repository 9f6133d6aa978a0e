"""The command line before a real terminal (a pseudo-terminal of the system), and before none."""

from __future__ import annotations

import os
import pty
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from tests.benchmarks.synthetic import write_catalogs, write_request

DRIVER = """
import sys, time
import optimizer.search
from optimizer.search.result import Progress
from tests.made_up import outcome

def search(request, catalogs, *, workers=1, progress=None):
    for decided in (100, 200):
        progress(Progress(60_000, decided, 12, "3.21 EUR"))
        time.sleep(0.15)
    return outcome()

optimizer.search.shortlist = search
optimizer.search.Interrupted = KeyboardInterrupt
from optimizer.cli import main
sys.exit(main(sys.argv[1:]))
"""


def seen(words: list[str], *, terminals: set[str], driver: str = DRIVER, **changes: str) -> tuple[str, str]:
    """What a run writes to standard output and error, each a terminal or a pipe."""
    kept = {
        key: value for key, value in os.environ.items() if key not in ("NO_COLOR", "COLUMNS", "FORCE_COLOR")
    }
    ends = {name: pty.openpty() if name in terminals else os.pipe() for name in ("out", "err")}
    done = subprocess.Popen(
        [sys.executable, "-c", driver, *words],
        stdout=ends["out"][1],
        stderr=ends["err"][1],
        env={**kept, "TERM": "xterm", **changes},
    )
    for _reader, writer in ends.values():
        os.close(writer)
    texts = {name: drained(reader) for name, (reader, _writer) in ends.items()}
    assert done.wait() == 0
    return texts["out"], texts["err"]


def drained(reader: int) -> str:
    parts = []
    while True:
        try:
            part = os.read(reader, 65536)
        except OSError:  # how Linux says that a terminal's other end has closed
            part = b""
        if not part:
            os.close(reader)
            return b"".join(parts).decode().replace("\r\n", "\n")
        parts.append(part)


def test_a_terminal_gets_progress_and_colour(request_file: Path) -> None:
    out, err = seen(["shortlist", str(request_file)], terminals={"out", "err"})
    assert "\x1b[1m" in out
    assert "200 of 60,000 pairs decided" in err
    assert "best so far: 3.21 EUR" in err


def test_pipes_get_plain_text_and_silence(request_file: Path) -> None:
    out, err = seen(["shortlist", str(request_file)], terminals=set(), FORCE_COLOR="1")
    assert "YZD-21" in out
    assert "\x1b" not in out
    assert err == ""


def test_no_color_is_respected(request_file: Path) -> None:
    out, _err = seen(["shortlist", str(request_file)], terminals={"out", "err"}, NO_COLOR="1")
    assert "YZD-21" in out
    assert "\x1b" not in out


@pytest.mark.parametrize("how", ["--quiet", "TERM"])
def test_no_progress_where_it_is_not_wanted(request_file: Path, how: str) -> None:
    words = ["shortlist", str(request_file)] + (["--quiet"] if how == "--quiet" else [])
    out, err = seen(words, terminals={"out", "err"}, TERM="dumb" if how == "TERM" else "xterm")
    assert "YZD-21" in out
    assert err == ""


@pytest.mark.parametrize("columns", [80, 120])
def test_columns_sets_the_width(request_file: Path, columns: int) -> None:
    out, _err = seen(["shortlist", str(request_file)], terminals=set(), COLUMNS=str(columns))
    widest = max(len(line) for line in out.split("\n"))
    assert columns - 15 < widest <= columns


@pytest.fixture(scope="module")
def long_request(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A request over ten million pairs, which no machine decides while a test waits for a first sign."""
    folder = tmp_path_factory.mktemp("long")
    write_catalogs(folder, opamps=4000, photodiodes=2500, seed=1)
    return write_request(folder, "dual-by-snr")


def wait_for_progress(_process: subprocess.Popen[bytes], reader: int) -> bytes:
    said = b""
    while b"pairs decided" not in said:
        said += os.read(reader, 65536)
    return said


def wait_for_workers(process: subprocess.Popen[bytes], _reader: int) -> bytes:
    """Several processes report when the first of them is done: too late for a test."""
    children = Path(f"/proc/{process.pid}/task/{process.pid}/children")
    if not children.exists():
        pytest.skip("the system does not tell which processes another one started")
    while process.poll() is None and len(children.read_text().split()) < 2:
        time.sleep(0.05)
    time.sleep(0.5)  # both have begun
    return b""


@pytest.mark.parametrize(
    ("workers", "wait", "proved"),
    [("1", wait_for_progress, b"Proved so far"), ("2", wait_for_workers, b"Nothing is proven yet")],
    ids=["alone", "two workers"],
)
def test_ctrl_c_ends_a_real_search_and_says_what_was_proved(
    long_request: Path,
    workers: str,
    wait: Callable[[subprocess.Popen[bytes], int], bytes],
    proved: bytes,
    tmp_path: Path,
) -> None:
    save = tmp_path / "record.json"
    reader, writer = pty.openpty()
    words = ["shortlist", str(long_request), "--workers", workers, "--save", str(save)]
    with subprocess.Popen(
        [sys.executable, "-m", "optimizer", *words],
        stdout=subprocess.DEVNULL,
        stderr=writer,
        start_new_session=True,
    ) as process:
        os.close(writer)
        said = wait(process, reader)
        os.killpg(process.pid, signal.SIGINT)  # as a terminal does: to every process of the command
        said += drained(reader).encode()
    assert process.returncode == 130
    assert b"interrupted after" in said
    assert proved in said
    assert b"Traceback" not in said
    assert not save.exists()
