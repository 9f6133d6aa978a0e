"""Every key of a board file, as a table: how its value is read, what it may be, what stands when left out."""

from __future__ import annotations

from collections.abc import Mapping

from optimizer.planning.outline import SOLVERS, Costs, Limits, Rules, Solve
from optimizer.planning.values import amount, area, seconds
from optimizer.request.values import quantity, text, whole, word
from optimizer.toml.schema import Key, Name, Schema

CHANNELS: Name = ("channels",)
MOST_COPIES = 10_000  # more channels of one kind than any board holds

_LIMITS, _COSTS, _RULES, _SOLVE = Limits(), Costs(), Rules(), Solve()

_TABLES: Mapping[str, Mapping[str, Key]] = {
    "limits": {
        "cost": Key(amount(zero=False), _LIMITS.cost),
        "supply_current": Key(quantity("current", above=0.0), _LIMITS.supply_current),
        "area": Key(area, _LIMITS.area),
        "line_items": Key(whole(1), _LIMITS.line_items),
    },
    "costs": {
        "line_item": Key(amount(zero=True), _COSTS.line_item),
        "placement": Key(amount(zero=True), _COSTS.placement),
    },
    "rules": {
        "opamp_sources": Key(whole(1), _RULES.opamp_sources),
        "opamp_parts": Key(whole(0), _RULES.opamp_parts),
    },
    "solve": {
        "plans": Key(whole(1), _SOLVE.plans),
        "time": Key(seconds, _SOLVE.time),
        "solver": Key(word(SOLVERS), _SOLVE.solver),
    },
}
_OWN: Mapping[Name, Key] = {
    ("name",): Key(text),
    ("quantity",): Key(whole(1), 1),
    **{(table, name): key for table, keys in _TABLES.items() for name, key in keys.items()},
}
_OF_ONE: Mapping[Name, Key] = {
    ("name",): Key(text),
    ("request",): Key(text, example='"turbidity.toml"'),
    ("count",): Key(whole(1, MOST_COPIES), 1),
}
_ONLY_BOARD = {path[-1] for path in _OWN} - {path[-1] for path in _OF_ONE}

CHANNEL = Schema(_OF_ONE, hints={(name,): Schema(_OWN).stands(name) for name in _ONLY_BOARD})
BOARD = Schema(
    _OWN,
    lists={CHANNELS: CHANNEL},
    hints={("currency",): "the currency is that of the catalogs; a request may state it"},
)
