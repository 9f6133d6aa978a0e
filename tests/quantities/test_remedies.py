"""What a refusal suggests: never another magnitude than the prefix that was typed."""

from __future__ import annotations

import re
from collections.abc import Iterator

import pytest

from optimizer.quantities import KINDS, QuantityError, read_quantity
from optimizer.quantities.kinds import scale
from optimizer.quantities.units import PREFIXES

COMPOSED = sorted(name for name, kind in KINDS.items() if kind.over is not None)


def remedy(text: str, kind: str) -> str | None:
    """The remedy of the refusal; None where the text is read."""
    try:
        read_quantity(text, kind)
    except QuantityError as error:
        return error.remedy
    return None


@pytest.mark.parametrize(
    ("text", "kind", "meant"),
    [
        ("10 MHZz", "frequency", "MHz"),
        ("10 mhzz", "frequency", "mHz"),
        ("3 kOhmm", "resistance", "kohm"),
        ("5 V/uss", "slew_rate", "V/us"),
        ("5 uV/s/", "slew_rate", "uV/s"),
        ("3 nV/rtHzz", "voltage_noise", "nV/rtHz"),
        ("3 mm22", "area", "mm2"),
        ("3 degre", "angle", "degree"),
    ],
)
def test_a_near_spelling_is_suggested(text: str, kind: str, meant: str) -> None:
    assert remedy(text, kind) == f"did you mean '{meant}'?"


@pytest.mark.parametrize(
    ("text", "kind"),
    [("3 p/K", "tempco"), ("3 degK", "temperature"), ("3 pp", "fraction"), ("5 meter", "length")],
)
def test_nothing_is_suggested_where_it_would_be_a_guess(text: str, kind: str) -> None:
    assert remedy(text, kind) == ""


def slips(unit: str, prefix: str) -> Iterator[str]:
    """`unit` with one letter behind its prefix doubled, lost, in the wrong case, or with a stray one."""
    for at in range(len(prefix), len(unit)):
        for new in (unit[at] * 2, "", unit[at].swapcase(), unit[at] + "x"):
            yield unit[:at] + new + unit[at + 1 :]


@pytest.mark.parametrize("kind", COMPOSED)
def test_a_slip_of_one_letter_never_changes_the_magnitude(kind: str) -> None:
    suggested = 0
    for prefix in ("", *PREFIXES):
        unit = prefix + KINDS[kind].symbol
        for typed in slips(unit, prefix) if scale(unit, kind) else ():
            meant = re.search(r"did you mean '(.*)'\?$", remedy(f"10 {typed}", kind) or "")
            if meant is not None:
                suggested += 1
                assert scale(meant[1], kind) == scale(unit, kind), typed
    assert suggested
