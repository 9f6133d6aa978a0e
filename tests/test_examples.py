"""Every example prints what its output.txt holds, byte for byte, timing masked.

Of a board that is what does not hang on how long the solver had: what the plan costs, and what it saves.

After a change that is meant to alter what is printed: `python -m tests.test_examples --write`, then
read the difference before committing it.
"""

from __future__ import annotations

import os
import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest

from tests.masking import WIDTH, masked

ROOT = Path(__file__).parents[1]
EXAMPLES = ROOT / "examples"
CASES = sorted(entry.name for entry in EXAMPLES.iterdir() if (entry / "request.toml").is_file())
BOARDS = sorted(entry.name for entry in EXAMPLES.iterdir() if (entry / "board.toml").is_file())
NOTHING_MEETS = "night-turbidity"


def run(case: str) -> subprocess.CompletedProcess[str]:
    """What the command of an example does in the top folder of a checkout."""
    program, *words = shlex.split((EXAMPLES / case / "command.txt").read_text("utf-8"))
    assert program == "luxsift"
    return subprocess.run(
        [sys.executable, "-m", "optimizer", *words],
        cwd=ROOT,
        env={**os.environ, "COLUMNS": str(WIDTH), "PYTHONIOENCODING": "utf-8"},
        capture_output=True,
        encoding="utf-8",
        check=False,
    )


def shown(case: str) -> str:
    """The output of an example as it is kept; decoded without newline translation."""
    return (EXAMPLES / case / "output.txt").read_bytes().decode()


@pytest.mark.parametrize("case", CASES)
def test_prints_what_is_shown(case: str) -> None:
    done = run(case)
    assert done.stderr == ""
    assert masked(done.stdout).splitlines(keepends=True) == shown(case).splitlines(keepends=True)
    assert done.returncode == (1 if case == NOTHING_MEETS else 0)


@pytest.mark.parametrize("case", CASES)
def test_holds_nothing_else_and_fits_80_columns(case: str) -> None:
    files = {file.name for file in (EXAMPLES / case).iterdir()}
    assert files == {"request.toml", "command.txt", "output.txt"}
    assert max(len(line) for line in shown(case).splitlines()) <= WIDTH


@pytest.mark.parametrize("case", BOARDS)
def test_a_board_costs_and_saves_what_is_shown(case: str) -> None:
    done = run(case)
    assert done.stderr == ""
    assert lasting(done.stdout) == lasting(shown(case))
    assert "saves" in lasting(shown(case))[-1]
    assert done.returncode == 0


@pytest.mark.parametrize("case", BOARDS)
def test_a_board_holds_nothing_else_and_fits_80_columns(case: str) -> None:
    assert {file.name for file in (EXAMPLES / case).iterdir()} == {"board.toml", "command.txt", "output.txt"}
    assert max(len(line) for line in shown(case).splitlines()) <= WIDTH


def lasting(text: str) -> list[str]:
    """Of what a board prints: its name, its boards with their cost, and what it saves."""
    head = text.splitlines()[:2]
    saves = next(part for part in text.split("\n\n") if part.startswith("With each channel"))
    return [*head, " ".join(saves.split())]


def test_cases_are_of_different_character() -> None:
    requests = [(EXAMPLES / case / "request.toml").read_text("utf-8") for case in CASES]
    rankings = {re.search(r'^by = "(\w+)"', text, re.MULTILINE)[1] for text in requests}  # type: ignore[index]
    assert rankings == {"cost", "margin", "snr"}
    assert NOTHING_MEETS in CASES


def test_masking_hides_the_two_numbers_and_nothing_else() -> None:
    def report(seconds: str, evaluated: str, pairs: str = "17,052") -> str:
        return (
            f"head in 3 s\n\nCovered 9.4 million combinations of {pairs} pairs in {seconds} s, {evaluated}\n"
            "of them evaluated, the others excluded. The ranking is proven.\n\nTail, in 3 s\n"
        )

    one = masked(report("0.289", "3,502"))
    assert one == masked(report("1.46e+03", "1,234,567"))
    assert one != masked(report("0.289", "3,502", pairs="17,051"))
    assert "head in 3 s\n\nCovered" in one
    assert one.endswith("\n\nTail, in 3 s\n")


def write() -> None:
    """Write every output.txt anew; stops at an example that fails."""
    for case in (*CASES, *BOARDS):
        done = run(case)
        if done.returncode not in (0, 1) or done.stderr:
            sys.exit(f"{case}: exit {done.returncode}\n{done.stderr}")
        (EXAMPLES / case / "output.txt").write_bytes(masked(done.stdout).encode())


if __name__ == "__main__":
    if sys.argv[1:] != ["--write"]:
        sys.exit("usage: python -m tests.test_examples --write")
    write()
