"""Figures against targets: signed margins, the limiting target, what meets."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from optimizer.request.types import Request

Floats = NDArray[np.float64]

TARGETS = (
    "bandwidth",
    "snr",
    "dynamic_range",
    "full_scale",
    "phase_margin",
    "peaking",
    "slew",
    "offset",
    "supply_current",
    "cost",
)
"""Graded targets in the order of the record, which also breaks ties for the limiting one."""

AT_LEAST = ("bandwidth", "full_scale", "slew")
DECIBELS = ("snr", "dynamic_range")
AT_MOST = ("offset", "supply_current", "cost")

PHASE_SCALE = 30.0
"""Degrees of phase margin that count as a margin of one."""

LARGEST = 1000.0


def limits(request: Request) -> dict[str, float]:
    """The graded targets of `request` and their limits, in order; full_scale's is the strongest light."""
    stated = {name: getattr(request.targets, name, None) for name in TARGETS}
    stated["full_scale"] = request.light.strongest
    return {name: float(limit) for name, limit in stated.items() if limit is not None}


def margin(name: str, value: Floats, limit: float) -> Floats:
    """Signed margin of figure `name` against `limit`: 0 is exactly met, negative is missed.

    Clipped to [-1, 1000], rounded to 1e-9; -1 where the figure does not exist (NaN).
    """
    return clipped(raw_margin(name, value, limit))


def clipped(margins: Floats) -> Floats:
    """Margins cut to [-1, 1000] and rounded to 1e-9; -1 for NaN."""
    known = np.where(np.isnan(margins), -1.0, margins)
    return np.asarray(np.round(np.clip(known, -1.0, LARGEST), 9) + 0.0)


def raw_margin(name: str, value: Floats, limit: float) -> Floats:
    """The margin before clipping and rounding."""
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        if name in AT_LEAST:
            return np.asarray(value / limit - 1.0)
        if name in DECIBELS:
            return np.asarray(10.0 ** ((value - limit) / 20.0) - 1.0)
        if name == "phase_margin":
            return np.asarray((value - limit) / PHASE_SCALE)
        if name == "peaking":
            return np.asarray(1.0 - value / limit)
        if name in AT_MOST:
            return np.asarray(
                np.where(value > 0.0, limit / value - 1.0, np.where(value <= 0.0, LARGEST, np.nan))
            )
    raise KeyError(name)


def margins(figures: Mapping[str, Floats], stated: Mapping[str, float]) -> Floats:
    """One column a stated target: the margins of all candidates, shape (candidates, targets)."""
    size = np.size(next(iter(figures.values())))
    columns = [margin(name, figures[name], limit) for name, limit in stated.items()]
    return np.stack(columns, axis=-1) if columns else np.zeros((size, 0))


def limiting(margins_row: Sequence[float], stated: Mapping[str, float]) -> str:
    """The target with the smallest margin; ties go to the first."""
    return tuple(stated)[int(np.argmin(margins_row))]
