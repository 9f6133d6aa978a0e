"""What the model leaves out, and the cautions that go with light and with safety work."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

LEFT_OUT = (
    "Not in the model: supply ripple through Vref or the diode's rail; temperature coefficients of R and C; "
    "dark current at another bias than its test bias; bipolar bias current in the cold; settling, slewing "
    "and overload recovery; buffer and reference dynamics; op-amp poles beyond the second; layout parasitics "
    "beyond the stated stray capacitance. Figures use nominal catalog values."
)
SOURCES = (
    "laser and LED sources can injure eyes; classify them (IEC 60825-1, IEC 62471) before anyone is near."
)
ULTRAVIOLET = "Light below 400 nm is hardly seen and harms eyes and skin: shield it and interlock the cover."
NEAR_INFRARED = (
    "Light above 700 nm is invisible: it draws no blink reflex, yet the eye focuses it on the retina."
)
INFRARED = "Light above 1400 nm is invisible: it draws no blink reflex and can burn the cornea."
GENERAL = (
    "A ranked list is no evidence of compliance: where mains, patients (IEC 60601-1), machine safety "
    "(ISO 13849-1), fire detection (EN 54) or any safety function (IEC 61508) depend on the receiver, "
    "local codes and licensed practitioners decide. Check parts against current data sheets and on the bench."
)


def cautions(request: Mapping[str, Any]) -> str:
    """The cautions that fit the request's wavelength, as one paragraph."""
    texts = (SOURCES, _band(request["light"]["wavelength"]), GENERAL)
    return " ".join(text for text in texts if text)


def _band(wavelength: float) -> str:
    if wavelength < 400e-9:
        return ULTRAVIOLET
    if wavelength <= 700e-9:
        return ""
    return NEAR_INFRARED if wavelength <= 1400e-9 else INFRARED
