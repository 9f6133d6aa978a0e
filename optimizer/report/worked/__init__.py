"""Each figure redone by hand: the formula, the same with its numbers put in, the value and the source.

`worked` gives the figures in the order of the record, `steps` the intermediate values that they use.
"""

from __future__ import annotations

from optimizer.report.worked.figures import worked
from optimizer.report.worked.row import Worked
from optimizer.report.worked.steps import steps

__all__ = ["Worked", "steps", "worked"]
