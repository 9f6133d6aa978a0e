"""How far planning a board is: its words, and who sees them."""

from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.cli.board_progress import words
from optimizer.planning.plan import Stage
from tests.cli.test_terminal import seen

DRIVER = """
import sys, time
from types import SimpleNamespace
from optimizer.planning.plan import Stage
from tests.planning.made_plan import refused

def plan_board(outline, progress=None):
    for stage in (Stage("looking", None, None, 0.1), Stage("solving", 150_000, 120_000, 0.2)):
        progress(stage)
        time.sleep(0.15)
    return refused()

sys.modules["optimizer.planning.plan_board"] = SimpleNamespace(plan_board=plan_board)
from optimizer.cli import main
sys.exit(main(sys.argv[1:]) - 1)
"""


def test_a_terminal_sees_how_far_planning_is(board_file: Path) -> None:
    _out, err = seen(["board", str(board_file)], terminals={"out", "err"}, driver=DRIVER, COLUMNS="100")
    assert "looking; no plan yet" in err
    assert "solving; best 10.00, bound 8.00, gap 20 %" in err


@pytest.mark.parametrize("how", ["--quiet", "TERM", "pipe"])
def test_no_progress_where_it_is_not_wanted(board_file: Path, how: str) -> None:
    words = ["board", str(board_file)] + (["--quiet"] if how == "--quiet" else [])
    shown = set() if how == "pipe" else {"out", "err"}
    term = "dumb" if how == "TERM" else "xterm"
    _out, err = seen(words, terminals=shown, driver=DRIVER, TERM=term)
    assert err == ""


@pytest.mark.parametrize(
    ("cost", "bound", "said"),
    [
        (None, None, "solving; no plan yet"),
        (None, 120_000, "solving; no plan yet, bound 8.00"),
        (150_000, None, "solving; best 10.00, no bound yet"),
        (150_000, 120_000, "solving; best 10.00, bound 8.00, gap 20 %"),
        (150_000, 149_999, "solving; best 10.00, bound 10.00, gap under 0.01 %"),
        (150_000, 150_000, "solving; best 10.00, bound 10.00, gap 0 %"),
        (150_000, 0, "solving; best 10.00, no bound yet"),
    ],
)
def test_a_stage_in_words(cost: int | None, bound: int | None, said: str) -> None:
    assert words(Stage("solving", cost, bound, 1.0), 150) == said
