"""The intermediate values that the worked figures use, each worked by hand too."""

from __future__ import annotations

from typing import TYPE_CHECKING

from optimizer.report.worked import dynamic, noise, steady
from optimizer.report.worked.bands import bands
from optimizer.report.worked.row import Worked

if TYPE_CHECKING:
    from optimizer.search.examine import Glass


def steps(glass: Glass) -> tuple[Worked, ...]:
    """Reference, swing, time constants, coefficients, crossover, noise integrals and contributions.

    `figure` of a row is its symbol in the formulas, or the contribution's name in the noise budget.
    """
    v, budget = glass.values, glass.noise.budget
    return (
        steady.temperature(v),
        *((steady.vref(v), steady.divider_resistance(v)) if v["divided"] else ()),
        *steady.swing(glass),
        steady.noise_gain(v),
        steady.feedback_capacitance(v),
        *dynamic.times_of_loop(v),
        *dynamic.coefficients(v),
        dynamic.crossover(v),
        *bands(v, budget),
        *noise.contributions(v, budget),
    )
