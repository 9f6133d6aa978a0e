"""What hangs on each part: how it is counted over records, what is read how often, what is refused."""

from __future__ import annotations

import json
import shutil
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from optimizer.catalog import shelf
from optimizer.catalog.parts import Catalogs
from optimizer.errors import InputError
from optimizer.review import exposure as exposures
from optimizer.review.exposure import Exposures, exposed, exposure
from optimizer.review.reopen import chosen_of, reopen
from optimizer.review.shelf import take_up
from optimizer.review.supply import Case, Exposure, summed, worst_first
from optimizer.review.withdrawal import VANISHED
from optimizer.search.change.positions import Fitted
from optimizer.search.change.serving import Serving
from tests.review.catalog_edits import with_cells, with_copy, without
from tests.saved_record import saved_in
from tests.search.made import catalogs, opamp

FITS = {"package": "SOT-23-5", "pinout": "single-5"}


@pytest.fixture
def saved(tmp_path: Path) -> Path:
    """A record that `shortlist` saved beside its request and catalogs."""
    return saved_in(tmp_path)


def looked_at(*paths: Path) -> Exposures:
    return exposure(take_up([str(path) for path in paths]))


def part(found: Exposures, name: str) -> Exposure:
    return next(one for one in found.parts if one.part == name)


def copied(record: Path, name: str, **changes: Any) -> Path:
    """The same record under another name, with changes of its document."""
    path = record.with_name(name)
    path.write_text(json.dumps(json.loads(record.read_text("utf-8")) | changes), "utf-8")
    return path


# What is counted


def test_every_part_of_the_candidate_is_there_once_with_its_uses(saved: Path) -> None:
    found = looked_at(saved)
    assert {(one.part, one.uses) for one in found.parts} == {
        ("YZD-01", ("photodiode",)),
        ("YZA-21", ("opamp",)),
        ("YZR-K", ("feedback_resistance", "divider")),
        ("YZC-G", ("feedback_capacitance",)),
        ("YZC-X", ("bypass",)),
    }
    opamp = part(found, "YZA-21")
    assert (opamp.maker, opamp.status, opamp.stock, opamp.lead_weeks) == (
        "Yonderbeck Analog",
        "active",
        4500,
        8,
    )
    family = part(found, "YZR-K")
    assert (family.status, family.stock, family.lead_weeks) == ("", None, None)


def test_pieces_are_those_of_all_builds(saved: Path) -> None:
    found = looked_at(saved, copied(saved, "other.json"), copied(saved, "third.json", chosen=2))
    assert part(found, "YZA-21").needed == 3 * 200
    assert part(found, "YZD-01").needed == 2 * 200
    assert part(found, "YZD-03").needed == 200
    assert part(found, "YZR-K").needed == 3 * 200 * 3  # Rf and two for the divider
    assert part(found, "YZC-X").needed == 3 * 200


def test_a_second_package_counts(saved: Path) -> None:
    data = json.loads(saved.read_text("utf-8"))
    data["candidates"][0]["reference"] |= {"buffered": True, "extra_package": True}
    found = looked_at(copied(saved, "other.json", candidates=data["candidates"]))
    assert part(found, "YZA-21").needed == 2 * 200


def test_drop_ins_and_values_are_told_apart(saved: Path) -> None:
    """One twin as it is; one that is fast enough only with a smaller Rf; one in another package; one too

    dear.
    """
    opamps = saved.parent / "opamps.csv"
    with_cells(opamps, "YZA-21", **FITS)
    with_copy(opamps, "YZA-21", part="YZA-T", maker="Quillfen Devices")
    with_copy(opamps, "YZA-21", part="YZA-V", gbw="400 kHz")
    with_copy(opamps, "YZA-21", part="YZA-P", package="MSOP-8")
    with_copy(opamps, "YZA-21", part="YZA-C", price="90")
    one = part(looked_at(saved), "YZA-21")
    assert (one.drop_ins, one.values, one.makers, one.fewest) == (1, 1, 2, 2)
    with_copy(opamps, "YZA-21", part="YZA-U", maker="Ottersill Optics")
    assert part(looked_at(saved), "YZA-21").drop_ins == 2


def test_an_unknown_outline_is_said(saved: Path) -> None:
    found = looked_at(saved)
    assert not part(found, "YZA-21").outlined
    assert part(found, "YZR-K").outlined


def test_what_serves_counts_only_where_it_serves_every_record() -> None:
    a, b, c = ("A", "Maker A"), ("B", "Maker B"), ("C", "Maker C")
    case = made_case(
        Serving(frozenset({a, b}), frozenset({c})),
        Serving(frozenset({b, c}), frozenset({a})),
        Serving(frozenset({b}), frozenset({c})),
    )
    one = summed(case, {"x": 0})
    assert (one.drop_ins, one.values, one.fewest) == (1, 1, 2)  # B as it is; C with other values
    assert one.makers == 2


def made_case(*served: Serving, holding: Catalogs | None = None) -> Case:
    held = holding if holding is not None else catalogs()
    part = Fitted("YZA-1", "Maker A", "SOIC-8", "single-8")
    return Case(part, {"opamp"}, {"x": []}, [held] * len(served), list(served), 100)


def test_each_record_having_its_own_is_still_none_that_serves_all() -> None:
    one = summed(
        made_case(
            Serving(frozenset({("B", "Maker B")}), frozenset()),
            Serving(frozenset({("C", "Maker C")}), frozenset()),
        ),
        {"x": 0},
    )
    assert one.alone
    assert one.fewest == 1


def test_of_several_catalogs_the_worst_is_said() -> None:
    nothing = Serving(frozenset(), frozenset())
    first = catalogs(opamps=[opamp(stock=900.0, lead_weeks=4.0)])
    second = catalogs(opamps=[opamp(stock=50.0, lead_weeks=None, status="last-time-buy")])
    third = catalogs(opamps=[opamp(part="YZA-9")])
    case = made_case(nothing, nothing)
    one = summed(replace_catalogs(case, first, second), {"x": 0})
    assert (one.status, one.stock, one.lead_weeks) == ("last-time-buy", 50.0, 4.0)
    assert one.short
    one = summed(replace_catalogs(case, first, third), {"x": 0})
    assert one.status == VANISHED
    assert one.lost


def replace_catalogs(case: Case, *held: Catalogs) -> Case:
    return replace(case, catalogs=list(held))


def test_makers_of_a_part_of_the_same_name_count() -> None:
    held = catalogs(opamps=[opamp(), opamp(maker="Maker Z")])
    one = summed(made_case(Serving(frozenset(), frozenset()), holding=held), {"x": 0})
    assert one.makers == 2


# The order


USUAL = Exposure(
    part="YZA-1",
    maker="Maker A",
    uses=("opamp",),
    records=("x",),
    status="active",
    outlined=True,
    stock=1000.0,
    lead_weeks=8.0,
    needed=100,
    makers=2,
    drop_ins=3,
    values=4,
    fewest=7,
)


def test_worst_first() -> None:
    expected = [
        replace(USUAL, drop_ins=0, values=0, fewest=0),
        replace(USUAL, drop_ins=0, values=0, fewest=1),
        replace(USUAL, status=VANISHED),
        replace(USUAL, status="obsolete"),
        replace(USUAL, status="last-time-buy"),
        replace(USUAL, status="not-for-new-designs"),
        replace(USUAL, stock=99.0),
        replace(USUAL, drop_ins=1, values=9),
        replace(USUAL, values=1),
        replace(USUAL, makers=1),
        replace(USUAL, lead_weeks=20.0),
        USUAL,
    ]
    rng = np.random.default_rng(1)
    mixed = [expected[i] for i in rng.permutation(len(expected))]
    assert sorted(mixed, key=worst_first) == expected


# Records whose candidate no longer holds


@pytest.mark.parametrize(
    ("edit", "why"),
    [
        (lambda folder: with_cells(folder / "opamps.csv", "YZA-21", stock="3"), ("stock",)),
        (lambda folder: with_cells(folder / "opamps.csv", "YZA-21", price="9"), ("misses cost",)),
        (lambda folder: without(folder / "opamps.csv", "YZA-21"), ("missing opamp",)),
        (lambda folder: None, ()),
    ],
)
def test_a_candidate_that_no_longer_holds_is_named(
    saved: Path, edit: Callable[[Path], None], why: tuple[str, ...]
) -> None:
    edit(saved.parent)
    found = looked_at(saved)
    assert [(one.record, one.why) for one in found.stale] == ([(str(saved), why)] if why else [])


def test_a_vanished_part_is_lost(saved: Path) -> None:
    without(saved.parent / "opamps.csv", "YZA-21")
    one = part(looked_at(saved), "YZA-21")
    assert (one.status, one.lost, one.stock) == (VANISHED, True, None)


# What is read and done how often


def test_requests_are_compiled_once_and_equal_candidates_looked_at_once(
    saved: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    calls: list[str] = []

    def counted(name: str, function: Callable[..., Any]) -> Callable[..., Any]:
        def call(*args: Any, **kwargs: Any) -> Any:
            calls.append(name)
            return function(*args, **kwargs)

        return call

    monkeypatch.setattr(exposures, "whole", counted("whole", exposures.whole))
    monkeypatch.setattr(exposures, "serving", counted("serving", exposures.serving))
    monkeypatch.setattr(shelf, "read_catalogs", counted("read", shelf.read_catalogs))
    request = saved.parent / "request.toml"
    second = saved.parent / "second.toml"
    second.write_text(request.read_text("utf-8").replace("quantity = 200", "quantity = 300"), "utf-8")
    inputs = json.loads(saved.read_text("utf-8"))["inputs"]
    others = [copied(saved, f"{k}.json") for k in range(3)]
    elsewhere = {"inputs": [inputs[0] | {"file": "second.toml"}, *inputs[1:]], "request_file": str(second)}
    others.append(copied(saved, "q.json", **elsewhere))
    told: list[str] = []
    taken = take_up([str(path) for path in (saved, *others, saved)])
    exposure(taken, told.append)
    assert calls.count("read") == 1
    assert calls.count("whole") == 2
    assert calls.count("serving") == 2 * 5
    assert sorted(told) == sorted(str(path) for path in (saved, *others))


def test_catalogs_are_read_again_where_the_quantity_chooses_rows(
    saved: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = saved.parent
    with_copy(folder / "opamps.csv", "YZA-21", price="2.00")
    source = folder / "source.toml"
    text = source.read_text("utf-8")
    header = '[file."opamps.csv"]'
    duplicates = f'{header}\nduplicates = "cheapest"'
    source.write_text(
        text.replace(header, duplicates) if header in text else f"{text}\n{duplicates}\n", "utf-8"
    )
    second = folder / "second.toml"
    second.write_text((folder / "request.toml").read_text("utf-8").replace("= 200 ", "= 300 "), "utf-8")
    inputs = json.loads(saved.read_text("utf-8"))["inputs"]
    elsewhere = {"inputs": [inputs[0] | {"file": "second.toml"}, *inputs[1:]], "request_file": str(second)}
    other = copied(saved, "q.json", **elsewhere)
    read: list[int] = []
    original = shelf.read_catalogs

    def counted(files: Any, options: Any) -> Catalogs:
        read.append(options.quantity)
        return original(files, options)

    monkeypatch.setattr(shelf, "read_catalogs", counted)
    take_up([str(saved), str(other)])
    assert read == [200, 300]


def test_a_record_named_twice_counts_once(saved: Path) -> None:
    taken = take_up([str(saved), str(saved.parent / "." / saved.name)])
    assert [one.name for one in taken] == [str(saved)]


# For a page


def test_the_exposure_of_one_candidate(saved: Path) -> None:
    reopened = reopen(saved)
    found = exposed(reopened, chosen_of(reopened.record))
    assert found == tuple(replace(one, records=("",)) for one in looked_at(saved).parts)


# What is refused


def refused(*paths: Path) -> list[str]:
    with pytest.raises(InputError) as caught:
        take_up([str(path) for path in paths])
    return [str(problem) for problem in caught.value.problems]


def test_every_problem_of_every_record_is_said_at_once(saved: Path, tmp_path: Path) -> None:
    wrong = copied(saved, "wrong.json", format="luxsift-shortlist/2")
    none = copied(saved, "none.json", chosen=None)
    said = refused(wrong, tmp_path / "gone.json", none, saved)
    assert len(said) == 3
    assert "another version" in said[0]
    assert "gone.json" in said[1]
    assert "marks no candidate as chosen" in said[2]


def test_a_vanished_catalog_is_named_once_as_seen_from_here(saved: Path) -> None:
    (saved.parent / "opamps.csv").unlink()
    said = refused(saved, copied(saved, "other.json"))
    assert len([line for line in said if str(saved.parent / "opamps.csv") in line]) == 1


def test_records_of_different_folders_keep_their_own_catalogs(saved: Path, tmp_path: Path) -> None:
    other = tmp_path / "other"
    other.mkdir()
    for name in ("record.json", "request.toml", "source.toml", "opamps.csv", "photodiodes.csv"):
        shutil.copy(tmp_path / name, other / name)
    for name in ("resistors.csv", "capacitors.csv"):
        shutil.copy(tmp_path / name, other / name)
    with_cells(other / "opamps.csv", "YZA-21", stock="300")
    found = looked_at(saved, other / "record.json")
    one = part(found, "YZA-21")
    assert (one.stock, one.needed, one.short) == (300.0, 400, True)
    assert one.records == (str(saved), str(other / "record.json"))
