"""Whatever bytes lie in the folder: an InputError or every row accounted for, and nothing else."""

from __future__ import annotations

import tempfile
from pathlib import Path

from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.catalog import Catalogs, inspect_file
from optimizer.errors import InputError
from optimizer.vocabulary import COLUMNS
from tests.catalog.made import GOOD, ROLES, Folder, named, table

MAP = """\
currency = "EUR"
encoding = "utf-8"
[file."opamps.csv"]
duplicates = "cheapest"
bad_rows = "leave out"
ignore = ["maker"]
status = { "New" = "active" }
[file."opamps.csv".columns]
gbw = { header = "gbw", unit = "MHz" }
maker = { value = "Maker A" }
temp_min = { header = "Range", part = "low" }
"""
PIECES = [
    ",",
    ";",
    "\t",
    '"',
    "\n",
    "\r",
    "\x00",
    "\ufeff",
    "nan",
    "none",
    "-",
    "1e999",
    "10 MHz",
    "µ",
    "€",
    ":",
    "~",
]
TOKENS = [
    "[",
    "]",
    "{",
    "}",
    "=",
    '"',
    "'",
    "\n",
    "#",
    ".",
    "1",
    "true",
    "nan",
    "1979-05-27",
    "\\u0000",
    "file",
    '"""',
]


def _made(directory: str) -> Folder:
    made = Folder(Path(directory))
    for role, row in GOOD.items():
        made.rows(role, row)
    return made


def _read(folder: Folder) -> Catalogs | None:
    """The catalogs, every row accounted for; None where they are refused with reasons."""
    try:
        catalogs = folder.read()
    except InputError as error:
        _has_reasons(error)
        return None
    rows = sum(source.rows for source in catalogs.sources)
    read = sum(getattr(catalogs, role).size for role in ROLES)
    assert read + len(catalogs.left_out) == rows
    return catalogs


def _has_reasons(error: InputError) -> None:
    assert error.problems
    assert all(problem.rule and problem.file for problem in error.problems)


def _inspect(folder: Folder) -> None:
    for role in ROLES:
        try:
            seen = inspect_file(folder.path / f"{role}.csv")
        except InputError as error:
            _has_reasons(error)
        else:
            assert seen.rows >= seen.parts


@st.composite
def spoilt(draw: st.DrawFn, good: bytes, pieces: list[str]) -> bytes:
    """Good bytes with a few cuts and insertions."""
    data = good
    for _ in range(draw(st.integers(1, 3))):
        start = draw(st.integers(0, len(data)))
        end = min(len(data), start + draw(st.sampled_from([0, 0, 0, 1, 2, 12])))
        insert = draw(st.sampled_from([*pieces, None, ""]))
        data = (
            data[:start] + (draw(st.binary(max_size=3)) if insert is None else insert.encode()) + data[end:]
        )
    return data


ROWS = [named("opamps", number) | {"Range": "-40 ~ 85 C", "package": "a"} for number in range(3)]
CSV_BYTES = st.one_of(
    st.binary(max_size=200),
    spoilt(table(ROWS).encode(), PIECES),
    spoilt(table(ROWS).encode(), ["x", " ", "5", "-"]),
    spoilt(table(ROWS, ";").encode("utf-16"), PIECES),
)
MAPS = ["", MAP, MAP.replace("utf-8", "utf-16")]
TOML_BYTES = st.one_of(
    st.binary(max_size=100),
    spoilt(MAP.encode(), TOKENS),
    spoilt(MAP.encode(), ["\n", " ", "# a remark"]),
    st.text(max_size=60).map(str.encode),
)


def test_what_the_fuzz_begins_from_is_good(folder: Folder) -> None:
    """Else every spoilt file would be refused for the same reason, and the fuzz would see nothing."""
    folder.rows("opamps", *ROWS)
    for source in MAPS[:2]:
        folder.write("source.toml", source)
        assert folder.read().opamps.size == 3


@settings(max_examples=250, deadline=None)
@given(CSV_BYTES, st.sampled_from(MAPS))
def test_any_bytes_as_a_catalog(data: bytes, source: str) -> None:
    with tempfile.TemporaryDirectory() as directory:
        folder = _made(directory)
        folder.write("opamps.csv", data)
        folder.write("source.toml", source)
        _read(folder)
        _inspect(folder)


@settings(max_examples=250, deadline=None)
@given(TOML_BYTES)
def test_any_bytes_as_source_toml(data: bytes) -> None:
    with tempfile.TemporaryDirectory() as directory:
        folder = _made(directory)
        folder.rows("opamps", *ROWS)
        folder.write("source.toml", data)
        _read(folder)
        _inspect(folder)


@settings(max_examples=60, deadline=None)
@given(
    st.sampled_from(ROLES).flatmap(
        lambda role: spoilt(table([GOOD[role]] * 2).encode(), PIECES).map(lambda data: (role, data))
    )
)
def test_any_bytes_as_any_catalog(case: tuple[str, bytes]) -> None:
    with tempfile.TemporaryDirectory() as directory:
        folder = _made(directory)
        folder.write(f"{case[0]}.csv", case[1])
        _read(folder)
        _inspect(folder)


# without a lone carriage return: the csv writer leaves it unquoted, and outside quotes it ends a line
CELLS = st.one_of(
    st.sampled_from(
        ["", "-", "N/A", "none", "10", "10 MHz", "1:2; 3:1", "nan", "-5", "1,5", "E24", "list", "a\nb", '"']
    ),
    st.text(alphabet=st.characters(codec="utf-8", exclude_characters="\x00\r"), max_size=12),
)


@settings(max_examples=150, deadline=None)
@given(
    st.lists(
        st.dictionaries(st.sampled_from(sorted(COLUMNS["opamps"])), CELLS, max_size=6), min_size=1, max_size=8
    )
)
def test_no_row_is_dropped_in_silence(changes: list[dict[str, str]]) -> None:
    """The rows of the file are counted here by the one who wrote them, not by the reader."""
    rows = [named("opamps", number) | change for number, change in enumerate(changes)]
    with tempfile.TemporaryDirectory() as directory:
        folder = _made(directory)
        folder.rows("opamps", *rows)
        folder.write("source.toml", '[file."opamps.csv"]\nduplicates = "cheapest"\nbad_rows = "leave out"\n')
        catalogs = _read(folder)
        if catalogs is not None:
            assert catalogs.sources[0].rows == len(rows)
            assert catalogs.opamps.size + len(catalogs.left_out) == len(rows)
        folder.write("source.toml", "")
        strict = _read(folder)
        if strict is not None:
            assert strict.opamps.size == len(rows)
