"""The one door from the tests of this folder to the engine: a case in, the engine's answers out.

A case becomes a request and catalogs in which it is the only thing to choose (or, for a divider, one
of the few), and the engine does the rest: temperature laws, prices, supply current, checks, figures.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.figures import CHECKS, evaluate
from optimizer.request.types import Ambient, Converter, Divider, Light, Request, Space, Supply, Targets
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.roles import PASSES
from optimizer.vocabulary import COLUMNS
from tests.independent.direct import Case

NOWHERE = (1e3, 1e3)  # F; a range that holds no capacitor


def parts(role: str, rows: Sequence[Mapping[str, Any]]) -> Parts:
    """Catalog columns from rows of plain values; a number that is not given is unknown."""
    text: dict[str, Any] = {}
    number: dict[str, Any] = {}
    points: dict[str, Any] = {}
    for name, column in COLUMNS[role].items():
        cells = [row.get(name) for row in rows]
        if column.kind.startswith(("points", "list", "price")):
            points[name] = tuple(tuple((float(x), float(y)) for x, y in cell or ()) for cell in cells)
        elif column.kind in ("text", "status", "series"):
            text[name] = np.array([cell or "" for cell in cells], dtype=str)
        else:
            number[name] = np.array([np.nan if cell is None else cell for cell in cells], dtype=float)
    return Parts(role, text, number, points, {})


def family(name: str, values: Sequence[float], price: object, parasitic: float = 0.0) -> dict[str, Any]:
    """A family of resistors or capacitors that offers just `values`."""
    listed = [(value, 0.0) for value in values]
    return {
        "family": name,
        "series": "list",
        "values": listed,
        "price": price,
        "parasitic_capacitance": parasitic,
    }


def catalogs(case: Case) -> Catalogs:
    named = {"part": "P1", "maker": "Maker A", "status": "active"}
    feedback, prices, reference = case["feedback"], case["prices"], case["reference"]
    # Rf in a range of its own beside the divider's values, so that no family serves both
    resistors = [family("feedback", [feedback["resistance"]], prices["resistor"], feedback["parasitic"])]
    capacitors = [family("placed", [feedback["placed"]] if feedback["placed"] else [], prices["capacitor"])]
    if reference["kind"] == "divider":
        pair = sorted({reference["top"], reference["bottom"]})
        resistors += [family(f"divider{i}", pair, price) for i, price in enumerate(prices["divider"])]
        single = [reference["bypass"]]
        capacitors += [family(f"bypass{i}", single, price) for i, price in enumerate(prices["bypass"])]
    return Catalogs(
        opamps=parts("opamps", [named | case["opamp"]]),
        photodiodes=parts("photodiodes", [named | case["diode"]]),
        resistors=parts("resistors", resistors),
        capacitors=parts("capacitors", capacitors),
        sources=(),
        left_out=(),
        currency=None,
    )


def request(case: Case) -> Request:
    rf, placed = case["feedback"]["resistance"], case["feedback"]["placed"]
    return Request(
        name="one setting",
        light=Light(**case["light"]),
        supply=Supply(**case["supply"]),
        catalogs={},
        path=Path("request.toml"),
        quantity=case["quantity"],
        ambient=Ambient(**case["ambient"], stated=True),
        targets=Targets(bandwidth=case["bandwidth_target"]),
        space=Space(
            wirings=(case["wiring"],),
            references=(case["reference"]["kind"],),
            divider=divider(case),
            resistance=(rf, rf),
            capacitance=(placed, placed) if placed else NOWHERE,
            no_capacitor=not placed,
            low_pass=(case["low_pass"],),
            stray=case["stray"],
            dark_on_rail=case["dark_on_rail"],
            noise_from=case["noise_from"],
        ),
        converter=case["converter"] and Converter(**case["converter"]),
    )


def divider(case: Case) -> Divider:
    reference = case["reference"]
    if reference["kind"] == "ground":
        return Divider()
    ends = sorted((reference["top"], reference["bottom"]))
    return Divider(series="E12", low=ends[0], high=ends[1], bypass=reference["bypass"])


def engine_setting(case: Case) -> tuple[spaces.Space, spaces.Choice]:
    """The compiled space of a case and the case as a choice in it."""
    space = spaces.build(request(case), catalogs(case))
    context = 0
    if case["reference"]["kind"] == "divider":
        pair = (case["reference"]["top"], case["reference"]["bottom"])
        found = list(zip(space.contexts.top, space.contexts.bottom, strict=True))
        context = found.index(pair)
    zero = np.zeros(1, dtype=np.int64)
    return space, spaces.Choice(zero, zero, zero + context, zero, zero, zero)


def engine_figures(case: Case) -> dict[str, float]:
    """The engine's figures of one case; NaN where it says that a figure does not exist."""
    space, choice = engine_setting(case)
    answer = evaluate(space.bench, spaces.settings(space, choice))
    return {name: float(np.ravel(value)[0]) for name, value in answer.figures.items()}


def engine_verdict(case: Case) -> str | None:
    """The first check of the model that the engine says a case fails; None where it is eligible."""
    space, choice = engine_setting(case)
    reach = int(plain.judge(space, choice, "cost").reach[0])
    return None if reach == PASSES else CHECKS[reach]
