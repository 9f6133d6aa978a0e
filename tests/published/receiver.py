"""The engine's loop and noise under the published examples' own assumptions.

Most published formulas take the op-amp as a pure integrator (infinite gain at rest, no second pole):
here a gain at rest so large that it no longer shows, in the engine's exact loop.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy import signal
from scipy.optimize import brentq

from optimizer.physics import loop as loops
from optimizer.physics import noise

INTEGRATOR = 1e13
"""Gain at rest that stands for an infinite one."""

IDEAL = 1e16
"""GBW [Hz] that stands for an op-amp with no limits."""

NONE = np.zeros(1)


@dataclass(frozen=True)
class Receiver:
    """One transimpedance amplifier, or any stage of the same noise gain (shunt: 1/Rsh [S])."""

    gbw: float
    rf: float
    cf: float
    cin: float
    shunt: float = 0.0

    @cached_property
    def amp(self) -> loops.Amplifier:
        return loops.amplifier(*(np.array([v]) for v in (INTEGRATOR, self.gbw, np.inf)))

    @cached_property
    def loop(self) -> loops.Loop:
        network = loops.Network(*(np.array([v]) for v in (self.rf, self.cf, self.shunt, self.cin)))
        return loops.close(self.amp, network)

    @property
    def h0(self) -> float:
        return self.rf * self.loop.gain.item()

    @property
    def natural_frequency(self) -> float:
        """Of the second-order denominator [Hz]."""
        return 1 / (2 * np.pi * np.sqrt(self.loop.e2.item()))

    @property
    def q(self) -> float:
        return np.sqrt(self.loop.e2.item()) / self.loop.e1.item()

    @property
    def bandwidth(self) -> float:
        return loops.bandwidth(self.loop, diode=NONE, low_pass=NONE).item()

    @property
    def phase_margin(self) -> float:
        return loops.phase_margin(self.amp, self.loop).item()

    @property
    def peaking(self) -> float:
        return loops.peaking(self.loop).item()

    @property
    def crossover(self) -> float:
        return loops.crossover(self.amp, self.loop).item() / (2 * np.pi)

    @property
    def noise_gain_zero(self) -> float:
        """Where the noise gain begins to rise [Hz], the shunt aside."""
        return 1 / (2 * np.pi * self.loop.total.item())

    @property
    def feedback_pole(self) -> float:
        """1/(2 pi Rf Cf) [Hz]."""
        return 1 / (2 * np.pi * self.loop.feedback.item())

    @property
    def high_noise_gain(self) -> float:
        """1 + Cin/Cf."""
        return (self.loop.total / self.loop.feedback).item()

    @property
    def overshoot(self) -> float:
        """Of the step response [%], stepped by scipy.signal from the engine's denominator."""
        e1, e2, e3 = (c.item() for c in (self.loop.e1, self.loop.e2, self.loop.e3))
        unit = np.sqrt(e2)
        system = signal.TransferFunction([1.0], [e3 / unit**3, 1.0, e1 / unit, 1.0])
        _, response = signal.step(system, T=np.linspace(0, 30, 30001))
        return max(0.0, 100 * (response.max() - 1))

    @cached_property
    def white(self) -> noise.Band:
        return noise.white_band((self.loop.e1, self.loop.e2, self.loop.e3))

    def flicker(self, start: float) -> noise.Band:
        return noise.flicker_band(self.loop, NONE, start)

    def current_rms(self, density: float) -> float:
        """Output [V] of a white current density squared [A2/Hz] at the summing node."""
        return np.sqrt(noise.output_current(np.array([self.h0]), density, self.white).item())

    def voltage_rms(self, density: float) -> float:
        """Output [V] of a white voltage density squared [V2/Hz] at the op-amp's input."""
        return np.sqrt(noise.amplifier_voltage(self.loop, density, self.white).item())

    def fall(self, frequency: float) -> float:
        """|H0/H|^2 at a frequency [Hz]."""
        c1, c2, c3 = (c.item() for c in loops.power_coefficients(self.loop))
        x = (2 * np.pi * frequency) ** 2
        return 1 + x * (c1 + x * (c2 + x * c3))


def ideal(rf: float, cf: float) -> Receiver:
    """Rf and Cf around an op-amp without limits: a first-order response."""
    return Receiver(IDEAL, rf, cf, 0.0)


def flat_capacitor(gbw: float, rf: float, cin: float) -> float:
    """The Cf [F] that makes the engine's loop maximally flat (Butterworth)."""

    def tilt(log_cf: float) -> float:
        return loops.power_coefficients(Receiver(gbw, rf, np.exp(log_cf), cin).loop)[0].item()

    middle = 0.5 * np.log(cin / (np.pi * rf * gbw))
    return float(np.exp(brentq(tilt, middle - 3, middle + 3, xtol=1e-13)))


WIDE = {"gbw": 1e9, "rf": 1e6, "cin": 1e-9}
"""A receiver with Cin far above Cf, where the rules for Cf reach their limits."""


def rule_of_45_degrees(factor: float = 1.0) -> Receiver:
    """Cf by sqrt(Cin/(2 pi Rf GBW)), times a factor, at Cin >> Cf."""
    cf = factor * np.sqrt(WIDE["cin"] / (2 * np.pi * WIDE["rf"] * WIDE["gbw"]))
    return Receiver(cf=cf, **WIDE)
