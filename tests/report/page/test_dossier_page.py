"""What the page says: all that the record holds, in its own numbers."""

from __future__ import annotations

import shlex
from collections.abc import Iterator
from dataclasses import replace

import numpy as np
import pytest

from optimizer.cli.arguments import parse
from optimizer.margins import margin
from optimizer.quantities import show
from optimizer.record import Record
from optimizer.report.corner import at_corner
from optimizer.report.page import compose
from optimizer.report.page.blocks import Block, Code, Facts, Figure, Formulas, Page, Section, Table, Words
from optimizer.report.page.terms import CONTRIBUTIONS, term
from optimizer.report.words import beside, figure, margin_words, told_apart
from optimizer.review.dossier import Dossier
from optimizer.review.findings import Findings
from optimizer.review.reopen import Changed
from optimizer.vocabulary import VOCABULARY


@pytest.fixture(scope="module")
def page(full: Dossier) -> Page:
    return compose(full)


def section(page: Page, key: str) -> Section:
    return next(section for section in page.sections if section.key == key)


def blocks(part: Section | Page) -> Iterator[Block]:
    sections = part.sections if isinstance(part, Page) else (part,)
    for each in sections:
        yield from each.blocks
        for inner in each.parts:
            yield from inner.blocks


def tables(part: Section | Page) -> Iterator[Table]:
    for block in blocks(part):
        if isinstance(block, Table):
            yield block
        elif isinstance(block, Figure) and block.data is not None:
            yield block.data


def words(part: Section | Page) -> str:
    return " ".join(block.text for block in blocks(part) if isinstance(block, Words))


def figures(page: Page) -> dict[str, Figure]:
    return {block.key: block for block in blocks(page) if isinstance(block, Figure)}


def test_sections_stand_in_the_order_in_which_a_review_reads_them(page: Page) -> None:
    keys = [section.key for section in page.sections]
    expected = "decision compliance request formulas behaviour tolerance alternatives prices exposure"
    assert keys == [*expected.split(), "limits", "sources"]


def test_sections_without_findings_are_left_out(dossier: Dossier) -> None:
    keys = {section.key for section in compose(replace(dossier, findings=Findings())).sections}
    assert not keys & {"tolerance", "prices", "exposure"}


def test_the_decision_names_parts_wiring_and_what_limits(page: Page, full: Dossier) -> None:
    row = full.candidate
    said = words(section(page, "decision"))
    for key in ("photodiode", "photodiode_maker", "opamp", "opamp_maker", "wiring"):
        assert row[key] in said
    assert f"limited by {term(row['limiting'])} with {margin_words(row['margin'])}" in said


def test_every_target_is_held_to_its_limit(page: Page, full: Dossier) -> None:
    (table,) = tables(section(page, "compliance"))
    for target, row in zip(full.candidate["targets"], table.rows, strict=True):
        value, limit = beside(target["name"], target["value"], target["limit"], full.request)
        assert row[0].text == term(target["name"])
        assert row[1].text == value
        assert row[2].text.endswith(limit)
        assert row[3].text == margin_words(target["margin"])
        assert row[3].bar == min(1.0, target["margin"] / full.request["ranking"]["comfort"])
        assert "meets" in row[4].text
    (marked,) = table.marked
    assert full.candidate["targets"][marked]["name"] == full.candidate["limiting"]


def test_the_request_is_there_with_units(page: Page, full: Dossier) -> None:
    facts = dict(
        pair for block in blocks(section(page, "request")) if isinstance(block, Facts) for pair in block.pairs
    )
    assert facts["wavelength"] == show(full.request["light"]["wavelength"], "length")
    assert facts["hottest"] == show(full.request["ambient"]["hottest"], "temperature")
    assert facts["divider, bypass"] == show(full.request["space"]["divider"]["bypass"], "capacitance")
    assert facts["gbw"] == "30 %"
    assert facts["quantity"] == "200"


def test_every_figure_is_worked_to_the_recorded_value(page: Page, full: Dossier) -> None:
    worked = {one.name: one for block in blocks(page) if isinstance(block, Formulas) for one in block.each}
    for name in VOCABULARY:
        expected = figure(name, full.candidate["figures"][name], full.request, digits=5).split()
        number, *unit = worked[term(name)].value.split()
        assert (float(number), unit) == (float(expected[0]), expected[1:]), name
        assert worked[term(name)].source


def test_drawings_say_the_recorded_numbers(page: Page, full: Dossier) -> None:
    found, row = figures(page), full.candidate["figures"]
    for key, names in {
        "gain": ("bandwidth", "phase_margin", "transresistance"),
        "budget": ("output_noise_weak",),
    }.items():
        for name in names:
            assert figure(name, row[name], full.request) in found[key].alternative


def test_every_drawing_is_there_with_its_data(page: Page) -> None:
    expected = {"gain", "density", "budget", "levels", "step", "spread", "margins", "cloud"}
    assert figures(page).keys() == expected
    for key, drawing in figures(page).items():
        assert drawing.alternative.endswith("."), key
        assert drawing.data is not None or key == "cloud"


def test_the_noise_budget_sums_to_the_recorded_noise(full: Dossier) -> None:
    total = np.sqrt(sum(full.glass.noise.budget.values()))
    assert total == pytest.approx(full.candidate["figures"]["output_noise_weak"], rel=1e-8)


def test_every_contribution_has_a_name(full: Dossier) -> None:
    assert full.glass.noise.budget.keys() <= CONTRIBUTIONS.keys()


def test_strongest_light_stays_inside_the_guard_as_full_scale_says(full: Dossier) -> None:
    for level in full.glass.levels:
        assert level.guard_low <= level.strongest <= level.guard_high


def test_the_yield_is_the_recorded_one(page: Page, full: Dossier) -> None:
    drawn = full.candidate["yield"]
    said = words(section(page, "tolerance"))
    assert f"{drawn['passed']:,} of {drawn['draws']:,} receivers" in said
    assert ("does not reach" not in said) == drawn["meets"]
    assert "gbw 30 %" in said.replace("\u00a0", " ")


def test_histograms_are_of_the_draws_that_the_record_counts(full: Dossier) -> None:
    drawn = full.candidate["yield"]
    for target in full.candidate["targets"]:
        values = full.findings.drawn[target["name"]]
        assert values.size == drawn["draws"]
        missed = int(np.sum(margin(target["name"], values, target["limit"]) < 0.0))
        assert missed == drawn["failures"].get(target["name"], 0)


def test_corners_stand_beside_the_nominal_values(cornered: Dossier) -> None:
    page = compose(cornered)
    table, places = tables(section(page, "compliance"))
    assert table.headings[1:3] == ("nominal", "worst corner")
    for target, row, place in zip(cornered.candidate["targets"], table.rows, places.rows, strict=True):
        said = told_apart(
            target["name"], (target["value"], target["worst"]), target["limit"], cornered.request
        )
        assert (row[1].text, row[2].text) == said[0]
        assert len(place[1].text.split(", ")) == max(1, len(target["corner"]))
    limiting = next(t for t in cornered.candidate["targets"] if t["name"] == cornered.candidate["limiting"])
    assert at_corner(limiting)
    assert at_corner(limiting) in words(section(page, "decision"))
    assert "at the worst corner of these spreads" in words(section(page, "tolerance"))


def test_second_sources_are_named(full: Dossier) -> None:
    other = {"opamp": "YZ-2", "opamp_maker": "Yester", "cost": 1.5, "limiting": "snr", "margin": 0.1}
    sourced = replace(full, candidate={**full.candidate, "alternates": [other]})
    table = list(tables(section(compose(sourced), "decision")))[1]
    assert [cell.text for cell in table.rows[0]] == ["YZ-2", "Yester", "1.50 EUR", "SNR, 10 % to spare"]


def test_every_alternative_is_there_with_what_limits_or_stops_it(page: Page, full: Dossier) -> None:
    every = [
        [cell.text for cell in row] for table in tables(section(page, "alternatives")) for row in table.rows
    ]
    for row in full.data["candidates"]:
        mine = next(texts for texts in every if texts[0] == str(row["rank"]))
        assert {row["photodiode"], row["opamp"]} <= set(mine)
        assert margin_words(row["margin"]) in mine[-1]
    for row in full.data["near_misses"]:
        mine = next(texts for texts in every if texts[0] == str(row["rank"]))
        assert "misses by" in " ".join(mine)


def test_assumptions_and_cautions_are_there(page: Page, full: Dossier) -> None:
    limits = section(page, "limits")
    said = words(limits) + " ".join(
        cell.text for table in tables(limits) for row in table.rows for cell in row
    )
    for standard in ("60825-1", "62471", "60601-1", "61508", "13849-1", "EN 54"):
        assert standard in said
    assert "local codes and licensed practitioners decide" in said
    assert "Light above 700 nm is invisible" in said
    assert "Not in the model" in [part.heading for part in limits.parts]
    for name in full.candidate["assumed"]:
        assert name in said


def test_every_input_is_there_with_its_hash(page: Page, full: Dossier) -> None:
    (table,) = tables(section(page, "sources"))
    hashes = [row[2].text for row in table.rows]
    assert hashes == [entry["sha256"] for entry in full.data["inputs"]]
    assert {row[3].text for row in table.rows} == {"unchanged"}


def test_the_commands_are_commands(page: Page, full: Dossier) -> None:
    (code,) = (block for block in blocks(section(page, "sources")) if isinstance(block, Code))
    search, justify = (parse(shlex.split(line)[1:]) for line in code.lines)
    assert search.command == "shortlist"
    assert search.request == full.place.request
    assert (search.by, search.show) == ("cost", str(full.request["ranking"]["show"]))
    assert (justify.command, justify.record, justify.rank) == ("justify", search.save, "1")


def test_changed_inputs_are_said_first_and_in_the_table(full: Dossier) -> None:
    changes = (
        Changed("opamps.csv", "ab", "cd"),
        Changed("source.toml", "ab", None),
        Changed("new.csv", None, "e"),
    )
    page = compose(replace(full, changed=changes))
    first = section(page, "decision").blocks[0]
    assert isinstance(first, Words)
    assert first.tone == "alert"
    assert "opamps.csv, source.toml and new.csv are not what" in first.text
    (table,) = tables(section(page, "sources"))
    states = {row[0].text: row[3].text for row in table.rows}
    assert states["opamps.csv"] == "changed since"
    assert states["source.toml"] == "gone since"
    assert states["new.csv"] == "new since"
    assert states["resistors.csv"] == "unchanged"


def test_another_row_says_what_stands_before_it(full: Dossier) -> None:
    other = replace(full, candidate=full.data["candidates"][1])
    said = words(section(compose(other), "decision"))
    first = full.data["candidates"][0]
    assert f"Row 1, {first['photodiode']}" in said
    assert "It is row 2 of the" in said


def test_a_substitute_says_what_it_replaces(full: Dossier) -> None:
    old, new = full.data["candidates"][1], {**full.candidate, "change": "redesign", "changed": ["photodiode"]}
    replaces = {"candidate": old, "gone": [], "out": [], "keep": []}
    record = Record({**full.data, "replaces": replaces})
    page = compose(replace(full, record=record, candidate=new))
    decision = section(page, "decision")
    assert "It is row 1 of the four substitutes shown, the least change first" in words(decision)
    assert "Kind of change: redesign." in words(decision)
    changed = list(tables(decision))[1].rows
    assert changed[0][0].text == "photodiode"
    assert old["photodiode"] in changed[0][1].text
    assert new["photodiode"] in changed[0][1].text
    (code,) = (block for block in blocks(section(page, "sources")) if isinstance(block, Code))
    assert [line.split()[1] for line in code.lines] == ["justify"]
