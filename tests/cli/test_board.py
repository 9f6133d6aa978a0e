"""`luxsift board`: exit statuses, streams, files, messages; the planning itself is stood in for."""

from __future__ import annotations

import csv
import json
import os
import sys
from collections.abc import Callable
from dataclasses import replace
from io import StringIO
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest

from optimizer.cli import main
from optimizer.cli.options import board as options
from optimizer.errors import LuxsiftError
from optimizer.planning.outline import SOLVERS, Limits, Outline
from optimizer.planning.plan import INTERRUPTED, WITHIN, Planned, Stage
from optimizer.record import read_board
from tests.planning.made_plan import hopeless, nothing_found, planned, refused

Captured = pytest.CaptureFixture[str]
Answer = Callable[[Planned | BaseException], list[Outline]]


@pytest.fixture
def answer(monkeypatch: pytest.MonkeyPatch) -> Answer:
    """Lets planning give (or raise) what a test says; returns the list of the boards it was given."""

    def install(result: Planned | BaseException) -> list[Outline]:
        calls: list[Outline] = []

        def plan_board(outline: Outline, progress: Any = None) -> Planned:
            calls.append(outline)
            for stage in (Stage("looking", None, None, 0.1), Stage("solving", 140_000, 135_000, 0.2)):
                progress(stage)
            if isinstance(result, BaseException):
                raise result
            return result

        stand_in = SimpleNamespace(plan_board=plan_board)
        monkeypatch.setitem(sys.modules, "optimizer.planning.plan_board", stand_in)
        return calls

    return install


# Exit statuses


def test_a_plan_that_meets_everything(board_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(planned())
    assert main(["board", str(board_file)]) == 0
    out, err = capsys.readouterr()
    assert "sorting line, optical board" in out
    assert planned().plans[0].builds[0].opamp in out
    assert max(len(line) for line in out.splitlines()) <= 80
    assert err == ""


def test_a_plan_within_the_time_meets_everything_too(
    board_file: Path, answer: Answer, capsys: Captured
) -> None:
    answer(planned(status=WITHIN))
    assert main(["board", str(board_file)]) == 0
    assert "NOT PROVEN" in capsys.readouterr().out


def test_a_plan_that_misses_a_limit_is_no_success(board_file: Path, answer: Answer) -> None:
    first = planned().plans[0]
    for total in (replace(first.total("area"), value=None), replace(first.total("area"), value=600e-6)):
        totals = tuple(total if one.name == "area" else one for one in first.totals)
        answer(planned(plans=(replace(first, totals=totals),)))
        assert main(["board", str(board_file)]) == 1


@pytest.mark.parametrize("result", [refused(), nothing_found()], ids=["infeasible", "none found"])
def test_no_plan(board_file: Path, answer: Answer, capsys: Captured, result: Planned) -> None:
    answer(result)
    assert main(["board", str(board_file)]) == 1
    out, err = capsys.readouterr()
    assert "No plan" in out
    assert err == ""


def test_a_channel_that_nothing_meets(board_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(refused(replace(refused().refusal, hopeless=(hopeless(),), limits=(), channels=())))
    assert main(["board", str(board_file)]) == 1
    assert "ambient" in capsys.readouterr().out


def test_an_interrupted_plan_is_shown_and_saved(
    board_file: Path, answer: Answer, capsys: Captured, tmp_path: Path
) -> None:
    answer(planned(status=INTERRUPTED, plans=planned().plans[:1]))
    save, bill = tmp_path / "r.json", tmp_path / "bill.csv"
    assert main(["board", str(board_file), "--save", str(save), "--csv", str(bill)]) == 130
    assert "NOT PROVEN: interrupted" in capsys.readouterr().out
    assert read_board(save).data["search"]["status"] == INTERRUPTED
    assert bill.exists()


def test_interrupted_without_a_plan(
    board_file: Path, answer: Answer, capsys: Captured, tmp_path: Path
) -> None:
    answer(nothing_found(status=INTERRUPTED))
    save = tmp_path / "r.json"
    assert main(["board", str(board_file), "--save", str(save)]) == 130
    assert "interrupted" in capsys.readouterr().out
    assert not save.exists()


def test_interrupted_before_anything(board_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(KeyboardInterrupt())
    assert main(["board", str(board_file)]) == 130
    assert "interrupted; nothing was decided or written" in capsys.readouterr().err


def test_interrupted_while_the_answer_is_written(
    board_file: Path, answer: Answer, capsys: Captured, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    def stop(*_args: object) -> None:
        raise KeyboardInterrupt

    answer(planned())
    monkeypatch.setattr(os, "fsync", stop)
    assert main(["board", str(board_file), "--save", str(tmp_path / "r.json")]) == 130
    assert "interrupted after planning, while the answer was being written" in capsys.readouterr().err
    assert not (tmp_path / "r.json").exists()


def test_what_planning_raises_on_purpose_exits_2(board_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(LuxsiftError("the solver is absent"))
    assert main(["board", str(board_file)]) == 2
    out, err = capsys.readouterr()
    assert (out, err) == ("", "luxsift: the solver is absent\n")


# Bad input


@pytest.mark.parametrize(
    ("words", "said"),
    [
        ("--plans=0", "--plans: found '0', expected a whole number from 1"),
        ("--plans=1.5", "--plans"),
        ("--time=0", "--time: found '0', expected more than 0 s"),
        ("--time=nan", "--time"),
        ("--time=5 min", "write '300 s'"),
        ("--solver=higs", "did you mean 'highs'?"),
        ("--solver=glue", "expected one of auto, cbc, highs"),
        ("--save=nowhere/x.json", "there is no folder"),
        ("--csv=nowhere/x.csv", "there is no folder"),
        ("--shw=3", "there is no such argument"),
    ],
)
def test_bad_options_exit_2_before_any_work(
    board_file: Path, answer: Answer, capsys: Captured, words: str, said: str
) -> None:
    calls = answer(planned())
    assert main(["board", str(board_file), words]) == 2
    out, err = capsys.readouterr()
    assert said in err
    assert (out, calls) == ("", [])


def test_problems_of_options_board_and_request_come_all_at_once(
    board_file: Path, answer: Answer, capsys: Captured
) -> None:
    calls = answer(planned())
    board_file.write_text(board_file.read_text() + 'cont = 3\nrequst = "x"\n')
    request = board_file.with_name("gate.toml")
    request.write_text(request.read_text().replace("bandwidth =", "bandwith ="))
    assert main(["board", str(board_file), "--plans", "0", "--save", "nowhere/x.json"]) == 2
    err = capsys.readouterr().err
    for word in ("5 problems", "--plans", "did you mean 'count'?", "requst", "bandwith", "nowhere/x.json"):
        assert word in err
    assert "Traceback" not in err
    assert calls == []


@pytest.mark.parametrize("name", ["nowhere.toml", "request.toml", "opamps.csv", "."])
def test_what_is_no_board_file_exits_2(board_file: Path, answer: Answer, capsys: Captured, name: str) -> None:
    answer(planned())
    assert main(["board", str(board_file.with_name(name) if name != "." else board_file.parent)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("luxsift: 1 problem")


@pytest.mark.parametrize("option", ["--save", "--csv"])
@pytest.mark.parametrize("file", ["board.toml", "colour.toml", "opamps.csv"])
def test_no_output_takes_the_place_of_an_input(
    board_file: Path, answer: Answer, capsys: Captured, option: str, file: str
) -> None:
    answer(planned())
    before = board_file.with_name(file).read_bytes()
    assert main(["board", str(board_file), option, str(board_file.with_name(file))]) == 2
    assert "input of this run" in capsys.readouterr().err
    assert board_file.with_name(file).read_bytes() == before


def test_a_message_names_the_line(board_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(planned())
    board_file.write_text(board_file.read_text().replace("count = 2", "count = 0"))
    assert main(["board", str(board_file)]) == 2
    line = board_file.read_text().splitlines().index("count = 0") + 1
    assert f"{board_file}, line {line}, channels.count: found '0', expected at least 1" in (
        capsys.readouterr().err
    )


# Options in force, files, streams


def test_options_override_the_board_file(board_file: Path, answer: Answer, tmp_path: Path) -> None:
    calls = answer(planned())
    save = tmp_path / "r.json"
    words = ["--plans", "3", "--time", "2.5 s", "--solver", "cbc", "--save", str(save)]
    assert main(["board", str(board_file), *words]) == 0
    (outline,) = calls
    assert (outline.solve.plans, outline.solve.time, outline.solve.solver) == (3, 2.5, "cbc")
    assert outline.limits == Limits(cost=9.0, supply_current=2.2e-3, area=500e-6, line_items=14)
    assert read_board(save).data["board"]["solve"] == {"plans": 3, "time": 2.5, "solver": "cbc"}


def test_without_options_the_board_file_stands(board_file: Path, answer: Answer) -> None:
    board_file.write_text(board_file.read_text() + '[solve]\nplans = 2\ntime = 7\nsolver = "highs"\n')
    (calls,) = (answer(planned()),)
    assert main(["board", str(board_file), "--quiet"]) == 0
    assert (calls[0].solve.plans, calls[0].solve.time, calls[0].solve.solver) == (2, 7.0, "highs")


def test_the_bill_of_materials_is_written(board_file: Path, answer: Answer, tmp_path: Path) -> None:
    answer(planned())
    bill = tmp_path / "bill.csv"
    assert main(["board", str(board_file), "--csv", str(bill)]) == 0
    rows = list(csv.DictReader(StringIO(bill.read_text("utf-8"))))
    expected = planned().plans[0].bill
    assert [row["part"] for row in rows] == [line.part for line in expected]
    assert [int(row["buy"]) for row in rows] == [line.buy for line in expected]


def test_the_bill_of_no_plan_has_headings_alone(board_file: Path, answer: Answer, tmp_path: Path) -> None:
    answer(refused())
    bill = tmp_path / "bill.csv"
    assert main(["board", str(board_file), "--csv", str(bill)]) == 1
    assert list(csv.DictReader(StringIO(bill.read_text("utf-8")))) == []
    assert '"part"' in bill.read_text("utf-8")


def test_a_refusal_is_saved_with_its_causes(board_file: Path, answer: Answer, tmp_path: Path) -> None:
    answer(refused())
    save = tmp_path / "r.json"
    assert main(["board", str(board_file), "--save", str(save)]) == 1
    data = read_board(save).data
    assert data["refusal"]["limits"] == ["cost", "line_items"]
    assert data["plans"] == []


@pytest.mark.parametrize("option", ["--save", "--csv"])
def test_a_file_to_standard_output_sends_all_else_to_standard_error(
    board_file: Path, answer: Answer, capsys: Captured, option: str
) -> None:
    answer(planned())
    assert main(["board", str(board_file), option, "-"]) == 0
    out, err = capsys.readouterr()
    if option == "--save":
        assert json.loads(out)["format"] == "luxsift-board/1"
    else:
        assert len(list(csv.DictReader(StringIO(out)))) == len(planned().plans[0].bill)
    assert "sorting line, optical board" in err


def test_both_files_to_standard_output_are_refused(
    board_file: Path, answer: Answer, capsys: Captured
) -> None:
    answer(planned())
    assert main(["board", str(board_file), "--save", "-", "--csv", "-"]) == 2
    assert "standard output is taken by --save already" in capsys.readouterr().err


def test_a_save_that_fails_still_prints_the_plan(
    board_file: Path, answer: Answer, capsys: Captured, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(*_args: object) -> None:
        raise OSError(28, "No space left on device")

    answer(planned())
    monkeypatch.setattr(os, "replace", fail)
    assert main(["board", str(board_file), "--save", str(tmp_path / "r.json")]) == 2
    out, err = capsys.readouterr()
    assert "sorting line, optical board" in out
    assert "r.json: cannot be written: No space left on device" in err


def test_quiet_prints_the_plan_alone(board_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(planned())
    assert main(["board", str(board_file)]) == 0
    whole = capsys.readouterr().out
    assert main(["board", str(board_file), "--quiet"]) == 0
    out, err = capsys.readouterr()
    assert planned().plans[0].builds[0].opamp in out
    assert "Caution" in whole
    assert "Caution" not in out
    assert len(out) < len(whole)
    assert err == ""


def test_rows_left_out_are_listed_once(board_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(planned())
    opamps = board_file.with_name("opamps.csv")
    source = board_file.with_name("source.toml")
    source.write_text('currency = "EUR"\n[file."opamps.csv"]\nbad_rows = "leave out"\n')
    opamps.write_text(opamps.read_text().replace("350 kHz", "fast", 1))
    assert main(["board", str(board_file)]) == 0
    err = capsys.readouterr().err
    assert err.startswith("luxsift: left out of the catalogs as source.toml says: 1 row\n")
    assert f"{opamps}, line 2" in err


def test_the_solvers_offered_are_those_of_a_board_file() -> None:
    assert options.SOLVERS == SOLVERS
