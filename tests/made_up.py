"""Made-up outcomes and requests: awkward on purpose, computed by nobody."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs, LeftOut, Parts, Source
from optimizer.record import Record, build
from optimizer.request.types import Light, Ranking, Request, Supply, Targets, Tolerance
from optimizer.search.result import Candidate, Outcome, Reference, Simulated, TargetValue
from optimizer.study import Study

GROUND = Reference("ground", 0.0, None, None, buffered=False, extra_package=False)
DIVIDER = Reference("divider", 2.4, 47e3, 44.16e3, buffered=True, extra_package=True)

FIGURES: Mapping[str, float | None] = {
    "bandwidth": 24123.4567,
    "snr": 48.1234567,
    "dynamic_range": 92.4567891,
    "phase_margin": 64.2,
    "peaking": 0.0,
    "offset": 4.3e-3,
    "full_scale": 3.3e-6,
    "slew": 12.5,
    "supply_current": 1.2345e-3,
    "cost": 3.2134,
    "error": 4.1e-3,
    "output_noise_dark": 55e-6,
    "output_noise_weak": 61e-6,
    "noise_equivalent_light": 92e-12,
    "transresistance": 999_900.0,
    "input_capacitance": 21e-12,
    "reverse_bias": 2.4,
}

REQUEST = Request(
    name="stack opacity, receive channel",
    light=Light(850e-9, "power", 30e-9, 3e-6, 5e-9),
    supply=Supply(5.0, tolerance=0.05, guard=0.05),
    catalogs={
        "opamps": ("opamps.csv",),
        "photodiodes": ("photodiodes.csv",),
        "resistors": ("resistors.csv",),
        "capacitors": ("capacitors.csv",),
    },
    path=Path("made-up/request.toml"),
    quantity=200,
    currency="EUR",
    targets=Targets(bandwidth=20e3, snr=46.0, cost=4.5),
    ranking=Ranking(),
)

TARGETS = (
    TargetValue("bandwidth", 24123.4567, 20e3, 0.206172835),
    TargetValue("snr", 48.1234567, 46.0, 0.277),
    TargetValue("full_scale", 3.3e-6, 3e-6, 0.1),
    TargetValue("cost", 3.2134, 4.5, 0.4),
)

CANDIDATE = Candidate(
    photodiode="YZD-21",
    photodiode_maker="Zellmarsh Photonics",
    opamp="YZA-14",
    opamp_maker="Yonderbeck Analog",
    wiring="rising-biased",
    reference=GROUND,
    feedback_resistance=1e6,
    resistor_family="YZR-T",
    feedback_capacitance=4.7e-12,
    capacitor_family="YZC-C",
    low_pass=None,
    figures=FIGURES,
    targets=TARGETS,
    limiting="full_scale",
    margin=0.1,
    missed=(),
    assumed=(),
)

MISS = replace(
    CANDIDATE,
    photodiode="YZD-30",
    figures={**FIGURES, "snr": 45.9999, "cost": 4.501, "dynamic_range": None},
    targets=(
        TargetValue("bandwidth", 24123.4567, 20e3, 0.206172835),
        TargetValue("snr", 45.9999, 46.0, -1.15e-5),
        TargetValue("dynamic_range", None, 80.0, -1.0),
        TargetValue("full_scale", 3.3e-6, 3e-6, 0.1),
        TargetValue("cost", 5.0, 4.5, -0.1),
    ),
    limiting="dynamic_range",
    margin=-1.0,
    missed=("snr", "dynamic_range", "cost"),
)


CORNERS = replace(
    REQUEST,
    tolerance=Tolerance(
        method="corners", yield_=0.99, gbw=0.3, voltage_noise=0.2, input_capacitance=0.2, stated=True
    ),
)
"""The request, graded at corners, with a yield asked for."""

DRAWN = Simulated(
    draws=10_000,
    passed=9_923,
    yield_=0.9923,
    low=0.990386,
    high=0.993835,
    failures={"snr": 61, "full_scale": 23, "dark_output": 1},
    worst={"bandwidth": 20100.0, "snr": 45.9, "full_scale": 2.9e-6, "cost": 3.2134},
    best={"bandwidth": 31000.0, "snr": 50.0, "full_scale": 3.5e-6, "cost": 3.2134},
)

CORNERED = replace(
    CANDIDATE,
    targets=(
        TargetValue(
            "bandwidth", 24123.4567, 20e3, 0.0045, 20090.0, {"gbw": -0.3, "feedback_resistance": 0.0115}
        ),
        TargetValue("snr", 48.1234567, 46.0, 0.031, 46.265, {"feedback_resistance": -0.0115, "gbw": 0.3}),
        TargetValue("full_scale", 3.3e-6, 3e-6, 0.05, 3.15e-6, {"divider_top": -0.0021}),
        TargetValue("cost", 3.2134, 4.5, 0.4, 3.2134, {}),
    ),
    limiting="bandwidth",
    margin=0.0045,
    simulated=DRAWN,
)
"""A candidate graded at corners; in some draw snr and full scale are worse than at their worst corner."""


def outcome(
    candidates: tuple[Candidate, ...] = (CANDIDATE,), near_misses: tuple[Candidate, ...] = (), **changes: Any
) -> Outcome:
    """An outcome of 60,000 pairs, with `changes`."""
    usual = Outcome(
        candidates=candidates,
        near_misses=near_misses,
        combinations=12_345_678_901_234,
        pairs=60_000,
        evaluated=12_345,
        seconds=1.2345,
        proven=True,
        dropped={"wavelength": 31_200, "missing:output_low": 12_000, "cannot_beat": 16_799},
    )
    return replace(usual, **changes)


def catalogs(left_out: tuple[LeftOut, ...] = ()) -> Catalogs:
    """Empty catalogs with their sources."""
    empty = Parts("opamps", {"part": np.array([], dtype=str)}, {}, {}, {})
    sources = tuple(Source(f"{role}.csv", "ab" * 32, 7) for role in ("opamps", "photodiodes"))
    return Catalogs(empty, empty, empty, empty, sources, left_out, "EUR")


def study(request: Request = REQUEST, left_out: tuple[LeftOut, ...] = ()) -> Study:
    """What `optimizer.study.load` gives, around empty catalogs."""
    source = Source("request.toml", "cd" * 32, 0)
    return Study(request, catalogs(left_out), source)


def record(result: Outcome | None = None, request: Request = REQUEST, chosen: int | None = 1) -> Record:
    """The record of `result` for `request`."""
    return build(study(request), outcome() if result is None else result, chosen)
