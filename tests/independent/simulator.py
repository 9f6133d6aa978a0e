"""What the circuit simulator says of a case's netlist: its sweeps, and the figures read off them."""

from __future__ import annotations

import subprocess
from dataclasses import dataclass
from math import log10, sqrt
from pathlib import Path

import numpy as np
from scipy.constants import elementary_charge

from tests.independent import direct, netlist
from tests.independent.direct import Case

SIMULATOR = "ngspice"
OUTPUTS = ("ac", "white", "pink")


@dataclass(frozen=True)
class Sweep:
    """Frequencies [Hz] with responses, and with noise densities at the filtered output [V2/Hz]."""

    frequency: np.ndarray
    whole: np.ndarray  # output over light: the diode's pole, the loop, the low-pass
    filtered: np.ndarray  # the loop and the low-pass
    loop: np.ndarray  # the loop alone
    loop_gain: np.ndarray
    noise_frequency: np.ndarray
    white: np.ndarray  # without the weakest light's own shot noise
    pink: np.ndarray


def simulate(case: Case, folder: Path, name: str) -> Sweep:
    """Writes `name`.cir into `folder`, runs the simulator on it there and reads what it wrote."""
    for kind in OUTPUTS:
        (folder / f"{name}.{kind}").unlink(missing_ok=True)
    (folder / f"{name}.cir").write_text(netlist.deck(case, name), encoding="utf-8")
    command = [SIMULATOR, "-b", f"{name}.cir"]
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, timeout=120, check=False)
    missing = [kind for kind in OUTPUTS if not (folder / f"{name}.{kind}").exists()]
    if missing:
        raise AssertionError(f"the simulator wrote no {missing}:\n{done.stdout}\n{done.stderr}")
    ac, white, pink = (np.loadtxt(folder / f"{name}.{kind}", skiprows=1) for kind in OUTPUTS)
    responses = [ac[:, i] + 1j * ac[:, i + 1] for i in (1, 3, 5, 7)]
    return Sweep(ac[:, 0], *responses, white[:, 0], white[:, 1] ** 2, pink[:, 1] ** 2)


def crossing(frequency: np.ndarray, level: np.ndarray) -> float:
    """The first frequency at which `level` turns negative, by a line in ln f."""
    i = int(np.argmax(level < 0))
    share = level[i - 1] / (level[i - 1] - level[i])
    logs = np.log(frequency[i - 1 : i + 1])
    return float(np.exp(logs[0] + share * (logs[1] - logs[0])))


def power(frequency: np.ndarray, density: np.ndarray, start: float) -> float:
    """A density [V2/Hz] over all frequencies from `start` (0: from nothing) up, by trapezoids in ln f."""
    logs, per_log = np.log(frequency), density * frequency
    if start == 0:
        return float(np.trapezoid(per_log, logs) + per_log[0] + per_log[-1])
    kept = frequency > start
    first = np.interp(np.log(start), logs, per_log)
    return float(np.trapezoid([first, *per_log[kept]], [np.log(start), *logs[kept]]))


def noise_parts(case: Case, sweep: Sweep) -> dict[str, float]:
    """Mean squares at the output [V2]: white, 1/f, and the weakest light's own shot noise."""
    signal = direct.responsivity(case) * direct.on_diode(case, case["light"]["weakest"])
    shot = 2 * elementary_charge * signal * np.abs(sweep.filtered) ** 2
    return {
        "white": power(sweep.noise_frequency, sweep.white, 0.0),
        "pink": power(sweep.noise_frequency, sweep.pink, case["noise_from"]),
        "signal": power(sweep.frequency, shot, 0.0),
    }


def peak(sweep: Sweep) -> float:
    """The largest |H| over H0: a parabola through the least three points of 1/|H|^2."""
    drop = (np.abs(sweep.loop[0]) / np.abs(sweep.loop)) ** 2
    i = int(np.argmin(drop[1:-1])) + 1
    below, least, above = drop[i - 1 : i + 2]
    bend = below - 2 * least + above
    return float(1 / sqrt(least if bend == 0 else least - (above - below) ** 2 / (8 * bend)))


def figures(case: Case, sweep: Sweep) -> dict[str, float]:
    """The figures that a sweep tells; the converter's step is added, for no circuit knows it."""
    h0 = float(np.abs(sweep.whole[0]))
    parts = noise_parts(case, sweep)
    dark = parts["white"] + parts["pink"] + direct.converter_square(case)
    weak = dark + parts["signal"]
    signal = h0 * direct.responsivity(case) * direct.on_diode(case, case["light"]["weakest"])
    cross = crossing(sweep.frequency, np.log(np.abs(sweep.loop_gain)))
    # the signal source drives the inverting side of nothing: the cut loop returns +L here
    phase = np.unwrap(np.angle(sweep.loop_gain))
    return {
        "bandwidth": crossing(sweep.frequency, np.log(np.abs(sweep.whole) / h0 * sqrt(2))),
        "snr": 20 * log10(signal / sqrt(weak)),
        "phase_margin": float(180 + np.degrees(np.interp(np.log(cross), np.log(sweep.frequency), phase))),
        "peaking": 20 * log10(peak(sweep)),
        "output_noise_dark": sqrt(dark),
        "output_noise_weak": sqrt(weak),
        "noise_equivalent_light": sqrt(dark) / (signal / case["light"]["weakest"]),
        "transresistance": h0,
    }
