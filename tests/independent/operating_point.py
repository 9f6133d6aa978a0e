"""The receiver at rest in the circuit simulator: rails, diode, bias currents and offsets, all at dc."""

from __future__ import annotations

import re
import subprocess
from collections.abc import Mapping
from dataclasses import dataclass
from math import inf
from pathlib import Path

from tests.independent import direct
from tests.independent.direct import Case
from tests.independent.simulator import SIMULATOR


@dataclass(frozen=True)
class Point:
    """What is left [V] between output and limit, guard taken off, and the diode's reverse bias [V]."""

    room: float
    reverse_bias: float


def diode(case: Case, current: float) -> list[str]:
    """The photocurrent runs from cathode to anode; which of them is at the node is the wiring."""
    biased, rising = direct.is_biased(case), direct.direction(case) > 0
    far = ("vneg" if rising else "vpos") if biased else "ref"
    cathode, anode = ("node", far) if rising else (far, "node")
    lines = [f"Iphoto {cathode} {anode} {current!r}", f"Ereverse across 0 {cathode} {anode} 1"]
    if direct.shunt_resistance(case) < inf:
        lines.append(f"Rshunt {cathode} {anode} {direct.shunt_resistance(case)!r}")
    return lines


def reference(case: Case, offset: float, bias: float) -> list[str]:
    if not direct.is_divider(case):
        return ["Vmid mid 0 0", "Vref ref mid 0"]
    values = case["reference"]
    lines = [
        f"Rtop vpos mid {values['top']!r}",
        f"Rbottom mid vneg {values['bottom']!r}",
        f"Iplus 0 mid {bias!r}",
    ]
    if direct.is_buffered(case):
        return [*lines, f"Vbuffer raised mid {offset!r}", "Ebuffer ref 0 raised 0 1"]
    return [*lines, "Vref ref mid 0"]


def deck(case: Case, figures: Mapping[str, float], end: int) -> str:
    """The circuit at one end of the supply tolerance, lit by `full_scale` and background.

    Offset and bias current stand in whichever sign drives the output on in the direction of light.
    """
    sign = direct.direction(case)
    amp, ambient = case["opamp"], case["ambient"]
    far = max(abs(ambient["coldest"] - 25), abs(ambient["hottest"] - 25))
    offset = sign * (amp["offset_voltage"] + amp["offset_drift"] * far)
    bias = sign * direct.bias_current(case)
    power = direct.on_diode(case, figures["full_scale"] + case["light"]["background"])
    vneg, vpos = direct.rails(case, end)
    return "\n".join(
        [
            "* a receiver at rest",
            f"Vpos vpos 0 {vpos!r}",
            f"Vneg vneg 0 {vneg!r}",
            *diode(case, direct.responsivity(case) * power + direct.dark_current(case)),
            *reference(case, offset, bias),
            f"Iminus node 0 {bias!r}",
            f"Rf node out {case['feedback']['resistance']!r}",
            f"Voffset plus ref {offset!r}",
            f"Eopamp out 0 plus node {amp['open_loop_gain']!r}",
            ".control",
            "set numdgt=12",
            "op",
            "print v(out) v(across)",
            "quit",
            ".endc",
            ".end",
            "",
        ]
    )


def run(case: Case, figures: Mapping[str, float], end: int, folder: Path, name: str) -> Point:
    (folder / f"{name}.cir").write_text(deck(case, figures, end), encoding="utf-8")
    command = [SIMULATOR, "-b", f"{name}.cir"]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, timeout=60, check=False)
    read = dict(re.findall(r"^v\((\w+)\) = (\S+)$", done.stdout, re.MULTILINE))
    if set(read) != {"out", "across"}:
        raise AssertionError(f"no operating point:\n{done.stdout}\n{done.stderr}")
    low, high = direct.output_limits(case, end)
    output, guard = float(read["out"]), case["supply"]["guard"]
    room = high - guard - output if direct.direction(case) > 0 else output - low - guard
    return Point(room, float(read["across"]))
