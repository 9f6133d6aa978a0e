"""What the model leaves out, and the cautions that go with light and with safety work."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

# What the model leaves out and how it takes values, by `tolerance.method` ("": no [tolerance] is stated).
COEFFICIENTS = {
    "": "temperature coefficients of R and C",
    "nominal": "temperature coefficients of C; parts that deviate together",
    "corners": "temperature coefficients of C; parts that deviate together",
}
VALUES = {
    "": "Figures use nominal catalog values.",
    "nominal": "Figures, margins and ranking use nominal catalog values; the yield alone is of real parts.",
    "corners": "Figures use nominal catalog values; margins, limiting target and ranking the worst corner.",
}
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
# Where the receiver may be put to use, and whose word counts there.
DUTIES = (
    ("near people, as any laser or LED source is", "IEC 60825-1 (lasers), IEC 62471 (lamps and LEDs)"),
    ("on or near a patient", "IEC 60601-1"),
    ("a machine's safety function", "ISO 13849-1"),
    ("any other safety function", "IEC 61508"),
    ("detecting or alarming of fire", "EN 54"),
    ("connected to the mains", "the local electrical code"),
)
DEFER = (
    "This page is no evidence of compliance with any of them: local codes and licensed practitioners decide. "
    "Check parts against current data sheets and on the bench."
)


def left_out(request: Mapping[str, Any]) -> str:
    """What the model leaves out of this request, as one paragraph."""
    method = request.get("tolerance", {}).get("method", "")
    return (
        f"Not in the model: supply ripple through Vref or the diode's rail; {COEFFICIENTS[method]}; dark "
        "current at another bias than its test bias; bipolar bias current in the cold; settling, slewing and "
        "overload recovery; buffer and reference dynamics; op-amp poles beyond the second; layout parasitics "
        f"beyond the stated stray capacitance. {VALUES[method]}"
    )


def cautions(request: Mapping[str, Any]) -> str:
    """The cautions that fit the request's wavelength, as one paragraph."""
    return board_cautions((request,))


def board_cautions(requests: Iterable[Mapping[str, Any]]) -> str:
    """The cautions that fit the wavelengths of several requests, each once, as one paragraph."""
    bands = dict.fromkeys(band(request) for request in requests)
    return " ".join(text for text in (SOURCES, *bands, GENERAL) if text)


def band(request: Mapping[str, Any]) -> str:
    """The caution that belongs to the request's wavelength; '' for visible light."""
    return _band(request["light"]["wavelength"])


def _band(wavelength: float) -> str:
    if wavelength < 400e-9:
        return ULTRAVIOLET
    if wavelength <= 700e-9:
        return ""
    return NEAR_INFRARED if wavelength <= 1400e-9 else INFRARED
