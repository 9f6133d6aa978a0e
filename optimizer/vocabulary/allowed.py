"""What the values of a catalog column may be, wherever they are stated: in a cell or in a request."""

from __future__ import annotations

import math
from collections.abc import Mapping
from types import MappingProxyType

from optimizer.quantities import KINDS, QuantityError
from optimizer.vocabulary.columns import Column

STATUSES = ("active", "not-for-new-designs", "last-time-buy", "obsolete")
ABSOLUTE_ZERO = -273.15

# What a stated `none` is in numbers: the value that has no effect.
NO_EFFECT: Mapping[str, float] = MappingProxyType(
    {
        "second_pole": math.inf,
        "bias_doubling": math.inf,
        "shunt_resistance": math.inf,
        "noise_corner": 0.0,
        "offset_drift": 0.0,
        "dark_current": 0.0,
        "rise_time": 0.0,
    }
)

# Columns of pairs that one value can stand for, and the x that it then has.
SINGLE_VALUE: Mapping[str, float] = MappingProxyType({"price": 1.0, "capacitance": 0.0})

_ABOVE_ZERO = frozenset(
    {
        "channels",
        "price",
        "supply_max",
        "quiescent_current",
        "gbw",
        "open_loop_gain",
        "second_pole",
        "min_gain",
        "slew_rate",
        "voltage_noise",
        "bias_doubling",
        "input_capacitance_common",
        "input_capacitance_differential",
        "output_current",
        "capacitance",
        "dark_doubling",
        "shunt_resistance",
        "rise_time",
        "active_area",
        "board_area",
        "from",
        "to",
        "values",
    }
)
_ZERO_OR_MORE = frozenset(
    {
        "stock",
        "lead_weeks",
        "supply_min",
        "noise_corner",
        "current_noise",
        "bias_current",
        "offset_voltage",
        "offset_drift",
        "output_low",
        "output_high",
        "responsivity",
        "dark_current",
        "reverse_max",
        "tolerance",
        "tempco",
        "parasitic_capacitance",
    }
)
_MAGNITUDE = frozenset({"bias_current", "offset_voltage", "offset_drift", "dark_current"})


def single_kind(column: Column) -> str | None:
    """Return the kind of quantity that one value of the column is, None where no single value can fill it."""
    if column.name in SINGLE_VALUE:
        return column.kind.rpartition(":")[2]
    return column.kind if column.kind in KINDS else None


def value_kind(column: Column) -> str | None:
    """Return the kind of a column's quantities (the second of pairs), None where it holds none."""
    kind = column.kind.rsplit(":", maxsplit=1)[-1]
    return kind if kind in KINDS else None


def refuse_impossible(column: str, value: float) -> None:
    """Raise QuantityError where no part can have this value [SI, temperatures in C] in this column."""
    if column in _ABOVE_ZERO and value <= 0:
        raise QuantityError("cannot be zero or negative", "leave the cell blank where the value is unknown")
    if column in _ZERO_OR_MORE and value < 0:
        remedy = "write the magnitude, without a sign" if column in _MAGNITUDE else ""
        raise QuantityError("cannot be negative", remedy)
    if column.startswith("temp_m") and value < ABSOLUTE_ZERO:
        raise QuantityError(f"cannot be below {ABSOLUTE_ZERO} C")
