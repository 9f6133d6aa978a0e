"""Gain over frequency: the loop's making in one panel, the response that comes of it in the other."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from optimizer.quantities import show
from optimizer.report.page.draw.canvas import (
    DASHES,
    INK,
    LIMIT,
    LINES,
    PAPER,
    apart,
    canvas,
    grid,
    settings,
    svg,
    units,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from optimizer.search.examine import Curves

Floats = NDArray[np.float64]
HALF_POWER = 20.0 * np.log10(np.sqrt(0.5))
FLOOR, SAME = -42.0, 0.05  # dB


def draw_gain(curves: Curves, bandwidth_limit: float | None, key: str) -> str:
    """Open-loop gain over noise gain, and the closed-loop response relative to its value at rest."""
    from matplotlib.ticker import MultipleLocator

    with settings():
        figure = canvas(5.1)
        apart(figure, 0.12)
        upper, lower = figure.subplots(2, 1, sharex=True, height_ratios=(3, 2))
        _loop(upper, curves)
        _response(lower, curves)
        if bandwidth_limit is not None:
            said = f"limit {show(bandwidth_limit, 'frequency')}"
            lower.axvline(bandwidth_limit, color=LIMIT, linewidth=1.0, linestyle=DASHES[1], label=said)
        for axes in (upper, lower):
            axes.set_xscale("log")
            axes.set_ylabel("dB")
            axes.yaxis.set_major_locator(MultipleLocator(20.0))
            grid(axes)
        lower.set_xlim(curves.frequency[0], curves.frequency[-1])
        units(lower.xaxis, "frequency")
        figure.legend(loc="outside lower left", ncols=3)
        return svg(figure, key)


def decibels(ratio: Floats) -> Floats:
    """Amplitude `ratio` as a level [dB]."""
    return np.asarray(20.0 * np.log10(np.abs(ratio)))


def _loop(axes: Axes, curves: Curves) -> None:
    axes.set_title("Open-loop gain and noise gain")
    noise_gain = decibels(curves.noise_gain)
    axes.plot(curves.frequency, decibels(curves.open_loop), color=LINES[0], label="open-loop gain A")
    axes.plot(curves.frequency, noise_gain, color=LINES[1], linestyle=DASHES[1], label="noise gain NG")
    at = float(curves.crossover)
    level = float(np.interp(np.log(at), np.log(curves.frequency), noise_gain))
    _mark(axes, (at, level), "o", f"loop gain 1 at {show(at, 'frequency')}")


def _response(axes: Axes, curves: Curves) -> None:
    axes.set_title("Closed-loop response, relative to rest")
    alone, whole = (
        decibels(ratio / ratio[0]) for ratio in (curves.loop_transresistance, curves.transresistance)
    )
    axes.plot(curves.frequency, whole, color=LINES[2], label="receiver")
    if np.abs(alone - whole)[alone > FLOOR].max() > SAME:
        axes.plot(curves.frequency, alone, color=LINES[0], linestyle=DASHES[2], label="op-amp's loop alone")
    axes.axhline(HALF_POWER, color=LIMIT, linewidth=0.8, linestyle=DASHES[2])
    at = float(curves.bandwidth)
    if np.isfinite(at):
        _mark(axes, (at, HALF_POWER), "D", f"-3 dB at {show(at, 'frequency')}")
    axes.set_ylim(FLOOR, max(6.0, float(max(alone.max(), whole.max())) + 4.0))


def _mark(axes: Axes, point: tuple[float, float], marker: str, said: str) -> None:
    """A mark at a point, in words in the legend."""
    x, y = point
    axes.plot(
        [x], [y], marker=marker, label=said, color=INK, markerfacecolor=PAPER, linestyle="none", zorder=3
    )
