"""Corners where a bound once lost a receiver, or knew nothing and left everything to be evaluated."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from optimizer import search, study
from optimizer.search import assemble, plain
from optimizer.search import space as spaces
from tests.search import made


@pytest.mark.parametrize("decibels", [100, 120, 150])
def test_slow_opamps_with_small_resistors_and_no_capacitance(decibels: int) -> None:
    """e1 (A0 + 1) and the op-amp's own time constants nearly cancel here: their rounding must not count."""
    rng = np.random.default_rng(decibels)
    for _ in range(40):
        gbw, rf = float(f"{10 ** rng.uniform(4, 6):.2g}"), float(f"{10 ** rng.uniform(1, 4):.2g}")
        bare = made.resistor(**made.listed(rf), parasitic_capacitance=0.0)
        catalogs = made.catalogs(
            [made.opamp(gbw=gbw, open_loop_gain=10.0 ** (decibels / 20.0))],
            [made.diode(capacitance=[(0.0, 1e-12 * float(f"{rng.uniform(2, 30):.2g}"))])],
            [bare, made.resistor(family="for the divider")],
            [made.capacitor()],
        )
        request = made.request(
            light={"weakest": 1e-6, "strongest": 1e-5},
            space={
                "resistance": (rf, rf),
                "references": ("divider",),
                "wirings": ("rising-biased",),
                "capacitance": (1e-12, 1e-9),
            },
            targets={"phase_margin": 45.0},
        )
        space = spaces.build(request, catalogs)
        best = plain.pair(space, 0, 0).best
        wanted = () if best is None else assemble.candidates(space, catalogs, best.choice)
        assert search.shortlist(request, catalogs).candidates == wanted


@pytest.mark.parametrize(
    ("supply", "choices"),
    [({}, {"references": ("ground",)}), ({"load": 1.0}, {})],
    ids=["ground only, so that the dark output rests on the rail", "a load that no op-amp drives"],
)
def test_what_every_setting_fails_is_known_without_evaluating_them(
    supply: dict[str, float], choices: dict[str, tuple[str, ...]]
) -> None:
    loaded = study.load(Path(__file__).parents[2] / "examples" / "turbidity" / "request.toml")
    request = replace(
        loaded.request,
        supply=replace(loaded.request.supply, **supply),  # type: ignore[arg-type]
        space=replace(loaded.request.space, **choices),  # type: ignore[arg-type]
    )
    outcome = search.shortlist(request, loaded.catalogs)
    assert (outcome.candidates, outcome.near_misses, outcome.proven) == ((), (), True)
    assert outcome.evaluated < 1000
