"""What is said before any search: each reason, and never where something meets."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from optimizer import search
from optimizer.request.types import Converter
from optimizer.search import plain
from optimizer.search import space as spaces
from tests.catalog.made import GOOD, table
from tests.search.instances import small
from tests.search.made import Row, capacitor, catalogs, diode, opamp, reached, request, resistor


def said(made: Any = None, **asked: Any) -> tuple[str, ...]:
    return search.shortlist(request(**asked), made or catalogs()).impossible


GROUND = {"references": ("ground",)}

REASONS: dict[str, tuple[Row, str]] = {
    "no reverse bias": ({"space": {**GROUND, "wirings": ("rising-biased",)}}, "wiring"),
    "no resistor": ({"space": {"resistance": (110e3, 120e3)}}, "resistor"),
    "no capacitor": ({"space": {"capacitance": (1.1e-12, 1.2e-12), "no_capacitor": False}}, "capacitor"),
    "converter above": ({"converter": Converter(12, 0.0, 5.1)}, "converter"),
    "converter below": ({"converter": Converter(12, -0.1, 3.0)}, "converter"),
    "guard": ({"supply": {"guard": 2.6}}, "guard"),
    "guard and tolerance": ({"supply": {"guard": 2.3, "tolerance": 0.1}}, "guard"),
    "guard and converter": ({"supply": {"guard": 0.6}, "converter": Converter(12, 0.0, 1.0)}, "guard"),
    "step": ({"targets": {"snr": 40.0}, "converter": Converter(9, 0.0, 5.0)}, "step"),
    "step, dynamic range": (
        {"targets": {"dynamic_range": 80.0}, "converter": Converter(8, 0.0, 5.0)},
        "step",
    ),
    "shot noise": ({"targets": {"snr": 100.0, "bandwidth": 100e3}}, "shot"),
}


@pytest.mark.parametrize("name", REASONS)
def test_each_reason_is_given_before_any_search(name: str) -> None:
    asked, word = REASONS[name]
    outcome = search.shortlist(request(**asked), catalogs())
    assert len(outcome.impossible) >= 1
    assert word in " ".join(outcome.impossible)
    assert outcome.proven
    assert outcome.evaluated == 0
    assert outcome.candidates == outcome.near_misses == ()


@pytest.mark.parametrize("name", [name for name in REASONS if not name.startswith("converter")])
def test_what_is_called_impossible_is_met_by_nothing(name: str) -> None:
    asked, _ = REASONS[name]
    try:
        ends = reached(request(**asked), catalogs())
    except ValueError:  # an axis without a single choice holds no setting at all
        assert name in ("no reverse bias", "no resistor", "no capacitor")
        return
    assert "meets" not in ends


NOT_QUITE: dict[str, Row] = {
    "guard": {"supply": {"guard": 1.2}},
    "converter at the rails": {"converter": Converter(16, 0.0, 5.0)},
    "converter on the supply": {"converter": Converter(16, 0.0, 5.0, True), "supply": {"tolerance": 0.1}},
    "step": {"targets": {"snr": 32.0}, "converter": Converter(12, 0.0, 5.0)},
    "shot noise": {"targets": {"snr": 38.0, "bandwidth": 10e3}},
}


@pytest.mark.parametrize("name", NOT_QUITE)
def test_what_can_be_met_is_not_called_impossible(name: str) -> None:
    outcome = search.shortlist(request(**NOT_QUITE[name]), catalogs())
    assert outcome.impossible == ()
    assert outcome.candidates


def test_dividers_that_nobody_sells_are_a_reason_where_nothing_else_is_asked_for() -> None:
    bare = catalogs(capacitors=[capacitor(to=10e-12)])
    assert said(bare, space={"references": ("divider",)})
    assert not said(bare, supply={"low": -5.0})


def test_families_without_a_price_offer_nothing() -> None:
    assert said(catalogs(resistors=[resistor(price=[])]))


def test_shot_noise_asks_for_the_most_sensitive_photodiode_that_passes() -> None:
    """Shot noise of 15 nA in 1 / (4 e1) of bandwidth: about 40 dB at 200 kHz, whatever the parts."""
    assert said(targets={"snr": 60.0, "bandwidth": 200e3})
    assert not said(targets={"snr": 60.0})
    assert not said(targets={"snr": 60.0, "bandwidth": 10.0})


QUIET = opamp(
    gbw=3e6, voltage_noise=1e-11, noise_corner=0.0, current_noise=0.0, bias_current=1e-15, open_loop_gain=1e7
)
"""So quiet that little but the shot noise of the light is left."""


def test_the_shot_noise_bound_is_not_too_tight_by_half_a_decibel() -> None:
    """The best snr of every setting that keeps the bandwidth may be asked for; 0.5 dB more is impossible."""
    space = {
        **GROUND, "wirings": ("falling-biased",), "no_capacitor": False,
        "resistance": (0.8e6, 1.5e6), "capacitance": (0.5e-12, 3e-12),
    }  # fmt: skip
    fine = {"series": "E96", "from": 1e-13}
    sensor = diode(dark_current=0.0, rise_time=0.0)
    made = catalogs([QUIET], [sensor], [resistor(series="E96")], [capacitor(**fine)])
    asked = {"space": space, "supply": {"low": -5.0}, "light": {"weakest": 1.5e-6, "strongest": 2e-6}}
    goals = {"bandwidth": 100e3}
    compiled = spaces.build(request(**asked, targets=goals), made)
    found = [plain.judge(compiled, choice, "snr") for choice in plain.every_choice(compiled, 0, 0)]
    best = max(float(-judged.primary[judged.meets].min(initial=0.0)) for judged in found)
    assert best > 60.0
    assert not said(made, **asked, targets={**goals, "snr": best - 1e-4})
    assert said(made, **asked, targets={**goals, "snr": best + 0.5})


RESTING = {"space": {"dark_on_rail": True, "references": ("ground",), "wirings": ("rising-unbiased",),
                     "resistance": (4e6, 10e6)}}  # fmt: skip


def test_an_output_resting_on_the_rail_may_use_what_lies_below_the_converter() -> None:
    """An output that rests on the rail may swing further than a converter's range that starts above it.

    With `dark_on_rail` the dark output rests at 0 V, below the converter's 1 V to 5 V: the weakest light
    has to reach 1 V, and the strongest may swing by almost 5 V, not 4 V. So 4 bits (step 0.25 V, 72 mV
    rms) hold an snr of 31.7 dB, which is said to be impossible. (Found by reading; the brute force agrees.)
    """
    asked = {
        **RESTING,
        "light": {"weakest": 0.5e-6, "strongest": 0.8e-6},
        "targets": {"snr": 31.3},
        "converter": Converter(4, 1.0, 5.0),
    }
    made = catalogs([opamp(output_low=0.0, output_high=0.0)], resistors=[resistor(series="E192")])
    ends = reached(request(**asked), made)
    assert ends["meets"] == 1
    assert said(made, **asked) == ()


def test_on_small_instances_nothing_meets_what_is_called_impossible() -> None:
    rng = np.random.default_rng(7)
    checked = 0
    for seed in range(24):
        asked, made = small(seed)
        converter = Converter(int(rng.choice([4, 6, 8, 10])), rng.uniform(0.0, 0.4), 0.9 * asked.supply.high)
        space = replace(asked.space, dark_on_rail=bool(rng.random() < 0.5))
        asked = replace(asked, converter=converter, space=space)
        outcome = search.shortlist(asked, made)
        if outcome.impossible and outcome.combinations < 300_000:
            checked += 1
            assert "meets" not in reached(asked, made), seed
    assert checked >= 5


def test_the_command_says_so_and_exits_with_1(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    from optimizer.cli import main

    for role, row in GOOD.items():
        (tmp_path / f"{role}.csv").write_text(table([row]), encoding="utf-8")
    files = "\n".join(f'{role} = ["{role}.csv"]' for role in GOOD)
    path = tmp_path / "request.toml"
    path.write_text(
        '[light]\nwavelength = "850 nm"\nweakest = "30 nW"\nstrongest = "3 uW"\n'
        f'[supply]\nhigh = "5 V"\nguard = "2.6 V"\n[catalogs]\n{files}\n',
        encoding="utf-8",
    )
    assert main(["shortlist", str(path), "--quiet"]) == 1
    shown = capsys.readouterr()
    assert "guard" in shown.out + shown.err
