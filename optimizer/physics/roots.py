"""Roots that the loop needs, vectorised, each reached from the side from which it cannot be missed."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

_NEWTON_STEPS = 60
_CROSSING_STEPS = 500


def single_positive_root(k0: Floats, k1: Floats, k2: Floats, k3: Floats) -> Floats:
    """The positive root of k3 x^3 + k2 x^2 + k1 x - k0 with k0 > 0 and k2, k3 >= 0; NaN where k0 <= 0.

    k1 must be positive where k2 and k3 are 0. The polynomial is convex for x > 0 and has one positive
    root, so Newton's method from above falls onto it monotonically, whatever the sign of k1 (Cardano's
    formula cancels there).
    """
    x = root_from_above((k0, k1, k2, k3), 0)
    for _ in range(_NEWTON_STEPS):
        new = _newton(x, (k0, k1, k2, k3))
        if not np.any(new < x * (1.0 - 1e-14)):
            return new
        x = new
    return x


def root_from_above(k: tuple[Floats, Floats, Floats, Floats], steps: int) -> Floats:
    """An upper bound on that root: a start from above and `steps` of Newton's method; `k`: k0 to k3."""
    k0, k1, k2, k3 = k
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        drop = np.maximum(-k1, 0.0)
        quadratic = (drop + np.sqrt(drop * drop + 4.0 * k2 * k0)) / (2.0 * k2)
        cubic = np.where(k3 > 0.0, np.maximum(np.cbrt(2.0 * k0 / k3), np.sqrt(2.0 * drop / k3)), np.inf)
        linear = np.where(k1 > 0.0, k0 / k1, np.inf)
        x = np.minimum(np.minimum(np.where(k2 > 0.0, quadratic, np.inf), cubic), linear)
    x = np.where(k0 > 0.0, x, np.nan)
    for _ in range(steps):
        x = _newton(x, k)
    return np.asarray(x)


def _newton(x: Floats, k: tuple[Floats, Floats, Floats, Floats]) -> Floats:
    """One step of Newton's method, not taken where the slope or the value is not positive."""
    k0, k1, k2, k3 = k
    value = ((k3 * x + k2) * x + k1) * x - k0
    slope = (3.0 * k3 * x + 2.0 * k2) * x + k1
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(x - np.where((slope > 0.0) & (value > 0.0), value / slope, 0.0))


def _shifted(coefficients: list[Floats], h: Floats) -> list[Floats]:
    """Taylor coefficients of a polynomial (ascending) moved by `h`."""
    moved = list(coefficients)
    last = len(moved) - 1
    for start in range(last):
        for k in range(last - 1, start - 1, -1):
            moved[k] = moved[k] + h * moved[k + 1]
    return moved


def _safe_step(coefficients: list[Floats], room: Floats) -> Floats:
    """The h > 0 at which the terms with positive coefficients alone use up `room`.

    The polynomial cannot rise by `room` before: what is left out is negative. Convex and rising, so
    Newton's method from above is monotone.
    """
    rising = [np.maximum(c, 0.0) for c in coefficients]
    h = np.full_like(room, np.inf)
    with np.errstate(divide="ignore", invalid="ignore"):
        for power, c in enumerate(rising, start=1):
            h = np.minimum(h, np.where(c > 0.0, (room / c) ** (1.0 / power), np.inf))
        for _ in range(6):
            value = np.zeros_like(h)
            slope = np.zeros_like(h)
            for c in reversed(rising):
                slope = slope * h + value
                value = value * h + c
            slope = slope * h + value
            h = h - (value * h - room) / slope
    return h


def first_crossing(coefficients: Sequence[Floats], rise: float) -> Floats:
    """Smallest x > 0 where c1 x + c2 x^2 + ... reaches `rise`; coefficients c1, c2, ... broadcast.

    From the left by steps in which no crossing can lie; near the crossing they become Newton's, so
    convergence is quadratic unless the polynomial only grazes the level. NaN where there is none.
    """
    rows = [np.ravel(c) for c in np.broadcast_arrays(*coefficients)]
    shape = np.broadcast_shapes(*(np.shape(c) for c in coefficients))
    result = np.full(rows[0].shape, np.nan)
    active = np.flatnonzero(np.any([r > 0.0 for r in rows], axis=0))
    local = [np.full(active.size, -rise), *(r[active] for r in rows)]
    x = np.zeros(active.size)
    for _ in range(_CROSSING_STEPS):
        h = _safe_step(local[1:], np.maximum(-local[0], 0.0))
        x = x + h
        local = _shifted(local, h)
        done = (np.abs(h) <= 1e-15 * x) | ~np.isfinite(h) | (local[0] >= -1e-15 * rise)
        result[active[done]] = x[done]
        keep = ~done
        if not keep.any():
            break
        active, x = active[keep], x[keep]
        local = [c[keep] for c in local]
    else:
        result[active] = x
    return _polished(result, rows, rise).reshape(shape)


def _polished(x: Floats, rows: Sequence[Floats], rise: float) -> Floats:
    """One Newton step on the polynomial itself, where it rises and the step is small."""
    value = np.zeros_like(x)
    slope = np.zeros_like(x)
    for c in reversed(rows):
        slope = slope * x + value
        value = value * x + c
    slope = slope * x + value
    with np.errstate(divide="ignore", invalid="ignore"):
        step = (value * x - rise) / slope
    return np.asarray(np.where((slope > 0.0) & (np.abs(step) < 1e-6 * x), x - step, x))


def cubic_roots(e1: Floats, e2: Floats, e3: Floats) -> tuple[Floats, Complexes, Complexes]:
    """Roots of t^3 + e1 t^2 + e2 t + e3 with e1, e2 > 0 and e1 e2 > e3 >= 0 (all left of the axis).

    One real root and the other two (complex, or real in complex arrays). The real root is bracketed
    and polished; the quadratic left over is deflated from the end that does not cancel.
    """
    p, q = e2 / (e1 * e1), e3 / (e1 * e1 * e1)
    r = _real_root(p, q)
    with np.errstate(divide="ignore", invalid="ignore"):
        c = np.where(r < 0.0, -q / r, p)
        b = np.where(np.abs(r) < 0.5, 1.0 + r, (c - p) / r)
        half = np.sqrt((b * b - 4.0 * c).astype(np.complex128)) / 2.0
        first = -0.5 * b - half
        second = np.where(np.imag(half) == 0.0, c / first, -0.5 * b + half)
    return r * e1, np.asarray(first * e1), np.asarray(second * e1)


def _real_root(p: Floats, q: Floats) -> Floats:
    """A root of u^3 + u^2 + p u + q in [-1, -q/p], by Newton kept inside a shrinking bracket."""
    low, high = -np.ones_like(p), -q / p
    u = high
    for _ in range(_NEWTON_STEPS):
        value = ((u + 1.0) * u + p) * u + q
        high = np.where(value >= 0.0, u, high)
        low = np.where(value < 0.0, u, low)
        slope = (3.0 * u + 2.0) * u + p
        with np.errstate(divide="ignore", invalid="ignore"):
            moved = u - value / slope
        inside = (moved > low) & (moved < high)
        new = np.where(inside, moved, np.where(value == 0.0, u, 0.5 * (low + high)))
        # a step of a rounding error leaves the bracket; that is the root too
        new = np.where(np.abs(moved - u) <= 4e-16 * np.abs(u), u, new)
        if np.all(np.abs(new - u) <= 2e-16 * np.abs(u)):
            break
        u = new
    return u
