"""Arbitrary and damaged board files: a board or problems with a place, never another exception."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from optimizer.errors import InputError
from optimizer.planning.in_force import in_force
from optimizer.planning.outline import SOLVERS, Outline
from optimizer.planning.reading import read_board
from optimizer.planning.schema import BOARD, CHANNEL, CHANNELS
from tests.planning.written import FULL, write_inputs
from tests.request.made import as_toml

RUN = settings(max_examples=100, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])

PIECES = [
    *FULL.splitlines(keepends=True),
    *(
        "[",
        "]",
        "[[",
        "]]",
        "{",
        "}",
        '"',
        "'",
        "\\",
        "=",
        ".",
        ",",
        "#",
        "\n",
        "\r",
        "\x00",
        "\x1b",
        "\ufeff",
    ),
    *("true", "nan", "-inf", "1e999", "-0.0", "0x7fffffffffffffffffff", "1979-05-27", "none", "%"),
]
bytes_in = st.sampled_from(PIECES).map(str.encode) | st.binary(max_size=4)
TEXTS = [
    *("turbidity.toml", "other/colour.toml", "fuzzed.toml", "inner.toml", "..", "/", "~", "a" * 5000, "\x00"),
    *("60 s", "5 min", "9" * 400 + " min", "25 mA", "450 mm2", "60.00", "60 EUR", "auto", "highs"),
]
scalars = st.booleans() | st.integers() | st.floats() | st.text(max_size=12) | st.sampled_from(TEXTS)
tables = st.dictionaries(st.sampled_from(["name", "request", "count", "cost"]), scalars, max_size=3)
values = scalars | st.lists(scalars | tables, max_size=3) | tables


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    made = tmp_path_factory.mktemp("fuzz")
    write_inputs(made)
    return made


def outcome(folder: Path, data: bytes) -> Outline | InputError:
    """The board or its refusal; anything else that is raised goes through."""
    path = folder / "fuzzed.toml"
    path.write_bytes(data)
    try:
        return read_board(path)
    except InputError as error:
        refusal = error
    lines = data.count(b"\n") + data.count(b"\r") + 1
    own = [problem for problem in refusal.problems if problem.file == str(path)]
    assert own  # the requests and catalogs beside it are sound, so something is wrong in the board file
    assert all(problem.row is None or 1 <= problem.row <= lines for problem in own)
    assert all(problem.rule for problem in refusal.problems)
    assert "\x1b" not in str(refusal)
    return refusal


@RUN
@given(st.binary(max_size=200))
def test_arbitrary_bytes(folder: Path, data: bytes) -> None:
    assert isinstance(outcome(folder, data), InputError)  # no 200 random bytes name a request


@RUN
@given(st.lists(st.tuples(st.integers(0, len(FULL)), st.integers(0, 30), bytes_in), min_size=1, max_size=4))
def test_damaged_boards(folder: Path, cuts: list[tuple[int, int, bytes]]) -> None:
    data = FULL.encode()
    for at, length, inserted in cuts:
        data = data[:at] + inserted + data[at + length :]
    outcome(folder, data)


@RUN
@given(st.lists(bytes_in, max_size=25))
def test_shuffled_pieces(folder: Path, pieces: list[bytes]) -> None:
    outcome(folder, b"".join(pieces))


def _written(stated: dict[tuple[str, ...], Any], channels: list[dict[str, Any]]) -> bytes:
    top: dict[str, Any] = {}
    for name, value in stated.items():
        inner = top
        for part in name[:-1]:
            inner = inner.setdefault(part, {})
            if not isinstance(inner, dict):
                break
        else:
            inner[name[-1]] = value
    rows = "".join("[[channels]]\n" + as_toml(channel) for channel in channels)
    return (as_toml(top) + ("" if "channels" in top else rows)).encode()


@RUN
@given(
    st.dictionaries(st.sampled_from([*BOARD.keys, CHANNELS]), values, max_size=5),
    st.lists(st.dictionaries(st.sampled_from([key[0] for key in CHANNEL.keys]), values), max_size=3),
)
def test_any_value_under_any_key(
    folder: Path, stated: dict[tuple[str, ...], Any], channels: list[dict[str, Any]]
) -> None:
    outcome(folder, _written(stated, [{"request": "turbidity.toml"}, *channels]))


# Values that each are possible and cannot contradict each other.
POSSIBLE: dict[tuple[str, ...], st.SearchStrategy[Any]] = {
    ("name",): st.text("abc é\"'\\#", min_size=1).filter(lambda name: name == name.strip()),
    ("quantity",): st.integers(1, 10**6),
    ("limits", "cost"): st.floats(1e-3, 1e9) | st.just("60.00"),
    ("limits", "supply_current"): st.floats(1e-9, 10.0) | st.just("25 mA"),
    ("limits", "area"): st.floats(1e-9, 1.0) | st.just("450 mm2"),
    ("limits", "line_items"): st.integers(1, 10**6),
    ("costs", "line_item"): st.floats(0.0, 1e6) | st.just(0),
    ("costs", "placement"): st.floats(0.0, 1e6),
    ("rules", "opamp_sources"): st.integers(1, 9),
    ("rules", "opamp_parts"): st.integers(0, 99),
    ("solve", "plans"): st.integers(1, 99),
    ("solve", "time"): st.floats(1e-3, 1e9) | st.just("60 s"),
    ("solve", "solver"): st.sampled_from(SOLVERS),
}
possible = st.fixed_dictionaries({}, optional=POSSIBLE)
channel = st.fixed_dictionaries(
    {"request": st.sampled_from(["turbidity.toml", "other/colour.toml"])},
    optional={"count": st.integers(1, 10_000)},
)


def test_every_key_is_tried() -> None:
    assert POSSIBLE.keys() == BOARD.keys.keys()


@RUN
@given(possible, st.lists(channel, min_size=1, max_size=4))
def test_possible_boards_are_read_and_written_back_equal(
    folder: Path, stated: dict[tuple[str, ...], Any], channels: list[dict[str, Any]]
) -> None:
    named = [{**one, "name": f"channel {number}"} for number, one in enumerate(channels)]
    found = outcome(folder, _written(stated, named))
    assert isinstance(found, Outline), found
    told = in_force(found)
    rows = told.pop("channels")
    again = outcome(folder, as_toml(told).encode() + _written({}, rows))
    assert isinstance(again, Outline)
    assert in_force(again) == in_force(found)
    assert [one.study.request for one in again.channels] == [one.study.request for one in found.channels]
