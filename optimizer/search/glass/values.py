"""The values behind a candidate's figures, by name: what a reviewer needs to redo each by hand."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike

from optimizer.figures import headroom
from optimizer.physics import loop as loops
from optimizer.physics.constants import BOLTZMANN, ELEMENTARY_CHARGE
from optimizer.search.glass.spectrum import bands, divider_density, reference_slope
from optimizer.search.glass.subject import Subject, number
from optimizer.search.space import Choice, Space

Named = dict[str, ArrayLike]


def values(space: Space, choice: Choice, c: Subject) -> Mapping[str, float]:
    """Every value behind the figures of `c` by name, in SI; infinite for what is absent, NaN unknown.

    Temperature laws are already applied: currents and the shunt are those at the hottest ambient.
    """
    named = (
        _request(space),
        _diode(c),
        _opamp(c),
        _capacitances(space, choice, c),
        _reference(space, choice, c),
        _loop(c),
        _noise(c),
        _swing(c),
        _prices(space, choice),
    )
    return {name: number(value) for group in named for name, value in group.items()}


def _request(space: Space) -> Named:
    """What the request fixes, and the constants of nature."""
    bench, light, ambient = space.bench, space.request.light, space.request.ambient
    target = bench.bandwidth_target
    return {
        "boltzmann": BOLTZMANN,
        "elementary_charge": ELEMENTARY_CHARGE,
        "hottest": ambient.hottest,
        "kelvin": bench.kelvin,
        "wavelength": light.wavelength,
        "weakest": bench.weakest,
        "strongest": bench.strongest,
        "background": bench.background,
        "supply_high": bench.high,
        "supply_low": bench.low,
        "supply_tolerance": bench.tolerance,
        "guard": bench.guard,
        "noise_from": bench.noise_from,
        "bandwidth_target": np.nan if target is None else target,
    }


def _diode(c: Subject) -> Named:
    """Responsivity is in A per unit of the request's light."""
    s, bench = c.s, c.bench
    return {
        "responsivity": s.responsivity,
        "weakest_current": s.responsivity * bench.weakest,
        "strongest_current": s.responsivity * bench.strongest,
        "background_current": s.responsivity * bench.background,
        "dark_current": s.dark,
        "shunt_resistance": 1.0 / s.shunt,
        "diode_time": s.pole,
        "low_pass_time": s.low_pass,
        "low_pass": 1.0 / (2.0 * np.pi * s.low_pass),
        "biased": s.biased,
        "reverse_bias": s.reverse_bias,
        "sign": s.sign,
    }


def _opamp(c: Subject) -> Named:
    s = c.s
    return {
        "open_loop_gain": s.dc_gain,
        "gbw": s.gbw,
        "second_pole": s.second_pole,
        "slew_rate": s.slew_rate,
        "voltage_noise": s.voltage_noise,
        "noise_corner": s.noise_corner,
        "current_noise": np.sqrt(s.current_noise),
        "bias_current": s.bias,
        "offset_voltage": s.vos,
        "output_low": s.output_low,
        "output_high": s.output_high,
        "output_current": s.output_current,
        "min_gain": s.min_gain,
    }


def _capacitances(space: Space, choice: Choice, c: Subject) -> Named:
    s = c.s
    return {
        "diode_capacitance": s.capacitance,
        "common_capacitance": s.common,
        "differential_capacitance": s.differential,
        "stray_capacitance": s.stray,
        "input_capacitance": c.figures["input_capacitance"],
        "feedback_resistance": s.rf,
        "placed_capacitance": space.capacitors.value[choice.capacitor],
        "parasitic_capacitance": space.resistors.parasitic[choice.resistor],
        "feedback_capacitance": s.cf,
    }


def _reference(space: Space, choice: Choice, c: Subject) -> Named:
    s, x = c.s, space.contexts
    return {
        "divided": s.divided,
        "buffered": s.buffered,
        "vref": s.vref,
        "divider_top": x.top[choice.context],
        "divider_bottom": x.bottom[choice.context],
        "divider_resistance": s.source,
        "divider_current": x.current[choice.context],
        "bypass": c.bench.bypass,
        "divider_time": s.source * c.bench.bypass,
        "reference_capacitance": np.where(s.biased, s.capacitance, 0.0) + s.common + s.stray,
    }


def _loop(c: Subject) -> Named:
    amp, loop = c.amp, c.loop
    return {
        "dominant_time": amp.dominant,
        "second_time": amp.second,
        "dc_noise_gain": loop.dc_noise_gain,
        "gain_ratio": loop.gain,
        "feedback_time": loop.feedback,
        "total_time": loop.total,
        "e1": loop.e1,
        "e2": loop.e2,
        "e3": loop.e3,
        "transresistance": c.transresistance,
        "crossover": loops.crossover(amp, loop) / (2.0 * np.pi),
        "peak_frequency": loops.peak_frequency(loop),
    }


def _noise(c: Subject) -> Named:
    """Integrals of |1/D|^2 [Hz] and |s/D|^2 [Hz/s^2], of the same over f, and behind the divider's pole."""
    integrals = bands(c)
    return {
        "white_flat": integrals.white.flat,
        "white_rising": integrals.white.rising,
        "flicker_flat": integrals.flicker.flat,
        "flicker_rising": integrals.flicker.rising,
        "bypassed_flat": integrals.bypassed.flat,
        "bypassed_rising": integrals.bypassed.rising,
        "reference_time": reference_slope(c),
        "divider_noise": np.sqrt(divider_density(c)),
        "converter_span": _converter_span(c),
        "converter_bits": np.nan if c.bench.converter is None else c.bench.converter[2],
    }


def _converter_span(c: Subject) -> float:
    return np.nan if c.bench.converter is None else c.bench.converter[1] - c.bench.converter[0]


def _swing(c: Subject) -> Named:
    """Room [V] from Vref to the limit in the direction of light, guard taken off, at both supply ends."""
    low, high = (headroom(c.bench, c.s, end) for end in c.bench.ends)
    return {"swing_low_end": low, "swing_high_end": high}


def _prices(space: Space, choice: Choice) -> Named:
    """Prices and supply current of what is bought; `packages` of the op-amp."""
    o, x = space.opamps, space.contexts
    extra = x.buffered[choice.context] & ~o.spare[choice.opamp]
    return {
        "price_photodiode": space.diodes.price[choice.diode],
        "price_opamps": np.where(extra, o.double[choice.opamp], o.single[choice.opamp]),
        "price_resistor": space.resistors.price[choice.resistor],
        "price_capacitor": space.capacitors.price[choice.capacitor],
        "price_divider": x.cost[choice.context],
        "packages": np.where(extra, 2.0, 1.0),
        "package_current": o.cool[choice.opamp],
    }
