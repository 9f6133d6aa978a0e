"""The board file: what is read, every error, and where it is said to stand."""

from __future__ import annotations

import hashlib
from pathlib import Path
from typing import Any

import pytest

from optimizer.errors import InputError, Problem
from optimizer.input_file import InputFile, read_input
from optimizer.planning.in_force import in_force
from optimizer.planning.outline import Costs, Limits, Rules, Solve
from optimizer.planning.reading import read_board
from optimizer.planning.schema import BOARD
from optimizer.study import load
from tests.planning.written import FULL, MINIMAL, Fails, Reads
from tests.request.made import as_toml


def places(problems: tuple[Problem, ...]) -> list[tuple[str, int | None, str | None]]:
    return [(Path(problem.file).name, problem.row, problem.column) for problem in problems]


# What is read


def test_every_key_of_a_full_board(read: Reads, tmp_path: Path) -> None:
    board = read(FULL)
    assert board.name == "river sonde, optical board"
    assert board.quantity == 400
    assert board.limits == Limits(cost=60.0, supply_current=25e-3, area=450e-6, line_items=16)
    assert board.costs == Costs(line_item=15.0, placement=0.01)
    assert board.rules == Rules(opamp_sources=2, opamp_parts=3)
    assert board.solve == Solve(plans=4, time=90.0, solver="cbc")
    assert [(one.name, one.request, one.count) for one in board.channels] == [
        ("turbidity", "turbidity.toml", 2),
        ("colour", "other/colour.toml", 1),
    ]
    assert board.path == tmp_path / "board.toml"
    assert board.source.file == "board.toml"
    assert board.source.sha256 == hashlib.sha256(FULL.encode()).hexdigest()
    assert board.currency == "catalog currency"


def test_what_is_left_out_takes_its_default(read: Reads) -> None:
    board = read(MINIMAL)
    assert (board.name, board.quantity) == ("board", 1)
    assert (board.limits, board.costs, board.rules, board.solve) == (Limits(), Costs(), Rules(), Solve())
    (channel,) = board.channels
    assert (channel.name, channel.count) == ("turbidity", 1)


@pytest.mark.parametrize(
    ("text", "time"), [("30", 30.0), ("0.5", 0.5), ('"1500 ms"', 1.5), ('"2 ks"', 2000.0), ("1e9", 1e9)]
)
def test_time_is_seconds_and_has_no_end(read: Reads, text: str, time: float) -> None:
    assert read(f"{MINIMAL}[solve]\ntime = {text}\n").solve.time == time


def test_a_solver_that_may_be_absent_is_no_matter_of_reading(read: Reads) -> None:
    assert read(MINIMAL + '[solve]\nsolver = "highs"\n').solve.solver == "highs"


def test_the_studies_take_the_quantity_of_the_board(read: Reads, tmp_path: Path) -> None:
    board = read(FULL)
    alone = load(tmp_path / "turbidity.toml")
    study = board.channels[0].study
    assert (alone.request.quantity, study.request.quantity) == (1, 400)
    assert study.request_source == alone.request_source
    assert study.catalogs.opamps.text["part"].tolist() == alone.catalogs.opamps.text["part"].tolist()


@pytest.mark.parametrize(("of_board", "of_request", "holds"), [(1, 1, 1), (2, 1, 2), (1, 2, 2), (3, 2, 3)])
def test_the_stricter_of_two_numbers_of_makers_holds(
    read: Reads, tmp_path: Path, of_board: int, of_request: int, holds: int
) -> None:
    with (tmp_path / "turbidity.toml").open("a") as file:
        file.write(f"[resilience]\nopamp_sources = {of_request}\n")
    board = read(f"{MINIMAL}[rules]\nopamp_sources = {of_board}\n")
    assert board.channels[0].study.request.resilience.opamp_sources == holds
    assert board.rules.opamp_sources == of_board


def test_each_file_is_read_once(read: Reads, monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """Three channels of one request and a second request beside it, over the same catalogs."""
    opened: list[str] = []

    def counting(path: Path, file: str, **options: Any) -> InputFile:
        opened.append(path.name)
        return read_input(path, file, **options)

    for module in ("optimizer.planning.reading_channels", "optimizer.catalog.files"):
        monkeypatch.setattr(f"{module}.read_input", counting)
    (tmp_path / "second.toml").write_text((tmp_path / "turbidity.toml").read_text())
    rows = [("a", "turbidity.toml"), ("b", "./turbidity.toml"), ("c", "other/../turbidity.toml")]
    text = "".join(
        f'[[channels]]\nname = "{name}"\nrequest = "{file}"\n' for name, file in (*rows, ("d", "second.toml"))
    )
    board = read(text)
    assert sorted(opened) == sorted(
        ["turbidity.toml", "second.toml", "opamps.csv", "photodiodes.csv", "resistors.csv", "capacitors.csv"]
    )
    assert board.channels[0].study is board.channels[2].study
    assert board.channels[0].study.catalogs is board.channels[3].study.catalogs


def test_the_currency_is_that_of_the_catalogs(read: Reads, tmp_path: Path) -> None:
    (tmp_path / "parts" / "source.toml").write_text('currency = "CHF"\n')
    assert read(FULL).currency == "CHF"


def test_what_is_in_force_reads_to_the_same_board(read: Reads) -> None:
    for text in (FULL, MINIMAL):
        board = read(text)
        tables = in_force(board)
        channels = tables.pop("channels")
        again = as_toml(tables) + "".join("[[channels]]\n" + as_toml(channel) for channel in channels)
        found = read(again)
        assert in_force(found) == in_force(board)
        assert (found.limits, found.solve, found.rules) == (board.limits, board.solve, board.rules)


def test_in_force_tells_every_key(read: Reads) -> None:
    tables = in_force(read(FULL))
    told = {(name,) for name, value in tables.items() if not isinstance(value, dict | list)} | {
        (name, key) for name, table in tables.items() if isinstance(table, dict) for key in table
    }
    assert told == set(BOARD.keys)


# What is refused: the text of one line that is wrong, the key, and words of the message

WRONG = [
    ("", "quantity = 0", "quantity", "at least 1"),
    ("", "quantity = -4", "quantity", "at least 1"),
    ("", "quantity = 1.5", "quantity", "whole number"),
    ("", "quantity = true", "quantity", "found 'true', expected a whole number"),
    ("", "name = 3", "name", "one line of text"),
    ("", "quantiy = 3", "quantiy", "did you mean 'quantity'?"),
    ("", 'currency = "EUR"', "currency", "that of the catalogs"),
    ("", "count = 2", "count", "count stands in [[channels]]"),
    ("", "cost = 60", "cost", "cost stands in [limits]"),
    ("", "limits = 3", "limits", "expected a table"),
    ("[[channels]]", "count = 0", "channels.count", "at least 1"),
    ("[[channels]]", "count = -1", "channels.count", "at least 1"),
    ("[[channels]]", "count = 2.5", "channels.count", "whole number"),
    ("[[channels]]", "count = true", "channels.count", "found 'true', expected a whole number"),
    ("[[channels]]", "count = inf", "channels.count", "whole number"),
    ("[[channels]]", "count = 10_001", "channels.count", "at most 10000"),
    ("[[channels]]", 'count = "two"', "channels.count", "whole number"),
    ("[[channels]]", "cont = 2", "channels.cont", "did you mean 'count'?"),
    ("[[channels]]", "quantity = 2", "channels.quantity", "stands at the top"),
    ("[[channels]]", "placement = 2", "channels.placement", "stands in [costs]"),
    ("[[channels]]", "name = 7", "channels.name", "one line of text"),
    ("[[channels]]", "request = 7", "channels.request", "one line of text"),
    ("[[channels]]", 'request = ""', "channels.request", "one line of text"),
    ("[[channels]]", 'request = "turbidty.toml"', "channels.request", "did you mean 'turbidity.toml'?"),
    ("[[channels]]", 'request = "no/such.toml"', "channels.request", "there is no such file"),
    ("[[channels]]", 'request = "parts"', "channels.request", "this is a folder"),
    ("[[channels]]", 'request = "board.toml"', "channels.request", "this is the board file itself"),
    ("[[channels]]", 'request = "other/../board.toml"', "channels.request", "this is the board file itself"),
    ("[[channels]]", 'request = "inner.toml"', "channels.request", "a channel of a board is no board"),
    ("[limits]", "cost = 0", "limits.cost", "more than 0"),
    ("[limits]", "cost = -5", "limits.cost", "more than 0"),
    ("[limits]", "cost = nan", "limits.cost", "expected a price"),
    ("[limits]", "cost = inf", "limits.cost", "expected a price"),
    ("[limits]", "cost = true", "limits.cost", "expected a price"),
    ("[limits]", 'cost = "60 EUR"', "limits.cost", "write 60"),
    ("[limits]", 'cost = "60 mA"', "limits.cost", "expected a price"),
    ("[limits]", "cost = 1e300", "limits.cost", "at most"),
    ("[limits]", "supply_current = 0", "limits.supply_current", "more than 0 A"),
    ("[limits]", 'supply_current = "-1 mA"', "limits.supply_current", "more than 0 A"),
    ("[limits]", 'supply_current = "25 mV"', "limits.supply_current", "'mV' is a unit of voltage"),
    ("[limits]", "supply_current = nan", "limits.supply_current", "expected a current"),
    ("[limits]", "area = 0", "limits.area", "more than 0 mm2"),
    ("[limits]", 'area = "-1 mm2"', "limits.area", "more than 0 mm2"),
    ("[limits]", 'area = "450 mm"', "limits.area", "expected an area"),
    ("[limits]", "area = 450", "limits.area", "write '450 mm2'"),
    ("[limits]", "line_items = 0", "limits.line_items", "at least 1"),
    ("[limits]", "line_items = 1.5", "limits.line_items", "whole number"),
    ("[limits]", "line_item = 15", "limits.line_item", "line_item stands in [costs]"),
    ("[limits]", "power = 3", "limits.power", "known here: cost, supply_current, area, line_items"),
    ("[costs]", "line_item = -1", "costs.line_item", "at least 0"),
    ("[costs]", "placement = -0.01", "costs.placement", "at least 0"),
    ("[costs]", "placement = inf", "costs.placement", "expected a price"),
    ("[costs]", 'placement = "0,01"', "costs.placement", "write '0.01'"),
    ("[costs]", "placment = 1", "costs.placment", "did you mean 'placement'?"),
    ("[rules]", "opamp_sources = 0", "rules.opamp_sources", "at least 1"),
    ("[rules]", "opamp_parts = -1", "rules.opamp_parts", "at least 0"),
    ("[rules]", "opamp_parts = false", "rules.opamp_parts", "whole number"),
    ("[rules]", "opamp_source = 2", "rules.opamp_source", "did you mean 'opamp_sources'?"),
    ("[solve]", "plans = 0", "solve.plans", "at least 1"),
    ("[solve]", "plans = 1.5", "solve.plans", "whole number"),
    ("[solve]", "time = 0", "solve.time", "more than 0 s"),
    ("[solve]", 'time = "-1 s"', "solve.time", "more than 0 s"),
    ("[solve]", "time = nan", "solve.time", "expected a time such as '60 s'"),
    ("[solve]", 'time = "60 Hz"', "solve.time", "'Hz' is a unit of frequency"),
    ("[solve]", 'time = "5 min"', "solve.time", "write '300 s'"),
    ("[solve]", 'time = "1 h"', "solve.time", "write '3600 s'"),
    ("[solve]", 'time = "long"', "solve.time", "expected a time such as '60 s'"),
    ("[solve]", 'solver = "higs"', "solve.solver", "did you mean 'highs'?"),
    ("[solve]", "solver = 1", "solve.solver", "expected 'auto', 'cbc' or 'highs'"),
    ("[limit]", "cost = 60", "limit", "there is no such table (did you mean 'limits'?)"),
    ("[light]", "wavelength = 1e-6", "light", "there is no such table"),
]


def with_line(table: str, line: str) -> str:
    """The minimal board with one more or one other line in the table."""
    lines = MINIMAL.splitlines()
    if not table:
        return "\n".join([line, *lines])
    if table not in lines:
        return "\n".join([*lines, table, line])
    key = line.partition("=")[0]
    return "\n".join([table, line, *(old for old in lines[1:] if not old.startswith(key))])


@pytest.mark.parametrize(
    ("table", "line", "key", "words"), WRONG, ids=[f"{row[0]} {row[1]}" for row in WRONG]
)
def test_one_wrong_line_is_one_problem_at_its_line(
    fail: Fails, table: str, line: str, key: str, words: str
) -> None:
    text = with_line(table, line)
    (problem,) = fail(text)
    assert problem.column == key
    assert words in str(problem)
    assert Path(problem.file).name == "board.toml"
    at_table = key in ("light", "limit")  # the heading itself is what is wrong
    assert text.splitlines()[(problem.row or 0) - 1] == (table if at_table else line)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "a board needs at least one channel (state [[channels]] with name"),
        ("channels = []\n", "a board needs at least one channel"),
        ('[channels]\nrequest = "turbidity.toml"\n', "write [[channels]] in double brackets"),
        ('channels = ["turbidity.toml"]\n', "found 'turbidity.toml', expected a table"),
        ('[[channel]]\nrequest = "turbidity.toml"\n', "no such table (did you mean 'channels'?)"),
    ],
)
def test_no_channels(fail: Fails, text: str, words: str) -> None:
    (problem,) = fail(text)
    assert words in str(problem)


def test_a_channel_without_a_request(fail: Fails) -> None:
    (problem,) = fail(MINIMAL + '[[channels]]\nname = "second"\n')
    assert (problem.row, problem.column) == (3, "channels.request")
    assert "this key is missing" in problem.rule


def test_a_misspelt_request_is_not_called_missing_as_well(fail: Fails) -> None:
    (problem,) = fail('[[channels]]\nreqest = "turbidity.toml"\n')
    assert (problem.column, problem.remedy) == ("channels.reqest", "did you mean 'request'?")


def test_two_channels_of_one_name(fail: Fails) -> None:
    (stated,) = fail(FULL.replace('"colour"', '"turbidity"'))
    assert (stated.row, stated.column, stated.cell) == (10, "channels.name", "turbidity")
    assert "another channel has this name already" in stated.rule
    (unstated,) = fail(MINIMAL + MINIMAL)
    assert (unstated.row, unstated.cell) == (3, "turbidity")
    assert "named after its request" in unstated.rule


def test_channels_of_one_inline_list_have_their_own_lines(fail: Fails) -> None:
    text = 'channels = [\n  {request = "turbidity.toml"},\n  {request = "turbidity.toml", count = 0},\n]\n'
    assert places(fail(text)) == [
        ("board.toml", 3, "channels.count"),
        ("board.toml", 3, "channels.name"),
    ]


def test_every_channel_that_names_a_missing_file_is_told(fail: Fails) -> None:
    text = '[[channels]]\nname = "a"\nrequest = "x.toml"\n[[channels]]\nname = "b"\nrequest = "x.toml"\n'
    problems = fail(text)
    assert places(problems) == [("board.toml", 3, "channels.request"), ("board.toml", 6, "channels.request")]
    assert all("there is no such file" in problem.rule for problem in problems)


def test_the_board_itself_is_not_offered_as_a_request(fail: Fails) -> None:
    (problem,) = fail('[[channels]]\nrequest = "borad.toml"\n')
    assert "there is no such file" in problem.rule
    assert "board.toml" not in problem.remedy


def test_a_request_that_is_no_toml_is_told_at_its_own_line(fail: Fails, tmp_path: Path) -> None:
    (tmp_path / "turbidity.toml").write_text("[light]\nwavelength = 850 nm\n")
    (problem,) = fail(MINIMAL)
    assert (Path(problem.file), problem.row) == (tmp_path / "turbidity.toml", 2)
    assert 'put the value in quotes: wavelength = "850 nm"' in problem.remedy


def test_a_request_in_place_of_the_board(tmp_path: Path, read: Reads) -> None:
    with pytest.raises(InputError) as caught:
        read_board(tmp_path / "turbidity.toml")
    (problem,) = caught.value.problems
    assert "this is a request of one receiver, expected a board file" in problem.rule


def test_a_board_in_place_of_a_request(tmp_path: Path, read: Reads) -> None:
    read(FULL)
    with pytest.raises(
        InputError, match=r"this is a board file, expected a request \(`luxsift board` plans it\)$"
    ):
        load(tmp_path / "board.toml")


def test_problems_of_board_requests_and_catalogs_come_all_at_once(fail: Fails, tmp_path: Path) -> None:
    """The catalogs are named by both requests, each from its folder; their problems are told once."""
    request = tmp_path / "other" / "colour.toml"
    request.write_text(request.read_text().replace('"30 nW"', '"30 nV"') + "[space]\ntray = 1\n")
    opamps = tmp_path / "parts" / "opamps.csv"
    opamps.write_text(opamps.read_text().replace("10 MHz", "fast"))
    text = FULL.replace("quantity = 400", "quantity = 0").replace('"cbc"', '"cbd"') + "[extra]\n"
    problems = fail(text.replace("count = 2", "count = 0"))
    assert places(problems) == [
        ("board.toml", 2, "quantity"),
        ("board.toml", 7, "channels.count"),
        ("board.toml", 30, "solve.solver"),
        ("board.toml", 31, "extra"),
        ("opamps.csv", 2, "gbw"),
        ("colour.toml", 3, "light.weakest"),
        ("colour.toml", 13, "space.tray"),
    ]
    assert Path(problems[4].file).samefile(opamps)
    assert Path(problems[5].file) == request


def test_two_currencies_over_the_channels(fail: Fails, tmp_path: Path) -> None:
    for request, code in (("turbidity.toml", "EUR"), ("other/colour.toml", "USD")):
        path = tmp_path / request
        path.write_text(f'currency = "{code}"\n' + path.read_text())
    (problem,) = fail(FULL)
    assert (problem.row, problem.column, problem.cell) == (11, "channels.request", "other/colour.toml")
    assert "its prices are in USD, those of turbidity.toml in EUR" in problem.rule


def test_a_request_and_catalogs_of_two_currencies(fail: Fails, tmp_path: Path) -> None:
    (tmp_path / "parts" / "source.toml").write_text('currency = "CHF"\n')
    path = tmp_path / "turbidity.toml"
    path.write_text('currency = "EUR"\n' + path.read_text())
    within, across = sorted(fail(FULL), key=lambda problem: problem.file, reverse=True)
    assert (Path(within.file).name, within.cell) == ("source.toml", "CHF")
    assert "those of turbidity.toml in EUR" in across.rule


def test_files_that_are_no_board_file(tmp_path: Path, fail: Fails) -> None:
    with pytest.raises(InputError, match="there is no such file"):
        read_board(tmp_path / "none.toml")
    with pytest.raises(InputError, match="this is a folder, expected a board file"):
        read_board(tmp_path)
    (problem,) = fail("[limits]\ncost = 60 EUR\n")
    assert problem.row == 2
    assert "not valid TOML" in problem.rule
    (problem,) = fail(MINIMAL.encode("utf-16"))
    assert "UTF-16" in problem.rule


def test_names_that_would_drive_a_terminal_are_escaped(fail: Fails) -> None:
    message = str(InputError(fail(MINIMAL + '"a\\u001b[31m" = 1\n[[channels]]\nrequest = "\\u001b[0m"\n')))
    assert "\x1b" not in message
