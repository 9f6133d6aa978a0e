"""`luxsift whynot`: exit statuses, streams, refusals."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from optimizer.cli import main
from optimizer.search.inquiry.whynot import steps
from optimizer.study import load

Captured = pytest.CaptureFixture[str]


def first_of(path: Path, column: int = 0) -> str:
    """The name of the first part of a catalog."""
    return path.read_text("utf-8").splitlines()[1].split(",")[column]


@pytest.fixture
def opamp(request_file: Path, capsys: Captured) -> str:
    """The op-amp of row 1."""
    main(["shortlist", str(request_file), "--save", "-"])
    return str(json.loads(capsys.readouterr().out)["candidates"][0]["opamp"])


def test_a_part_that_meets(request_file: Path, opamp: str, capsys: Captured) -> None:
    assert main(["whynot", str(request_file), opamp]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    said = " ".join(out.split())
    assert f"{opamp} (" in said
    assert "an op-amp, meets the request. It is row 1 of the shortlist" in said
    assert "What is reached of each target" in said


def test_a_part_that_misses(request_file: Path, opamp: str, capsys: Captured) -> None:
    text = request_file.read_text("utf-8")
    request_file.write_text(re.sub(r"^cost = .*$", "cost = 0.01", text, flags=re.MULTILINE), encoding="utf-8")
    assert main(["whynot", str(request_file), opamp]) == 1
    assert "misses the request: " in " ".join(capsys.readouterr().out.split())


def test_a_pair_and_a_family(request_file: Path, opamp: str, capsys: Captured) -> None:
    family = first_of(request_file.parent / "resistors.csv")
    assert main(["whynot", str(request_file), opamp, family]) in (0, 1)
    out = capsys.readouterr().out
    assert f"Checks of {opamp} (" in out
    assert f"Checks of {family} (" in out


@pytest.mark.parametrize(
    ("words", "said"),
    [
        ([], "the following arguments are required: REQUEST, PART"),
        (["{request}"], "the following arguments are required: PART"),
        (["{request}", "a", "b", "c"], "found 'c', there is no such argument"),
        (
            ["{request}", "nothing-like-it"],
            "found 'nothing-like-it', the catalogs hold no such part or family",
        ),
        (["{request}", "{opamp}x"], "(did you mean '{opamp}'?)"),
        (["{request}", "{opamp}", "{opamp}"], "each of these is an op-amp (ask about one at a time)"),
        (["{folder}/none.toml", "x"], "none.toml"),
        (["{request}", "x", "--quiet"], "there is no such argument"),
    ],
)
def test_bad_input(words: list[str], said: str, request_file: Path, opamp: str, capsys: Captured) -> None:
    known = {"request": str(request_file), "folder": str(request_file.parent), "opamp": opamp}
    assert main(["whynot", *(word.format(**known) for word in words)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert said.format(**known) in " ".join(err.split())


def test_a_catalog_that_has_vanished_is_named(request_file: Path, opamp: str, capsys: Captured) -> None:
    (request_file.parent / "photodiodes.csv").unlink()
    assert main(["whynot", str(request_file), opamp]) == 2
    err = capsys.readouterr().err
    assert "photodiodes.csv" in err
    assert f"named as seen from the folder {request_file.parent}" in err


def test_every_step_is_told_as_it_begins(request_file: Path, opamp: str) -> None:
    from optimizer.search.inquiry.whynot import whynot

    study = load(request_file)
    told: list[str] = []
    whynot(study.request, study.catalogs, [opamp], tell=told.append)
    assert told == list(steps(study.request))


def test_interrupted(request_file: Path, opamp: str, capsys: Captured) -> None:
    def stop(*_args: object, **_more: object) -> None:
        raise KeyboardInterrupt

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("optimizer.search.inquiry.whynot.whynot", stop)
        assert main(["whynot", str(request_file), opamp]) == 130
    assert "interrupted; nothing was decided or written" in capsys.readouterr().err
