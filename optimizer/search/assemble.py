"""From settings by index to candidates by name, with every figure, target and what was assumed."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.catalog.parts import Catalogs, Parts
from optimizer.figures import FIGURES, evaluate
from optimizer.request.types import WIRINGS
from optimizer.search.change.outlines import outlines
from optimizer.search.result import SOURCES, Alternate, Candidate, Reference, TargetValue
from optimizer.search.sources import Served, alternates
from optimizer.search.space import Choice, Space, settings
from optimizer.search.spread.worst import Worst, worst

Floats = NDArray[np.float64]

Used = tuple[int, tuple[str, ...]]
"""A family's catalog row, and the columns of it that a setting uses."""

LINEAR_MODEL = ("dynamic_range", "output_noise_dark")
"""Figures that are only the linear model's where the dark output rests on the rail."""


def candidates(space: Space, catalogs: Catalogs, choice: Choice) -> tuple[Candidate, ...]:
    """The candidates of `choice`, in its order."""
    if not choice.opamp.size:
        return ()
    with np.errstate(all="ignore"):
        figures = evaluate(space.bench, settings(space, choice)).figures
    at_worst = worst(space, choice)
    rows = range(choice.opamp.size)
    found = [_candidate(space, catalogs, choice, row, (figures, at_worst)) for row in rows]
    if space.request.resilience.opamp_sources > 1:
        served = alternates(space, choice)
        found = [_sourced(space, catalogs, one, (served, row)) for row, one in enumerate(found)]
    return tuple(found)


def _sourced(space: Space, catalogs: Catalogs, candidate: Candidate, served: tuple[Served, int]) -> Candidate:
    """`candidate` with its alternates, the cheapest first, and whether they are too few."""
    every, row = served
    text = catalogs.opamps.text
    others = [
        Alternate(
            str(text["part"][every.opamp[i]]),
            str(text["maker"][every.opamp[i]]),
            float(every.judged.cost[i]),
            margins.limiting(every.judged.margin_columns[i].tolist(), space.limits),
            float(every.judged.margin_columns[i].min()),
        )
        for i in np.flatnonzero(every.row == row)
    ]
    others.sort(key=lambda other: (other.cost, other.opamp, other.opamp_maker))
    makers = {candidate.opamp_maker, *(other.opamp_maker for other in others)}
    few = not candidate.missed and len(makers) < space.request.resilience.opamp_sources
    missed = (SOURCES,) if few else candidate.missed
    return replace(candidate, alternates=tuple(others), missed=missed)


def plain_number(value: float) -> float | None:
    """A figure for the record: 9 digits, None where it does not exist."""
    return float(f"{value:.9g}") if np.isfinite(value) else None


def _targets(
    space: Space, figures: Mapping[str, Floats], at_worst: Worst | None, row: int
) -> Iterator[TargetValue]:
    """The graded targets of one setting: at nominal, or by the worst corner where corners are graded."""
    for name, limit in space.limits.items():
        value = figures[name][row]
        nominal = plain_number(float(value))
        if at_worst is None:
            yield TargetValue(name, nominal, limit, float(margins.margin(name, value, limit)))
        else:
            least = plain_number(float(at_worst.value[name][row]))
            margin = float(at_worst.margin[name][row])
            yield TargetValue(name, nominal, limit, margin, least, at_worst.corner(name, row))


def _candidate(
    space: Space,
    catalogs: Catalogs,
    choice: Choice,
    row: int,
    graded: tuple[Mapping[str, Floats], Worst | None],
) -> Candidate:
    figures, at_worst = graded
    o, d, x, r, c, low = (int(column[row]) for column in choice.columns())
    values = {name: plain_number(float(figures[name][row])) for name in FIGURES}
    targets = tuple(_targets(space, figures, at_worst, row))
    limiting = margins.limiting([target.margin for target in targets], space.limits)
    family = int(space.capacitors.family[c])
    lag = float(space.low_passes[low])
    on_rail = space.bench.dark_on_rail and space.bench.low == 0.0
    linear = on_rail and space.contexts.sign[x] > 0 and not space.contexts.divided[x]
    return Candidate(
        photodiode=str(catalogs.photodiodes.text["part"][d]),
        photodiode_maker=str(catalogs.photodiodes.text["maker"][d]),
        opamp=str(catalogs.opamps.text["part"][o]),
        opamp_maker=str(catalogs.opamps.text["maker"][o]),
        wiring=WIRINGS[int(space.contexts.wiring[x])],
        reference=_reference(space, o, x),
        feedback_resistance=float(space.resistors.value[r]),
        resistor_family=space.resistors.names[int(space.resistors.family[r])],
        feedback_capacitance=float(space.capacitors.value[c]),
        capacitor_family=None if family < 0 else space.capacitors.names[family],
        low_pass=None if lag == 0.0 else plain_number(1.0 / (2.0 * np.pi * lag)),
        figures=values,
        targets=targets,
        limiting=limiting,
        margin=min(target.margin for target in targets),
        missed=tuple(target.name for target in targets if target.margin < 0.0),
        assumed=_assumed(space, catalogs, choice, row),
        linear_model=LINEAR_MODEL if linear else (),
        outlines=outlines(space, catalogs, (o, d, x, r, c)),
    )


def _reference(space: Space, opamp: int, context: int) -> Reference:
    x = space.contexts
    divided, buffered = bool(x.divided[context]), bool(x.buffered[context])
    return Reference(
        kind="divider" if divided else "ground",
        voltage=float(f"{x.vref[context]:.9g}"),
        top=float(x.top[context]) if divided else None,
        bottom=float(x.bottom[context]) if divided else None,
        buffered=buffered,
        extra_package=buffered and not bool(space.opamps.spare[opamp]),
    )


def _assumed(space: Space, catalogs: Catalogs, choice: Choice, row: int) -> tuple[str, ...]:
    """The filled blanks that this candidate's figures and checks use, sorted."""
    o, d, x, r, c, _ = (int(column[row]) for column in choice.columns())
    biased = bool(space.contexts.biased[x])
    unused = {"dark_current", "reverse_max"} if not biased else {"shunt_resistance"}
    unused |= _needless(space)
    names = _filled("opamp", catalogs.opamps, o, unused)
    names |= _filled("photodiode", catalogs.photodiodes, d, unused)
    for row_of, used in _families(space, x, r, c):
        parts = catalogs.resistors if row_of == "resistor" else catalogs.capacitors
        for family, columns in used:
            names |= {f"{row_of}.{n}" for n in columns if n in parts.assumed and parts.assumed[n][family]}
    return tuple(sorted(names))


def _needless(space: Space) -> set[str]:
    """Columns that no figure or check of this request uses."""
    request = space.request
    unused = {"board_area", "lead_weeks"}
    if not request.tolerance.stated:
        unused |= {"tolerance", "tempco"}
    if not request.ambient.stated:
        unused |= {"temp_min", "temp_max", "bias_doubling", "offset_drift"}
    if request.ambient.hottest == 25.0:
        unused |= {"dark_doubling"}
    if request.supply.load is None:
        unused |= {"output_current"}
    if request.targets.bandwidth is None:
        unused |= {"slew_rate"}
    light = request.light
    if light.kind == "power" and light.area_from is None and light.area_to is None:
        unused |= {"active_area"}
    return unused


def _filled(role: str, parts: Parts, row: int, unused: set[str]) -> set[str]:
    return {f"{role}.{name}" for name, mask in parts.assumed.items() if mask[row] and name not in unused}


def _families(space: Space, context: int, resistor: int, capacitor: int) -> Iterator[tuple[str, list[Used]]]:
    """By role, the catalog rows of the families of a setting and the columns that its figures use."""
    x, r, c = space.contexts, space.resistors, space.capacitors
    offered = ("price", "from", "to")
    spread = ("tolerance", "tempco") if space.request.tolerance.stated else ()
    feedback = (*offered, "parasitic_capacitance", *spread)
    resistors: list[Used] = [(r.rows[int(r.family[resistor])], feedback)]
    capacitors: list[Used] = []
    if c.family[capacitor] >= 0:
        capacitors.append((c.rows[int(c.family[capacitor])], (*offered, *spread)))
    if x.divided[context]:
        resistors.append((int(x.resistors[context]), (*offered, *spread)))
        capacitors.append((int(x.bypass[context]), offered))
    yield "resistor", resistors
    yield "capacitor", capacitors
