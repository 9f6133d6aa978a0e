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
from optimizer.report.answer import answer
from optimizer.report.corner import at_corner
from optimizer.report.page import compose
from optimizer.report.page.blocks import Block, Code, Facts, Figure, Formulas, Page, Section, Table, Words
from optimizer.report.page.terms import CONTRIBUTIONS, in_terms, money, term
from optimizer.report.reached import reach_columns
from optimizer.report.stepped import runs
from optimizer.report.words import beside, figure, margin_words, told_apart
from optimizer.review.dossier import Dossier
from optimizer.review.findings import Findings
from optimizer.review.reopen import Changed
from optimizer.vocabulary import VOCABULARY
from tests.report.page.made import COMPARED


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
        assert drawing.data is not None, key


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
    assert at_corner(limiting) in words(section(page, "compliance"))
    (worst, nominal), _limit = told_apart(
        limiting["name"], (limiting["worst"], limiting["value"]), limiting["limit"], cornered.request
    )
    said = words(section(page, "decision"))
    assert f"at its worst corner ({worst} there, {nominal} at nominal" in said
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


def test_the_cloud_names_the_cheapest_the_widest_and_the_front(page: Page, full: Dossier) -> None:
    cloud, drawing = full.findings.cloud, figures(page)["cloud"]
    assert cloud is not None
    assert cloud.complete
    assert f"The {cloud.cost.size} pairs that meet the request" in drawing.alternative
    assert drawing.data is not None
    assert [row[0].text for row in drawing.data.rows] == np.array(cloud.names)[cloud.front].tolist()
    row = full.candidate
    chosen = f"stands at {money(row['figures']['cost'], full.data)} and {margin_words(row['margin'])}."
    assert chosen in drawing.alternative


def test_a_cloud_that_is_cut_short_is_not_called_everything(full: Dossier) -> None:
    cloud = full.findings.cloud
    assert cloud is not None
    cut = replace(full, findings=replace(full.findings, cloud=replace(cloud, complete=False)))
    drawing = figures(compose(cut))["cloud"]
    assert "everything" not in drawing.title
    assert f"The {cloud.cost.size} lowest in cost of the pairs" in drawing.alternative
    assert "more meet" in drawing.alternative


def test_a_setting_that_is_not_the_cheapest_of_its_pair_is_said_to_be_so(full: Dossier) -> None:
    row = {**full.candidate, "figures": {**full.candidate["figures"], "cost": 3.0}}
    said = figures(compose(replace(full, candidate=row)))["cloud"].alternative
    assert "in a setting that is not the cheapest of its pair" in said
    assert "not the cheapest of its pair" not in figures(compose(full))["cloud"].alternative


def test_every_part_named_for_comparison_is_answered(page: Page, full: Dossier) -> None:
    parts = {part.heading: part for part in section(page, "alternatives").parts}
    for one in full.findings.compared:
        part = parts[f"Why not {one.name}"]
        texts = [block.text for block in part.blocks if isinstance(block, Words)]
        for sentence in answer(one.finding, one.data):
            assert in_terms(sentence) in texts[0]
        captions = [block.caption for block in part.blocks if isinstance(block, Table)]
        assert any("reaches" in caption for caption in captions) == bool(one.finding.reaches)
    assert "is not eligible: it fails supply" in str(parts["Why not YZA-41"])
    assert "SNR" in str(parts["Why not YZA-31"])


def test_what_a_part_reaches_is_the_same_as_on_a_terminal(page: Page, full: Dossier) -> None:
    one = next(one for one in full.findings.compared if one.name == "YZA-31")
    part = next(p for p in section(page, "alternatives").parts if p.heading == "Why not YZA-31")
    table = next(b for b in part.blocks if isinstance(b, Table) and "reaches" in b.caption)
    columns = reach_columns(one.finding, full.request)
    assert [row[0].text for row in table.rows] == [term(name) for name in columns[0].cells]
    for place, column in enumerate(columns[1:], 1):
        assert tuple(row[place].text for row in table.rows) == column.cells


def test_every_step_of_every_target_has_its_cost(page: Page, full: Dossier) -> None:
    found, table = full.findings.prices, next(tables(section(page, "prices")))
    assert found is not None
    assert found.base is not None
    base = figure("cost", found.base.figures["cost"], full.request)
    assert [row[0].text for row in table.rows] == [term(row.target) for row in found.rows]
    for row, said in zip(found.rows, table.rows, strict=True):
        texts = [cell.text for cell in said[2:]]
        assert float(texts.pop(texts.index(next(t for t in texts if t.startswith(base))))) > 0.0
        for step, text in zip(row.steps, texts, strict=True):
            if step.candidate is None:
                assert text == "none"
            elif not step.changes:
                assert text == "same"
            else:
                assert float(text) == pytest.approx(step.candidate.figures["cost"], rel=5e-3)


def test_what_the_steps_change_is_said_once_for_neighbours(page: Page, full: Dossier) -> None:
    found = full.findings.prices
    assert found is not None
    _overview, changed = tables(section(page, "prices"))
    moving = [row for row in found.rows if any(step.changes or not step.candidate for step in row.steps)]
    assert [row[0].text for row in changed.rows] == [
        term(row.target) for row in moving for _run in runs(row.steps)
    ]
    still = [term(row.target) for row in found.rows if row not in moving]
    for name in still:
        assert name in words(section(page, "prices"))
    assert "It is the one justified here" in words(section(page, "prices"))


def test_the_prices_say_where_another_row_is_justified(full: Dossier) -> None:
    other = replace(full, candidate=full.data["candidates"][1])
    assert "It is not the one justified here" in words(section(compose(other), "prices"))


def test_the_supply_of_every_part_is_there(page: Page, full: Dossier) -> None:
    (table,) = tables(section(page, "exposure"))
    for part, row in zip(full.findings.exposure, table.rows, strict=True):
        assert row[0].text.startswith(part.part)
        assert [cell.text for cell in row[6:9]] == [str(part.makers), str(part.drop_ins), str(part.values)]
        assert ("no substitute" in row[9].text) == part.alone
        assert (part.part in words(section(page, "exposure"))) == part.alone


def test_a_near_miss_that_lacks_sources_alone_says_so(full: Dossier) -> None:
    row = {**full.data["candidates"][1], "rank": 9, "missed": ["opamp_sources"]}
    request = {**full.request, "resilience": {"opamp_sources": 2}}
    record = Record({**full.data, "request": request, "near_misses": [row]})
    every = [
        cell.text for table in tables(compose(replace(full, record=record))) for r in table.rows for cell in r
    ]
    assert "op-amps of 1 of 2 makers serve, in this package and pinout" in every


def test_targets_are_called_as_in_a_sentence() -> None:
    assert in_terms("full_scale misses; snr (1 dB), slew") == "full scale misses; SNR (1 dB), slew"
    assert in_terms("photodiode snr-7 or my_snr") == "photodiode snr-7 or my_snr"


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
    assert tuple(justify.compare) == COMPARED


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
