"""Every figure of a candidate worked by hand, in the order of the vocabulary."""

from __future__ import annotations

from collections.abc import Mapping
from functools import partial
from typing import TYPE_CHECKING

from optimizer.report.worked import dynamic, noise, steady
from optimizer.report.worked.row import Worked
from optimizer.vocabulary import VOCABULARY

if TYPE_CHECKING:
    from optimizer.search.examine import Glass


def worked(glass: Glass, figures: Mapping[str, float | None], light: str) -> tuple[Worked, ...]:
    """Each figure with its formula, numbers, value and source.

    `figures` are those of the record, None where one does not exist; `light` is the request's kind,
    'power' or 'irradiance'.
    """
    v, budget = glass.values, glass.noise.budget
    f = {name: float("nan") if value is None else float(value) for name, value in figures.items()}
    rows = {
        "bandwidth": partial(dynamic.bandwidth, v, f),
        "snr": partial(noise.snr, v, f, light),
        "dynamic_range": partial(noise.dynamic_range, v, f, light),
        "full_scale": partial(steady.full_scale, v, f, light),
        "phase_margin": partial(dynamic.phase_margin, v, f),
        "peaking": partial(dynamic.peaking, v, f),
        "slew": partial(steady.slew, v, f, light),
        "offset": partial(steady.offset, v, f),
        "supply_current": partial(steady.supply_current, v, f),
        "cost": partial(steady.cost, v, f),
        "error": partial(steady.error, v, f),
        "output_noise_dark": partial(noise.output_noise, "output_noise_dark", f, budget),
        "output_noise_weak": partial(noise.output_noise, "output_noise_weak", f, budget),
        "noise_equivalent_light": partial(noise.noise_equivalent_light, v, f, light),
        "transresistance": partial(steady.transresistance, v, f),
        "input_capacitance": partial(steady.input_capacitance, v, f),
        "reverse_bias": partial(steady.reverse_bias, v, f),
    }
    return tuple(rows[name]() for name in VOCABULARY)
