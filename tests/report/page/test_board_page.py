"""The page on a board's plan: what it says comes from the record or is computed again, and agrees with it."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest

from optimizer.errors import InputError
from optimizer.record import BoardRecord, read_any, read_board, write
from optimizer.report.page import to_html, to_markdown
from optimizer.report.page.blocks import Facts, Page, Part, Section, Table, Words
from optimizer.report.page.board import compose_board
from optimizer.review.board import plan_of, reopen_board
from optimizer.review.board_dossier import BoardDossier, gather_board
from optimizer.review.board_replacement import board_record_of, board_replacement
from optimizer.review.dossier import Place
from optimizer.review.withdrawal import Wish
from tests.review.catalog_edits import rewritten, with_cells, without
from tests.review.made_board import saved_board


@pytest.fixture
def saved(tmp_path: Path) -> Path:
    return saved_board(tmp_path / "board")


@pytest.fixture(scope="module")
def dossier(tmp_path_factory: pytest.TempPathFactory) -> BoardDossier:
    return gathered(saved_board(tmp_path_factory.mktemp("page") / "board"))


@pytest.fixture(scope="module")
def page(dossier: BoardDossier) -> Page:
    return compose_board(dossier)


def gathered(path: Path, rank: int | None = None) -> BoardDossier:
    record = read_any(path)
    assert isinstance(record, BoardRecord)
    opened = reopen_board(record, path)
    return gather_board(opened, Place(path.name, "board.toml", "review.html"), rank)


def refused(path: Path) -> str:
    with pytest.raises(InputError) as caught:
        gathered(path)
    return str(caught.value)


def section(page: Page, key: str) -> Section:
    return next(one for one in page.sections if one.key == key)


def part(section: Section, heading: str) -> Part:
    return next(one for one in section.parts if one.heading == heading)


def table(blocks: Any, begins: str) -> Table:
    return next(one for one in blocks if isinstance(one, Table) and one.caption.startswith(begins))


def rows(one: Table) -> list[list[str]]:
    return [[cell.text for cell in row] for row in one.rows]


def words(blocks: Any) -> str:
    return " ".join(one.text for one in blocks if isinstance(one, Words))


# What it says


def test_the_decision_says_what_is_built_for_how_much_and_how_sure_that_is(page: Page) -> None:
    said = words(section(page, "decision").blocks)
    assert "Build 200 boards of 3 channels as plan 1, at 4.39 EUR a board" in said
    assert "every channel meets its request, and the board keeps both limits" in said
    assert "line items being the nearest (25 % to spare)" in said
    assert "Proven over the candidates looked at, which are not all" in said
    (strip,) = (one for one in section(page, "decision").blocks if isinstance(one, Facts))
    assert dict(strip.pairs)["cost of 200 boards"] == "877.60 EUR"
    assert dict(strip.pairs)["op-amp packages"] == "3"


def test_every_channel_is_held_to_every_target(page: Page, dossier: BoardDossier) -> None:
    own = section(page, "compliance")
    assert [one.heading for one in own.parts] == ["gate x2", "level"]
    for one, built in zip(own.parts, dossier.plan["channels"], strict=True):
        held = rows(table(one.blocks, "Every graded target"))
        assert len(held) == len(built["candidate"]["targets"])
        assert all("meets" in row[-1] for row in held)


def test_the_bill_has_every_line_and_adds_up(page: Page, dossier: BoardDossier) -> None:
    own = section(page, "bill")
    lines = rows(table(own.blocks, "Every part number"))
    assert len(lines) == len(dossier.plan["bill"])
    sums = rows(table(own.blocks, "What the build comes to"))
    cents = [round(float(row[2]) * 100) for row in sums]
    assert sum(cents[:-1]) == cents[-1] == dossier.plan["cost"]
    assert sum(round(float(row[-1]) * 100) for row in lines) == cents[0]


def test_totals_stand_beside_their_limits(page: Page) -> None:
    held = {row[0]: row[1:] for row in rows(table(section(page, "totals").blocks, "What one board uses"))}
    assert held["line items"] == ["12", "at most 16", "25 % to spare, limiting"]
    assert held["cost a board"][1] == "at most 40.00"
    assert held["area"] == ["unknown", "-", "-"]


def test_packages_savings_and_other_plans_are_there(page: Page) -> None:
    packages = rows(table(part(section(page, "plan"), "Op-amp packages").blocks, "Op-amp packages"))
    assert sorted(row[0] for row in packages) == ["YZA-11", "YZA-21"]
    assert "op-amp package" in words(section(page, "alone").blocks)
    other = part(section(page, "alternatives"), "Plan 2")
    assert "more a board" in words(other.blocks)
    assert any("YZD-01 \u2192 YZD-03" in " ".join(row) for row in rows(table(other.blocks, "What plan 2")))


def test_what_was_asked_holds_the_board_and_each_request(page: Page) -> None:
    headings = [one.heading for one in section(page, "request").parts]
    assert headings[0] == "Board"
    assert "channels/gate.toml: targets" in headings
    assert "channels/level.toml: targets" in headings


def test_inputs_have_their_hashes_and_the_way_to_repeat_it(page: Page, dossier: BoardDossier) -> None:
    own = section(page, "sources")
    files = rows(table(own.blocks, "The files"))
    assert [row[0] for row in files] == [entry["file"] for entry in dossier.data["inputs"]]
    assert {row[2] for row in files} == {entry["sha256"] for entry in dossier.data["inputs"]}
    assert {row[3] for row in files} == {"unchanged"}
    markdown = to_markdown(page)
    assert "luxsift board board.toml --save board.json" in markdown
    assert "luxsift justify board.json --rank 1 -o review.html" in markdown


def test_cautions_defer_to_standards_and_local_codes(page: Page) -> None:
    text = to_markdown(page)
    for said in ("IEC 60825-1", "IEC 62471", "IEC 61508", "EN 54", "licensed practitioners decide"):
        assert said in text


def test_each_figure_is_worked_by_hand_for_each_channel(page: Page) -> None:
    headings = [one.heading for one in section(page, "formulas").parts]
    assert headings == [
        "gate x2: figures",
        "gate x2: values in between",
        "level: figures",
        "level: values in between",
    ]


def test_the_supply_of_every_part_is_there(page: Page, dossier: BoardDossier) -> None:
    own = rows(table(section(page, "exposure").blocks, "Each part's supply"))
    assert len(own) == len({(line["part"], line["maker"]) for line in dossier.plan["bill"]})


def test_another_plan_says_that_it_is_not_the_first(saved: Path) -> None:
    said = words(section(compose_board(gathered(saved, 2)), "decision").blocks)
    assert "as plan 2" in said
    assert "It is plan 2 of 2, not the cheapest." in said


def test_a_substitute_says_what_it_replaces(saved: Path) -> None:
    record = read_board(saved)
    answer = board_replacement(reopen_board(record, saved), plan_of(record), Wish(("YZA-21",)), show=1)
    path = saved.parent / "second.json"
    write(board_record_of(answer), path)
    own = section(compose_board(gathered(path)), "decision")
    assert "It changes 2 positions, which is proven the fewest" in words(own.blocks)
    changes = rows(table(part(own, "What it replaces").blocks, "What changes"))
    assert changes[0] == ["packages", "2 YZA-21 (Yonderbeck Analog) \u2192 1 YZA-22 (Yonderbeck Analog)"]
    assert changes[-1][0] == "cost"


def test_names_do_no_harm(saved: Path, tmp_path: Path) -> None:
    """A maker that is markup, in the catalogs and in the record."""
    evil = "<script>alert(1)</script>|`x`"
    folder = saved.parent
    rewritten(folder / "opamps.csv", lambda all_: [row | {"maker": evil} for row in all_])
    saved.write_text(saved.read_text("utf-8").replace("Yonderbeck Analog", json.dumps(evil)[1:-1]), "utf-8")
    page = compose_board(gathered(saved))
    html, markdown = to_html(page), to_markdown(page)
    assert "<script>" not in html
    assert "&lt;script&gt;" in html
    assert "<script>" not in markdown


def test_html_and_markdown_hold_the_same_tables(page: Page) -> None:
    html = to_html(page)
    captions = [
        block.caption
        for one in page.sections
        for blocks in (one.blocks, *(p.blocks for p in one.parts))
        for block in blocks
        if isinstance(block, Table)
    ]
    plain = re.sub(r"\s+", " ", html)
    assert len(captions) >= 15
    for caption in captions:
        assert caption.replace("'", "&#39;") in plain


# What is refused


def test_a_figure_that_no_longer_follows_is_refused(saved: Path) -> None:
    with_cells(saved.parent / "opamps.csv", "YZA-21", voltage_noise="9 nV/rtHz")
    said = refused(saved)
    assert "plan 1, gate, snr: found '47.875641', it is" in said
    assert "opamps.csv: this input is changed since the record was made" in said
    assert "run luxsift board again" in said
    assert "level, snr" not in said


def test_a_price_that_no_longer_holds_is_refused(saved: Path) -> None:
    with_cells(saved.parent / "capacitors.csv", "YZC-X", price="0.50")
    said = refused(saved)
    assert "plan 1, bill, YZC-X, unit price: found '0.01', it is 0.5 now" in said
    assert "plan 1, cost: found '87760'" in said


def test_a_part_that_has_gone_is_refused(saved: Path) -> None:
    without(saved.parent / "photodiodes.csv", "YZD-01")
    said = refused(saved)
    assert "plan 1, gate, photodiode: YZD-01 of Zellmarsh Photonics is not in the catalogs" in said
    assert "plan 1, level, photodiode" in said
    assert "plan 1, bill, YZD-01: it is not in the catalogs as photodiode" in said


def test_another_limit_or_cost_on_the_board_is_refused(saved: Path) -> None:
    file = saved.parent / "board.toml"
    text = file.read_text("utf-8")
    file.write_text(
        text.replace("cost = 40.0", "cost = 30.0").replace("line_item = 15.0", "line_item = 20.0")
    )
    said = refused(saved)
    assert "plan 1, limit of cost: found '40', it is 30 now" in said
    assert "plan 1, cost: found '87760', it is 93760 cents now" in said


def test_a_change_that_does_not_touch_the_plan_is_said_and_let_pass(saved: Path) -> None:
    with_cells(saved.parent / "photodiodes.csv", "YZD-07", price="9.99")
    own = section(compose_board(gathered(saved)), "decision")
    alert = next(one for one in own.blocks if isinstance(one, Words) and one.tone == "alert")
    assert alert.text.startswith("photodiodes.csv is not what planning read")
