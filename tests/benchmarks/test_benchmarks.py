"""The benchmarks run on a tiny size and print what they promise; how long anything takes is not asserted."""

from __future__ import annotations

import tomllib
from dataclasses import replace
from pathlib import Path

import pytest

from tests.benchmarks import reading, search, tradeoff
from tests.benchmarks.case import Measured
from tests.benchmarks.search import Case, How, Result
from tests.benchmarks.synthetic_data import REQUESTS

QUICKLY = ["--sizes", "30x20", "--seeds", "1", "--plain", "0.05"]
MEASURED = Measured(
    reading=0.1,
    seconds=4.0,
    cpu=3.9,
    pairs=500_000,
    combinations=16 * 10**13,
    distinct=8 * 10**13,
    evaluated=9000,
    meet=10,
    memory=200_000_000,
    plain=5e5,
    stopped="",
)
BY_COST = Case((1000, 500), 1, "easy-by-cost")


def printed(capsys: pytest.CaptureFixture[str]) -> list[dict[str, str]]:
    """The rows of the table, by column, cut at the widths that the heading was printed with."""
    lines = capsys.readouterr().out.splitlines()
    heading = next(k for k, line in enumerate(lines) if line.split()[:1] == ["size"])
    ends = len(lines[heading])
    rows = []
    for line in lines[heading + 1 :]:
        if "cases:" in line:
            break
        cells, start = {}, 0
        for name, width, _ in search.COLUMNS:
            assert lines[heading][start : start + width].strip() == name
            cells[name] = line[start : start + width].strip()
            start += width + 2
        rows.append(cells | {"remark": line[ends:].strip()})
    return rows


def test_the_search_benchmark_prints_every_column(capsys: pytest.CaptureFixture[str]) -> None:
    search.main([*QUICKLY, "--requests", "easy-by-cost,nothing"])
    easy, nothing = printed(capsys)
    assert [easy["size"], easy["seed"], easy["request"]] == ["30x20", "1", "easy-by-cost"]
    assert [nothing["request"], nothing["meet"]] == ["nothing", "0"]
    for row in (easy, nothing):
        assert row["pairs"] == "600"
        assert row["floor"] == "-"
        assert row["remark"] == ""
        for name in (
            "seconds",
            "cpu s",
            "combinations",
            "comb/s",
            "evaluated",
            "peak MB",
            "plain/s",
            "ratio",
        ):
            assert float(row[name]) > 0, name
    assert 0 < int(easy["meet"]) <= 10
    # the process alone, numpy loaded, is over 20 MB: a smaller peak would be in the wrong unit
    assert 20 < float(easy["peak MB"]) < 4000


def test_corners_are_compared_with_the_nominal_search_of_the_same_run() -> None:
    other = replace(BY_COST, seed=2)
    results = [
        Result(BY_COST, MEASURED),
        Result(other, replace(MEASURED, cpu=1.0)),
        Result(replace(BY_COST, request="easy-by-cost-corners"), replace(MEASURED, cpu=9.75)),
        Result(replace(other, request="easy-by-cost-corners"), replace(MEASURED, cpu=4.0)),
    ]
    assert search.corners_over_nominal(results) == [
        "  easy-by-cost-corners 1000x500 seed 1: 2.5 times the processor time of the nominal search",
        "  easy-by-cost-corners 1000x500 seed 2: 4.0 times the processor time of the nominal search",
    ]
    assert search.corners_over_nominal(results[2:]) == []
    stopped = Result(results[0].case, replace(MEASURED, stopped="over 120 s"))
    assert search.corners_over_nominal([stopped, results[2]]) == []
    assert search.summary(results).endswith("4.0 times the processor time of the nominal search")


def test_the_corner_case_has_its_nominal_case_and_five_spreads() -> None:
    cornered = [name for name in REQUESTS if name.endswith(search.CORNERS)]
    assert cornered
    for name in cornered:
        nominal = REQUESTS[name.removesuffix(search.CORNERS)]
        table = tomllib.loads(REQUESTS[name].removeprefix(nominal))["tolerance"]
        assert table.pop("method") == "corners"
        assert len(table) == 5


def test_two_workers_find_as_much(capsys: pytest.CaptureFixture[str]) -> None:
    meet = []
    for workers in ("1", "2"):
        search.main([*QUICKLY, "--requests", "easy-by-margin", "--workers", workers])
        meet += [row["meet"] for row in printed(capsys)]
    assert len(meet) == 2
    assert meet[0] == meet[1] != "0"


def test_quick_is_one_size_and_one_seed(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(
        search, "run", lambda case, request, how: Result(case, replace(MEASURED, plain=how.plain))
    )
    search.main(["--quick"])
    rows = printed(capsys)
    assert {(row["size"], row["seed"], row["plain/s"]) for row in rows} == {("300x200", "1", "1")}
    assert [row["request"] for row in rows] == list(REQUESTS)


def test_a_case_that_takes_too_long_is_ended_and_said(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(search, "LONGEST", 0.02)
    search.main([*QUICKLY, "--requests", "nothing"])
    (row,) = printed(capsys)
    assert row["remark"] == "over 0.02 s"
    assert row["comb/s"] == row["ratio"] == "-"


def test_a_process_that_dies_is_said(tmp_path: Path) -> None:
    result = search.run(BY_COST, tmp_path / "nowhere.toml", How(1, 0.05, False))
    assert search.row(result) == "1000x500  1  easy-by-cost: ended with status 1"


@pytest.mark.parametrize(
    ("case", "found", "said"),
    [
        (BY_COST, MEASURED, []),
        (BY_COST, replace(MEASURED, seconds=4.01), ["time over 4 s"]),
        (replace(BY_COST, request="nothing"), replace(MEASURED, seconds=4.01), ["time over 4 s"]),
        (replace(BY_COST, request="easy-by-margin"), replace(MEASURED, seconds=29.0), []),
        (replace(BY_COST, request="easy-by-margin"), replace(MEASURED, seconds=31.0), ["time over 30 s"]),
        (replace(BY_COST, request="dual-by-snr"), replace(MEASURED, seconds=31.0), []),
        (BY_COST, replace(MEASURED, distinct=10**12), ["ratio under 1e+06"]),
        (replace(BY_COST, size=(30, 20)), replace(MEASURED, distinct=10**12), []),
        (BY_COST, replace(MEASURED, memory=1_000_000_001), ["memory over 1 GB"]),
    ],
)
def test_floors_that_were_not_kept_are_named(case: Case, found: Measured, said: list[str]) -> None:
    assert search.shortfalls(case, found) == said
    assert search.row(Result(case, found)).endswith("; ".join(said))


def test_the_ratio_counts_distinct_combinations_only() -> None:
    assert MEASURED.rate == pytest.approx(4e13)
    assert MEASURED.ratio == pytest.approx(2e13 / 5e5)


def test_an_unknown_request_is_refused(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        search.main(["--requests", "easy"])
    assert "easy: choose from easy-by-cost" in capsys.readouterr().err


def test_the_reading_benchmark_prints_both_times(capsys: pytest.CaptureFixture[str]) -> None:
    reading.main(["--rows", "40", "--runs", "2"])
    lines = capsys.readouterr().out.splitlines()
    assert lines[1].split() == ["seconds", "median", "least", "most", "floor"]
    for line, start in zip(lines[2:], ("read 40 rows, 40 usable", "luxsift --help"), strict=True):
        assert line.startswith(start)
        median, least, most, _ = map(float, line.removeprefix(start).split()[:4])
        assert 0 < least <= median <= most


def test_the_tradeoff_benchmark_prints_a_line_a_case() -> None:
    heading, *cases = tradeoff.lines([(30, 20)], [1])
    assert heading.split()[:3] == ["size", "seed", "request"]
    assert [line.split()[2] for line in cases] == list(tradeoff.KINDS)
    for line in cases:
        plain, table, ratio = (float(cell) for cell in line.split()[3:6])
        assert ratio == pytest.approx(table / plain, rel=0.2)
