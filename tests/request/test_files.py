"""Files that are no request at all."""

from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.errors import InputError
from optimizer.request import read_request
from tests.request.made import MINIMAL, Fails


@pytest.mark.parametrize(
    ("data", "row", "words"),
    [
        (MINIMAL.encode("utf-16"), 1, "UTF-16"),
        (MINIMAL.encode("utf-16-le"), 1, "save it again as UTF-8"),
        (MINIMAL.encode("utf-32"), 1, "UTF-32"),
        (b'[light]\nname = "5 \xb5W"', 2, "byte 0xB5 in column 11 is not UTF-8"),
        (b"[light]\nwavelength = 850 nm\n", 2, 'put the value in quotes: wavelength = "850 nm"'),
        (b"a = 1\nb = True\n", 2, "write b = true"),
        (b"a = 1\nb : 2\n", 2, "write b = 2"),
        (b'a = "x\n', 1, "put the missing quote"),
        (b"a = [1\n", 2, "a list is not closed"),
        (b"a = [1,\n", 2, "a bracket left open?"),
        (b"a = 1\na = 2\n", 2, "this key stands above already"),
        (b"[a]\n[b]\n[a]\n", 3, "this table stands above already"),
        (b"a = " + b"[" * 5000, None, "nested too deep"),
        (b"quantity = " + b"9" * 5000, None, "too many digits"),
        (b"\x00\x01", 1, "UTF-8"),
        (b"a = 1\n\x01", 2, "not valid TOML"),
    ],
)
def test_a_file_that_is_no_toml_is_named_with_the_place(
    fail: Fails, data: bytes, row: int | None, words: str
) -> None:
    (problem,) = fail(data)
    assert problem.row == row
    assert words in str(problem)


def test_a_number_too_large_for_any_quantity_is_refused(fail: Fails) -> None:
    problems = fail("quantity = 0x" + "f" * 5000 + "\n" + MINIMAL.replace('"5 V"', "1" + "0" * 400))
    assert [problem.column for problem in problems] == ["quantity", "supply.high"]


def test_a_missing_file_names_the_near_one(tmp_path: Path) -> None:
    (tmp_path / "bench.toml").write_text(MINIMAL)
    with pytest.raises(InputError, match=r"there is no such file \(did you mean 'bench.toml'"):
        read_request(tmp_path / "bensh.toml")
    with pytest.raises(InputError, match="this is a folder"):
        read_request(tmp_path)
    with pytest.raises(InputError, match="luxsift start"):
        read_request(tmp_path / "no" / "such.toml")
    with pytest.raises(InputError, match="cannot be read"):
        read_request("nul\x00byte")


def test_control_characters_of_keys_and_values_do_not_reach_the_message(fail: Fails) -> None:
    message = str(InputError(fail(MINIMAL + '"a\\u001b[31m" = "\\u001b[0m"\n[ranking]\nby = "\\u001b[0m"')))
    assert "\x1b" not in message
    assert "\\u001b[31m" in message
