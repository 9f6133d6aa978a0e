"""The output between its rails, from dark to the strongest light, and the step response."""

from __future__ import annotations

from collections.abc import Sequence
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
    canvas,
    grid,
    settings,
    svg,
    units,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from optimizer.search.examine import Level, Step


def draw_levels(levels: Sequence[Level], names: Sequence[str], key: str) -> str:
    """One row for each end of the supply: rails, limits, guard, and where the light takes the output."""
    with settings():
        figure = canvas(1.5 + 0.75 * len(levels))
        axes = figure.add_subplot()
        axes.set_title("Output voltage from dark to the strongest light")
        for row, level in enumerate(levels):
            _limits(axes, level, -float(row))
            _signal(axes, level, -float(row))
        axes.set_yticks([-float(row) for row in range(len(levels))], list(names))
        axes.tick_params(axis="y", length=0)
        axes.spines["left"].set_visible(False)
        axes.set_ylim(-len(levels) + 0.45, 0.6)
        units(axes.xaxis, "voltage")
        grid(axes, "x")
        handles, labels = axes.get_legend_handles_labels()
        once = dict(zip(labels, handles, strict=True))
        figure.legend(list(once.values()), list(once), loc="outside lower left", ncols=3)
        return svg(figure, key)


def _limits(axes: Axes, level: Level, y: float) -> None:
    """What the output must keep away from."""
    ends = [level.rail_low, level.rail_high]
    axes.plot(ends, [y, y], color=QUIET, linewidth=0.8, zorder=1, label="rail to rail")
    for start, end in ((level.rail_low, level.limit_low), (level.limit_high, level.rail_high)):
        axes.barh(y, end - start, 0.5, left=start, color=RULE, label="out of reach")
    for start, end in ((level.limit_low, level.guard_low), (level.guard_high, level.limit_high)):
        for bar in axes.barh(y, end - start, 0.5, left=start, label="guard"):
            bar.set(facecolor="none", edgecolor=LIMIT, hatch="////", linewidth=0.6)


def _signal(axes: Axes, level: Level, y: float) -> None:
    """Where the output is, without light and with it."""
    lit, dark = level.strongest - level.background, level.dark_high - level.dark_low
    axes.barh(y, lit, 0.2, left=level.background, color=LINES[0], label="background to strongest light")
    axes.barh(y, dark, 0.34, left=level.dark_low, color=LINES[1], label="dark, over its error")
    for at, marker, size, label in (
        (level.vref, "|", 18.0, "Vref"),
        (level.weakest, "o", 4.0, "weakest light"),
        (level.strongest, "D", 5.0, "strongest light"),
    ):
        (mark,) = axes.plot([at], [y], marker=marker, markersize=size, color=INK, label=label)
        mark.set_markerfacecolor(PAPER)
        mark.set_linestyle("none")


def draw_step(step: Step, key: str) -> str:
    """The output after a step of light, relative to its final value."""
    with settings():
        figure = canvas(2.9)
        axes = figure.add_subplot()
        axes.set_title("Response to a step of light, relative to its final value")
        value = np.asarray(step.value)
        axes.axhline(1.0, color=QUIET, linewidth=0.8)
        for level in (0.1, 0.9):
            axes.axhline(level, color=LIMIT, linewidth=0.8, linestyle=DASHES[2])
        axes.plot(step.time, value, color=LINES[0])
        axes.annotate(
            f"10 % to 90 % in {show(float(step.rise_time), 'time')}",
            (0.98, 0.12),
            xycoords="axes fraction",
            ha="right",
        )
        axes.set_xlim(step.time[0], step.time[-1])
        axes.set_ylim(min(0.0, float(value.min())), max(1.1, float(value.max()) * 1.05))
        units(axes.xaxis, "time")
        units(axes.yaxis, "fraction")
        grid(axes)
        return svg(figure, key)
