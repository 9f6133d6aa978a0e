"""One worked formula, and how its numbers are written: five digits, so that it can be redone by hand."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from optimizer.quantities import show

DIGITS = 5

OWN = (
    "own algebra, held to dense numeric evaluation, a circuit simulator and published cases by the "
    "project's tests"
)
COMMON = "common practice, no source"
DEFINITION = "definition, no source"
FRANCO = "S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed."
FIORE = "J. M. Fiore, Op Amps and Linear Integrated Circuits: Concepts and Applications"
JOHNSON = "M. Johnson, Photodetection and Measurement, McGraw-Hill 2003"
ASTROM = "K. J. Astrom, Introduction to Stochastic Control Theory, Academic Press 1970, ch. 5, theorem 5.2"
JUNCTION = "rise time of one pole, 10 % to 90 %: ln 9 time constants, own algebra"
CURRENT = f"{JOHNSON}, p. 22 (a current through the feedback resistor)"
UNSTABLE = "the loop is unstable"
UNKNOWN = "the catalog leaves a value unknown that this needs"
NETWORK = "Transimpedance amplifier circuit, SBOA220B, Texas Instruments 2018, step 4"

Values = Mapping[str, float]
"""Values by name, in SI, as the glass gives them."""

Figures = Mapping[str, float]
"""Figures by name, in SI, NaN where one does not exist."""

Budget = Mapping[str, float]
"""Mean squares at the output by contribution [V^2]."""


@dataclass(frozen=True, slots=True)
class Worked:
    """One quantity worked by hand: `figure` names it, `numbers` are lines of arithmetic.

    Each line reads left to right; where it holds equals signs, all sides agree within the digits
    printed. Angles of atan are in degrees. `value` is '-' where the figure does not exist, and then
    `numbers` say why.
    """

    figure: str
    formula: str
    numbers: tuple[str, ...]
    value: str
    source: str


def q(value: float, kind: str) -> str:
    """A quantity with its unit, five digits."""
    return show(value, kind, DIGITS)


def n(value: float, unit: str = "") -> str:
    """A number in the usual or scientific notation, five digits, with a unit that takes no prefix."""
    mantissa, _, exponent = f"{value:.{DIGITS}g}".partition("e")
    return f"{mantissa}e{int(exponent)} {unit}".rstrip() if exponent else f"{mantissa} {unit}".rstrip()


def money(value: float) -> str:
    """A price, with more than two decimals only where five digits need them."""
    whole, point, cents = show(value, "price", DIGITS).partition(".")
    return f"{whole}{point}{cents.rstrip('0').ljust(2, '0')}" if point else whole


def per_light(value: float, light: str) -> str:
    """A responsivity in amps per unit of the request's kind of light."""
    return q(value, "responsivity") if light == "power" else f"{q(value, 'current')}/(W/m2)"


def angular(frequency: float) -> str:
    """The line that turns a frequency [Hz] into w."""
    return f"w = 2 pi × {q(frequency, 'frequency')} = {n(turns(frequency), 'rad/s')}"


def turns(frequency: float) -> float:
    """Angular frequency [rad/s]."""
    return 6.283185307179586 * frequency


def times(*factors: str) -> str:
    """A product."""
    return " × ".join(factors)


def plus(*terms: str) -> str:
    """A sum."""
    return " + ".join(terms)
