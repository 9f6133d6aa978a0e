"""The candidate that is looked at: its setting, its closed loop and its figures, arrays of one element."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optimizer.figures import Bench, Settings, amplifier_of, evaluate, input_capacitance
from optimizer.physics import loop as loops
from optimizer.search.space import Choice, Space, settings

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Subject:
    """What the request fixes, the setting `s`, its op-amp and closed loop, and its rounded figures."""

    bench: Bench
    s: Settings
    amp: loops.Amplifier
    loop: loops.Loop
    figures: Mapping[str, float]

    @property
    def transresistance(self) -> float:
        """H0 [ohm], not rounded."""
        return number(self.s.rf * self.loop.gain)

    @property
    def stable(self) -> bool:
        """Whether the closed loop's own answer dies away."""
        return bool(np.all(self.loop.e1 * self.loop.e2 > self.loop.e3))

    def fall(self, w: Floats) -> Floats:
        """|H0/H| at the angular frequencies `w` [rad/s]."""
        e1, e2, e3 = self.loop.e1, self.loop.e2, self.loop.e3
        return np.asarray(np.hypot(1.0 - e2 * w**2, w * (e1 - e3 * w**2)))


def subject(space: Space, choice: Choice) -> Subject:
    """The one-row `choice` of `space`."""
    s = settings(space, choice)
    amp = amplifier_of(s)
    with np.errstate(all="ignore"):
        loop = loops.close(amp, loops.Network(s.rf, s.cf, s.shunt, input_capacitance(s)))
        figures = evaluate(space.bench, s).figures
    return Subject(space.bench, s, amp, loop, {name: number(value) for name, value in figures.items()})


def number(value: ArrayLike) -> float:
    """The only element of an array."""
    return float(np.ravel(value)[0])
