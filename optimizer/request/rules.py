"""What the keys of a request owe to each other."""

from __future__ import annotations

from dataclasses import dataclass

from optimizer.quantities import show
from optimizer.request.types import ROLES
from optimizer.request.values import CATALOG_CURRENCY, Money
from optimizer.toml.place import dotted
from optimizer.toml.reading import Reading
from optimizer.toml.schema import Name


@dataclass(frozen=True, slots=True)
class _Order:
    """Two keys of one kind of which the first may not be above (`strict`: must be below) the second."""

    low: Name
    high: Name
    kind: str
    strict: bool = False


_ORDERS = (
    _Order(("supply", "low"), ("supply", "high"), "voltage", strict=True),
    _Order(("ambient", "coldest"), ("ambient", "hottest"), "temperature"),
    _Order(("light", "active_area", "from"), ("light", "active_area", "to"), "area"),
    _Order(("space", "divider", "from"), ("space", "divider", "to"), "resistance"),
    _Order(("space", "resistance", "from"), ("space", "resistance", "to"), "resistance"),
    _Order(("space", "capacitance", "from"), ("space", "capacitance", "to"), "capacitance"),
)
_CONVERTER_ORDER = _Order(("converter", "low"), ("converter", "high"), "voltage", strict=True)
_LIGHT: tuple[Name, ...] = (("light", "weakest"), ("light", "strongest"), ("light", "background"))


def check(reading: Reading) -> None:
    """Refuse what the keys contradict each other in; keys that went wrong themselves are passed over."""
    for order in _ORDERS:
        _check_order(order, reading)
    _check_converter(reading)
    _check_light(reading)
    _check_slew(reading)
    _check_cost(reading)
    _check_catalogs(reading)


def _check_order(order: _Order, reading: Reading) -> None:
    stated = [key for key in (order.low, order.high) if key in reading.values]
    low, high = reading.value(order.low), reading.value(order.high)
    if not stated or reading.is_wrong(order.low) or reading.is_wrong(order.high) or None in (low, high):
        return
    if low < high or (low == high and not order.strict):
        return
    words = "below" if order.strict else "not above"
    other = order.high if stated[0] == order.low else order.low
    if stated[0] == order.high:
        words = "above" if order.strict else "not below"
    value = reading.cells.get(other) or f"{show(reading.value(other), order.kind, 6)} when left out"
    rule = f"expected a value {words} {dotted(other)}, which is {value}"
    reading.refuse(stated[0], reading.cells[stated[0]], rule)


def _check_converter(reading: Reading) -> None:
    """A range that ends at the supply has the upper rail for its high end."""
    if reading.value(_CONVERTER_ORDER.high) != "supply":
        _check_order(_CONVERTER_ORDER, reading)
        return
    low, rail = reading.value(_CONVERTER_ORDER.low), reading.values.get(("supply", "high"))
    if rail is not None and ("converter", "low") in reading.values and low >= rail:
        rule = f"expected a value below supply.high, which is {reading.cells['supply', 'high']}"
        reading.refuse(("converter", "low"), reading.cells["converter", "low"], rule)


def _check_light(reading: Reading) -> None:
    """All three levels are one kind of light, and the weakest is not above the strongest."""
    levels = [(key, reading.values[key]) for key in _LIGHT if key in reading.values]
    kinds = {level.kind for _, level in levels} - {""}
    if len(kinds) > 1:
        first_key, first = levels[0]
        for key, level in levels[1:]:
            if level.kind not in (first.kind, ""):
                rule = (
                    f"expected one kind of light: this is {level.kind}, {dotted(first_key)} is {first.kind}"
                )
                reading.refuse(key, reading.cells[key], rule, "a bare number is power")
        return
    weakest, strongest = (reading.values.get(key) for key in _LIGHT[:2])
    if weakest and strongest and weakest.value > strongest.value:
        rule = f"expected a value not above light.strongest, which is {reading.cells['light', 'strongest']}"
        reading.refuse(("light", "weakest"), reading.cells["light", "weakest"], rule)


def _check_slew(reading: Reading) -> None:
    bandwidth, slew = ("targets", "bandwidth"), ("targets", "slew")
    if slew in reading.values and bandwidth not in reading.values and not reading.is_wrong(bandwidth):
        rule = "a slew target needs a bandwidth target: it says how many times the slew rate covers it"
        reading.refuse(slew, None, rule, "state targets.bandwidth too")


def _check_cost(reading: Reading) -> None:
    """A currency written with the cost agrees with that of the request."""
    cost, currency = reading.value(("targets", "cost")), reading.value(("currency",))
    if not isinstance(cost, Money) or cost.code in (None, currency) or reading.is_wrong(("currency",)):
        return
    rule = f"the cost is in {cost.code}, the request in {currency}"
    remedy = ""
    if currency == CATALOG_CURRENCY:
        rule, remedy = "a cost with a currency", f'state currency = "{cost.code}" at the top'
    reading.refuse(("targets", "cost"), reading.cells["targets", "cost"], rule, remedy)


def _check_catalogs(reading: Reading) -> None:
    """No file is read twice, under one role or two."""
    first: dict[str, str] = {}
    for role in ROLES:
        for file in reading.value(("catalogs", role)):
            if file in first:
                rule = f"this file stands under {first[file]} already"
                reading.refuse(("catalogs", role), file, rule, "name each catalog once")
            first.setdefault(file, f"catalogs.{role}")
