"""What real parts may be instead of their nominal values: relative spreads, and settings so moved.

A deviation is a fraction of the nominal value. Resistors and capacitors spread by their family's
tolerance (and, for resistors, tempco over the ambient), all else by what the request states. The
junction capacitance stays that of the nominal reverse bias; a resistor's parasitic does not spread.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import Settings
from optimizer.physics import loop, noise, reference
from optimizer.search.roles import FOLLOWER_MARGIN
from optimizer.search.space import Choice, Space, packages_current, settings

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

PASSIVES = ("feedback_resistance", "feedback_capacitance", "divider_top", "divider_bottom")
PARTS = (
    "gbw", "voltage_noise", "input_capacitance", "diode_capacitance", "responsivity", "stray",
    "dark_current", "bias_current", "open_loop_gain",
)  # fmt: skip
AXES = (*PASSIVES, *PARTS)
"""Everything that may deviate, in the order in which it is named."""


def half_widths(space: Space, choice: Choice) -> dict[str, Floats]:
    """The largest relative deviation of every axis for each setting; NaN where a family leaves it blank.

    0 where a setting has no such part (no capacitor placed, no divider).
    """
    stated = space.request.tolerance.spreads
    divider = space.contexts.spread[choice.context]
    widths = {
        "feedback_resistance": space.resistors.spread[choice.resistor],
        "feedback_capacitance": space.capacitors.spread[choice.capacitor],
        "divider_top": divider,
        "divider_bottom": divider,
    }
    return widths | {name: np.full(choice.opamp.shape, stated[name]) for name in PARTS}


def moved(space: Space, choice: Choice, deviation: Mapping[str, Floats]) -> Settings:
    """The settings of `choice` with each value at nominal times 1 + its deviation.

    `deviation` maps axes to arrays that broadcast to the choices; axes left out do not deviate.
    """
    s, o, x = settings(space, choice), space.opamps, space.contexts

    def factor(axis: str) -> Floats:
        return np.asarray(1.0 + deviation.get(axis, np.zeros(1)))

    top, bottom = x.top[choice.context], x.bottom[choice.context]
    top, bottom = top * factor("divider_top"), bottom * factor("divider_bottom")
    bias = s.bias * factor("bias_current")
    gain, gbw = s.dc_gain * factor("open_loop_gain"), s.gbw * factor("gbw")
    placed = space.capacitors.value[choice.capacitor] * factor("feedback_capacitance")
    with np.errstate(invalid="ignore"):
        current = np.fmax(o.own_noise[choice.opamp], noise.shot_current(bias))
    return replace(
        _with_divider(space, choice, s, (top, bottom)),
        dc_gain=gain,
        gbw=gbw,
        voltage_noise=s.voltage_noise * factor("voltage_noise"),
        current_noise=current,
        bias=bias,
        common=s.common * factor("input_capacitance"),
        differential=s.differential * factor("input_capacitance"),
        stray=s.stray * factor("stray"),
        buffers=_buffers(s, gain, gbw),
        responsivity=s.responsivity * factor("responsivity"),
        capacitance=s.capacitance * factor("diode_capacitance"),
        dark=s.dark * factor("dark_current"),
        rf=s.rf * factor("feedback_resistance"),
        cf=placed + space.resistors.parasitic[choice.resistor],
    )


def _with_divider(space: Space, choice: Choice, s: Settings, pair: tuple[Floats, Floats]) -> Settings:
    """`s` with Vref, source resistance and supply current of the divider `pair` (R1, R2) [ohm]."""
    top, bottom = pair
    high, low = space.bench.high, space.bench.low
    vref = np.where(s.divided, reference.divided(high, low, top, bottom), s.vref)
    bias = np.where(s.biased, np.where(s.sign > 0.0, vref - low, high - vref), 0.0)
    current = packages_current(space, choice) + reference.current(high, low, top, bottom)
    return replace(
        s,
        vref=vref,
        reverse_bias=np.where(s.divided, bias, s.reverse_bias),
        source=np.where(s.divided, reference.parallel(top, bottom), 0.0),
        supply_current=np.where(s.divided, current, s.supply_current),
    )


def _buffers(s: Settings, gain: Floats, gbw: Floats) -> Bools:
    """Where the op-amp so moved may follow at noise gain 1."""
    amp = loop.amplifier(gain, gbw, s.second_pole)
    with np.errstate(invalid="ignore"):
        return np.asarray((s.min_gain <= 1.0) & (loop.follower_phase_margin(amp) >= FOLLOWER_MARGIN))


def moved_checks(space: Space, choice: Choice, s: Settings) -> dict[str, Bools]:
    """Where a divider so moved takes Vref or the reverse bias out of what the parts take.

    These are checks that op-amp and photodiode pass alone at nominal; only a divider moves them.
    """
    o, d, bench = space.opamps, space.diodes, space.bench
    low, high = o.input_low[choice.opamp], o.input_high[choice.opamp]
    outside = np.zeros(np.shape(s.vref), dtype=bool)
    with np.errstate(invalid="ignore"):
        for end in bench.ends:
            vref = s.vref * end
            outside |= (vref < bench.low * end + low) | (vref > bench.high * end - high)
        over = s.biased & (s.reverse_bias * bench.ends[1] > d.reverse_max[choice.diode])
    return {"reverse_bias": over & s.divided, "input_range": outside & s.divided}
