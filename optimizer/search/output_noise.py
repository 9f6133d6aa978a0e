"""A lower bound on the noise at the output in the dark, which hardly depends on how wide Rf still is.

Referred to the input, thermal noise falls with Rf while its bandwidth falls too; referred to the output
both nearly cancel (kT/C). With E1 = Rf u and E2 = Rf u', where u and u' fall with Rf,

  4kT/Rf Rf^2 I0 >= kT Rf/E1 = kT/u,   en^2 (Cin + Cf)^2 Rf^2 I1 >= en^2 (Cin + Cf)^2 / (4 u u'),

so their largest values over a box, at its smallest Rf, bound the noise of the whole box. All is times
H0^2/Rf^2 = (A0/(A0 + g))^2.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import Bench
from optimizer.physics import noise
from optimizer.search.bounds import Coefficients, Narrow, filtered
from optimizer.search.flicker import flicker_flat, flicker_span
from optimizer.search.view import View

Floats = NDArray[np.float64]


def output_floor(v: View, left: Narrow, c: Coefficients, bench: Bench) -> Floats:
    """Mean square [V^2] of the noise in the dark over what is left, at least."""
    first, second = _per_ohm(v, left, c)
    steady = noise.shot_current(v.responsivity * bench.background + v.dark_low) + v.current_noise
    steady = steady + noise.thermal_conductance_current(v.shunt_low, bench.kelvin)
    thermal = noise.thermal_conductance_current(1.0, bench.kelvin)
    currents = (thermal + steady * left.rf_low) / (4.0 * first)
    total = (currents + _voltages(v, left, c, (first, second, bench.noise_from))) * (
        v.gain / (v.gain + c.g_high)
    ) ** 2
    if bench.converter is not None:
        floor, ceiling, bits = bench.converter
        total = total + noise.quantisation(ceiling - floor, bits)
    return total


def _per_ohm(v: View, left: Narrow, c: Coefficients) -> tuple[Floats, Floats]:
    """E1/Rf [F] and E2/Rf [s F], low-pass included, at most."""
    both, node = v.dominant + v.second, v.cin_high + left.cf_high
    conductance = 1.0 / left.rf_low + v.shunt_high
    most = v.gain + c.g_low
    first = (v.gain * left.cf_high + node + both * conductance) / most
    second = (both * node + v.dominant * v.second * conductance) / most
    return first + v.lag_high / left.rf_low, second + v.lag_high * first


def _voltages(v: View, left: Narrow, c: Coefficients, state: tuple[Floats, Floats, float]) -> Floats:
    """What the voltage noise of op-amp and buffer comes to [V^2], at least."""
    first, second, start = state
    high, low = filtered(v, c)
    level = 1.0 / (4.0 * high[0]) + flicker_flat(high[0], high[1], start) * v.noise_corner
    slope = 1.0 / (4.0 * first * second) + 0.5 * flicker_span(high, low, start) / first**2 * v.noise_corner
    node, moved = v.cin_low + left.cf_low, left.cf_low + v.reference_node
    total = c.g_low**2 * level + node**2 * slope
    total = total + np.where(v.buffered, level + moved**2 * slope, 0.0)
    return np.asarray(v.voltage_noise * total)
