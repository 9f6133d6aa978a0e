from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from optimizer.errors import clean
from optimizer.record.build import plain
from optimizer.report.cautions import cautions
from optimizer.report.reasons import WORDS, reason_lines
from optimizer.report.words import beside, margin_words, percent, spoken
from tests.made_up import record

DATA = record().data


@pytest.mark.parametrize(
    ("number", "words"),
    [
        (0, "0"),
        (999_999, "999,999"),
        (1_000_000, "1 million"),
        (12_345_678_901_234, "12.3 million million"),
        (4_560_000_000, "4.56 thousand million"),
        (7 * 10**18, "7 million million million"),
        (10**24, "1e+24"),
    ],
)
def test_spoken(number: int, words: str) -> None:
    assert spoken(number) == words


@pytest.mark.parametrize(
    ("margin", "words"),
    [
        (0.0, "exactly met"),
        (-0.0, "exactly met"),
        (0.0312, "3 % to spare"),
        (-0.04, "misses by 4 %"),
        (0.0042, "0.4 % to spare"),
        (1e-9, "under 0.01 % to spare"),
        (-1e-9, "misses by under 0.01 %"),
        (0.996, "100 % to spare"),
        (3.5, "350 % to spare"),
        (12.4, "12-fold to spare"),
        (1000.0, "1000-fold to spare"),
        (-1.0, "misses by 100 %"),
    ],
)
def test_margin_words(margin: float, words: str) -> None:
    assert margin_words(margin) == words


@given(st.floats(min_value=1e-12, max_value=20))
def test_a_margin_never_reads_as_nothing(fraction: float) -> None:
    assert percent(fraction) not in ("0 %", "-0 %")
    assert margin_words(-fraction).startswith("misses by")
    assert margin_words(fraction).endswith("to spare")


@pytest.mark.parametrize(
    ("value", "limit", "said"),
    [
        (45.9999, 46.0, ("45.9999 dB", "46 dB")),
        (46.0, 46.0, ("46 dB", "46 dB")),
        (None, 46.0, ("-", "46 dB")),
    ],
)
def test_a_miss_never_looks_like_its_limit(value: float | None, limit: float, said: tuple[str, str]) -> None:
    assert beside("snr", value, limit, DATA["request"]) == said


def test_full_scale_follows_the_requests_kind_of_light() -> None:
    request = plain(DATA["request"])
    request["light"] |= {"weakest": "0.004 W/m2", "strongest": "0.4 W/m2", "background": "0.0 W/m2"}
    value, limit = beside("full_scale", 0.5, 0.4, request)
    assert value.endswith("W/m2")
    assert limit.endswith("W/m2")


@given(st.text())
def test_cleaned_text_is_one_printable_line(text: str) -> None:
    cleaned = clean(text)
    assert cleaned.isprintable()
    assert "\x1b" not in cleaned


# The keys of the eligibility table of physics.md.
KEYS = "status excluded stock temperature wavelength supply reverse_bias input_range window dark_output load"
KEYS += " gain min_gain unstable missed_target cannot_beat"


def dropped(counts: dict[str, int], width: int = 80) -> str:
    lines = reason_lines({"candidates": [DATA["candidates"][0]], "search": {"dropped": counts}}, width)
    assert max(len(line.plain) for line in lines) <= width
    return " ".join(" ".join(line.plain for line in lines).split())


@pytest.mark.parametrize("key", KEYS.split())
def test_every_reason_has_words(key: str) -> None:
    text = dropped({"stock": 0, key: 1234})
    assert f"1,234 {key} {WORDS[key]}" in text
    assert "does not know" not in text
    assert "[assume]" not in text


def test_a_reason_of_a_later_version_is_still_counted() -> None:
    assert "3 pairs_of_tomorrow dropped for a reason" in dropped({"pairs_of_tomorrow": 3})


def test_blanks_share_a_row_that_counts_each_column() -> None:
    text = dropped({"missing:output_low": 40, "missing:price": 100, "stock": 120})
    assert "140 missing a value that a target or check needs is blank: price 100, output_low 40 120" in text
    assert "Why 260 other pairs dropped out" in text
    assert "[assume]" in text


@pytest.mark.parametrize(
    ("pairs", "counts", "said"),
    [
        (260, {"stock": 140, "supply": 120}, "Why all 260 pairs dropped out"),
        (300, {"stock": 140, "supply": 120}, "Why 260 pairs dropped out"),
        (1, {"stock": 1}, "Why 1 pair dropped out"),
    ],
)
def test_without_a_row_shown_there_are_no_other_pairs(pairs: int, counts: dict[str, int], said: str) -> None:
    data = {"candidates": [], "search": {"pairs": pairs, "dropped": counts}}
    assert reason_lines(data, 80)[0].plain == said


@pytest.mark.parametrize(
    ("wavelength", "word"),
    [(254e-9, "below 400 nm"), (850e-9, "blink reflex"), (1550e-9, "cornea")],
)
def test_cautions_fit_the_wavelength(wavelength: float, word: str) -> None:
    text = cautions({"light": {"wavelength": wavelength}})
    assert word in text
    for standard in ("IEC 60825-1", "IEC 62471", "IEC 60601-1", "ISO 13849-1", "EN 54", "IEC 61508"):
        assert standard in text
    assert "no evidence of compliance" in text


def test_visible_light_is_not_called_invisible() -> None:
    assert "invisible" not in cautions({"light": {"wavelength": 550e-9}})
