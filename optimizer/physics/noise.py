"""Noise at the output: densities and their integrals through the closed loop, in closed form.

White parts are integrals of |N/D|^2 of rational functions (the recursion of K. J. Astrom,
Introduction to Stochastic Control Theory, Academic Press 1970, chapter 5, theorem 5.2, here run on
the reversed polynomials, so that absent poles are plain zeros). Flicker parts are sums of residues
in w^2; where two poles nearly coincide, Gauss-Legendre quadrature or interpolation takes over.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optimizer.physics.constants import BOLTZMANN, ELEMENTARY_CHARGE
from optimizer.physics.loop import Loop
from optimizer.physics.roots import cubic_roots

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

_NEARLY_COINCIDENT = 5e-3
"""Relative distance of two poles in w^2 below which residues lose too many digits (they lose its square)."""

_SPREAD = 1e-2
"""Relative spacing of the places between which integrals near a coincidence are interpolated."""


@dataclass(frozen=True, slots=True)
class Band:
    """Integrals over frequency of one response: `flat` of |P|^2 [Hz], `rising` of |s P|^2 [Hz/s^2]."""

    flat: Floats
    rising: Floats


def thermal_current(resistance: ArrayLike, kelvin: float) -> Floats:
    """Density of a resistor's noise current squared, 4 k T / R [A^2/Hz], R in ohm."""
    return np.asarray(4.0 * BOLTZMANN * kelvin / np.asarray(resistance, dtype=float))


def thermal_conductance_current(conductance: ArrayLike, kelvin: float) -> Floats:
    """The same from a conductance [S]: 4 k T G [A^2/Hz]."""
    return np.asarray(4.0 * BOLTZMANN * kelvin * np.asarray(conductance, dtype=float))


def thermal_voltage(resistance: ArrayLike, kelvin: float) -> Floats:
    """Density of a resistor's noise voltage squared, 4 k T R [V^2/Hz], R in ohm."""
    return np.asarray(4.0 * BOLTZMANN * kelvin * np.asarray(resistance, dtype=float))


def shot_current(current: ArrayLike) -> Floats:
    """Density of shot noise squared, 2 q I [A^2/Hz], of `current` [A]."""
    return np.asarray(2.0 * ELEMENTARY_CHARGE * np.asarray(current, dtype=float))


def quantisation(span: ArrayLike, bits: int) -> Floats:
    """Variance [V^2] of an ideal converter of `bits` over `span` [V]: step^2 / 12."""
    return np.asarray((np.asarray(span, dtype=float) / 2.0**bits) ** 2 / 12.0)


def times_pole(polynomial: Sequence[Floats], time_constant: Floats) -> tuple[Floats, ...]:
    """Coefficients (of s, s^2, ...; the constant is 1) of a polynomial times (1 + s `time_constant`)."""
    lower = [np.ones_like(time_constant), *polynomial]
    upper = [*polynomial, np.zeros_like(time_constant)]
    return tuple(high + time_constant * low for low, high in zip(lower, upper, strict=True))


def white_band(polynomial: Sequence[Floats]) -> Band:
    """Integrals from 0 to infinity of |1/D|^2 and |s/D|^2 over frequency, D = 1 + e1 s + e2 s^2 + ...

    `polynomial` holds e1, e2, ... of a stable D (trailing ones may be 0), at least two of them non-zero.
    """
    shape = np.broadcast_shapes(*(np.shape(e) for e in polynomial))
    order = len(polynomial)
    a = [np.ones(shape), *(np.broadcast_to(e, shape) for e in polynomial)]
    flat = [np.ones(shape) if k == 0 else np.zeros(shape) for k in range(order)]
    rising = [np.ones(shape) if k == 1 else np.zeros(shape) for k in range(order)]
    return Band(0.5 * _astrom(a, flat), 0.5 * _astrom(a, rising))


def _astrom(a: list[Floats], b: list[Floats]) -> Floats:
    """(1 / 2 pi) times the integral of |B/A|^2 over w; descending coefficients, deg B = deg A - 1."""
    total = np.zeros_like(a[0])
    while len(a) > 1:
        present = a[1] != 0.0
        divisor = np.where(present, a[1], 1.0)
        alpha = np.where(present, a[0] / divisor, 0.0)
        beta = np.where(present, b[0] / divisor, 0.0)
        total = total + 0.5 * beta * b[0] / np.where(present, a[0], 1.0)
        size = len(a) - 1
        wide = [*a, np.zeros_like(total)]
        a = [wide[i + 1] - alpha * wide[i + 2] if i % 2 else wide[i + 1] for i in range(size)]
        b = [b[i + 1] - beta * wide[i + 2] if i % 2 else b[i + 1] for i in range(size - 1)]
    return total


def flicker_band(loop: Loop, low_pass: Floats, start: float) -> Band:
    """Integrals of |1/D|^2 / f and |s/D|^2 / f over f from `start` [Hz] to infinity, low-pass included.

    Returned as a Band whose units lack one Hz: [1] and [1/s^2]. `low_pass` is a time constant [s].
    """
    shape = np.broadcast_shapes(np.shape(loop.e1), np.shape(low_pass))
    e1, e2, e3, tau = (np.broadcast_to(v, shape).ravel() for v in (loop.e1, loop.e2, loop.e3, low_pass))
    real, first, second = cubic_roots(e1, e2, e3)
    z = np.stack([(real * real).astype(complex), first * first, second * second, (tau * tau).astype(complex)])
    x0 = (2.0 * np.pi * start) ** 2
    flat, rising = _residues(z, x0)
    # the pair of a resonance meets on the negative axis, without loss and beyond quadrature; there only
    # the low-pass can come too near the real pole
    resonant = np.abs(np.imag(first)) > np.abs(np.real(first))
    low_pass_near = resonant & (_gap(z, 0, 3) < _NEARLY_COINCIDENT)
    pairs = [(i, j) for i in range(4) for j in range(i)]
    near = ~resonant & (np.min([_gap(z, i, j) for i, j in pairs], axis=0) < _NEARLY_COINCIDENT)
    for rows, method in ((near, _quadrature), (low_pass_near, _interpolated)):
        if rows.any():
            flat[rows], rising[rows] = method(z[:, rows], x0)
    return Band(flat.reshape(shape), rising.reshape(shape))


def _gap(z: Complexes, i: int, j: int) -> Floats:
    """Relative distance of two poles; infinite where one of them is absent."""
    larger = np.maximum(np.abs(z[i]), np.abs(z[j]))
    present = (z[i] != 0.0) & (z[j] != 0.0)
    return np.where(present, np.abs(z[i] - z[j]) / np.where(present, larger, 1.0), np.inf)


def _residues(z: Complexes, x0: float) -> tuple[Floats, Floats]:
    """Half the integrals from x0 of 1/(x P) and 1/P, P the product of (1 + z x), poles well apart."""
    count = z.shape[0]
    flat = np.zeros(z.shape[1])
    rising = np.zeros(z.shape[1])
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        for i in range(count):
            present = z[i] != 0.0
            weight = np.ones(z.shape[1], dtype=complex)
            for j in range(count):
                if j != i:
                    weight = weight / (1.0 - z[j] / z[i])
            ratio = np.where(present, 1.0 / (z[i] * x0), 1.0)
            flat += np.where(present, np.real(weight * np.log1p(ratio)), 0.0)
            rising -= np.where(present, np.real(weight / z[i] * np.log(x0 + 1.0 / z[i])), 0.0)
    return 0.5 * flat, 0.5 * rising


def _interpolated(z: Complexes, x0: float) -> tuple[Floats, Floats]:
    """The same with the low-pass (the last pole) at or near the real pole (the first).

    The integrals are analytic in the low-pass's z, so they are taken at a few places around and
    interpolated (Lagrange) to where it is.
    """
    places = _SPREAD * np.array([-3.0, -2.0, -1.0, 1.0, 2.0, 3.0])
    wanted = np.real(z[3] / z[0]) - 1.0
    flat = np.zeros(z.shape[1])
    rising = np.zeros(z.shape[1])
    for place in places:
        others = places[places != place]
        weight = np.prod([(wanted - other) / (place - other) for other in others], axis=0)
        moved = np.concatenate([z[:3], z[:1] * (1.0 + place)])
        at_flat, at_rising = _residues(moved, x0)
        flat += weight * at_flat
        rising += weight * at_rising
    return flat, rising


def _quadrature(z: Complexes, x0: float) -> tuple[Floats, Floats]:
    """The same integrals by composite Gauss-Legendre in ln x, for poles on or near the real axis."""
    nodes, weights = np.polynomial.legendre.leggauss(16)
    slow = np.sort(np.abs(z), axis=0)[-2]
    span = np.maximum(np.log(1e13 / (slow * x0)), 1.0)
    panels = 96
    flat = np.zeros(z.shape[1])
    rising = np.zeros(z.shape[1])
    for panel in range(panels):
        left = np.log(x0) + span * panel / panels
        v = left[:, None] + (nodes + 1.0) * 0.5 * span[:, None] / panels
        x = np.exp(v)
        power = np.real(np.prod(1.0 + z[:, :, None] * x, axis=0))
        scale = weights * 0.25 * span[:, None] / panels
        flat += np.sum(scale / power, axis=1)
        rising += np.sum(scale * x / power, axis=1)
    return flat, rising


def output_voltage(loop: Loop, density: Floats, slope: Floats, band: Band) -> Floats:
    """Mean square [V^2] of a voltage `density` [V^2/Hz] seen through gain (c + s slope)/D, c = 1.

    `slope` [s] is the numerator's time constant; `band` the integrals of 1/D with the same filters.
    """
    return np.asarray(density * loop.gain**2 * (band.flat + slope**2 * band.rising))


def amplifier_voltage(loop: Loop, density: Floats, band: Band) -> Floats:
    """Mean square [V^2] of the op-amp's own voltage noise through A NG/(A + NG) = gain (g + s total)/D."""
    g2, t2 = loop.dc_noise_gain**2, loop.total**2
    return np.asarray(density * loop.gain**2 * (g2 * band.flat + t2 * band.rising))


def output_current(transresistance: Floats, density: Floats, band: Band) -> Floats:
    """Mean square [V^2] of a current `density` [A^2/Hz] at the summing node, through H = H0/D."""
    return np.asarray(density * transresistance**2 * band.flat)
