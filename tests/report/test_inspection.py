"""What inspect prints, of catalogs written for the purpose."""

from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.catalog.inspect import inspect_file
from optimizer.cli import main
from optimizer.report import to_text
from optimizer.report.inspection import LISTED, inspection_lines

HEADER = "part,maker,price,responsivity,capacitance,shunt_resistance,Datasheet\n"
GOOD = "YZD-1,Zellmarsh,1.20,850 nm:0.6,10 pF,1 Gohm,x\n"


def said(path: Path, rows: str, width: int = 80) -> str:
    path.write_text(HEADER + rows)
    text = to_text(inspection_lines(inspect_file(path), width), colour=False)
    assert max(len(line) for line in text.split("\n")) <= max(width, len(str(path)) + 50)
    return " ".join(text.split())


@pytest.fixture
def file(tmp_path: Path) -> Path:
    return tmp_path / "photodiodes.csv"


def test_counts_and_unused_headers(file: Path) -> None:
    text = said(file, GOOD)
    assert ": 1 photodiode" in text
    assert "Known for every part: part, maker, price, responsivity, capacitance, shunt_resistance." in text
    assert "rise_time 1 0 unknown" in text
    assert "dark_doubling 1 0 10 K" in text
    assert "Headers not used: Datasheet." in text


def test_what_an_assume_line_would_admit(file: Path) -> None:
    text = said(file, GOOD + "YZD-2,Zellmarsh,1.20,850 nm:0.6,10 pF,-,x\n")
    assert "shunt_resistance 1 1 unknown 1" in text
    assert "[assume.photodiodes] dark_current = ..." in text


@pytest.mark.parametrize("width", [60, 72, 80])
def test_a_long_column_name_and_a_long_blank_fit_the_width(tmp_path: Path, width: int) -> None:
    path = tmp_path / "opamps.csv"
    path.write_text(
        "part,maker,price,supply_min,supply_max,quiescent_current,gbw,voltage_noise,bias_current,"
        "offset_voltage,current_noise,input_capacitance_differential\n"
        "YZA-1,Yonderbeck,1,2 V,5 V,1 mA,1 MHz,5 nV/rtHz,1 pA,1 mV,,\n"
    )
    lines = to_text(inspection_lines(inspect_file(path), width), colour=False).split("\n")[1:]
    table = [line for line in lines if len(line) > width]
    assert table == []
    text = " ".join(" ".join(lines).split())
    assert "sqrt(2 q Ib25)" in text
    whole = {60: "input_ 1 0 unknown", 72: "input_capacitance_ 1 0 unknown"}
    assert whole.get(width, "input_capacitance_differential 1 0 unknown") in text


def test_a_unit_slip_is_told_and_not_refused(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = said(file, GOOD + "YZD-2,Zellmarsh,1.20,850 nm:0.6,10 F,1 Gohm,x\n")
    assert "Unusual values: 1" in text
    assert "line 3 capacitance 10 F above the usual" in text
    assert "a unit slip?" in text
    assert main(["inspect", str(file)]) == 0
    assert capsys.readouterr().err == ""


def test_long_lists_are_shortened_and_counted(file: Path) -> None:
    rows = "".join(f"YZD-{n},Zellmarsh,1.20,850 nm:0.6,10 F,1 Gohm,x\n" for n in range(LISTED + 7))
    assert "... and 7 more like these" in said(file, rows)


def test_a_part_on_very_many_lines_names_the_first_of_them(file: Path) -> None:
    text = said(file, GOOD * 1000)
    assert "lines 2, 3, 4, 5, 6, 7, 8, 9, 10, 11 and 990 more" in text
    assert "999" not in text


def test_a_very_long_bad_cell_is_left_out_in_few_words(file: Path) -> None:
    (file.parent / "source.toml").write_text('[file."photodiodes.csv"]\nbad_rows = "leave out"\n')
    text = said(file, GOOD + GOOD.replace("10 pF", "9" * 50_000 + " x"))
    assert "Left out as source.toml says: 1 row" in text
    assert "..." in text
    assert len(text) < 3000


def test_duplicates_make_a_file_unusable(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = said(file, GOOD + GOOD)
    assert "UNUSABLE" in text
    assert "On several lines: 1 part YZD-1 Zellmarsh lines 2, 3" in text
    assert main(["inspect", str(file)]) == 2
    out, err = capsys.readouterr()
    assert "UNUSABLE" in out
    assert "photodiodes.csv, line 3" in err


def test_every_file_is_inspected_though_one_fails(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file.write_text(HEADER + GOOD)
    assert main(["inspect", "nowhere.csv", str(file)]) == 2
    out, err = capsys.readouterr()
    assert ": 1 photodiode" in " ".join(out.split())
    assert not out.startswith("\n")
    assert "nowhere.csv" in err


def test_names_do_not_drive_the_terminal(file: Path) -> None:
    text = said(file, GOOD.replace("YZD-1", "YZD\x1b[31m") * 2)
    assert "\x1b" not in text
