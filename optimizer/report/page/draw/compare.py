"""Candidates beside each other: margins target by target, and cost against margin."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from optimizer.quantities import show
from optimizer.report.page.draw.canvas import (
    DASHES,
    INK,
    LIMIT,
    LINES,
    PAPER,
    QUIET,
    RULE,
    apart,
    canvas,
    grid,
    settings,
    svg,
    units,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from optimizer.review.findings import Cloud

ACROSS = 5
SMALL = 8.5


@dataclass(frozen=True, slots=True)
class Bars:
    """The margins of one candidate, one a target; the chosen one is `marked`."""

    name: str
    margins: Sequence[float]
    marked: bool


def draw_margins(rows: Sequence[Bars], targets: Sequence[str], comfort: float, key: str) -> str:
    """One panel a target, one bar a candidate from no margin to comfortable; the first row on top."""
    down = -(-len(targets) // ACROSS)
    with settings():
        figure = canvas(down * (0.7 + 0.19 * len(rows)) + 0.2)
        apart(figure, 0.09)
        panels = figure.subplots(down, ACROSS, sharex=True, sharey=True, squeeze=False).ravel()
        for column, (axes, target) in enumerate(zip(panels, targets, strict=False)):
            axes.set_title(target, fontsize=SMALL)
            _bars(axes, rows, np.minimum([row.margins[column] for row in rows], comfort))
        for axes in panels[len(targets) :]:
            axes.set_visible(False)
        panels[0].set_xlim(0.0, comfort)
        panels[0].set_xticks([0.0, comfort], ["0", show(comfort, "fraction")])
        return svg(figure, key)


def _bars(axes: Axes, rows: Sequence[Bars], values: np.ndarray) -> None:
    at = np.arange(len(rows))[::-1]
    colours = [LINES[0] if row.marked else RULE for row in rows]
    axes.barh(at, values, height=0.66, color=colours, edgecolor=QUIET, linewidth=0.5)
    axes.set_yticks(at, [f"> {row.name}" if row.marked else row.name for row in rows], fontsize=SMALL)
    axes.tick_params(axis="both", length=0)
    axes.tick_params(axis="x", labelsize=8)
    grid(axes, "x")


def draw_cloud(cloud: Cloud, chosen: tuple[float, float], comfort: float, key: str) -> str:
    """Cost against margin of everything that met the request, the chosen candidate ringed.

    Margins from `comfort` up rank alike and are drawn there; a stepped line joins the front.
    """
    with settings():
        figure = canvas(3.4)
        axes = figure.add_subplot()
        axes.set_title("Margin over cost")
        dots = np.minimum(cloud.margin, comfort)
        axes.plot(cloud.cost, dots, marker="o", markersize=3.5, linestyle="none", color=LINES[0], alpha=0.7)
        best = cloud.front
        axes.step(cloud.cost[best], dots[best], where="post", color=QUIET, linewidth=1.0)
        axes.axhline(comfort, color=LIMIT, linewidth=0.9, linestyle=DASHES[1])
        at = (chosen[0], min(chosen[1], comfort))
        axes.plot([at[0]], [at[1]], marker="o", markersize=10, markerfacecolor="none", color=INK)
        ground = {"facecolor": PAPER, "edgecolor": "none", "pad": 1.0}
        axes.annotate("chosen", at, xytext=(0, 10), textcoords="offset points", ha="center", bbox=ground)
        axes.set_xlabel("cost")
        axes.set_ylabel("margin")
        axes.set_ylim(0.0, min(1.06 * comfort, 1.5 * max(float(dots.max()), at[1], 0.1 * comfort)))
        units(axes.xaxis, "price")
        units(axes.yaxis, "fraction")
        grid(axes)
        return svg(figure, key)
