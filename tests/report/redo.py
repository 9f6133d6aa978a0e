"""Does printed arithmetic again: reads numbers with their units out of a line and computes it."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

PREFIXES = {
    "a": 1e-18, "f": 1e-15, "p": 1e-12, "n": 1e-9, "\u00b5": 1e-6, "m": 1e-3,
    "k": 1e3, "M": 1e6, "G": 1e9, "T": 1e12, "": 1.0,
}  # fmt: skip
UNITS = (
    "Hz/s^2", "1/s^2", "V/rtHz", "A/rtHz", "V/\u00b5s", "A/(W/m2)", "A/W", "W/m2", "J/K", "rad/s",
    "ohm", "Hz", "s^2", "s^3", "s^4", "s^8", "deg", "dB", "V", "A", "W", "F", "C", "K", "s",
)  # fmt: skip
NUMBER = re.compile(
    r"(?<![\w.])(\d+(?:\.\d+)?)(e-?\d+)?"
    r"(?: ([afpn\u00b5mkMGT]?)(" + "|".join(re.escape(unit) for unit in UNITS) + r")(?![\w/^]))?"
)
FUNCTIONS = {
    "sqrt": math.sqrt,
    "log10": math.log10,
    "atan": lambda x: math.degrees(math.atan(x)),
    "max": max,
    "pi": math.pi,
}
EXACT = 200
"""Whole numbers without a unit up to here belong to a formula."""

SLACK = 6e-5
"""Five digits: at most 5e-5 of a number is lost, and a little for a gain printed as 1."""


class NotArithmetic(ValueError):
    """The text holds words or symbols: nothing that can be computed."""


@dataclass(frozen=True)
class Redone:
    """A value and how far the digits printed leave it open."""

    value: float
    tolerance: float


def redo(text: str) -> Redone:
    """The value of an arithmetic expression, and what rounding of its numbers may do to it."""
    numbers: list[float] = []
    inexact: list[bool] = []

    def place(match: re.Match[str]) -> str:
        digits, exponent, prefix, unit = match.groups()
        value = float(digits + (exponent or ""))
        scale = PREFIXES[prefix or ""] * (1e6 if unit == "V/\u00b5s" else 1.0)
        inexact.append(bool(unit or exponent or "." in digits or value > EXACT))
        numbers.append(value * scale)
        return f"n[{len(numbers) - 1}]"

    code = NUMBER.sub(place, text).replace("\u00d7", "*").replace("^", "**")
    code = re.sub(r"(\]) pi", r"\1 * pi", code)
    if set(re.findall(r"[A-Za-z_]\w*", code)) - {"n", *FUNCTIONS}:
        raise NotArithmetic(text)
    try:
        compiled = compile(code.strip(), "<printed>", "eval")
    except SyntaxError:
        raise NotArithmetic(text) from None

    def compute(values: list[float]) -> float:
        return float(eval(compiled, {"__builtins__": {}}, {"n": values, **FUNCTIONS}))

    value = compute(numbers)
    lost = SLACK * abs(value) if any(inexact) else 0.0
    for k in range(len(numbers)):
        if inexact[k]:
            moved = [*numbers[:k], numbers[k] * (1 + SLACK), *numbers[k + 1 :]]
            lost += abs(compute(moved) - value)
    return Redone(value, lost)


def agree(first: Redone, second: Redone) -> bool:
    """Whether two sides are equal within the digits printed."""
    return abs(first.value - second.value) <= first.tolerance + second.tolerance
