"""Rows about the loop, the output at rest and the reference: what the engine says for their inputs."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from scipy.optimize import brentq

from optimizer.physics import loop as loops
from optimizer.physics import output, photodiode, reference
from optimizer.physics.roots import first_crossing
from tests.published.receiver import Receiver, flat_capacitor, ideal, rule_of_45_degrees

Values = float | tuple[float, ...]


def natural_frequency(*, GBW: float, Rf: float, Cin: float = 0.0, Cd: float = 0.0) -> float:
    """sqrt(GBW/(2 pi Rf Cin)), which the notes call the bandwidth: the engine's without Cf."""
    return Receiver(GBW, Rf, 0.0, Cin + Cd).natural_frequency


def gbw_for(*, Rf: float, Cin: float, f: float) -> float:
    return (f / natural_frequency(GBW=1.0, Rf=Rf, Cin=Cin)) ** 2


def flat_pole(*, GBW: float, Rf: float, Cin: float) -> float:
    return ideal(Rf, flat_capacitor(GBW, Rf, Cin)).bandwidth


def flat_cf(*, GBW: float, Rf: float, Cin: float) -> float:
    return flat_capacitor(GBW, Rf, Cin)


def flat_margin(*, GBW: float, Rf: float, Cin: float) -> float:
    return Receiver(GBW, Rf, flat_capacitor(GBW, Rf, Cin), Cin).phase_margin


def flat_overshoot(*, Q: float) -> float:
    receiver = Receiver(1e9, 1e5, flat_capacitor(1e9, 1e5, 1e-10), 1e-10)
    assert abs(receiver.q - Q) < 1e-5
    return receiver.overshoot


def exact_bandwidth(*, Rf: float, Cin: float, Cf: float, GBW: float) -> float:
    return Receiver(GBW, Rf, Cf, Cin).bandwidth


def exact_margin(*, Rf: float, Cin: float, Cf: float, GBW: float) -> float:
    return Receiver(GBW, Rf, Cf, Cin).phase_margin


def one_pole(*, Rf: float, Cf: float) -> float:
    """1/(2 pi Rf Cf): the engine's bandwidth with an op-amp without limits."""
    return ideal(Rf, Cf).bandwidth


def constant_gain(*, G: float, Rf: float, C: float) -> float:
    """G/(2 pi Rf C), an amplifier whose gain does not fall: the same pole with C/G."""
    return ideal(Rf, C / G).bandwidth


def resistor_for(*, Vmax: float, Vmin: float, Imax: float) -> float:
    """The Rf with which the engine's full scale is the largest current."""

    def excess(rf: float) -> float:
        return float(
            output.full_scale(np.float64(Vmax - Vmin), np.float64(0), np.float64(rf), np.float64(1)) - Imax
        )

    return brentq(excess, 1.0, 1e12, rtol=1e-13)


def capacitor_for(*, Rf: float, f: float) -> float:
    return 1e-12 * ideal(Rf, 1e-12).bandwidth / f


def least_gbw(*, Rf: float, Cf: float, Cin: float) -> float:
    """(Cin + Cf)/(2 pi Rf Cf^2): feedback pole times high noise gain."""
    receiver = Receiver(1e6, Rf, Cf, Cin)
    return receiver.feedback_pole * receiver.high_noise_gain


def divider_ratio(*, Vcc: float, Vref: float) -> float:
    return brentq(lambda top: float(reference.divided(Vcc, 0.0, top, 1.0)) - Vref, 1e-3, 1e6, rtol=1e-13)


def rest_level(*, Rf: float, I: float, Vb: float) -> float:  # noqa: E741 - the source's letter
    return Vb + I * ideal(Rf, 1e-15).h0


def uncompensated(*, R: float, C: float, ft: float) -> Receiver:
    """A differentiator, or a receiver without Cf."""
    return Receiver(ft, R, 0.0, C)


def stray_margin(*, R1: float, R2: float, Cn: float, ft: float) -> float:
    """An inverting stage with capacitance at its input: R1 is the shunt of the engine's loop."""
    return Receiver(ft, R2, 0.0, Cn, shunt=1 / R1).phase_margin


def shaped_zero(*, GBP: float, NG1: float, NG2: float) -> float:
    """The noise gain's 1/(2 pi Rf (Cin + Cf)) for a flat response between noise gains NG1 and NG2."""
    rf = 1e3

    def receiver(zero: float) -> Receiver:
        total = 1 / (2 * np.pi * rf * zero)
        return Receiver(GBP, rf, total / NG2, total * (1 - 1 / NG2), shunt=(NG1 - 1) / rf)

    def tilt(zero: float) -> float:
        return loops.power_coefficients(receiver(zero).loop)[0].item() * zero**2

    return brentq(tilt, GBP / NG2**2 / 2, GBP / NG1**2 / 2, rtol=1e-13)


def shaping_cf(*, Rf: float, Z0: float, NG2: float) -> float:
    """The Cf that puts the engine's noise-gain zero at Z0, Cin following from NG2."""

    def excess(log_cf: float) -> float:
        cf = np.exp(log_cf)
        return np.log(Receiver(1e9, Rf, cf, (NG2 - 1) * cf).noise_gain_zero / Z0)

    return float(np.exp(brentq(excess, np.log(1e-18), np.log(1e-6), xtol=1e-13)))


def shaped_bandwidth(*, Z0: float, GBP: float) -> float:
    total = 1 / (2 * np.pi * 1e3 * Z0)
    return Receiver(GBP, 1e3, 0.0, total).natural_frequency


def lag_frequency(*, fB: float, err: float) -> float:
    """Where a single pole has lost the fraction `err`: the engine's crossing at another level."""
    x = first_crossing([np.array([1 / (2 * np.pi * fB) ** 2])], 1 / (1 - err) ** 2 - 1)
    return float(np.sqrt(x.item()) / (2 * np.pi))


def load_bandwidth(*, C: float, R: list[float]) -> Values:
    return tuple(one_pole(Rf=r, Cf=C) for r in R)


def load_then_more(*, B: float, Cd: float, Ca: float) -> Values:
    """The largest load for a bandwidth, and the bandwidth left once the amplifier's C is added."""
    load = brentq(lambda r: one_pole(Rf=r, Cf=Cd) / B - 1, 1e-3, 1e9, rtol=1e-13)
    return load, one_pole(Rf=load, Cf=Cd + Ca)


def parallel_loads(*, R: list[float], C: float) -> float:
    return one_pole(Rf=float(reference.parallel(*R)), Cf=C)


def loads_for(*, C: float, f: list[float]) -> Values:
    return tuple(brentq(lambda r, f=each: one_pole(Rf=r, Cf=C) / f - 1, 1e-3, 1e9, rtol=1e-13) for each in f)


def output_error(*, Vos: float, NG: float, Ib: float, Rf: float) -> float:
    return float(output.dc_error(*(np.float64(v) for v in (Vos, Ib, Rf, (NG - 1) / Rf))))


def bias_drop(*, I: float, R: float) -> float:  # noqa: E741 - the source's letter
    return float(output.dc_error(*(np.float64(v) for v in (0.0, I, R, 0.0))))


def sine_rate(*, f: float, V: float) -> float:
    """The slew rate [V/s] of a sine of peak V at f."""
    return 1 / float(output.slew_ratio(np.float64(1), f, np.float64(2 * V)))


def full_power(*, SR: float, V: float) -> float:
    return SR / sine_rate(f=1.0, V=V)


def largest_input(*, SR: float, f: float, A: float) -> float:
    return SR / sine_rate(f=f, V=1.0) / A


def pole_rise_time(frequency: float) -> float:
    """Rise time [s] of a pole at `frequency`, by the engine's law for the diode's own pole."""
    return 1 / (2 * np.pi * frequency) / float(photodiode.own_pole(1.0))


def displayed(*, tri: float, f: list[float]) -> Values:
    return tuple(float(np.hypot(tri, pole_rise_time(each))) for each in f)


HELD: dict[str, Callable[..., Values]] = {
    "TIA-01": gbw_for,
    "TIA-04": natural_frequency,
    "TIA-05": natural_frequency,
    "TIA-06": natural_frequency,
    "TIA-12": natural_frequency,
    "TIA-21": exact_bandwidth,
    "TIA-22": exact_margin,
    "TIA-25": constant_gain,
    "TIA-02": flat_pole,
    "TIA-07": flat_cf,
    "TIA-09": flat_cf,
    "TIA-15": one_pole,
    "TIA-10": flat_overshoot,
    "TIA-11": flat_margin,
    "STB-05": lambda rule: rule_of_45_degrees().phase_margin,
    "STB-06": lambda rule: rule_of_45_degrees().overshoot,
    "STB-07": lambda rule: rule_of_45_degrees().peaking,
    "STB-08": lambda rule: rule_of_45_degrees(2).bandwidth / rule_of_45_degrees().bandwidth,
    "STB-09": lambda rule: rule_of_45_degrees(2).overshoot,
    "TIA-13a": exact_bandwidth,
    "TIA-13b": exact_bandwidth,
    "TIA-13c": exact_bandwidth,
    "TIA-13d": exact_bandwidth,
    "STB-10": one_pole,
    "STB-11": one_pole,
    "TIA-16": resistor_for,
    "TIA-17": capacitor_for,
    "TIA-18": least_gbw,
    "TIA-19": divider_ratio,
    "TIA-23": lambda Rf: 20 * np.log10(ideal(Rf, 1e-15).h0),
    "TIA-24": rest_level,
    "STB-01": lambda **inputs: uncompensated(**inputs).crossover,
    "STB-02": lambda **inputs: uncompensated(**inputs).q,
    "STB-04": stray_margin,
    "DEC-01": shaped_zero,
    "DEC-02": shaping_cf,
    "DEC-04": shaped_bandwidth,
    "OPA-10": lag_frequency,
    "PHY-15": load_bandwidth,
    "PHY-16": load_then_more,
    "PHY-28": parallel_loads,
    "PHY-29": loads_for,
    "PHY-30": load_then_more,
    "PHY-20": bias_drop,
    "OPA-08": output_error,
    "OPA-01": full_power,
    "OPA-02": largest_input,
    "OPA-04": sine_rate,
    "OPA-05": full_power,
    "PHY-12": lambda f: tuple(pole_rise_time(each) for each in f),
    "PHY-13": displayed,
    "PHY-14": lambda: 1 / float(photodiode.own_pole(1.0)),
}
