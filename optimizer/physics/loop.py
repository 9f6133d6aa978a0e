"""The closed loop of a transimpedance amplifier: transfer, bandwidth, phase margin, peaking.

With A(s) = A0 / ((1 + a s)(1 + b s)), Zf = Rf / (1 + s Rf Cf) and NG = 1 + Zf (1/Rsh + s Cin), the
transresistance is all-pole, Zf A / (A + NG) = H0 / (1 + e1 s + e2 s^2 + e3 s^3), and everything here
is a root of a polynomial in w^2. Source: own algebra; held in the tests to dense numeric evaluation,
a circuit simulator and the published cases.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.physics.roots import first_crossing, single_positive_root

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Amplifier:
    """An op-amp's open loop: dc gain [1], dominant time constant [s], second time constant [s] (0: none)."""

    dc_gain: Floats
    dominant: Floats
    second: Floats


@dataclass(frozen=True, slots=True)
class Network:
    """What surrounds it: Rf [ohm], Cf [F] parasitic included, 1/Rsh [S], Cin [F] at the summing node."""

    feedback_resistance: Floats
    feedback_capacitance: Floats
    shunt: Floats
    input_capacitance: Floats


@dataclass(frozen=True, slots=True)
class Loop:
    """The closed loop: H0 = `gain` Rf with `gain` = A0/(A0 + g), g = 1 + Rf/Rsh, the coefficients of

    the normalised denominator (`e1` [s], `e2` [s^2], `e3` [s^3]), `feedback` = Rf Cf and
    `total` = Rf (Cin + Cf) [s]; arrays of one broadcast shape.
    """

    gain: Floats
    dc_noise_gain: Floats
    e1: Floats
    e2: Floats
    e3: Floats
    feedback: Floats
    total: Floats


def amplifier(dc_gain: Floats, gbw: Floats, second_pole: Floats) -> Amplifier:
    """The op-amp of `dc_gain` [1], `gbw` [Hz] and `second_pole` [Hz] (inf: none)."""
    turn = 2.0 * np.pi
    return Amplifier(dc_gain, dc_gain / (turn * gbw), 1.0 / (turn * second_pole))


def close(amp: Amplifier, net: Network) -> Loop:
    """The closed loop of `amp` and `net` (broadcast together)."""
    a, b = amp.dominant, amp.second
    g = 1.0 + net.feedback_resistance * net.shunt
    feedback = net.feedback_resistance * net.feedback_capacitance
    total = net.feedback_resistance * (net.input_capacitance + net.feedback_capacitance)
    d0 = amp.dc_gain + g
    return Loop(
        gain=amp.dc_gain / d0,
        dc_noise_gain=g,
        e1=(amp.dc_gain * feedback + total + g * (a + b)) / d0,
        e2=((a + b) * total + g * a * b) / d0,
        e3=a * b * total / d0,
        feedback=feedback,
        total=total,
    )


def power_coefficients(loop: Loop) -> tuple[Floats, Floats, Floats]:
    """Coefficients c1 [s^2], c2 [s^4], c3 [s^6] of |H0/H|^2 = 1 + c1 x + c2 x^2 + c3 x^3, x = w^2."""
    e1, e2, e3 = loop.e1, loop.e2, loop.e3
    return e1 * e1 - 2.0 * e2, e2 * e2 - 2.0 * e1 * e3, e3 * e3


def bandwidth(loop: Loop, *, diode: Floats, low_pass: Floats) -> Floats:
    """Lowest frequency [Hz] where the response is H0/sqrt 2, the diode's pole and low-pass included.

    `diode` and `low_pass` are time constants [s], 0 for none.
    """
    c1, c2, c3 = power_coefficients(loop)
    p, q = diode * diode, low_pass * low_pass
    s, t = p + q, p * q
    coefficients = (c1 + s, c2 + s * c1 + t, c3 + s * c2 + t * c1, s * c3 + t * c2, t * c3)
    return np.asarray(np.sqrt(first_crossing(coefficients, 1.0)) / (2.0 * np.pi))


def crossover(amp: Amplifier, loop: Loop) -> Floats:
    """Angular frequency [rad/s] where the loop gain A/NG is one; NaN where A0 <= NG(0)."""
    k = crossover_polynomial(amp, loop.dc_noise_gain, loop.total, loop.feedback)
    return np.asarray(np.sqrt(single_positive_root(*k)))


def crossover_polynomial(
    amp: Amplifier, dc_noise_gain: Floats, total: Floats, feedback: Floats
) -> tuple[Floats, Floats, Floats, Floats]:
    """k0, k1, k2, k3 of the polynomial in w^2 whose root is the crossover: k3 x^3 + k2 x^2 + k1 x - k0.

    |A/NG|^2 falls through one exactly once: the coefficients change sign once (Descartes). `total` =
    Rf (Cin + Cf) and `feedback` = Rf Cf [s].
    """
    a2, b2 = amp.dominant**2, amp.second**2
    g2, t2 = dc_noise_gain**2, total**2
    gain2 = amp.dc_gain**2
    k1 = g2 * (a2 + b2) + t2 - gain2 * feedback**2
    k2 = g2 * a2 * b2 + (a2 + b2) * t2
    return gain2 - g2, k1, k2, a2 * b2 * t2


def phase_margin(amp: Amplifier, loop: Loop) -> Floats:
    """180 deg + arg(A/NG) at the crossover [deg]; NaN where the loop gain never reaches one."""
    w = crossover(amp, loop)
    lag = np.arctan(amp.dominant * w) + np.arctan(amp.second * w)
    lag += np.arctan(loop.total * w / loop.dc_noise_gain) - np.arctan(loop.feedback * w)
    return np.asarray(180.0 - np.degrees(lag))


def follower_phase_margin(amp: Amplifier) -> Floats:
    """Phase margin [deg] of the op-amp as a follower (noise gain 1); NaN where A0 <= 1."""
    none = np.zeros_like(amp.dc_gain)
    unity = Loop(none, np.ones_like(none), none, none, none, none, none)
    return phase_margin(amp, unity)


def peaking(loop: Loop) -> Floats:
    """max |H|/H0 over frequency [dB], >= 0; the loop alone, without diode pole and low-pass."""
    x = _peak(loop)
    least = (1.0 - loop.e2 * x) ** 2 + x * (loop.e1 - loop.e3 * x) ** 2
    return np.asarray(np.maximum(-10.0 * np.log10(np.minimum(least, 1.0)), 0.0) + 0.0)


def peak_frequency(loop: Loop) -> Floats:
    """Frequency [Hz] where |H| of the loop alone has its local maximum; 0 where |H| only falls."""
    return np.asarray(np.sqrt(_peak(loop)) / (2.0 * np.pi))


def _peak(loop: Loop) -> Floats:
    """w^2 of the only local maximum of |H|, 0 where there is none."""
    c1, c2, c3 = power_coefficients(loop)
    discriminant = c2 * c2 - 3.0 * c1 * c3
    root = np.sqrt(np.maximum(discriminant, 0.0))
    with np.errstate(divide="ignore", invalid="ignore"):
        # the larger root of the derivative, from whichever side does not cancel
        falling = -c1 / (c2 + root)
        dip = np.where(c2 < 0.0, (root - c2) / (3.0 * c3), 0.0)
    x = np.where(c1 < 0.0, np.where(c2 < 0.0, dip, falling), dip)
    return np.asarray(np.where(np.isfinite(x) & (x > 0.0) & (discriminant >= 0.0), x, 0.0))
