"""Every figure and target: name, kind, meaning, better side and heading."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType


@dataclass(frozen=True, slots=True)
class Figure:
    """One computed quantity; `better` is 'higher', 'lower' or '', `heading` stands over its column.

    `kind` is a key of `optimizer.quantities.KINDS`; see `figure_kind` for the two that follow the light.
    """

    name: str
    kind: str
    meaning: str
    better: str
    heading: str


_FIGURES = (
    Figure(
        "bandwidth",
        "frequency",
        "Lowest frequency at which the response is 3 dB below its value at rest.",
        "higher",
        "bandwidth",
    ),
    Figure(
        "snr", "level", "Steady signal at the weakest light over the total rms noise there.", "higher", "SNR"
    ),
    Figure(
        "dynamic_range",
        "level",
        "Largest unclipped signal over the rms noise without light.",
        "higher",
        "dynamic range",
    ),
    Figure(
        "full_scale",
        "power",
        "Strongest light at which the output is still inside its limits.",
        "higher",
        "full scale",
    ),
    Figure(
        "phase_margin",
        "angle",
        "Phase left before 180 deg where the loop gain is 1.",
        "higher",
        "phase margin",
    ),
    Figure("peaking", "level", "Highest response of the loop over its value at rest.", "lower", "peaking"),
    Figure(
        "slew",
        "ratio",
        "Slew rate over what the strongest light needs at the bandwidth target.",
        "higher",
        "slew ratio",
    ),
    Figure(
        "offset",
        "voltage",
        "Output error without light, dark current included, in the worse sign.",
        "lower",
        "offset",
    ),
    Figure("supply_current", "current", "Current drawn from the supply at rest.", "lower", "supply current"),
    Figure("cost", "price", "Price of the parts of one receiver at the build quantity.", "lower", "cost"),
    Figure("error", "voltage", "Output error of the amplifier alone, in the worse sign.", "lower", "error"),
    Figure("output_noise_dark", "voltage", "Rms noise at the output without light.", "lower", "noise, dark"),
    Figure(
        "output_noise_weak",
        "voltage",
        "Rms noise at the output at the weakest light.",
        "lower",
        "noise, weakest",
    ),
    Figure(
        "noise_equivalent_light",
        "power",
        "Light whose signal equals the rms noise without light, over the whole band.",
        "lower",
        "noise-equivalent light",
    ),
    Figure(
        "transresistance", "resistance", "Output voltage per photocurrent at rest.", "", "transresistance"
    ),
    Figure(
        "input_capacitance",
        "capacitance",
        "Capacitance at the summing node: diode, amplifier and stray.",
        "lower",
        "input capacitance",
    ),
    Figure("reverse_bias", "voltage", "Reverse bias across the diode at nominal supply.", "", "reverse bias"),
)

VOCABULARY: Mapping[str, Figure] = MappingProxyType({figure.name: figure for figure in _FIGURES})

# In the order of the record, which also breaks ties between equal margins.
TARGETS = tuple(figure.name for figure in _FIGURES[:10])


def figure_kind(name: str, light: str) -> str:
    """Kind of the figure `name` where the request's light is 'power' or 'irradiance'.

    >>> figure_kind("full_scale", "irradiance"), figure_kind("snr", "irradiance")
    ('irradiance', 'level')
    """
    kind = VOCABULARY[name].kind
    return light if kind == "power" else kind
