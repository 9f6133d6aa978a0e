"""The table of the kinds of quantity, each with its units, messages and way of being shown."""

from __future__ import annotations

from collections.abc import Mapping
from decimal import Decimal
from functools import lru_cache
from types import MappingProxyType

from optimizer.quantities.units import AS_IT_IS, PREFIXES, Kind, Names, QuantityError, Scale, read_unit


def _from_decibel(value: float) -> float:
    if abs(value) > 6000:  # 10 ** 300: far outside any gain, near the end of what a float holds
        raise QuantityError(
            "no gain is this large; a gain without a unit is in dB", f"write '{value:.6g} V/V'"
        )
    return float(10.0 ** (value / 20.0))


def _from_kelvin(value: float) -> float:
    return float(Decimal(repr(value)) - Decimal("273.15"))


def _bare_wavelength(value: float) -> float:
    if value > 1e-3:
        unit = "nm" if value >= 100 else "um"
        raise QuantityError(
            "a wavelength without a unit is in metres, and this is far too long",
            f"write '{value:.12g} {unit}'",
        )
    return value


def _bare_fraction(value: float) -> float:
    if abs(value) > 1:
        unit = "%" if abs(value) <= 100 else "ppm"
        raise QuantityError(
            "a tolerance without a unit is a fraction, and this is above 1", f"write '{value:.12g} {unit}'"
        )
    return value


def _whole(value: float) -> float:
    if value != int(value):
        raise QuantityError("expected a whole number such as '1000'")
    return value


_NO_PREFIX: Mapping[str, int] = MappingProxyType({})
_METRIC = MappingProxyType({**PREFIXES, "c": -2})
_VOLT = Names(("V",))
_AMPERE = Names(("A",))
_WATT = Names(("W",))
_SECOND = Names(("s",))
_SQUARE_METRE = Names(("m2",), _METRIC, 2)
_ROOT_HERTZ = Names(("rtHz",), _NO_PREFIX)
_DEGREE = Names(("K", "C", "degC"), _NO_PREFIX)
_LEVEL = {"db": AS_IT_IS}
_DECIBEL = Scale(0, _from_decibel)
_COUNT = Scale(0, _whole)
_WEEKS = dict.fromkeys(("weeks", "week", "wks", "wk"), AS_IT_IS)
_OHM_LETTERS = {"L": -3, "m": -3, "R": 0, "r": 0, "k": 3, "K": 3, "M": 6, "G": 9}
_FARAD_LETTERS = {"p": -12, "n": -9, "u": -6, "m": -3, "F": 0}

_ALL = (
    Kind("frequency", "a frequency", "10 MHz", "Hz", over=Names(("Hz",))),
    Kind(
        "resistance", "a resistance", "10 kohm", "ohm", over=Names(("ohm", "ohms", "R")), letters=_OHM_LETTERS
    ),
    Kind("capacitance", "a capacitance", "4.7 pF", "F", over=Names(("F",)), letters=_FARAD_LETTERS),
    Kind("voltage", "a voltage", "50 mV", "V", over=_VOLT),
    Kind("current", "a current", "3 mA", "A", over=_AMPERE),
    Kind("power", "a power", "30 nW", "W", over=_WATT),
    Kind("irradiance", "an irradiance", "0.4 uW/cm2", "W/m2", over=_WATT, under=_SQUARE_METRE),
    Kind(
        "length", "a wavelength", "850 nm", "m", over=Names(("m",), _METRIC), bare=Scale(0, _bare_wavelength)
    ),
    Kind(
        "area",
        "an area",
        "7.5 mm2",
        "m2",
        over=_SQUARE_METRE,
        prefix_alone=False,
        shown="mm2",
        shown_shift=-6,
        engineering=False,
    ),
    Kind(
        "temperature",
        "a temperature",
        "-20 C",
        "C",
        fixed={"c": AS_IT_IS, "degc": AS_IT_IS, "k": Scale(0, _from_kelvin)},
        shown="\u00b0C",
        engineering=False,
    ),
    Kind(
        "temperature_difference",
        "a temperature difference",
        "10 K",
        "K",
        over=Names(("K", "C", "degC"), MappingProxyType({"m": -3})),
        engineering=False,
    ),
    Kind("time", "a time", "10 ns", "s", over=_SECOND),
    Kind(
        "angle",
        "an angle",
        "60 deg",
        "deg",
        fixed=dict.fromkeys(("deg", "degree", "degrees"), AS_IT_IS),
        engineering=False,
    ),
    Kind("level", "a level in decibels", "46 dB", "dB", fixed=_LEVEL, engineering=False),
    Kind(
        "gain",
        "a gain",
        "100 dB",
        "V/V",
        over=_VOLT,
        under=_VOLT,
        fixed={"db": _DECIBEL},
        bare=_DECIBEL,
        prefix_alone=False,
    ),
    Kind(
        "gain_ratio",
        "a gain",
        "10 V/V",
        "V/V",
        over=_VOLT,
        under=_VOLT,
        fixed={"db": _DECIBEL},
        engineering=False,
    ),
    Kind(
        "fraction",
        "a fraction",
        "5 %",
        "",
        fixed={"%": Scale(-2), "percent": Scale(-2), "ppm": Scale(-6)},
        bare=Scale(0, _bare_fraction),
        shown="%",
        shown_shift=-2,
        engineering=False,
        signed_pair=True,
    ),
    Kind("responsivity", "a responsivity", "0.6 A/W", "A/W", over=_AMPERE, under=_WATT, engineering=False),
    Kind("voltage_noise", "a voltage noise density", "8 nV/rtHz", "V/rtHz", over=_VOLT, under=_ROOT_HERTZ),
    Kind("current_noise", "a current noise density", "5 fA/rtHz", "A/rtHz", over=_AMPERE, under=_ROOT_HERTZ),
    Kind(
        "slew_rate",
        "a slew rate",
        "5 V/us",
        "V/s",
        over=_VOLT,
        under=_SECOND,
        shown="V/\u00b5s",
        shown_shift=6,
        engineering=False,
    ),
    Kind("drift", "a voltage drift", "2 uV/C", "V/K", over=_VOLT, under=_DEGREE, signed_pair=True),
    Kind(
        "tempco",
        "a temperature coefficient",
        "50 ppm/C",
        "1/K",
        fixed={
            f"{top}/{bottom}": Scale(shift)
            for top, shift in (("1", 0), ("%", -2), ("ppm", -6), ("ppb", -9))
            for bottom in ("k", "c", "degc")
        },
        shown="ppm/K",
        shown_shift=-6,
        engineering=False,
        signed_pair=True,
    ),
    Kind("price", "a price", "1.85", "", engineering=False),
    Kind(
        "count",
        "a whole number",
        "1000",
        "",
        fixed=dict.fromkeys(("pcs", "pc", "pieces", "piece"), _COUNT),
        bare=_COUNT,
        engineering=False,
    ),
    Kind("ratio", "a number", "1.5", "", engineering=False),
    Kind("duration_weeks", "a time in weeks", "12 weeks", "weeks", fixed=_WEEKS, engineering=False),
)

KINDS: Mapping[str, Kind] = MappingProxyType({kind.name: kind for kind in _ALL})


@lru_cache(maxsize=4096)
def scale(unit: str, kind: str) -> Scale | None:
    """`read_unit` by the kind's name, remembered: a catalog has few spellings and many cells."""
    return read_unit(unit, KINDS[kind])
