"""Arbitrary and damaged request files: a request or problems with a place, never another exception."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from optimizer.errors import InputError
from optimizer.request import read_request
from optimizer.request.in_force import in_force
from optimizer.request.schema import KEYS, SCHEMA
from optimizer.request.types import WIRINGS, Request
from optimizer.vocabulary import COLUMNS
from tests.request.made import FULL, MINIMAL, as_toml

RUN = settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])

PIECES = [
    *MINIMAL.splitlines(keepends=True),
    *FULL.splitlines(keepends=True),
    *("[", "]", "{", "}", '"', "'", '"""', "\\", "=", ".", ",", "#", "\n", "\r", "\x00", "\x1b", "\ufeff"),
    *("true", "nan", "-inf", "1e999", "-0.0", "0x7fffffffffffffffffff", "1979-05-27", "none", "supply", "%"),
]

bytes_in = st.sampled_from(PIECES).map(str.encode) | st.binary(max_size=4)
scalars = (
    st.none().map(lambda _: True)
    | st.integers()
    | st.floats()
    | st.text(max_size=12)
    | st.sampled_from(
        ["850 nm", "30 nW", "0.4 uW/cm2", "5 V", "5 %", "-20 C", "4k7", "none", "supply", "EUR"]
    )
)
values = scalars | st.lists(scalars, max_size=3) | st.dictionaries(st.text(max_size=5), scalars, max_size=2)
columns = sorted({(role, column) for role, table in COLUMNS.items() for column in table})


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("fuzz")


def outcome(folder: Path, data: bytes) -> Request | InputError:
    """Return the request or its refusal; anything else that is raised goes through."""
    path = folder / "fuzzed.toml"
    path.write_bytes(data)
    try:
        return read_request(path)
    except InputError as error:
        refusal = error
    lines = data.count(b"\n") + data.count(b"\r") + 1
    assert refusal.problems
    assert all(problem.row is None or 1 <= problem.row <= lines for problem in refusal.problems)
    assert all(problem.rule for problem in refusal.problems)
    assert "\x1b" not in str(refusal)
    return refusal


@RUN
@given(st.binary(max_size=200))
def test_arbitrary_bytes(folder: Path, data: bytes) -> None:
    assert isinstance(outcome(folder, data), InputError)  # no 200 random bytes state light and supply


@RUN
@given(st.lists(st.tuples(st.integers(0, len(FULL)), st.integers(0, 30), bytes_in), min_size=1, max_size=4))
def test_damaged_requests(folder: Path, cuts: list[tuple[int, int, bytes]]) -> None:
    data = FULL.encode()
    for at, length, inserted in cuts:
        data = data[:at] + inserted + data[at + length :]
    outcome(folder, data)


@RUN
@given(st.lists(bytes_in, max_size=25))
def test_shuffled_pieces(folder: Path, pieces: list[bytes]) -> None:
    outcome(folder, b"".join(pieces))


def _with(tables: dict[str, Any], name: tuple[str, ...], value: Any) -> None:
    for part in name[:-1]:
        inner = tables.setdefault(part, {})
        if not isinstance(inner, dict):
            return
        tables = inner
    tables[name[-1]] = value


@RUN
@given(st.dictionaries(st.sampled_from(sorted(KEYS) + sorted(SCHEMA.tables - {()})), values, max_size=6))
def test_any_value_under_any_key(folder: Path, stated: dict[tuple[str, ...], Any]) -> None:
    tables: dict[str, Any] = {
        "light": {"wavelength": 850e-9, "weakest": 1e-9, "strongest": 1e-6},
        "supply": {"high": 5},
    }
    for name, value in stated.items():
        _with(tables, name, value)
    found = outcome(folder, as_toml(tables).encode())
    if isinstance(found, Request):
        assert outcome(folder, as_toml(in_force(found)).encode()) == found


@RUN
@given(st.dictionaries(st.sampled_from(columns), scalars, max_size=4))
def test_any_value_under_any_assumed_column(folder: Path, assumed: dict[tuple[str, str], Any]) -> None:
    tables: dict[str, Any] = {}
    for (role, column), value in assumed.items():
        _with(tables, (role, column), value)
    found = outcome(folder, (MINIMAL + as_toml({"assume": tables})).encode())
    if isinstance(found, Request):
        assert found.assume.keys() == assumed.keys()
        again = outcome(folder, as_toml(in_force(found)).encode())
        assert isinstance(again, Request)
        assert again.assume == pytest.approx(found.assume, rel=1e-13)


def _between(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_subnormal=False)


names = st.lists(
    st.text("AZaz09 -/#", min_size=1, max_size=6).filter(lambda name: name == name.strip()), max_size=3
)
# Values that each are possible and cannot contradict each other.
POSSIBLE: dict[tuple[str, ...], st.SearchStrategy[Any]] = {
    ("name",): st.text("abc é😀\"'\\#", min_size=1).filter(lambda name: name == name.strip()),
    ("quantity",): st.integers(1, 10**6),
    ("currency",): st.sampled_from(["EUR", "catalog currency"]),
    ("light", "wavelength"): _between(1e-9, 1e-3),
    ("light", "weakest"): _between(1e-15, 1e-6).flatmap(lambda w: st.sampled_from([w, f"{w!r}", f"{w!r} W"])),
    ("light", "strongest"): _between(1e-6, 1.0),
    ("light", "background"): _between(0.0, 1.0),
    ("light", "active_area", "from"): _between(0.0, 1e-6),
    ("light", "active_area", "to"): _between(1e-6, 1e-4),
    ("supply", "high"): _between(1.0, 36.0) | st.integers(1, 36),
    ("supply", "low"): _between(-36.0, 0.0),
    ("supply", "tolerance"): _between(0.0, 0.99) | st.sampled_from(["5 %", "300 ppm"]),
    ("supply", "load"): _between(1.0, 1e9),
    ("supply", "load_to"): _between(-50.0, 50.0) | st.just("reference"),
    ("ambient", "coldest"): _between(-273.15, 25.0) | st.just("250 K"),
    ("ambient", "hottest"): _between(25.0, 300.0),
    ("targets", "bandwidth"): _between(1e-3, 1e12),
    ("targets", "snr"): _between(-100.0, 300.0),
    ("targets", "phase_margin"): _between(0.0, 179.0),
    ("targets", "cost"): _between(1e-6, 1e6),
    ("space", "wirings"): st.lists(st.sampled_from(WIRINGS), min_size=1, max_size=6),
    ("space", "low_pass"): st.lists(st.just("none") | _between(1e-3, 1e12), min_size=1, max_size=4),
    ("space", "dark_on_rail"): st.booleans(),
    ("space", "divider", "series"): st.sampled_from(["E3", "E192"]),
    ("space", "divider", "from"): _between(1.0, 1e5),
    ("space", "capacitance", "none"): st.booleans(),
    ("space", "require"): names,
    ("space", "packages"): names,
    ("converter", "high"): _between(0.1, 9.0) | st.just("supply"),
    ("converter", "bits"): st.integers(1, 64),
    ("ranking", "comfort"): _between(1e-9, 1.0) | st.just("40 %"),
    ("tolerance", "method"): st.sampled_from(["nominal", "corners"]),
    ("tolerance", "yield"): _between(1e-9, 0.999999) | st.just("99 %"),
    ("tolerance", "draws"): st.integers(1, 10**6),
    ("tolerance", "seed"): st.integers(0, 10**12),
    ("tolerance", "gbw"): _between(0.0, 0.99) | st.just("30 %"),
    ("resilience", "opamp_sources"): st.integers(1, 9),
    ("assume", "opamps", "gbw"): _between(1.0, 1e12),
    ("assume", "opamps", "noise_corner"): _between(0.0, 1e6) | st.just("none"),
    ("assume", "resistors", "tolerance"): _between(0.0, 1.0),
}
possible = st.fixed_dictionaries(
    {name: POSSIBLE[name] for name in SCHEMA.required},
    optional={name: strategy for name, strategy in POSSIBLE.items() if name not in SCHEMA.required},
)


@RUN
@given(possible, st.booleans())
def test_possible_requests_are_read_and_written_back_equal(
    folder: Path, stated: dict[tuple[str, ...], Any], irradiance: bool
) -> None:
    tables: dict[str, Any] = {}
    for name, value in stated.items():
        _with(tables, name, value)
    if irradiance:
        for level in {"weakest", "strongest", "background"} & tables["light"].keys():
            tables["light"][level] = f"{str(tables['light'][level]).removesuffix(' W')} W/m2"
    found = outcome(folder, as_toml(tables).encode())
    assert isinstance(found, Request), found
    assert found.light.kind == ("irradiance" if irradiance else "power")
    assert outcome(folder, as_toml(in_force(found)).encode()) == found
