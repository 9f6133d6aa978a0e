"""How near the settings that get furthest come to passing the check that stops them all.

Exact for all checks but `unstable`: the dark output (save where it may rest on the rail), the gain and
min_gain ask for a small Rf and a small Cf, the load for neither, so the settings at the small ends are
the nearest; where the output may rest on the rail every Rf is tried. For `unstable` the figures are
those of the most stable setting at the ends of the ranges.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import (
    CHECKS,
    Bench,
    Settings,
    amplifier_of,
    dc_error,
    input_capacitance,
    output_limits,
    rounded,
    steady_state,
)
from optimizer.physics import loop
from optimizer.search.reach import first_failed
from optimizer.search.roles import FOLLOWER_MARGIN, PASSES
from optimizer.search.space import Choice, Space, own_code, settings

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

Columns = dict[str, Floats]
"""Numbers that decide a check, by what they are, one element a setting; `short` is how much is missing."""

BLOCK = 65536


def nearest(space: Space, pairs: tuple[Ints, Ints], key: str) -> tuple[Choice, dict[str, float]]:
    """The setting of `pairs` that gets as far as check `key` and comes nearest to passing it, with numbers.

    `pairs` (op-amps, diodes) are some that get as far as that and no further.
    """
    best: tuple[Choice, dict[str, float]] | None = None
    for choice in _ends(space, pairs, key):
        here = choice.take(first_failed(space, choice) == CHECKS.index(key))
        if not here.opamp.size:
            continue
        with np.errstate(all="ignore"):
            columns = NUMBERS[key](space.bench, settings(space, here))
        row = int(np.argmin(columns["short"]))
        found = {name: float(column[row]) for name, column in columns.items()}
        if best is None or found["short"] < best[1]["short"]:
            best = here.take(np.array([row])), found
    assert best is not None, key
    return best


def _ends(space: Space, pairs: tuple[Ints, Ints], key: str) -> Iterator[Choice]:
    """The settings at the ends of the ranges, in blocks."""
    step = max(BLOCK // (space.contexts.size * 2), 1)
    for begin in range(0, pairs[0].size, step):
        part = slice(begin, begin + step)
        yield from _of_pairs(space, pairs[0][part], pairs[1][part], key)


def _of_pairs(space: Space, opamp: Ints, diode: Ints, key: str) -> Iterator[Choice]:
    count = space.contexts.size
    context = np.tile(np.arange(count), opamp.size)
    opamp, diode = np.repeat(opamp, count), np.repeat(diode, count)
    none = np.zeros(context.size, dtype=np.int64)
    free = own_code(space, Choice(opamp, diode, context, none, none, none)) == PASSES
    opamp, diode, context = opamp[free], diode[free], context[free]
    on_rail = space.bench.dark_on_rail & (space.contexts.sign > 0) & ~space.contexts.divided
    for resistor, capacitor in _passives(space, key):
        yield _all(opamp, diode, context, resistor, capacitor)
    rail = on_rail[context]
    if rail.any():
        smallest = int(np.argmin(space.capacitors.value))
        for resistor in range(space.resistors.size):
            yield _all(opamp[rail], diode[rail], context[rail], resistor, smallest)


def _all(opamp: Ints, diode: Ints, context: Ints, resistor: int, capacitor: int) -> Choice:
    same = np.ones(context.size, dtype=np.int64)
    return Choice(opamp, diode, context, resistor * same, capacitor * same, 0 * same)


def _passives(space: Space, key: str) -> Iterator[tuple[int, int]]:
    """The smallest resistor of each parasitic with the smallest capacitor; for `unstable` the largest too."""
    values, parasitic = space.resistors.value, space.resistors.parasitic
    capacitors = [int(np.argmin(space.capacitors.value))]
    if key == "unstable":
        capacitors.append(int(np.argmax(space.capacitors.value)))
    for one in np.unique(parasitic):
        rows = np.flatnonzero(parasitic == one)
        ends = [rows[np.argmin(values[rows])]]
        if key == "unstable":
            ends.append(rows[np.argmax(values[rows])])
        yield from ((int(resistor), capacitor) for resistor in ends for capacitor in capacitors)


def _dark_output(bench: Bench, s: Settings) -> Columns:
    """Where the output lies without light, and how far outside its limits, guard taken off."""
    transresistance, offset = (rounded(value) for value in steady_state(s))
    error = rounded(dc_error(s))
    leaning = transresistance * s.responsivity * bench.weakest - error
    rests = (s.sign > 0.0) & ~s.divided & (bench.dark_on_rail and bench.low == 0.0)
    found: list[Columns] = []
    for end in bench.ends:
        lower, upper = output_limits(bench, end, s.output_low, s.output_high)
        lower, upper, vref = lower + bench.guard, upper - bench.guard, s.vref * end
        moved = vref + s.sign * offset
        lowest = np.where(rests, vref + leaning, np.minimum(vref - error, moved))
        highest = np.where(rests, lowest, np.maximum(vref + error, moved))
        short = np.maximum(lower - lowest, np.where(rests, -np.inf, highest - upper))
        columns = {"lowest": lowest, "highest": highest, "lower": lower, "upper": upper, "short": short}
        found.append({name: np.asarray(np.broadcast_to(c, short.shape)) for name, c in columns.items()})
    worse = found[0]["short"] >= found[1]["short"]
    return {name: np.where(worse, found[0][name], found[1][name]) for name in found[0]}


def _load(bench: Bench, s: Settings) -> Columns:
    """The output current needed at the high end of the supply, and what there is."""
    assert bench.load is not None
    end = bench.ends[1]
    lower, upper = output_limits(bench, end, s.output_low, s.output_high)
    to = s.vref * end if bench.load_to is None else np.full(s.vref.shape, bench.load_to)
    farthest = np.maximum(np.abs(upper - to), np.abs(lower - to))
    light = s.responsivity * (bench.strongest + bench.background)
    needed = farthest / bench.load + light + s.dark + s.bias
    return {
        "load": np.full(needed.shape, bench.load),
        "needed": needed,
        "output_current": s.output_current,
        "short": needed - s.output_current,
    }


def _gain(_bench: Bench, s: Settings) -> Columns:
    """The open-loop gain needed, and what there is."""
    needed = 1.0 + s.rf * s.shunt
    return {"needed": needed, "dc_gain": s.dc_gain, "short": needed - s.dc_gain}


def _min_gain(_bench: Bench, s: Settings) -> Columns:
    """The noise gain at high frequency and the least stable one; of a buffer, its phase margin."""
    noise_gain = 1.0 + rounded(input_capacitance(s)) / s.cf
    follower = loop.follower_phase_margin(amplifier_of(s))
    short = s.min_gain - noise_gain
    # a buffer that is none cannot be mended by any Cf: only where nothing else is left
    helpless = s.buffered & ~s.buffers
    return {
        "noise_gain": noise_gain,
        "min_gain": s.min_gain,
        "buffered": helpless.astype(float),
        "follower": follower,
        "needed": np.full(short.shape, FOLLOWER_MARGIN),
        "short": np.where(helpless, np.inf, short),
    }


def _unstable(_bench: Bench, s: Settings) -> Columns:
    """The phase margin."""
    amp = amplifier_of(s)
    closed = loop.close(amp, loop.Network(s.rf, s.cf, s.shunt, input_capacitance(s)))
    phase = rounded(loop.phase_margin(amp, closed))
    return {"phase_margin": phase, "short": np.where(np.isnan(phase), np.inf, -phase)}


NUMBERS: dict[str, Callable[[Bench, Settings], Columns]] = {
    "dark_output": _dark_output,
    "load": _load,
    "gain": _gain,
    "min_gain": _min_gain,
    "unstable": _unstable,
}
