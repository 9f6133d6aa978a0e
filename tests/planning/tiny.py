"""Tiny boards with invented parts, drawn at random: few enough settings to try every plan."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs, Source
from optimizer.planning.outline import Costs, Limits, Outline, Rules, Solve, Wanted
from optimizer.request.types import Divider, Request
from optimizer.study import Study
from tests.search.made import NAN, Row, capacitor, catalogs, diode, listed, opamp, request, resistor

SOURCE = Source("board.toml", "0" * 64, 0)
MAKERS = ("Maker A", "Maker B", "Maker E")
PRICES: tuple[list[tuple[float, float]], ...] = (
    [(1.0, 1.0)],
    [(1.0, 1.13), (10.0, 0.9), (30.0, 0.71)],
    [(1.0, 2.005), (5.0, 1.2)],
    [(1.0, 0.8), (20.0, 0.3)],
    [(10.0, 0.6), (25.0, 0.55)],
)
SMALL: tuple[list[tuple[float, float]], ...] = (
    [(1.0, 0.02)],
    [(1.0, 0.05), (50.0, 0.01)],
    [(1.0, 0.004), (100.0, 0.0013)],
    [(1.0, 0.15), (10.0, 0.07), (25.0, 0.031)],
)


class Draws:
    """Picks of one seed."""

    def __init__(self, seed: int) -> None:
        self.rng = np.random.default_rng(seed)

    def pick(self, *choices: Any) -> Any:
        """One of `choices`."""
        return choices[int(self.rng.integers(len(choices)))]


def outline_of(channels: Sequence[tuple[str, int, Request, Catalogs]], **changes: Any) -> Outline:
    """A board of channels by name, count, request and catalogs; one request's channels are one kind.

    `changes` are those of the outline.
    """
    quantity = changes.get("quantity", 10)
    files: dict[int, str] = {}
    wanted = []
    for name, count, asked, held in channels:
        file = files.setdefault(id(asked), f"request-{len(files)}.toml")
        study = Study(replace(asked, quantity=quantity), held, Source(file, "0" * 64, 0))
        wanted.append(Wanted(name, file, count, study))
    settled = {"quantity": quantity, "solve": Solve(plans=3, time=20.0)} | changes
    return Outline("tiny", Path("board.toml"), SOURCE, tuple(wanted), **settled)


def drawn(seed: int) -> Outline:
    """A board of one to three channels of one or two kinds, with limits, costs and rules at random."""
    draws = Draws(seed)
    pick = draws.pick
    sources = pick(1, 1, 1, 1, 2)
    held = parts(draws, alike=sources > 1)
    first, second = asked(draws), asked(draws)
    channels = [("one", pick(1, 1, 2, 2), first, held)]
    if pick(True, True, False):
        channels.append(("two", 1, second, held))
    if pick(True, False, False):
        channels.append(("three", 1, first, held))
    return outline_of(
        channels,
        quantity=pick(1, 4, 10, 12),
        limits=limits(draws),
        costs=Costs(pick(0.0, 0.5, 3.0, 11.11), pick(0.0, 0.003, 0.05)),
        rules=Rules(sources, pick(0, 0, 0, 0, 1, 2)),
    )


def limits(draws: Draws) -> Limits:
    """Limits of which most are not stated, and few are out of reach."""
    pick = draws.pick
    return Limits(
        cost=pick(None, None, None, 9.0, 15.0, 30.0),
        supply_current=pick(None, None, None, None, 4e-3, 8e-3),
        area=pick(None, None, None, None, 80e-6, 120e-6),
        line_items=pick(None, None, None, None, 7, 9),
    )


def parts(draws: Draws, *, alike: bool) -> Catalogs:
    """Two or three families of op-amps in a few packages each, as many photodiodes, few passives.

    `alike`: all op-amps fit in the place of one another.
    """
    pick = draws.pick
    amplifiers: list[Row] = []
    for k in range(pick(2, 3, 3)):
        amplifiers += _family(draws, k, alike=alike)
    sensors = [
        diode(
            part=f"YZD-{k}",
            price=pick(*PRICES),
            stock=pick(NAN, NAN, NAN, 20.0, 40.0),
            board_area=pick(9e-6, 16e-6, 25e-6),
            capacitance=[(0.0, pick(10e-12, 40e-12, 150e-12))],
            shunt_resistance=pick(1e9, 1e7),
        )
        for k in range(pick(2, 2, 3))
    ]
    return catalogs(
        amplifiers,
        sensors,
        [
            resistor(family="YZR-1", price=pick(*SMALL), board_area=1e-6),
            resistor(
                family="YZR-2",
                price=pick(*SMALL),
                board_area=pick(0.5e-6, None),
                **listed(150e3, 220e3, 10e3),
            ),
        ],
        [
            capacitor(family="YZC-1", price=pick(*SMALL), board_area=1e-6, **listed(1e-12, 4.7e-12, 100e-9)),
            capacitor(family="YZC-2", price=pick(*SMALL), board_area=0.6e-6, **listed(2.2e-12, 4.7e-12)),
        ],
    )


def _family(draws: Draws, k: int, *, alike: bool) -> list[Row]:
    """One amplifier in single and other packages; now and then one of them is not quite the same."""
    pick = draws.pick
    same = {
        "maker": MAKERS[k % 3],
        "family": f"YZA-{k}",
        "gbw": pick(3e6, 10e6, 40e6),
        "voltage_noise": pick(5e-9, 12e-9),
        "bias_current": pick(1e-12, 50e-12),
        "quiescent_current": pick(0.3e-3, 0.9e-3, 2e-3),
        "output_low": pick(0.0, 0.0, 0.02),
        "supply_max": pick(5.5, 12.0, 12.0, 12.0),
    }
    sizes = pick((1,), (1, 2), (1, 2), (2,), (1, 1, 2), (1, 2, 4))
    return [
        opamp(
            part=f"YZA-{k}{'abc'[place]}",
            channels=float(size),
            price=pick(*PRICES),
            stock=pick(NAN, NAN, NAN, 12.0, 24.0),
            board_area=pick(9e-6, 15e-6, 30e-6, None if pick(0, 0, 0, 1) else 12e-6),
            package="SOIC-8" if alike else pick("SOIC-8", "SOT-23"),
            pinout=pick("usual", "usual", "usual", "") if alike else pick("usual", ""),
            **(same | {"gbw": 41e6} if pick(0, 0, 0, 0, 0, 1) else same),
        )
        for place, size in enumerate(sizes)
    ]


def asked(draws: Draws) -> Request:
    """A request with few settings, and targets that some of them miss."""
    pick = draws.pick
    return request(
        light={"strongest": pick(1e-6, 3e-6), "weakest": pick(30e-9, 60e-9)},
        supply={"high": pick(5.0, 5.0, 5.0, 3.3)},
        space={
            "references": pick(("ground",), ("divider",), ("divider",), ("ground", "divider")),
            "wirings": pick(
                ("rising-unbiased",),
                ("rising-unbiased", "rising-biased"),
                ("falling-unbiased", "rising-unbiased"),
            ),
            "dark_on_rail": True,
            "no_capacitor": pick(False, False, True),
            "divider": Divider(series="E3", low=10e3, high=pick(10e3, 22e3), bypass=100e-9),
            "resistance": pick((100e3, 250e3), (200e3, 500e3), (150e3, 230e3)),
            "packages": pick((), (), (), (), (), ("SOIC-8", "TO-5")),
        },
        targets={
            "bandwidth": pick(None, 30e3, 100e3),
            "snr": pick(None, 30.0, 34.0),
            "phase_margin": pick(None, 50.0),
            "supply_current": pick(None, None, None, 1.3e-3, 3e-3),
            "cost": pick(None, None, None, None, 4.0, 4.8),
        },
    )
