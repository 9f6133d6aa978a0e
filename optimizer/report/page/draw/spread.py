"""How each target spreads over random real parts, with its limit."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from optimizer.report.page.draw.canvas import LIMIT, LINES, QUIET, apart, canvas, settings, svg

if TYPE_CHECKING:
    from matplotlib.axes import Axes

ACROSS, BINS = 3, 40


@dataclass(frozen=True, slots=True)
class Panel:
    """One target: its values, its limit, on which side of it they must be, and how to say a value."""

    title: str
    values: NDArray[np.float64]
    limit: float
    at_least: bool
    said: Callable[[float], str]


def draw_spread(panels: Sequence[Panel], key: str) -> str:
    """One histogram a target; what misses the limit has another colour and stands beyond it."""
    down = max(1, -(-len(panels) // ACROSS))
    with settings():
        figure = canvas(1.7 * down)
        apart(figure, 0.06, 0.12)
        every = figure.subplots(down, ACROSS, squeeze=False).ravel()
        for axes, panel in zip(every, panels, strict=False):
            _panel(axes, panel)
        for axes in every[len(panels) :]:
            axes.set_visible(False)
        return svg(figure, key)


def _panel(axes: Axes, panel: Panel) -> None:
    values = panel.values[np.isfinite(panel.values)]
    counts, edges = np.histogram(values, bins=_edges(values, panel.limit))
    low, high = edges[:-1], edges[1:]
    beyond = high <= panel.limit if panel.at_least else low >= panel.limit
    axes.set_title(panel.title)
    for where, colour in ((~beyond, LINES[0]), (beyond, LINES[1])):
        width = (high - low)[where]
        axes.bar(low[where], counts[where], width, align="edge", color=colour)
    axes.axvline(panel.limit, color=LIMIT, linewidth=1.2, linestyle=(0, (6, 2)))
    left = panel.limit > 0.5 * (edges[0] + edges[-1])
    axes.annotate(
        "limit",
        (panel.limit, 1.0),
        xycoords=("data", "axes fraction"),
        xytext=(-3 if left else 3, -9),
        textcoords="offset points",
        ha="right" if left else "left",
        fontsize=8,
        color=LIMIT,
    )
    axes.set_yticks([])
    axes.spines["left"].set_visible(False)
    ends = (float(edges[0]), float(edges[-1]))
    axes.set_xticks(ends, [panel.said(end) for end in ends])
    first, last = axes.get_xticklabels()
    first.set_horizontalalignment("left")
    last.set_horizontalalignment("right")
    axes.set_xlim(*ends)
    axes.tick_params(axis="x", color=QUIET, labelsize=8.5)


def _edges(values: NDArray[np.float64], limit: float) -> NDArray[np.float64]:
    """Bins over the values, one edge at the limit; the limit is always in view."""
    low, high = min(float(values.min()), limit), max(float(values.max()), limit)
    step = (high - low) / BINS
    below, above = int(np.ceil((limit - low) / step)) + 1, int(np.ceil((high - limit) / step)) + 1
    return np.asarray(limit + step * np.arange(-below, above + 1))
