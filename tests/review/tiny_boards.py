"""Boards so small that every other board can be tried, with a plan that stands and a part that goes."""

from __future__ import annotations

import random
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from optimizer.planning.outline import Outline
from optimizer.planning.plan import Build
from optimizer.planning.reading import read_board
from optimizer.record import write
from optimizer.record.board import build
from optimizer.review.board import space_of
from optimizer.search import assemble
from optimizer.search.plain import judge
from optimizer.search.result import Candidate
from optimizer.search.space import Choice
from tests.review.made_board import planned

OPAMPS = """\
part,maker,family,package,channels,price,supply_min,supply_max,quiescent_current,gbw,second_pole,slew_rate,\
voltage_noise,noise_corner,current_noise,bias_current,bias_doubling,offset_voltage,offset_drift,input_low,\
input_high,output_low,output_high,input_capacitance_common,input_capacitance_differential,temp_min,temp_max
{rows}
"""
ELECTRICAL = (
    "2.2 V,5.5 V,0.95 mA,{gbw},30 MHz,6 V/us,{noise},1.5 kHz,2 fA/rtHz,2 pA,10 C,1 mV,1.5 uV/C,"
    "-100 mV,0 V,12 mV,12 mV,4 pF,2 pF,-40 C,125 C"
)
DIODES = """\
part,maker,package,price,responsivity,capacitance,dark_current,shunt_resistance,reverse_max,rise_time,\
active_area,temp_min,temp_max
{rows}
"""
REQUEST = """\
name = "{name}"
[light]
wavelength = "850 nm"
weakest = "20 nW"
strongest = "{strongest}"
[supply]
high = "5 V"
guard = "50 mV"
[targets]
bandwidth = "{bandwidth}"
snr = "{snr}"
[space]
wirings = ["rising-unbiased", "rising-biased"]
references = ["divider"]
divider = {{ series = "E3", from = "10 kohm", to = "22 kohm", bypass = "100 nF" }}
resistance = {{ from = "500 kohm", to = "5 Mohm" }}
capacitance = {{ from = "1 pF", to = "10 pF", none = false }}
[catalogs]
opamps = ["opamps.csv"]
photodiodes = ["photodiodes.csv"]
resistors = ["resistors.csv"]
capacitors = ["capacitors.csv"]
"""
BOARD = """\
name = "tiny {seed}"
quantity = {quantity}
[[channels]]
name = "a"
request = "a.toml"
count = {count}
[[channels]]
name = "b"
request = "b.toml"
[costs]
line_item = {line_item}
placement = 0.01
"""


@dataclass(frozen=True)
class Tiny:
    """A saved board, its outline, its plan, and every receiver that meets, by channel."""

    record: Path
    outline: Outline
    builds: tuple[Build, ...]
    receivers: dict[str, tuple[Candidate, ...]]


def tiny(folder: Path, seed: int) -> Tiny:
    """One random board; the same for the same seed."""
    draw = random.Random(seed)
    path = _written(folder, seed, draw)
    outline = read_board(path)
    receivers = {channel.name: _receivers(outline, channel.name) for channel in outline.channels}
    builds = tuple(_stands(outline, receivers, draw))
    record = folder / "board.json"
    write(build(outline, planned(outline, builds)), record)
    return Tiny(record, outline, builds, receivers)


def _written(folder: Path, seed: int, draw: random.Random) -> Path:
    prices = [f"1:{draw.choice([0.5, 0.8, 1.1])}; 50:{draw.choice([0.3, 0.45])}" for _ in range(5)]
    slow, fast = (
        ELECTRICAL.format(gbw=gbw, noise=noise)
        for gbw, noise in (("8 MHz", "9 nV/rtHz"), ("12 MHz", "7 nV/rtHz"))
    )
    opamps = [
        f"YZA-1,Maker A,YZA,SOT-23-5,1,{prices[0]},{slow}",
        f"YZA-2,Maker A,YZA,MSOP-8,2,{prices[1]},{slow}",
        f"YZB-1,Maker B,YZB,SOT-23-5,1,{prices[2]},{fast}",
    ]
    if draw.random() < 0.5:
        opamps.append(f"YZB-2,Maker B,YZB,MSOP-8,2,{prices[3]},{fast}")
    diodes = [
        f"YZD-{n},Maker C,SMD,{draw.choice([0.4, 0.6, 0.9])},850 nm:{draw.choice([0.5, 0.55, 0.6])},"
        f"0 V:{draw.choice([10, 20, 40])} pF,0.3 nA,4 Gohm,20 V,12 ns,{n} mm2,-40 C,85 C"
        for n in (1, 2, 3)
    ]
    resistors = (
        "family,maker,package,series,values,price\n"
        "YZR-1,Maker C,0603,list,10 kohm; 22 kohm; 1 Mohm; 2.2 Mohm,0.02\n"
        "YZR-2,Maker C,0603,list,1 Mohm; 1.5 Mohm,0.03\n"
    )
    capacitors = (
        "family,maker,package,series,values,price\n"
        "YZC-1,Maker C,0603,list,2.2 pF; 100 nF,0.02\nYZC-2,Maker C,0402,list,1.5 pF; 2.2 pF,0.03\n"
    )
    (folder / "opamps.csv").write_text(OPAMPS.format(rows="\n".join(opamps)))
    (folder / "photodiodes.csv").write_text(DIODES.format(rows="\n".join(diodes)))
    (folder / "resistors.csv").write_text(resistors)
    (folder / "capacitors.csv").write_text(capacitors)
    for name in "ab":
        text = REQUEST.format(
            name=name,
            strongest=draw.choice(["0.5 uW", "1 uW"]),
            bandwidth=draw.choice(["20 kHz", "30 kHz"]),
            snr=draw.choice(["40 dB", "44 dB"]),
        )
        (folder / f"{name}.toml").write_text(text)
    path = folder / "board.toml"
    path.write_text(
        BOARD.format(
            seed=seed,
            quantity=draw.choice([10, 60]),
            count=draw.choice([1, 2, 2]),
            line_item=draw.choice([0.0, 5.0, 15.0]),
        )
    )
    return path


def _receivers(outline: Outline, name: str) -> tuple[Candidate, ...]:
    """Every setting of a channel's request, op-amps in their smallest packages, that meets all of it."""
    channel = next(channel for channel in outline.channels if channel.name == name)
    space, catalogs = space_of(outline, channel), channel.study.catalogs
    single = np.flatnonzero(catalogs.opamps.number["channels"] == 1.0)
    axes = (
        single,
        np.arange(catalogs.photodiodes.size),
        np.arange(space.contexts.size),
        np.arange(space.resistors.size),
        np.arange(space.capacitors.size),
        np.arange(space.low_passes.size),
    )
    every = Choice(*(column.ravel() for column in np.meshgrid(*axes, indexing="ij")))
    meets = judge(space, every, "cost").meets
    return assemble.candidates(space, catalogs, every.take(meets))


def _stands(
    outline: Outline, receivers: dict[str, tuple[Candidate, ...]], draw: random.Random
) -> list[Build]:
    """A random board that stands: buffered references shared where they are the same."""
    levels: dict[tuple[float | None, float | None, str], str] = {}
    builds: list[Build] = []
    packages = {
        family: draw.choice(
            [p for p in ("YZA-1", "YZA-2", "YZB-1", "YZB-2") if p[:3] == family and _has(outline, p)]
        )
        for family in ("YZA", "YZB")
    }
    chosen: dict[tuple[str, int], Candidate] = {}
    for channel in outline.channels:
        for copy in range(1, channel.count + 1):
            alike = chosen.get((channel.name, 1)) if draw.random() < 0.6 else None
            chosen[channel.name, copy] = alike or draw.choice(receivers[channel.name])
    for (name, copy), one in chosen.items():
        level = None
        if one.reference.buffered:
            key = (one.reference.top, one.reference.bottom, one.opamp)
            level = levels.setdefault(key, f"VREF{len(levels) + 1}")
        opamp = packages[one.opamp[:3]]
        same = next((b for b in builds if (b.channel, b.candidate, b.level) == (name, one, level)), None)
        if same is not None:
            builds[builds.index(same)] = Build(name, (*same.copies, copy), one, level, opamp, one.opamp_maker)
        else:
            builds.append(Build(name, (copy,), one, level, opamp, one.opamp_maker))
    return builds


def _has(outline: Outline, part: str) -> bool:
    return part in outline.channels[0].study.catalogs.opamps.text["part"].tolist()
