"""A corner of the spreads in words: what deviates there, and by how much."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.quantities import show
from optimizer.report.paragraphs import UNBROKEN

# Everything that may deviate, as the rest of the report calls it.
AXES: Mapping[str, str] = {
    "feedback_resistance": "Rf",
    "feedback_capacitance": "Cf",
    "divider_top": "R1",
    "divider_bottom": "R2",
    "gbw": "gbw",
    "voltage_noise": "voltage noise",
    "input_capacitance": "input capacitance",
    "diode_capacitance": "diode capacitance",
    "responsivity": "responsivity",
    "stray": "stray capacitance",
    "dark_current": "dark current",
    "bias_current": "bias current",
    "open_loop_gain": "open-loop gain",
}


def has_corner(target: Mapping[str, Any]) -> bool:
    """Whether the margin of `target` is that of its worst corner."""
    return target.get("corner") is not None


def graded_value(target: Mapping[str, Any]) -> float | None:
    """The value that the margin of `target` belongs to: at the worst corner, or at nominal."""
    value: float | None = target["worst"] if has_corner(target) else target["value"]
    return value


def at_corner(target: Mapping[str, Any]) -> str:
    """'at gbw -30 %, Rf -1 %', the farthest first; '' where nominal is graded, or nothing is worse."""
    corner = target.get("corner")
    return f"at{UNBROKEN}{corner_words(corner)}" if corner else ""


def corner_words(corner: Mapping[str, float]) -> str:
    """'gbw -30 %, Rf -1 %', the farthest from nominal first; lines break between them only."""
    axes = sorted(corner, key=lambda axis: -abs(corner[axis]))
    said = (f"{AXES.get(axis, axis)} {deviation(corner[axis])}" for axis in axes)
    return ", ".join(words.replace(" ", UNBROKEN) for words in said)


def deviation(fraction: float) -> str:
    """A relative deviation with its sign: '-30 %', '+0.21 %'."""
    return f"{'+' if fraction > 0.0 else ''}{show(fraction, 'fraction')}"
