"""The benchmark of the board plan on small boards: every column is printed, rivals agree on the cost."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.benchmarks import board as benchmark
from tests.benchmarks import plain_boards, planning
from tests.benchmarks.board import Case

TINY = Case(3, 12, 1, 20.0, 1, True, "none")
SEVERAL = Case(2, 10, 3, 20.0, 2, False, "none")


def test_a_line_for_each_board(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(benchmark, "CASES", {"tiny": TINY, "several": SEVERAL})
    benchmark.main(["--seeds", "1,2", "--solver", "cbc"])
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].startswith("solver cbc")
    rows = [line.split() for line in lines[2:] if not line.startswith("  floor")]
    assert [row[:4] for row in rows[:2]] == [["3", "x", "12", "1"], ["3", "x", "12", "2"]]
    for line in lines[2:4]:
        assert "HiGHS" in line
        assert "CBC" in line
        assert " ratio " in line
        assert "DISAGREES" not in line
    assert "6 of 2 kinds x 10" in lines[5]


def test_the_plain_formulation_agrees_with_the_plan() -> None:
    own = benchmark.ours(TINY, 3, "highs").result
    assert own.proven
    for name, other in benchmark.rivals(TINY, 3, 20.0).items():
        assert other.proven, name
        assert other.cost == pytest.approx(own.cost, abs=0.5), name
        assert other.gap == pytest.approx(0.0, abs=1e-5), name


def test_a_rival_that_is_wrong_is_said() -> None:
    own = benchmark.ours(TINY, 3, "cbc")
    assert own.result.cost is not None
    wrong = plain_boards.Result(1.0, own.result.cost + 5, own.result.cost + 5, 1.0)
    line = benchmark.row(TINY, 3, own, {"HiGHS": wrong, "CBC": plain_boards.Result(2.0, 9e9, 1.0)})
    assert line.endswith("HiGHS DISAGREES")
    assert "gap 100.00 %" in line


def test_an_unknown_case_is_refused(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        benchmark.main(["--cases", "9x9"])
    assert "9x9: choose from 8x300" in capsys.readouterr().err


def test_the_planning_benchmark_prints_a_row_for_each_board(tmp_path: Path) -> None:
    outline = planning.drawn(tmp_path, (40, 40), 1, 3.0)
    assert [channel.count for channel in outline.channels] == [3, 2]
    first, every, _, pools, everything, *_ = planning.measured(outline).split()
    assert 0.0 < float(first) <= float(every)
    assert 0.0 <= float(pools) <= float(everything)
