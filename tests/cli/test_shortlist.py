"""The command line: exit statuses, streams, messages; the search itself is stood in for."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

import optimizer as lux
import optimizer.search
from optimizer.cli import main
from optimizer.errors import LuxsiftError
from optimizer.record import Record, read
from optimizer.search.result import Outcome, Progress
from tests.made_up import CANDIDATE, MISS, outcome

Captured = pytest.CaptureFixture[str]


class Interrupted(LuxsiftError):
    """What the search raises on Ctrl-C."""

    def __init__(self, result: Outcome) -> None:
        super().__init__("interrupted")
        self.outcome = result


@pytest.fixture
def answer(monkeypatch: pytest.MonkeyPatch) -> Callable[[Outcome | Exception], list[dict[str, Any]]]:
    """Lets the search give (or raise) what a test says; returns the list of its calls."""

    def install(result: Outcome | Exception) -> list[dict[str, Any]]:
        calls: list[dict[str, Any]] = []

        def search(request: Any, catalogs: Any, *, workers: int = 1, progress: Any = None) -> Outcome:
            calls.append({"request": request, "workers": workers, "progress": progress})
            if progress is not None:
                progress(Progress(40, 30, 12, None))
            if isinstance(result, Exception):
                raise result
            return result

        monkeypatch.setattr(optimizer.search, "shortlist", search, raising=False)
        monkeypatch.setattr(optimizer.search, "Interrupted", Interrupted, raising=False)
        return calls

    return install


Answer = Callable[[Outcome | Exception], list[dict[str, Any]]]


# Exit statuses


def test_something_meets(request_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(outcome())
    assert main(["shortlist", str(request_file)]) == 0
    out, err = capsys.readouterr()
    assert "YZD-21" in out
    assert "The ranking is" in out
    assert err == ""


def test_nothing_meets(request_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(outcome((), (MISS,), blocking=("snr",)))
    assert main(["shortlist", str(request_file)]) == 1
    assert "Nothing meets the request." in capsys.readouterr().out


def test_nothing_could_meet(request_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(outcome((), (), impossible=("snr: the shot noise alone",)))
    assert main(["shortlist", str(request_file), "--quiet"]) == 1
    assert "snr: the shot noise alone" in capsys.readouterr().out


def test_interrupted_search_says_what_was_proved(
    request_file: Path, answer: Answer, capsys: Captured, tmp_path: Path
) -> None:
    answer(Interrupted(outcome(proven=False)))
    save = tmp_path / "r.json"
    assert main(["shortlist", str(request_file), "--save", str(save)]) == 130
    out, err = capsys.readouterr()
    assert out == ""
    assert "Proved so far: 30 of the 40 pairs whose parts are eligible are decided" in " ".join(err.split())
    assert "NOT proven" in err
    assert "YZD-21" in err
    assert not save.exists()


def test_interrupted_before_the_search(request_file: Path, answer: Answer, capsys: Captured) -> None:
    def stop(*_args: object) -> None:
        raise KeyboardInterrupt

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("optimizer.study.load", stop)
        assert main(["shortlist", str(request_file)]) == 130
    assert "interrupted; nothing was decided or written" in capsys.readouterr().err


def test_interrupted_after_the_search(
    request_file: Path, answer: Answer, capsys: Captured, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    def stop(*_args: object) -> None:
        raise KeyboardInterrupt

    answer(outcome())
    monkeypatch.setattr(os, "fsync", stop)
    assert main(["shortlist", str(request_file), "--save", str(tmp_path / "r.json")]) == 130
    err = capsys.readouterr().err
    assert "interrupted after the search, while its answer was being written" in err
    assert "nothing was decided" not in err
    assert not (tmp_path / "r.json").exists()


def test_interrupted_workers_are_told_of(request_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(Interrupted(outcome((), (), proven=False)))
    assert main(["shortlist", str(request_file), "--workers", "2"]) == 130
    assert "what the workers had found by then is lost" in " ".join(capsys.readouterr().err.split())


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["shortlst"], "did you mean 'shortlist'?"),
        (["shortlist"], "the following arguments are required: REQUEST"),
        (["shortlist", "REQUEST", "--sho", "3"], "found '--sho', there is no such argument (did you mean"),
        (["--nope"], "found '--nope', there is no such argument"),
        (["inspect"], "the following arguments are required: CATALOG"),
        (["inspect", "nowhere.csv"], "nowhere.csv"),
        (["shortlist", "nowhere.toml"], "nowhere.toml"),
    ],
)
def test_a_bad_command_line_exits_2(words: list[str], said: str, capsys: Captured) -> None:
    assert main(words) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert said in err
    assert "Traceback" not in err


def test_no_command_prints_the_help(capsys: Captured) -> None:
    assert main([]) == 2
    assert "luxsift shortlist" in capsys.readouterr().err


def test_help_and_version_exit_0(capsys: Captured) -> None:
    assert main(["--help"]) == 0
    assert main(["shortlist", "--help"]) == 0
    assert main(["--version"]) == 0
    assert "luxsift " in capsys.readouterr().out


@pytest.mark.parametrize(
    ("words", "said"),
    [
        ("--show=0", "command line, --show: found '0', expected a whole number from 1"),
        ("--show=-3", "--show"),
        ("--show=1.5", "--show: found '1.5'"),
        ("--show=" + "9" * 5000, "--show"),
        ("--show=\u0663", "--show"),
        ("--workers=0", "--workers: found '0'"),
        ("--choose=none", "--choose: found 'none'"),
        ("--choose=9", "--choose: found '9', expected one of the 8 rows to be shown"),
        ("--by=price", "--by: found 'price', expected one of cost, margin, snr, supply_current"),
        ("--by=margins", "did you mean 'margin'?"),
        ("--save=nowhere/x.json", "there is no folder"),
        ("--csv=nowhere/x.csv", "there is no folder"),
    ],
)
def test_bad_options_exit_2_before_the_search(
    request_file: Path, answer: Answer, capsys: Captured, words: str, said: str
) -> None:
    calls = answer(outcome())
    assert main(["shortlist", str(request_file), words]) == 2
    assert said in capsys.readouterr().err
    assert calls == []


def test_problems_of_options_and_request_come_all_at_once(
    request_file: Path, answer: Answer, capsys: Captured
) -> None:
    answer(outcome())
    request_file.write_text(request_file.read_text().replace("bandwidth =", "bandwith ="))
    words = ["shortlist", str(request_file), "--show", "0", "--by", "x", "--save", "nowhere/x.json"]
    assert main(words) == 2
    err = capsys.readouterr().err
    for word in ("--show", "--by", "bandwith", "did you mean 'bandwidth'?", "nowhere/x.json"):
        assert word in err


@pytest.mark.parametrize("option", ["--save", "--csv"])
@pytest.mark.parametrize("file", ["request.toml", "opamps.csv"])
def test_no_output_takes_the_place_of_an_input(
    request_file: Path, answer: Answer, capsys: Captured, option: str, file: str
) -> None:
    answer(outcome())
    before = (request_file.parent / file).read_bytes()
    assert main(["shortlist", str(request_file), option, str(request_file.parent / file)]) == 2
    assert "input of this run" in capsys.readouterr().err
    assert (request_file.parent / file).read_bytes() == before


# Options in force


def test_options_override_the_request(request_file: Path, answer: Answer, tmp_path: Path) -> None:
    calls = answer(outcome((CANDIDATE,) * 2))
    save = tmp_path / "r.json"
    words = ["--by", "snr", "--show", "3", "--choose", "2", "--workers", "2", "--save", str(save)]
    assert main(["shortlist", str(request_file), *words]) == 0
    assert calls[0]["workers"] == 2
    assert calls[0]["request"].ranking.by == "snr"
    data = read(save).data
    assert data["request"]["ranking"] == {"by": "snr", "show": 3, "comfort": 0.5}
    assert data["chosen"] == 2


def test_a_choice_beyond_what_was_found_prints_the_table_and_exits_2(
    request_file: Path, answer: Answer, capsys: Captured, tmp_path: Path
) -> None:
    answer(outcome((CANDIDATE,) * 2))
    save = tmp_path / "r.json"
    assert main(["shortlist", str(request_file), "--choose", "3", "--save", str(save)]) == 2
    out, err = capsys.readouterr()
    assert "YZD-21" in out
    assert "expected a rank from 1 to 2" in err
    assert not save.exists()


def test_quiet_prints_only_the_table(request_file: Path, answer: Answer, capsys: Captured) -> None:
    answer(outcome())
    assert main(["shortlist", str(request_file), "--quiet"]) == 0
    out, err = capsys.readouterr()
    assert "YZD-21" in out
    assert "Caution" not in out
    assert err == ""


def test_save_to_standard_output_sends_all_else_to_standard_error(
    request_file: Path, answer: Answer, capsys: Captured
) -> None:
    answer(outcome())
    assert main(["shortlist", str(request_file), "--save", "-"]) == 0
    out, err = capsys.readouterr()
    assert json.loads(out)["format"] == "luxsift-shortlist/1"
    assert "Caution" in err


def test_a_save_that_fails_still_prints_the_table(
    request_file: Path, answer: Answer, capsys: Captured, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(*_args: object) -> None:
        raise OSError(28, "No space left on device")

    answer(outcome())
    monkeypatch.setattr(os, "replace", fail)
    assert main(["shortlist", str(request_file), "--save", str(tmp_path / "r.json")]) == 2
    out, err = capsys.readouterr()
    assert "YZD-21" in out
    assert "r.json: cannot be written: No space left on device" in err


def test_csv_is_written(request_file: Path, answer: Answer, tmp_path: Path) -> None:
    answer(outcome())
    assert main(["shortlist", str(request_file), "--csv", str(tmp_path / "x.csv")]) == 0
    assert (tmp_path / "x.csv").read_text().startswith('"meets","rank"')


def test_rows_left_out_are_listed(
    request_file: Path, answer: Answer, capsys: Captured, tmp_path: Path
) -> None:
    answer(outcome())
    source, opamps = tmp_path / "source.toml", tmp_path / "opamps.csv"
    source.write_text('currency = "EUR"\n[file."opamps.csv"]\nbad_rows = "leave out"\n')
    opamps.write_text(opamps.read_text().replace("350 kHz", "fast", 1))
    assert main(["shortlist", str(request_file)]) == 0
    out, err = capsys.readouterr()
    assert "left out of the catalogs as source.toml says: 1 row; catalogs are named as seen from" in err
    assert "opamps.csv, line 2" in err
    assert "Left out of the catalogs as source.toml says: 1 row, opamps.csv (1)." in " ".join(out.split())


# The terminal


def test_utf8_names_survive_an_ascii_stream(request_file: Path) -> None:
    code = (
        "import sys, optimizer.search\n"
        "from dataclasses import replace\n"
        "from tests.made_up import CANDIDATE, outcome\n"
        "named = replace(CANDIDATE, opamp='\\u03a9-\\u4e2d')\n"
        "optimizer.search.shortlist = lambda *a, **k: outcome((named,))\n"
        "optimizer.search.Interrupted = KeyboardInterrupt\n"
        "from optimizer.cli import main\n"
        f"sys.exit(main(['shortlist', {str(request_file)!r}]))"
    )
    environment = {**os.environ, "PYTHONIOENCODING": "ascii"}
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, env=environment, check=False)
    assert done.returncode == 0, done.stderr
    assert b"ohm-\\u4e2d" in done.stdout
    assert b"3.3 uW" in done.stdout


def test_a_reader_that_leaves_early_is_no_failure(request_file: Path) -> None:
    command = [sys.executable, "-m", "optimizer", "inspect", *map(str, request_file.parent.glob("*.csv"))]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stdout is not None
        process.stdout.close()
        assert process.stderr is not None
        said = process.stderr.read()
    assert said == b""
    assert process.returncode == 0


def test_help_loads_nothing_heavy() -> None:
    """The house rule of 0.3 s to --help, held by what is imported rather than by a clock."""
    code = (
        "import sys\nfrom optimizer.cli import main\nmain(['--help'])\nprint(*sys.modules, file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    loaded = {name.partition(".")[0] for name in done.stderr.split()}
    assert loaded.isdisjoint({"numpy", "scipy", "pandas", "rich", "tomllib"})
    assert "optimizer" in loaded


# From Python


def test_python_use(request_file: Path, answer: Answer) -> None:
    calls = answer(outcome())
    made = lux.shortlist(lux.read_request(request_file), workers=2)
    assert isinstance(made, Record)
    assert lux.Record is Record
    assert len(made.table) == 1
    assert calls[0]["workers"] == 2
    assert len(lux.shortlist(str(request_file)).table) == 1


def test_python_use_refuses_no_workers(request_file: Path, answer: Answer) -> None:
    answer(outcome())
    with pytest.raises(lux.InputError, match="workers: found '0'"):
        lux.shortlist(request_file, workers=0)


def test_the_package_has_a_version_and_no_other_names() -> None:
    assert isinstance(lux.__version__, str)
    assert set(lux.__all__) <= set(dir(lux))
    with pytest.raises(AttributeError):
        lux.nothing_of_the_kind  # noqa: B018


def test_a_request_in_memory_may_be_changed(request_file: Path, answer: Answer) -> None:
    calls = answer(outcome())
    request = lux.read_request(request_file)
    lux.shortlist(replace(request, ranking=replace(request.ranking, by="margin")))
    assert calls[0]["request"].ranking.by == "margin"
