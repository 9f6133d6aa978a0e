"""Every catalog column: name, kind, meaning, what a blank counts as, and its usual range."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType


@dataclass(frozen=True, slots=True)
class Column:
    """One catalog column.

    `kind`: 'text', 'status', 'series', 'price' (one number, or breaks), 'points:X:Y' (pairs, or one Y),
    'list:X' (several), or a key of `optimizer.quantities.KINDS`. `default_text` is what a blank is read
    as ('' = unknown); two are words for what is worked out: the part itself, sqrt(2 q Ib25).
    `usual` (low, high) in SI, of Y in pairs, marks what `inspect` finds suspicious; it refuses nothing.
    """

    name: str
    kind: str
    meaning: str
    required: bool = False
    default_text: str = ""
    none_allowed: bool = False
    usual: tuple[float, float] | None = None


_PRICE = Column("price", "price", "unit price, or breaks quantity:price", required=True, usual=(1e-4, 1e4))
_SUPPLIED = (
    Column("status", "status", "whether it may still be designed in", default_text="active"),
    Column("stock", "count", "pieces that can be had", usual=(0.0, 1e8)),
    Column("lead_weeks", "duration_weeks", "weeks until it arrives", usual=(0.0, 104.0)),
    _PRICE,
)
_BOARD_AREA = Column("board_area", "area", "board area it takes", usual=(1e-7, 1e-3))
_BODY = (
    Column("package", "text", "the body it comes in"),
    Column("pinout", "text", "name of its pin arrangement"),
    _BOARD_AREA,
)
_TEMPERATURES = (
    Column("temp_min", "temperature", "coldest it works at", usual=(-65.0, 25.0)),
    Column("temp_max", "temperature", "hottest it works at", usual=(40.0, 225.0)),
)
_NAMED = (
    Column("part", "text", "part number", required=True),
    Column("maker", "text", "who makes it", required=True),
)

_OPAMPS = (
    *_NAMED,
    Column("family", "text", "the same amplifier in other packages", default_text="the part itself"),
    *_BODY,
    Column("channels", "count", "amplifiers in the package", default_text="1", usual=(1.0, 8.0)),
    *_SUPPLIED,
    Column("supply_min", "voltage", "least V+ - V- it works at", required=True, usual=(0.7, 36.0)),
    Column("supply_max", "voltage", "most V+ - V- it stands", required=True, usual=(1.8, 200.0)),
    Column(
        "quiescent_current",
        "current",
        "supply current per amplifier at rest",
        required=True,
        usual=(1e-7, 0.1),
    ),
    Column("gbw", "frequency", "gain-bandwidth product", required=True, usual=(1e3, 20e9)),
    Column("open_loop_gain", "gain", "gain at rest", default_text="100 dB", usual=(1e3, 1e9)),
    Column(
        "second_pole",
        "frequency",
        "second pole of the gain",
        default_text="none",
        none_allowed=True,
        usual=(1e4, 1e11),
    ),
    Column("min_gain", "gain_ratio", "least stable noise gain", default_text="1", usual=(1.0, 100.0)),
    Column("slew_rate", "slew_rate", "fastest output slope", usual=(1e2, 2e10)),
    Column("voltage_noise", "voltage_noise", "white input voltage noise", required=True, usual=(5e-10, 1e-6)),
    Column(
        "noise_corner",
        "frequency",
        "where flicker equals white voltage noise",
        none_allowed=True,
        usual=(0.01, 1e7),
    ),
    Column(
        "current_noise",
        "current_noise",
        "white input current noise",
        default_text="sqrt(2 q Ib25)",
        usual=(1e-17, 1e-10),
    ),
    Column("bias_current", "current", "input bias current at 25 C", required=True, usual=(1e-16, 1e-4)),
    Column(
        "bias_doubling",
        "temperature_difference",
        "warming that doubles the bias current",
        none_allowed=True,
        usual=(5.0, 50.0),
    ),
    Column("offset_voltage", "voltage", "largest input offset at 25 C", required=True, usual=(0.0, 0.05)),
    Column("offset_drift", "drift", "largest offset change per kelvin", none_allowed=True, usual=(0.0, 1e-4)),
    Column("input_low", "voltage", "lowest input, above V-", usual=(-1.0, 5.0)),
    Column("input_high", "voltage", "highest input, below V+ (negative: beyond it)", usual=(-1.0, 5.0)),
    Column("output_low", "voltage", "lowest output, above V-", usual=(0.0, 5.0)),
    Column("output_high", "voltage", "highest output, below V+", usual=(0.0, 5.0)),
    Column("input_capacitance_common", "capacitance", "each input to ground", usual=(1e-14, 1e-10)),
    Column("input_capacitance_differential", "capacitance", "between the inputs", usual=(1e-14, 1e-10)),
    Column("output_current", "current", "what the output can drive", usual=(1e-4, 2.0)),
    *_TEMPERATURES,
)
_PHOTODIODES = (
    *_NAMED,
    *_BODY,
    *_SUPPLIED,
    Column("responsivity", "points:length:responsivity", "wavelength:A/W", required=True, usual=(0.001, 1.5)),
    Column(
        "capacitance",
        "points:voltage:capacitance",
        "reverse bias:capacitance, or one value at 0 V",
        required=True,
        usual=(1e-13, 1e-7),
    ),
    Column("dark_current", "current", "dark current at 25 C, biased", none_allowed=True, usual=(1e-14, 1e-4)),
    Column(
        "dark_doubling",
        "temperature_difference",
        "warming that doubles the dark current",
        default_text="10 K",
        usual=(4.0, 20.0),
    ),
    Column("shunt_resistance", "resistance", "resistance at 0 V, 25 C", none_allowed=True, usual=(1e2, 1e13)),
    Column("reverse_max", "voltage", "most reverse bias it stands", usual=(0.1, 1000.0)),
    Column("rise_time", "time", "its own rise time, 10 % to 90 %", none_allowed=True, usual=(1e-11, 1e-3)),
    Column("active_area", "area", "light-sensitive area", usual=(1e-10, 1e-3)),
    *_TEMPERATURES,
)


_FAMILY = (
    Column("family", "text", "name of the family", required=True),
    Column("maker", "text", "who makes it"),
    Column("package", "text", "the body it comes in"),
    _BOARD_AREA,
)
_SERIES = Column("series", "series", "E3 to E192 of IEC 60063, or list", required=True)
_TOLERANCE = Column("tolerance", "fraction", "largest deviation of the value", usual=(1e-5, 0.5))
_RESISTORS = (
    *_FAMILY,
    _SERIES,
    Column("from", "resistance", "lowest value of the series", usual=(1e-3, 1e12)),
    Column("to", "resistance", "highest value of the series", usual=(1e-3, 1e12)),
    Column("values", "list:resistance", "the values, where the series is list", usual=(1e-3, 1e12)),
    _TOLERANCE,
    Column("tempco", "tempco", "largest change of the value per kelvin", usual=(1e-7, 5e-3)),
    Column("parasitic_capacitance", "capacitance", "across its ends", default_text="0", usual=(0.0, 5e-12)),
    _PRICE,
)
_CAPACITORS = (
    *_FAMILY,
    _SERIES,
    Column("from", "capacitance", "lowest value of the series", usual=(1e-13, 1e-3)),
    Column("to", "capacitance", "highest value of the series", usual=(1e-13, 1e-3)),
    Column("values", "list:capacitance", "the values, where the series is list", usual=(1e-13, 1e-3)),
    _TOLERANCE,
    Column("dielectric", "text", "what it is made of"),
    _PRICE,
)


def _by_name(columns: tuple[Column, ...]) -> Mapping[str, Column]:
    return MappingProxyType({column.name: column for column in columns})


# Role -> column -> Column, in the contract's order, which also orders two blanks of one part.
COLUMNS: Mapping[str, Mapping[str, Column]] = MappingProxyType(
    {
        "opamps": _by_name(_OPAMPS),
        "photodiodes": _by_name(_PHOTODIODES),
        "resistors": _by_name(_RESISTORS),
        "capacitors": _by_name(_CAPACITORS),
    }
)

ROLES = tuple(COLUMNS)

# Role -> the column that names a row; it stands first.
NAMES: Mapping[str, str] = MappingProxyType({role: next(iter(columns)) for role, columns in COLUMNS.items()})
