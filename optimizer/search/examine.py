"""One candidate under the glass: its curves, noise, levels and step, and the values behind its figures."""

from __future__ import annotations

import numpy as np

from optimizer.search.glass.curves import curves
from optimizer.search.glass.levels import levels
from optimizer.search.glass.records import Curves, Glass, Level, Levels, NoiseSpectrum, Step
from optimizer.search.glass.spectrum import spectrum
from optimizer.search.glass.step import step
from optimizer.search.glass.subject import subject
from optimizer.search.glass.values import values
from optimizer.search.space import Choice, Space

__all__ = ["Curves", "Glass", "Level", "Levels", "NoiseSpectrum", "Step", "examine"]


def examine(space: Space, choice: Choice) -> Glass:
    """What the one-row `choice` of `space` looks like, by the physics of its figures."""
    with np.errstate(all="ignore"):
        looked_at = subject(space, choice)
        return Glass(
            curves=curves(looked_at),
            noise=spectrum(looked_at),
            levels=levels(looked_at),
            step=step(looked_at),
            values=values(space, choice, looked_at),
        )
