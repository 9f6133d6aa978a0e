"""Reading and showing quantities; cases without a source are the wording of the project's own contract."""

from __future__ import annotations

import math
import string
from decimal import Decimal

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from optimizer.errors import LuxsiftError
from optimizer.quantities import KINDS, QuantityError, read_quantity
from optimizer.quantities.kinds import scale

# Source: SI Brochure, 9th edition (2019), table 7 (from memory).
SI_PREFIXES = {"a": -18, "f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "k": 3, "M": 6, "G": 9, "T": 12}
PREFIXED = {
    "frequency": "Hz",
    "resistance": "ohm",
    "capacitance": "F",
    "voltage": "V",
    "current": "A",
    "power": "W",
    "time": "s",
    "length": "m",
    "irradiance": "W/m2",
    "responsivity": "A/W",
    "voltage_noise": "V/rtHz",
    "current_noise": "A/rtHz",
    "slew_rate": "V/s",
    "drift": "V/K",
}

numbers = st.decimals(min_value=Decimal("-99999"), max_value=Decimal("99999"), places=4).map(
    lambda d: f"{d:f}"
)


def refusal(text: object, kind: str, **options: object) -> QuantityError:
    with pytest.raises(QuantityError) as caught:
        read_quantity(text, kind, **options)  # type: ignore[arg-type]
    return caught.value


@pytest.mark.parametrize(
    ("text", "kind", "expected"),
    [
        ("10 MHz", "frequency", 10e6),
        ("4.7pF", "capacitance", 4.7e-12),
        ("8 nV/rtHz", "voltage_noise", 8e-9),
        ("8 nV/sqrt(Hz)", "voltage_noise", 8e-9),
        ("8 nV/√Hz", "voltage_noise", 8e-9),
        ("8 nV/√(Hz)", "voltage_noise", 8e-9),
        ("8 nV / rt Hz", "voltage_noise", 8e-9),
        ("8 nV/Hz^0.5", "voltage_noise", 8e-9),
        ("0.8 fA/rtHz", "current_noise", 0.8e-15),
        ("5 V/us", "slew_rate", 5e6),
        ("5 V/µs", "slew_rate", 5e6),
        ("5 kV/μs", "slew_rate", 5e9),
        ("-20 C", "temperature", -20.0),
        ("-20 °C", "temperature", -20.0),
        ("-20 degC", "temperature", -20.0),
        ("273.15 K", "temperature", 0.0),
        ("300 K", "temperature", 26.85),
        ("10 K", "temperature_difference", 10.0),
        ("10 °C", "temperature_difference", 10.0),
        ("0.6 A/W", "responsivity", 0.6),
        ("600 mA/W", "responsivity", 0.6),
        ("0.6 uA/uW", "responsivity", 0.6),
        ("60 deg", "angle", 60.0),
        ("60°", "angle", 60.0),
        ("40 dB", "level", 40.0),
        ("40 DB", "level", 40.0),
        ("100 dB", "gain", 1e5),
        ("-6 dB", "gain", 10 ** (-6 / 20)),
        ("100 V/mV", "gain", 1e5),
        ("2 V/V", "gain", 2.0),
        ("20 dB", "gain_ratio", 10.0),
        ("10 V/V", "gain_ratio", 10.0),
        ("2 %", "fraction", 0.02),
        ("±2%", "fraction", 0.02),
        ("+/- 2 %", "fraction", 0.02),
        ("200 ppm", "fraction", 200e-6),
        ("3 uV/C", "drift", 3e-6),
        ("3 uV/K", "drift", 3e-6),
        ("3 µV/°C", "drift", 3e-6),
        ("50 ppm/C", "tempco", 50e-6),
        ("±50ppm/°C", "tempco", 50e-6),
        ("50 ppm/K", "tempco", 50e-6),
        ("7.5 mm2", "area", 7.5e-6),
        ("7.5 mm²", "area", 7.5e-6),
        ("7.5 mm^2", "area", 7.5e-6),
        ("1 cm2", "area", 1e-4),
        ("0.4 uW/cm2", "irradiance", 0.004),
        ("1 mW/cm²", "irradiance", 10.0),
        ("3 W/m2", "irradiance", 3.0),
        ("10 kohm", "resistance", 10e3),
        ("10 kOhm", "resistance", 10e3),
        ("10 k\u03a9", "resistance", 10e3),
        ("10 k\u2126", "resistance", 10e3),
        ("10 KR", "resistance", 10e3),
        ("470R", "resistance", 470.0),
        ("10k", "resistance", 10e3),
        ("4.7p", "capacitance", 4.7e-12),
        ("850 nm", "length", 850e-9),
        ("0.85 µm", "length", 0.85e-6),
        ("10 m", "length", 10.0),
        ("12 Weeks", "duration_weeks", 12.0),
        ("100 pcs", "count", 100.0),
        ("1e6", "frequency", 1e6),
        ("1e6 Hz", "frequency", 1e6),
        ("1E-3MHz", "frequency", 1e3),
        (".5 V", "voltage", 0.5),
        ("5. V", "voltage", 5.0),
        ("+5 V", "voltage", 5.0),
    ],
)
def test_spellings_of_the_contract(text: str, kind: str, expected: float) -> None:
    assert read_quantity(text, kind) == expected


@pytest.mark.parametrize(
    ("number", "kind", "expected"),
    [
        (25, "temperature", 25.0),
        (60, "angle", 60.0),
        (100, "gain", 1e5),
        (46, "level", 46.0),
        (10, "gain_ratio", 10.0),
        (0.02, "fraction", 0.02),
        (1, "fraction", 1.0),
        (850e-9, "length", 850e-9),
        (1e-3, "length", 1e-3),
        (4700, "resistance", 4700.0),
        (3e-6, "area", 3e-6),
        (0, "voltage", 0.0),
    ],
)
def test_bare_numbers_are_si_but_for_temperatures_angles_gains(
    number: float, kind: str, expected: float
) -> None:
    assert read_quantity(number, kind) == expected
    assert read_quantity(str(number), kind) == expected


@pytest.mark.parametrize("space", ["", " ", "  ", "\t", "\u00a0", "\u2009", "\u202f", "\u200a", "\u3000"])
def test_spaces_of_every_kind_are_stray(space: str) -> None:
    assert read_quantity(f"{space}4.7{space}pF{space}", "capacitance") == 4.7e-12
    assert read_quantity(f"\ufeff{space}8 n{space}V/{space}rtHz", "voltage_noise") == 8e-9


@pytest.mark.parametrize("minus", ["-", "\u2212", "\u2013", "- ", "\u2212\u00a0"])
def test_minus_signs(minus: str) -> None:
    assert read_quantity(f"{minus}20 °C", "temperature") == -20.0
    assert read_quantity(f"5e{minus.strip()}3 V", "voltage") == 5e-3


@given(numbers, st.sampled_from(sorted(SI_PREFIXES)), st.sampled_from(sorted(PREFIXED)))
@example("4.7", "p", "capacitance")
@example("8.2", "n", "voltage_noise")
def test_a_prefix_is_read_as_the_nearest_float(number: str, prefix: str, kind: str) -> None:
    expected = float(Decimal(number) * Decimal(10) ** SI_PREFIXES[prefix])
    assert read_quantity(f"{number} {prefix}{PREFIXED[kind]}", kind) == expected
    assert read_quantity(f"{number}{prefix}{PREFIXED[kind].swapcase()}", kind) == expected


@given(numbers, st.sampled_from(sorted(PREFIXED)))
def test_micro_has_three_spellings_and_kilo_two(number: str, kind: str) -> None:
    micro = {read_quantity(f"{number} {sign}{PREFIXED[kind]}", kind) for sign in ("u", "\u00b5", "\u03bc")}
    assert micro == {float(Decimal(number) * Decimal("1e-6"))}
    kilo = {read_quantity(f"{number} {sign}{PREFIXED[kind]}", kind) for sign in "kK"}
    assert kilo == {float(Decimal(number) * 1000)}


@given(st.integers(0, 9999), st.text("0123456789", min_size=1, max_size=4))
def test_letter_codes_are_read_as_the_nearest_float(whole: int, part: str) -> None:
    for letter, power in {"R": 0, "k": 3, "K": 3, "M": 6, "G": 9, "L": -3, "m": -3}.items():
        assert read_quantity(f"{whole}{letter}{part}", "resistance") == float(f"{whole}.{part}e{power}")
    for letter, power in {"p": -12, "n": -9, "u": -6, "µ": -6, "μ": -6, "m": -3, "F": 0}.items():
        assert read_quantity(f"{whole}{letter}{part}", "capacitance") == float(f"{whole}.{part}e{power}")
    assert read_quantity(f"R{part}", "resistance") == float(f"0.{part}")
    assert read_quantity(f"p{part}", "capacitance") == float(f"0.{part}e-12")


def test_milli_and_mega_are_never_guessed_from_the_size() -> None:
    assert read_quantity("10 mHz", "frequency") == 0.01
    assert read_quantity("10 mhz", "frequency") == 0.01
    assert read_quantity("10 MF", "capacitance") == 1e7
    assert read_quantity("4m7", "resistance") == 4.7e-3
    assert read_quantity("4M7", "resistance") == 4.7e6


@pytest.mark.parametrize(
    ("text", "kind", "remedy"),
    [
        ("4.7 PF", "capacitance", "prefixes keep their case: did you mean 'pF'?"),
        ("4.7 NF", "capacitance", "prefixes keep their case: did you mean 'nF'?"),
        ("5 kHx", "frequency", "did you mean 'kHz'?"),
        ("5 V", "frequency", "'V' is a unit of voltage"),
        ("5 pF", "resistance", "'pF' is a unit of capacitance"),
        ("1.000 V", "frequency", "'V' is a unit of voltage"),
        ("5 %", "voltage", "'%' is a unit of fraction"),
        ("5 f", "capacitance", "'f' may be a prefix or the unit: write 'fF' or 'F'"),
        ("5 a", "current", "'a' may be a prefix or the unit: write 'aA' or 'A'"),
        ("5 M", "length", "'M' may be a prefix or the unit: write 'Mm' or 'm'"),
        ("100 k", "gain", ""),
        ("5 k", "area", ""),
        ("1e99999 V", "voltage", ""),
        ("1e400 V", "voltage", "the number is out of range"),
        ("1e-400 V", "voltage", "the number is out of range"),
        ("4P7", "capacitance", ""),
        ("4k7", "capacitance", ""),
        ("4k7 kohm", "resistance", ""),
        ("-4k7", "resistance", ""),
        ("4.7k7", "resistance", ""),
        ("±15 V", "voltage", ""),
        ("5 V V", "voltage", "did you mean 'V'?"),
        ("5 V/", "slew_rate", "did you mean 'V/s'?"),
        ("", "voltage", ""),
        ("10 ^", "voltage", ""),
        ("10 m^2", "length", "'m^2' is a unit of area"),
        ("-", "voltage", ""),
        ("nan", "voltage", ""),
        ("inf", "voltage", ""),
        ("１２ V", "voltage", ""),
        ("0x10", "voltage", ""),
        ("1_000", "voltage", "write '1000'"),
    ],
)
def test_what_does_not_fit_is_refused_with_what_was_expected(text: str, kind: str, remedy: str) -> None:
    caught = refusal(text, kind)
    assert caught.remedy == remedy
    if remedy != "write '1000'":
        assert str(caught) == f"expected {KINDS[kind].title} such as '{KINDS[kind].example}'"


@pytest.mark.parametrize("number", [True, False, math.nan, math.inf, -math.inf, 10**400, None, [1.0], b"1"])
@pytest.mark.parametrize("kind", ["voltage", "fraction", "count", "gain", "price"])
def test_booleans_and_non_numbers_are_refused(number: object, kind: str) -> None:
    assert str(refusal(number, kind)).startswith("expected a")


def test_refusals_are_errors_of_ours_and_of_value() -> None:
    assert issubclass(QuantityError, LuxsiftError)
    assert issubclass(QuantityError, ValueError)
    with pytest.raises(KeyError):
        read_quantity("5 V", "no such kind")


@pytest.mark.parametrize(
    ("number", "kind", "remedy"),
    [
        (850, "length", "write '850 nm'"),
        ("850", "length", "write '850 nm'"),
        ("0.85", "length", "write '0.85 um'"),
        ("1.0001e-3", "length", "write '0.0010001 um'"),
        (5, "fraction", "write '5 %'"),
        ("1.5", "fraction", "write '1.5 %'"),
        ("200", "fraction", "write '200 ppm'"),
        (100_000, "gain", "write '100000 V/V'"),
    ],
)
def test_bare_numbers_that_cannot_be_show_the_likely_unit(number: float, kind: str, remedy: str) -> None:
    assert refusal(number, kind).remedy == remedy


def test_with_a_unit_the_size_is_not_judged() -> None:
    assert read_quantity("850 m", "length") == 850.0
    assert read_quantity("150 %", "fraction") == 1.5
    assert read_quantity("850", "length", unit="nm") == 850e-9
    assert read_quantity(5, "fraction", unit="%") == 0.05


def test_counts_are_whole() -> None:
    assert read_quantity("1e3", "count") == 1000.0
    assert str(refusal("1.5", "count")) == "expected a whole number such as '1000'"
    refusal("1e999", "count")
    refusal("2k", "count")


@pytest.mark.parametrize(
    ("text", "unit", "kind", "expected"),
    [
        ("10", "MHz", "frequency", 10e6),
        (10, "MHz", "frequency", 10e6),
        ("10 kHz", "MHz", "frequency", 10e3),
        ("4.7", "nV/√Hz", "voltage_noise", 4.7e-9),
        ("300", "K", "temperature", 26.85),
        ("120", "dB", "gain", 1e6),
        ("100", "V/mV", "gain", 1e5),
        ("\u22125", "mV", "voltage", -5e-3),
        ("10k", "Mohm", "resistance", 10e3),
        ("4k7", "Mohm", "resistance", 4700.0),
    ],
)
def test_a_stated_unit_counts_for_bare_numbers_only(text: str, unit: str, kind: str, expected: float) -> None:
    assert read_quantity(text, kind, unit=unit) == expected


def test_a_stated_unit_that_does_not_fit_is_refused() -> None:
    assert str(refusal("10", "frequency", unit="MV")) == "expected a unit of frequency, as in '10 MHz'"


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("4,7 pF", 4.7e-12),
        ("4,700 pF", 4.7e-12),
        ("4.7 pF", 4.7e-12),
        (",5 pF", 0.5e-12),
        ("0.125 pF", 0.125e-12),
    ],
)
def test_decimal_comma_where_the_file_has_them(text: str, expected: float) -> None:
    assert read_quantity(text, "capacitance", decimal_comma=True) == expected


@pytest.mark.parametrize(
    ("text", "decimal_comma", "remedy"),
    [
        ("4,7 pF", False, "write '4.7 pF'"),
        (",5 pF", False, "write '.5 pF'"),
        ("0,125 pF", False, "write '0.125 pF'"),
        ("1,000 pF", False, "write '1000' or '1.000'"),
        ("-1,000 pF", False, "write '-1000' or '-1.000'"),
        ("1 000 pF", False, "write '1000'"),
        ("1\u202f000\u202f000 pF", False, "write '1000000'"),
        ("1'000 pF", False, "write '1000'"),
        ("1,000,000 pF", False, "write '1000000'"),
        ("1.000.000 pF", False, "write '1000000'"),
        ("1,234.5 pF", False, "write '1234.5'"),
        ("1.000 pF", True, "write '1000' or '1,000'"),
        ("\u22121.000 pF", True, "write '-1000' or '-1,000'"),
        ("1.234,5 pF", True, "write '1234,5'"),
        ("1,000,000 pF", True, "write '1000000'"),
    ],
)
def test_separators_are_refused_with_what_to_write(text: str, decimal_comma: bool, remedy: str) -> None:
    assert refusal(text, "capacitance", decimal_comma=decimal_comma).remedy == remedy


cells = st.text(string.digits + ".,-+eE kKmMuµμΩ°%±/√()HzVAFWC€$\u00a0\u2212\u202f\n", max_size=14) | st.text(
    max_size=8
)


@given(cells, st.sampled_from(sorted(KINDS)), st.booleans())
def test_any_text_is_a_finite_number_or_a_refusal(text: str, kind: str, decimal_comma: bool) -> None:
    try:
        value = read_quantity(text, kind, decimal_comma=decimal_comma)
    except QuantityError:
        return
    assert math.isfinite(value)


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_every_kind_reads_its_own_example(kind: str) -> None:
    read_quantity(KINDS[kind].example, kind)
    shown = KINDS[kind].shown or KINDS[kind].symbol
    assert scale(shown, kind) is not None
