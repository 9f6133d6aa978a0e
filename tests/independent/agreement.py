"""How two sets of figures are compared: one rule for every test of this folder."""

from __future__ import annotations

from collections.abc import Mapping
from math import isnan

LEVELS = frozenset({"snr", "dynamic_range", "peaking"})  # dB
ANGLES = frozenset({"phase_margin"})  # deg
DB_PER_NEPER = 8.686


def distance(name: str, value: float | None, other: float | None) -> float:
    """How far apart two values of a figure are, as a relative error of the quantity behind it.

    A level is compared as the amplitude it stands for (with its own rounding to 9 digits counted
    off), an angle against itself or one degree; a figure that does not exist must not in either.
    """
    if value is None or other is None or isnan(value) or isnan(other):
        return 0.0 if _absent(value) and _absent(other) else float("inf")
    gap = abs(value - other)
    if name in LEVELS:
        return max(0.0, gap - 5e-9 * abs(value)) / DB_PER_NEPER
    if name in ANGLES:
        return gap / max(abs(value), 1.0)
    return gap / abs(value) if value else gap


def _absent(value: float | None) -> bool:
    return value is None or isnan(value)


def disagreements(
    expected: Mapping[str, float | None], found: Mapping[str, float | None], tolerance: float
) -> dict[str, tuple[float | None, float | None]]:
    """The figures of `expected` that `found` misses by more than `tolerance`, each with both values."""
    return {
        name: (value, found.get(name))
        for name, value in expected.items()
        if not distance(name, value, found.get(name)) <= tolerance
    }
