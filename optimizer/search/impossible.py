"""What no part could meet, found before any search, each with the reason in words."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from optimizer.physics import noise
from optimizer.quantities import show
from optimizer.search.bounds import ROOT2
from optimizer.search.roles import PASSES
from optimizer.search.space import Space


def reasons(space: Space) -> tuple[str, ...]:
    """Why nothing can meet the request, whatever the parts; empty where nothing of the sort is known."""
    return (*_choices(space), *_window(space), *_converter(space), *_shot_noise(space))


def _choices(space: Space) -> Iterator[str]:
    if not space.contexts.size:
        yield (
            "no wiring with its reference can be built: the biased ones need reverse bias above 0 V, "
            "and a divider needs resistor and capacitor families that offer its values"
        )
    if not space.resistors.size:
        low, high = space.request.space.resistance
        yield (
            "no resistor family offers a priced value from "
            f"{show(low, 'resistance')} to {show(high, 'resistance')}"
        )
    if not space.capacitors.size:
        low, high = space.request.space.capacitance
        yield (
            "no capacitor family offers a priced value from "
            f"{show(low, 'capacitance')} to {show(high, 'capacitance')}, and none = false"
        )


def _widest(space: Space) -> float:
    """The widest output range [V] that rails and converter allow, at the worse tolerance end."""
    bench = space.bench
    spans = []
    for end in bench.ends:
        low, high = bench.low * end, bench.high * end
        if bench.converter is not None:
            floor, ceiling, _ = bench.converter
            low, high = max(low, floor), min(high, high if bench.converter_follows else ceiling)
        spans.append(high - low)
    return float(min(spans))


def _swing(space: Space) -> float:
    """The largest signal [V] that any output range leaves; one that rests on the rail starts from there."""
    bench = space.bench
    if not (bench.dark_on_rail and bench.low == 0.0):
        return _widest(space) - 2.0 * bench.guard
    tops = [bench.high * end for end in bench.ends]
    if bench.converter is not None and not bench.converter_follows:
        tops.append(bench.converter[1])
    return max(_widest(space), min(tops)) - bench.guard


def _window(space: Space) -> Iterator[str]:
    bench = space.bench
    if bench.converter is not None and not bench.converter_follows:
        floor, ceiling, _ = bench.converter
        if floor < bench.low or ceiling > bench.high:
            yield (
                f"the converter's range, {show(floor, 'voltage')} to {show(ceiling, 'voltage')}, "
                f"is not inside the rails, {show(bench.low, 'voltage')} to {show(bench.high, 'voltage')}"
            )
            return
    guards = bench.guard if bench.dark_on_rail else 2.0 * bench.guard
    width = _widest(space)
    if width <= guards:
        yield (
            f"the guard of {show(bench.guard, 'voltage')} at both output limits leaves nothing of the "
            f"output range of {show(max(width, 0.0), 'voltage')} at the worse end of the supply tolerance"
        )


def _converter(space: Space) -> Iterator[str]:
    """The step's noise against the signal, which the strongest light scales to the range at most."""
    bench = space.bench
    if bench.converter is None:
        return
    floor, ceiling, bits = bench.converter
    step = float(np.sqrt(noise.quantisation(ceiling - floor, bits)))
    usable = max(_swing(space), 0.0)
    if step <= 0.0 or usable <= 0.0:
        return
    best = 20.0 * np.log10(usable * bench.weakest / (bench.strongest + bench.background) / step)
    snr = space.limits.get("snr")
    if snr is not None and best < snr - 1e-6:
        yield (
            f"snr: the converter's step alone holds it to {show(float(best), 'level')} at the weakest "
            f"light when the strongest fills its range; the target is {show(snr, 'level')}"
        )
    best = 20.0 * np.log10(usable / step)
    wide = space.limits.get("dynamic_range")
    if wide is not None and best < wide - 1e-6:
        yield (
            f"dynamic_range: the converter's step alone holds it to {show(float(best), 'level')}; "
            f"the target is {show(wide, 'level')}"
        )


def _shot_noise(space: Space) -> Iterator[str]:
    """Shot noise of weakest light and background, in the least noise bandwidth the target allows."""
    bench, snr, target = space.bench, space.limits.get("snr"), space.limits.get("bandwidth")
    sensible = space.diodes.responsivity[space.diode_verdicts.alone == PASSES]
    amps = space.opamp_verdicts.alone == PASSES
    if snr is None or target is None or not sensible.size or not amps.any():
        return
    a = space.opamps.dc_gain[amps] / (2.0 * np.pi * space.opamps.gbw[amps])
    b = 1.0 / (2.0 * np.pi * space.opamps.second_pole[amps])
    w = 2.0 * np.pi * target
    slowest = ROOT2 / w + a * b / (a + b) * (1.0 + ROOT2) + space.low_passes.max()
    band = float(np.min(1.0 / (4.0 * slowest)))
    current = float(sensible.max()) * bench.weakest
    shot = float(noise.shot_current(sensible.max() * (bench.weakest + bench.background))) * band
    best = 20.0 * np.log10(current) - 10.0 * np.log10(shot)
    if best < snr - 1e-6:
        yield (
            "snr: the shot noise of weakest light and background alone holds it to "
            f"{show(float(best), 'level')} in the bandwidth asked for, with the most sensitive photodiode; "
            f"the target is {show(snr, 'level')}"
        )
