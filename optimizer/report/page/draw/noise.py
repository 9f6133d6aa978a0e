"""Noise at the output: the density of every contribution, and the budget of the mean squares."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

import numpy as np

from optimizer.report.page.draw.canvas import (
    DASHES,
    INK,
    LINES,
    QUIET,
    canvas,
    grid,
    settings,
    svg,
    units,
)

if TYPE_CHECKING:
    from optimizer.search.examine import NoiseSpectrum

LEADING = len(LINES)
DECADES = 5.0  # below the strongest; what lies deeper adds nothing that could be seen


def draw_density(noise: NoiseSpectrum, names: Sequence[str], words: Mapping[str, str], key: str) -> str:
    """The density over frequency; `names` in the order of the budget, the first few set apart."""
    with settings():
        figure = canvas(4.4)
        axes = figure.add_subplot()
        axes.set_title("Output noise density by contribution")
        axes.plot(noise.frequency, noise.total, color=INK, linewidth=2.4, label="total")
        for number, name in enumerate(names):
            leading = number < LEADING
            axes.plot(
                noise.frequency,
                np.where(noise.density[name] > 0.0, noise.density[name], np.nan),
                color=LINES[number] if leading else QUIET,
                linestyle=DASHES[number if leading else (number - LEADING) % (len(DASHES) - 1) + 1],
                linewidth=1.6 if leading else 0.9,
                label=words[name],
            )
        axes.set_xscale("log")
        axes.set_yscale("log")
        top = float(noise.total.max())
        axes.set_ylim(top * 10.0**-DECADES, top * 3.0)
        axes.set_xlim(noise.frequency[0], noise.frequency[-1])
        units(axes.xaxis, "frequency")
        units(axes.yaxis, "voltage_noise")
        grid(axes)
        figure.legend(loc="outside lower left", ncols=3)
        return svg(figure, key)


def draw_budget(rows: Sequence[tuple[str, float, str]], key: str) -> str:
    """Each contribution's share of the mean square, largest on top; `rows` of name, share, words."""
    with settings():
        figure = canvas(0.7 + 0.27 * len(rows))
        axes = figure.add_subplot()
        axes.set_title("Share of the mean square, weakest light")
        at = np.arange(len(rows))[::-1]
        axes.barh(at, [share for _name, share, _words in rows], height=0.62, color=LINES[0])
        for place, (_name, share, words) in zip(at, rows, strict=True):
            axes.annotate(words, (share, place), xytext=(5, 0), textcoords="offset points", va="center")
        axes.set_yticks(at, [name for name, _share, _words in rows])
        axes.tick_params(axis="y", length=0)
        axes.set_xlim(0.0, 1.3 * max(share for _name, share, _words in rows))
        units(axes.xaxis, "fraction")
        grid(axes, "x")
        return svg(figure, key)
