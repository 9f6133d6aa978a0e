"""How the chosen receiver behaves: over frequency, in its noise, between its rails, after a step."""

from __future__ import annotations

from functools import partial
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.quantities import show
from optimizer.report.page.blocks import Figure, Part, Section, Table, Words, cells
from optimizer.report.page.draw.gain import decibels, draw_gain
from optimizer.report.page.draw.noise import draw_budget, draw_density
from optimizer.report.page.draw.swing import draw_levels, draw_step
from optimizer.report.page.terms import contribution, joined
from optimizer.report.words import figure, percent
from optimizer.review.dossier import Dossier
from optimizer.search.examine import Curves, Level, NoiseSpectrum

Floats = NDArray[np.float64]
SAMPLES = 13
LEADING = 3
FLAT = 0.005  # dB; nearer to 0 than anyone reads


def behaviour(dossier: Dossier) -> Section:
    """The section of drawings made from the candidate's curves and budgets."""
    text = (
        "Drawn from the same formulas that give the figures, at the request's hottest ambient and nominal "
        "catalog values."
    )
    parts = (
        Part("Gain over frequency", (_gain(dossier),)),
        Part("Noise", (_density(dossier), _budget(dossier))),
        Part("Use of the output between the rails", (_levels(dossier),)),
        Part("Step response", (_step(dossier),)),
    )
    return Section("behaviour", "How it behaves", (Words(text),), parts)


def _gain(dossier: Dossier) -> Figure:
    curves, figures = dossier.glass.curves, dossier.candidate["figures"]
    limit = dossier.request.get("targets", {}).get("bandwidth")
    crossover = show(float(curves.crossover), "frequency")
    said = f"limit at least {show(limit, 'frequency')}" if limit is not None else "no limit stated"
    peak = f"a peak of {_said(dossier, 'peaking')} over" if figures["peaking"] else "no peak over"
    down = f"is 3 dB down at {_said(dossier, 'bandwidth')}"
    if figures["bandwidth"] is None:
        down = "has no known bandwidth, for the diode's own pole is not stated"
    alternative = (
        f"Two panels over frequency. Above, the open-loop gain falls from {_dB(curves.open_loop[0])} at rest "
        f"and meets the noise gain, {_dB(curves.noise_gain[0])} at rest, at {crossover}, where the phase "
        f"margin is {_said(dossier, 'phase_margin')}. Below, the closed-loop response {down} ({said}), with "
        f"{peak} its value at rest, {_said(dossier, 'transresistance')}."
    )
    return Figure(
        "gain",
        "Open-loop gain and noise gain; closed-loop response relative to rest",
        alternative,
        partial(draw_gain, curves, limit),
        _gain_data(curves),
    )


def _gain_data(curves: Curves) -> Table:
    rows = tuple(
        cells(
            show(float(curves.frequency[i]), "frequency"),
            _dB(curves.open_loop[i]),
            _dB(curves.noise_gain[i]),
            _dB(curves.loop_gain[i]),
            show(float(curves.loop_phase[i]), "angle"),
            _dB(curves.transresistance[i] / curves.transresistance[0]),
        )
        for i in _spread(curves.frequency)
    )
    headings = ("frequency", "open-loop gain", "noise gain", "loop gain", "loop phase", "response")
    return Table("Gains and response over frequency", headings, rows, numbers=frozenset(range(1, 6)))


def _density(dossier: Dossier) -> Figure:
    noise = dossier.glass.noise
    names = [name for name in _by_share(noise) if name in noise.density]
    words = {name: contribution(name) for name in names}
    at = int(np.argmax(noise.total))
    highest, where = (
        show(float(noise.total[at]), "voltage_noise"),
        show(float(noise.frequency[at]), "frequency"),
    )
    largest = joined([words[name] for name in names[:LEADING]])
    alternative = (
        "Output noise density of each contribution over frequency, both axes logarithmic. The total is "
        f"highest at {where} with {highest}; the largest contributions to the mean square are {largest}."
    )
    title = "Output noise density of every contribution, at the weakest light"
    return Figure(
        "density", title, alternative, partial(draw_density, noise, names, words), _density_data(noise, names)
    )


def _density_data(noise: NoiseSpectrum, names: list[str]) -> Table:
    rows = tuple(
        cells(
            show(float(noise.frequency[i]), "frequency"),
            show(float(noise.total[i]), "voltage_noise"),
            *(show(float(noise.density[name][i]), "voltage_noise") for name in names),
        )
        for i in _spread(noise.frequency)
    )
    headings = ("frequency", "total", *(contribution(name) for name in names))
    return Table(
        "Output noise density over frequency", headings, rows, numbers=frozenset(range(1, len(headings)))
    )


def _budget(dossier: Dossier) -> Figure:
    noise = dossier.glass.noise
    total = sum(noise.budget.values())
    shares = [(name, noise.budget[name] / total) for name in _by_share(noise) if noise.budget[name] > 0.0]
    rows = [(contribution(name), share, percent(share)) for name, share in shares]
    leading = [f"{name} {words}" for name, _share, words in rows[:LEADING]]
    alternative = (
        f"The noise at the weakest light is {_said(dossier, 'output_noise_weak')} rms. "
        f"Shares of its mean square, largest first: {joined(leading)}"
        + (f"; {len(rows) - LEADING} more below." if len(rows) > LEADING else ".")
    )
    table = tuple(
        cells(contribution(name), words, show(float(np.sqrt(noise.budget[name])), "voltage"))
        for (name, _share), (_name, _part, words) in zip(shares, rows, strict=True)
    )
    data = Table(
        "Integrated noise by contribution", ("contribution", "share", "rms"), table, numbers=frozenset({1, 2})
    )
    title = "Budget of the integrated output noise, at the weakest light"
    return Figure("budget", title, alternative, partial(draw_budget, rows), data)


def _by_share(noise: NoiseSpectrum) -> list[str]:
    return sorted(noise.budget, key=lambda name: (-noise.budget[name], name))


def _levels(dossier: Dossier) -> Figure:
    levels = tuple({level.end: level for level in dossier.glass.levels}.values())
    names = [_end(level, dossier.request) for level in levels]
    worst = min(levels, key=_room)
    rows = "One row at the nominal supply"
    if len(levels) > 1:
        rows = "One row at the nominal supply, one at each end of its tolerance"
    alternative = (
        f"{rows}. With {_end(worst, dossier.request)} the output rests "
        f"at {_volts(worst.vref)}, between {_volts(worst.dark_low)} and {_volts(worst.dark_high)} without "
        f"light, and reaches {_volts(worst.strongest)} in the strongest light; it must stay between "
        f"{_volts(worst.guard_low)} and {_volts(worst.guard_high)}, guard taken off. {_volts(_room(worst))} "
        "are left."
    )
    return Figure(
        "levels",
        "The output between the rails, from dark to the strongest light",
        alternative,
        partial(draw_levels, levels, names),
        _levels_data(levels, names),
        least=520,
    )


def _room(level: Level) -> float:
    """The voltage left between the strongest light and the limit it heads for, guard taken off."""
    rising = level.strongest >= level.vref
    return float(level.guard_high - level.strongest if rising else level.strongest - level.guard_low)


def _volts(value: float) -> str:
    return show(float(value), "voltage")


def _end(level: Level, request: Any) -> str:
    tolerance = request["supply"].get("tolerance", 0.0)
    if not tolerance or level.end == 1.0:
        return "supply nominal"
    return f"supply {'+' if level.end > 1.0 else '-'}{show(tolerance, 'fraction')}"


def _levels_data(levels: Any, names: list[str]) -> Table:
    fields = (
        ("rail_low", "lower rail"),
        ("limit_low", "lower output limit"),
        ("guard_low", "with guard"),
        ("dark_low", "dark, lowest"),
        ("vref", "Vref"),
        ("dark_high", "dark, highest"),
        ("background", "background light"),
        ("weakest", "weakest light"),
        ("strongest", "strongest light"),
        ("guard_high", "upper limit with guard"),
        ("limit_high", "upper output limit"),
        ("rail_high", "upper rail"),
    )
    rows = tuple(
        cells(words, *(show(float(getattr(level, name)), "voltage", 4) for level in levels))
        for name, words in fields
    )
    return Table("Output voltages", ("level", *names), rows, numbers=frozenset(range(1, len(names) + 1)))


def _step(dossier: Dossier) -> Figure | Words:
    step = dossier.glass.step
    if not np.isfinite(step.rise_time):
        return Words("Not drawn: the diode's rise time, and so its own pole, is not stated.")
    rise, settled = (show(float(value), "time") for value in (step.rise_time, step.settling_time))
    over = "no overshoot" if step.overshoot <= 0.0 else f"an overshoot of {percent(float(step.overshoot))}"
    alternative = (
        f"After a step of light the output rises from 10 % to 90 % of its final value in {rise}, with "
        f"{over}, and has settled to within 1 % after {settled}. Small signal and linear: the slew rate is "
        "another matter."
    )
    at = np.linspace(0, len(step.time) - 1, SAMPLES).round().astype(int)
    rows = tuple(
        cells(show(float(step.time[i]), "time"), show(float(step.value[i]), "fraction", 4)) for i in at
    )
    data = Table("Response over time", ("time", "output"), rows, numbers=frozenset({0, 1}))
    return Figure(
        "step", "Response to a step of light", alternative, partial(draw_step, step), data, least=480
    )


def _spread(frequency: Floats) -> list[int]:
    """Some indices, evenly spread over the logarithm of frequency, both ends among them."""
    exponents = np.log(frequency)
    wanted = np.linspace(exponents[0], exponents[-1], SAMPLES)
    found = [int(np.argmin(np.abs(exponents - at))) for at in wanted]
    return [found[0], *(second for first, second in pairwise(found) if first != second)]


def _said(dossier: Dossier, name: str) -> str:
    return figure(name, dossier.candidate["figures"][name], dossier.request)


def _dB(ratio: Any) -> str:
    level = float(decibels(np.asarray(ratio)))
    return show(0.0 if abs(level) < FLAT else level, "level")
