"""Every eligibility check in words, with its numbers."""

from __future__ import annotations

from math import inf, nan
from typing import Any

import pytest

from optimizer.figures import CHECKS
from optimizer.report.checks import WORDS, check_words
from optimizer.search.inquiry.eligibility import (
    FAILED,
    NOT_CHECKED,
    NOT_REACHED,
    PARTLY,
    PASSED,
    UNKNOWN,
    Check,
)


def test_every_check_has_its_words() -> None:
    assert set(WORDS) == {*CHECKS, "values"}


@pytest.mark.parametrize(
    ("key", "verdict", "facts", "said"),
    [
        ("status", PASSED, {"status": "active", "admitted": ("active",)}, "active"),
        (
            "status",
            FAILED,
            {"status": "obsolete", "admitted": ("active", "last-time-buy")},
            "obsolete; the request takes active or last-time-buy",
        ),
        ("stock", FAILED, {"stock": 40.0, "needed": 300.0}, "40 in stock, the build needs 300"),
        (
            "stock",
            PARTLY,
            {"stock": 400.0, "needed": 300.0, "with_buffer": 600.0},
            "400 in stock, the build needs 300, or 600 where a buffer takes a second package",
        ),
        (
            "stock",
            NOT_CHECKED,
            {"stock": nan, "needed": 1200.0},
            "blank, so not checked; the build needs 1,200",
        ),
        (
            "temperature",
            FAILED,
            {"low": 0.0, "high": 70.0, "coldest": -20.0, "hottest": 60.0},
            "0 °C to 70 °C; the ambient is -20 °C to 60 °C",
        ),
        ("temperature", NOT_CHECKED, {"low": 0.0, "high": 70.0}, "the request states no ambient"),
        ("temperature", UNKNOWN, {"low": nan, "high": 70.0}, "the catalog leaves it blank"),
        (
            "supply",
            PASSED,
            {"low": 2.7, "high": 5.5, "least": 3.136, "most": 3.465, "nominal": 3.3, "tolerance": 0.05},
            "2.7 V to 5.5 V; the request's 3.3 V within 5 % is 3.14 V to 3.46 V",
        ),
        (
            "supply",
            FAILED,
            {"low": 2.7, "high": 5.5, "least": 9.0, "most": 9.0, "nominal": 9.0, "tolerance": 0.0},
            "2.7 V to 5.5 V; the request's is 9 V",
        ),
        (
            "missing",
            FAILED,
            {"columns": ("bias_doubling", "offset_drift"), "role": "opamps"},
            "bias_doubling and offset_drift blank; [assume.opamps] fills blanks",
        ),
        (
            "missing",
            PARTLY,
            {"columns": ("reverse_max",), "biased": ("reverse_max",), "unbiased": (), "role": "photodiodes"},
            "reverse_max blank, which biased wirings need; [assume.photodiodes] fills blanks",
        ),
        ("missing", PASSED, {"columns": (), "role": "opamps"}, "all that is needed is known"),
        ("excluded", PASSED, {}, "nothing in the request excludes it"),
        (
            "excluded",
            FAILED,
            {"exclude": ("YZA-1",), "maker": "M\x1b[31m", "makers": ("A", "B", "C")},
            "the request excludes YZA-1; made by M\\x1b[31m; the request takes A, B or C",
        ),
        (
            "excluded",
            FAILED,
            {"require": ("YZA-2",), "package": "", "packages": ("SOIC-8",)},
            "the request requires YZA-2; package blank; the request takes SOIC-8",
        ),
        (
            "excluded",
            FAILED,
            {"area": 4e-6, "area_from": 5e-6, "area_to": inf},
            "active area 4 mm2; the request takes 5 mm2 or more",
        ),
        (
            "wavelength",
            FAILED,
            {"low": 400e-9, "high": 1.1e-6, "wavelength": 254e-9, "responsivity": nan},
            "responsivity is known from 400 nm to 1.1 \u00b5m; the request's light is at 254 nm",
        ),
        (
            "wavelength",
            FAILED,
            {"low": 400e-9, "high": 1.1e-6, "wavelength": 1.1e-6, "responsivity": 0.0},
            "no responsivity at 1.1 \u00b5m",
        ),
        (
            "reverse_bias",
            PARTLY,
            {"reverse_max": 3.0, "largest": 5.25, "passing": 5.0, "contexts": 9.0},
            "stands 3 V; wirings ask for up to 5.25 V at the high end of the supply",
        ),
        (
            "input_range",
            PARTLY,
            {"low": 0.0, "high": 2.917, "passing": 327.0, "contexts": 567.0},
            "Vref may lie from 0 V to 2.92 V; 327 of 567 wirings with their references pass",
        ),
        (
            "input_range",
            FAILED,
            {"low": 6.0, "high": 4.0, "passing": 0.0, "contexts": 9.0},
            "no Vref is inside the input range at both ends of the supply tolerance; "
            "0 of 9 wirings with their references pass",
        ),
        (
            "window",
            FAILED,
            {"width": -0.5, "from_low": 3.0, "from_high": 2.5},
            "0 V between output limits that are 3 V from V- and 2.5 V from V+",
        ),
        (
            "values",
            FAILED,
            {"kind": "resistance", "from": 1e5, "to": 2.2e7, "count": 0.0, "low": 1e8, "high": 1e10},
            "0 values inside 100 kohm to 22 Mohm; it offers 100 Mohm to 10 Gohm",
        ),
        (
            "dark_output",
            FAILED,
            {"lowest": 0.01, "highest": 0.2, "lower": 0.05, "upper": 4.9, "short": 0.04},
            "without light the output lies from 10 mV to 200 mV; the limits less guard are 50 mV to 4.9 V: "
            "40 mV too far",
        ),
        (
            "load",
            FAILED,
            {"load": 1e3, "needed": 5.3e-3, "output_current": 4e-3},
            "1 kohm and the feedback take 5.3 mA; it drives 4 mA",
        ),
        ("load", NOT_CHECKED, {}, "the request states no load"),
        ("gain", FAILED, {"dc_gain": 10.0, "needed": 100.0}, "open-loop gain 20 dB; 1 + Rf/Rsh is 40 dB"),
        (
            "min_gain",
            FAILED,
            {"noise_gain": 3.5, "min_gain": 5.0, "buffered": 0.0, "follower": 60.0, "needed": 45.0},
            "noise gain 1 + Cin/Cf 3.5 V/V; stable from 5 V/V",
        ),
        (
            "min_gain",
            FAILED,
            {"noise_gain": 9.0, "min_gain": 1.0, "buffered": 1.0, "follower": 30.0, "needed": 45.0},
            "no buffer: it needs a noise gain of 1 V/V, and as a follower has a phase margin of 30 deg, "
            "where 1 V/V and 45 deg are asked for",
        ),
        (
            "unstable",
            FAILED,
            {"phase_margin": -12.0},
            "phase margin -12 deg at the most stable setting at the ends of the ranges",
        ),
        ("unstable", NOT_REACHED, {}, "no setting gets as far"),
        (
            "input_range",
            FAILED,
            {},
            "each part passes in some wiring with its reference, but none passes with both",
        ),
    ],
)
def test_a_check_in_words(key: str, verdict: str, facts: dict[str, Any], said: str) -> None:
    assert check_words(Check(key, verdict, facts)) == said
