"""The words of `whynot`: every check, every way to end, nothing cut, nothing wider than the terminal."""

from __future__ import annotations

import re
from dataclasses import replace
from math import inf, nan
from typing import Any

import pytest

from optimizer.catalog.parts import Catalogs
from optimizer.record.whynot import as_record
from optimizer.report import to_text
from optimizer.report.answer import answer
from optimizer.report.reached import best_words, proof, reach_margin
from optimizer.report.whynot import whynot_lines
from optimizer.request.types import Ambient, Request, Resilience
from optimizer.search.inquiry.best import Best
from optimizer.search.inquiry.finding import Finding, Reach, Subject
from optimizer.search.inquiry.lookup import Part
from optimizer.search.inquiry.whynot import whynot
from optimizer.study import Study
from tests.made_up import MISS, study
from tests.search import made

WIDTHS = [60, 66, 72, 80, 100, 120, 160]
DATA = as_record(study(), Finding(())).data


def looked_at(names: list[str], request: Request, catalogs: Catalogs) -> tuple[Finding, Any]:
    finding = whynot(request, catalogs, names)
    made_study = Study(request, catalogs, study().request_source)
    return finding, as_record(made_study, finding).data


def joined(text: str) -> str:
    return re.sub(r"\s+", " ", text)


def text_of(names: list[str], request: Request, catalogs: Catalogs, width: int = 80) -> str:
    return to_text(whynot_lines(*looked_at(names, request, catalogs), width), colour=False)


# Targets in words


def reach(alone: Best, together: Best, value: float | None = 45.0, margin: float = -0.1) -> Reach:
    return Reach("snr", 46.0, alone, together, value, margin)


def test_best_values_in_words() -> None:
    request = DATA["request"]
    plain = reach(Best(71.234), Best(None))
    assert best_words(plain, plain.alone, request) == "71.2 dB"
    assert best_words(plain, plain.together, request) == "never"
    assert best_words(plain, Best(nan), request) == "does not exist"
    assert best_words(plain, Best(45.9999), request) == "45.9999 dB"  # told apart from the limit
    assert best_words(plain, Best(71.234, 75.0), request) == "71.2 dB+"
    assert best_words(plain, Best(71.234, 71.2401), request) == "71.2 dB"  # proven as far as it is shown
    assert best_words(plain, Best(71.234, inf), request) == "71.2 dB+"
    assert reach_margin(plain, "snr") == "misses by 10\u00a0%, limiting"
    assert reach_margin(replace(plain, value=None), "cost") == "does not exist"


def test_what_is_not_proven_is_said_with_its_bound() -> None:
    request = DATA["request"]
    finding = Finding((), pairs=1, reaches=(reach(Best(71.2), Best(46.5)),))
    (only,) = proof(finding, request)
    assert only.startswith("Proven over every setting of 1 pair: none reads better than a best value and")
    loose = replace(finding, reaches=(reach(Best(71.2, 74.0), Best(46.5, inf)),))
    first, second = proof(loose, request)
    assert "a best value, those marked + apart, and" in first
    assert second == (
        "+ found, but not proven the best: snr alone is never above 74 dB; "
        "snr with the others met is not bounded."
    )


# The answer, for every way to end

OUTLINE = {"package": "SOIC-8", "pinout": "single"}
ENDS: dict[str, tuple[list[str], Request, Catalogs, str]] = {
    "meets, and is first": (
        ["YZA-1"],
        made.request(targets={"bandwidth": 10e3}, currency="EUR"),
        made.catalogs(),
        "YZA-1 (Maker A), an op-amp, meets the request. It is row 1 of the shortlist by cost: 5.09 EUR.",
    ),
    "meets, and is second": (
        ["YZA-1"],
        made.request(targets={"bandwidth": 10e3}),
        made.catalogs((made.opamp(), made.opamp(part="YZA-2", price=[(1.0, 1.5)]))),
        "It is row 2 of the shortlist by cost: it costs 5.09, 0.500 more than row 1.",
    ),
    "meets, below what is shown": (
        ["YZA-1"],
        made.request(targets={"bandwidth": 10e3}, ranking={"show": 1}),
        made.catalogs((made.opamp(), made.opamp(part="YZA-2", price=[(1.0, 1.5)]))),
        "It stands below the 1 row of the shortlist by cost: it costs 5.09, 0.500 more than row 1.",
    ),
    "misses one target": (
        ["YZA-1"],
        made.request(targets={"cost": 4.0}),
        made.catalogs(),
        "misses the request: at its setting of largest margin, with YZD-1, cost misses by 21 % (5.09, at "
        "most 4.00). Out of reach even alone, whatever the others do: cost (5.09 at best, at most 4.00). "
        "Dropping this one target would let it through. With all others met: cost (5.09 at best, at most "
        "4.00).",
    ),
    "misses targets that conflict": (
        ["YZA-1", "YZD-1"],
        made.request(targets={"bandwidth": 500e3, "snr": 45.0}),
        made.catalogs(),
        "YZA-1 (Maker A) with YZD-1 (Maker B) misses the request: at its setting of largest margin, "
        "bandwidth misses by 58 % (211 kHz, needs 500 kHz). Dropping any one of these targets would let it "
        "through. With all others met: bandwidth (34.3 kHz at best, needs 500 kHz); snr (27.7 dB at best, "
        "needs 45 dB).",
    ),
    "set aside, and meets": (
        ["YZA-1"],
        made.request(targets={"bandwidth": 10e3}, quantity=100),
        made.catalogs((made.opamp(stock=40.0, status="obsolete"),)),
        "YZA-1 (Maker A), an op-amp, is not eligible: it fails status and stock. With status and stock set "
        "aside it would meet the request. All that follows is with status and stock set aside. Nothing else "
        "in the catalogs meets the request.",
    ),
    "set aside, and misses": (
        ["YZA-1"],
        made.request(targets={"cost": 4.0}),
        made.catalogs((made.opamp(status="obsolete"),)),
        "With status set aside it would miss the request. All that follows is with status set aside.",
    ),
    "stopped for good": (
        ["YZA-1", "YZD-1"],
        made.request(),
        made.catalogs((made.opamp(status="obsolete", gbw=None),)),
        "YZA-1 (Maker A) with YZD-1 (Maker B) is not eligible: YZA-1 (Maker A) fails status and missing. Nor "
        "would it be with status set aside, so its figures were not looked at.",
    ),
    "no eligible setting": (
        ["YZA-1"],
        made.request(),
        made.catalogs((made.opamp(open_loop_gain=1.0),)),
        "YZA-1 (Maker A), an op-amp, has no eligible setting. The setting that gets furthest fails gain: "
        "open-loop gain 0 dB; 1 + Rf/Rsh is",
    ),
    "nothing to pair with": (
        ["YZA-1"],
        made.request(),
        made.catalogs(photodiodes=(made.diode(status="obsolete"),)),
        "is eligible, but nothing in the catalogs that it could be paired with is.",
    ),
    "too few makers": (
        ["YZA-1"],
        made.request(targets={"bandwidth": 10e3}, resilience=Resilience(opamp_sources=2)),
        made.catalogs((made.opamp(**OUTLINE),)),
        "meets every target, but not with op-amps of as many makers as asked for.",
    ),
    "a family": (
        ["YZR-1"],
        made.request(targets={"bandwidth": 10e3}),
        made.catalogs(),
        "YZR-1 (Maker C), a resistor family, meets the request.",
    ),
    "impossible": (
        ["YZA-1"],
        made.request(supply={"guard": 3.0}),
        made.catalogs(),
        "No part could meet this request, so nothing was searched:",
    ),
}


@pytest.mark.parametrize("name", ENDS)
def test_the_answer_comes_first(name: str) -> None:
    names, request, catalogs, said = ENDS[name]
    text = joined(text_of(names, request, catalogs))
    assert said in text, text
    assert text.startswith("made ")


@pytest.mark.parametrize(
    ("alone", "said"),
    [
        (Best(47.0), "Each target can be met alone, but dropping no single target would let it through."),
        (Best(45.0, 47.0), "Dropping no single target would let it through."),  # not proven to miss
        (Best(45.0), "Out of reach even alone, whatever the others do: snr (45 dB at best, needs 46 dB)."),
        (Best(nan), "Out of reach even alone, whatever the others do: snr (does not exist at best, needs"),
    ],
)
def test_what_stands_in_the_way(alone: Best, said: str) -> None:
    part = Part("opamps", 0, "YZA-14", "Yonderbeck Analog")
    subject = Subject(part, (), (), None)
    missed = Finding((subject,), pairs=1, eligible=1, reaches=(reach(alone, Best(None)),), largest=MISS)
    assert said in " ".join(answer(missed, as_record(study(), missed).data))


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", ENDS)
def test_no_line_is_wider_than_the_terminal(name: str, width: int) -> None:
    names, request, catalogs, _ = ENDS[name]
    lines = text_of(names, request, catalogs, width).split("\n")
    assert [line for line in lines if len(line) > width] == []


def test_the_caution_and_the_model_are_always_told() -> None:
    names, request, catalogs, _ = ENDS["no eligible setting"]
    text = joined(text_of(names, request, catalogs))
    assert "Not in the model:" in text
    assert "Caution: laser and LED sources can injure eyes" in text


def test_no_name_drives_the_terminal() -> None:
    evil = "\x1b[31m<b>[bold]"
    table = made.catalogs((made.opamp(part=evil, maker="M\nN", status="obsolete"),))
    text = text_of([evil], made.request(ambient=Ambient()), table)
    assert "\x1b" not in text
    assert "\\x1b[31m<b>[bold] (M N)" in text


def test_the_answer_is_free_of_layout() -> None:
    names, request, catalogs, _ = ENDS["misses one target"]
    sentences = answer(*looked_at(names, request, catalogs))
    assert all(sentence.endswith(".") for sentence in sentences)
