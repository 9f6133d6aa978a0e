"""Rows about light, currents and noise: what the engine says for their inputs."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from scipy.optimize import brentq

from optimizer.physics import constants, noise, photodiode
from optimizer.vocabulary import COLUMNS
from tests.published.receiver import IDEAL, Receiver, ideal

Values = float | tuple[float, ...]

ROOM = 290.0
"""K; where the source writes 4kT = 1.6e-20 J."""


def thermal_volts(R: float, T: float) -> float:
    return float(np.sqrt(noise.thermal_voltage(R, T)))


def thermal_amps(R: float, T: float) -> float:
    return float(np.sqrt(noise.thermal_current(R, T)))


def shot_amps(I: float) -> float:  # noqa: E741 - the source's letter
    return float(np.sqrt(noise.shot_current(I)))


def quantum(eta: float, lam: float) -> float:
    return float(photodiode.quantum_responsivity(eta, lam))


def photon_wavelength(energy: float) -> float:
    return constants.PLANCK * constants.LIGHT_SPEED / energy


def within(density: float, band: float) -> float:
    """rms of a white amplitude density over a band with a sharp edge."""
    return float(density * np.sqrt(band))


def corner_rms(*, en: float, fce: float, fl: float, fh: float) -> float:
    """White and flicker between sharp edges: the engine's flicker integrals from each edge, subtracted."""
    wide = Receiver(IDEAL, 1e3, 1e-18, 1e-18)
    pink = (wide.flicker(fl).flat - wide.flicker(fh).flat).item()
    return en * np.sqrt(fce * pink + fh - fl)


def stage(inputs: dict[str, Any]) -> Receiver:
    """The op-amp stage of NOI-07: R2 in feedback, R1 to ground; a trace of capacitance."""
    return Receiver(inputs["ft"], inputs["R2"], 0.0, 1e-20, shunt=1 / inputs["R1"])


def stage_noise(**inputs: Any) -> float:
    """Its total output noise by the exact integrals (the source: areas up to 1.57 times the pole)."""
    receiver, kelvin, r3 = stage(inputs), inputs["T"], inputs["R3"]
    band, pink = receiver.white, receiver.flicker(inputs["fl"])
    en2, in2 = inputs["en"] ** 2, inputs["in_"] ** 2
    h0 = np.array([receiver.h0])
    thermal = noise.thermal_current(inputs["R1"], kelvin) + noise.thermal_current(inputs["R2"], kelvin)
    plus = noise.thermal_voltage(r3, kelvin) + in2 * r3**2
    square = noise.output_current(h0, thermal + in2, band)
    square = square + noise.output_current(h0, in2 * inputs["fci"], pink)
    square = square + noise.amplifier_voltage(receiver.loop, en2 + plus, band)
    corner = en2 * inputs["fce"] + in2 * r3**2 * inputs["fci"]
    return float(np.sqrt(square + noise.amplifier_voltage(receiver.loop, corner, pink)).item())


def pin_receiver(inputs: dict[str, Any]) -> tuple[float, float, float]:
    """rms of signal shot, dark shot and thermal noise in a band [A]."""
    signal = quantum(inputs["eta"], inputs["lam"]) * inputs["P"]
    resistance = inputs["RL"] if "RL" in inputs else inputs["R"]
    band = inputs["B"]
    return (
        within(shot_amps(signal), band),
        within(shot_amps(inputs["Id"]), band),
        within(thermal_amps(resistance, inputs["T"]), band),
    )


def bias_box(*, RL: float, I: float, Idark: float, B: float, T: float) -> Values:  # noqa: E741 - the source's letter
    square = noise.thermal_current(RL, T) + noise.shot_current(Idark) + noise.shot_current(I)
    total = within(float(np.sqrt(square)), B)
    return total * RL, I / total


def shot_and_thermal(**inputs: float) -> Values:
    signal, dark, thermal = pin_receiver(inputs)
    return float(np.hypot(signal, dark)), thermal


def power_ratio(*, F_dB: float, **inputs: float) -> float:
    signal, dark, thermal = pin_receiver(inputs)
    current = quantum(inputs["eta"], inputs["lam"]) * inputs["P"]
    return current**2 / (signal**2 + dark**2 + thermal**2 * 10 ** (F_dB / 10))


def loaded_ratio(*, I: float, RL: float, B: float, T: float) -> float:  # noqa: E741 - the source's letter
    square = (noise.shot_current(I) + noise.thermal_current(RL, T)) * B
    return float(10 * np.log10(I**2 / square))


def shot_limit(*, I: float, B: float) -> float:  # noqa: E741 - the source's letter
    return float(20 * np.log10(I / within(shot_amps(I), B)))


def quantum_limit(*, SNR_dB: float, B: float, lam: float, eta: float) -> float:
    """The light whose own shot noise alone gives the ratio."""

    def excess(log_current: float) -> float:
        return shot_limit(I=10**log_current, B=B) - SNR_dB

    return 10 ** brentq(excess, -18, 0, xtol=1e-13) / quantum(eta, lam)


def dark_nep(*, eta: float, lam: float, Id: float, A: float) -> Values:
    nep = shot_amps(Id) / quantum(eta, lam)
    return nep, np.sqrt(A) / nep


def spot(*, Rf: float, Cf: float, Cp: float, f: float, density: float) -> float:
    """Output of a current density [A2/Hz] at the summing node, at one frequency [V/rtHz]."""
    receiver = Receiver(IDEAL, Rf, Cf, Cp)
    return receiver.h0 * np.sqrt(density / receiver.fall(f))


def spot_row(kind: str) -> Callable[..., float]:
    def value(**i: float) -> float:
        place = {name: i[name] for name in ("Rf", "Cf", "Cp", "f")}
        # a voltage en acts as the current en (1/Rf + s (Cp + Cf)) at the summing node
        rise = 1 / i["Rf"] ** 2 + (2 * np.pi * i["f"] * (i["Cp"] + i["Cf"])) ** 2
        densities = {
            "thermal": float(noise.thermal_current(i["Rf"], i["T"])),
            "current": i["in_"] ** 2,
            "voltage": i["en"] ** 2 * rise,
            "shot": float(noise.shot_current(i["I"])),
        }
        return spot(**place, density=densities[kind])

    return value


def budget(inputs: dict[str, float]) -> Receiver:
    """The source's difference amplifier: its input capacitance counts CM + 2 CD."""
    return Receiver(inputs["GBP"], inputs["Rf"], inputs["CF"], inputs["CS"] + inputs["CM"] + 2 * inputs["CD"])


def two_resistors(**inputs: float) -> float:
    """Two Rf at 298 K through one pole: the engine's white integral with an ideal op-amp."""
    return np.sqrt(2) * ideal(inputs["Rf"], inputs["CF"]).current_rms(
        float(noise.thermal_current(inputs["Rf"], 298.0))
    )


def small_budget(inputs: dict[str, float]) -> Receiver:
    extra = inputs["CM"] + 2 * inputs["CD"]
    return Receiver(inputs["GBW"], inputs["Rf"], inputs["Cf"], inputs["Cs"] + extra)


def resistor_part(**inputs: float) -> float:
    """Thermal noise of Rf over pi/2 of the crossover that the capacitances set."""
    crossing = inputs["GBW"] / small_budget(inputs).high_noise_gain
    return within(thermal_volts(inputs["Rf"], inputs["T"]), np.pi / 2 * crossing)


def mean_input(*, in_: float, Rf: float, en: float, Cd: float, F: float) -> float:
    return float(
        np.sqrt(
            in_**2 + noise.thermal_current(Rf, ROOM) + (en / Rf) ** 2 + (2 * np.pi * en * Cd * F) ** 2 / 3
        )
    )


def piecewise_receiver(**i: float) -> float:
    """The areas that the source adds, with corners and noise gain from the engine's loop."""
    receiver = Receiver(i["GBW"], i["Rf"], i["Cf"], i["Cin"])
    pole, gain = receiver.feedback_pole, receiver.high_noise_gain
    voltage = gain * within(i["en"], np.pi / 2 * i["GBW"] / gain - pole)
    return float(np.hypot(voltage, within(thermal_volts(i["Rf"], i["T"]), np.pi / 2 * pole)))


def junction(*, C0: float, phi: float, m: float, V: Any) -> Values:
    """A power law of another potential and exponent: through two points, in units of the potential."""

    def scaled(bias: float) -> float:
        return bias * photodiode.BUILT_IN_POTENTIAL / phi

    far = 30.0
    points = [(0.0, C0), (scaled(far), C0 * (1 + far / phi) ** -m)]
    chosen = points[:1] if m == 0.5 else points  # one point: the engine's own square-root law
    values = photodiode.junction_capacitance([scaled(v) for v in np.atleast_1d(V)], chosen)
    return tuple(values.tolist())


def doubled(*, I0: float, dT: float) -> float:
    return float(photodiode.doubled(I0, 25.0 + dT, 10.0))


def converter_step(FS: float, N: float) -> float:
    return float(np.sqrt(12 * noise.quantisation(FS, N)))


def converter_snr(N: float) -> float:
    """Of a sine that fills the range [dB]."""
    return float(20 * np.log10(1 / (2 * np.sqrt(2)) / np.sqrt(noise.quantisation(1.0, N))))


def efficiency(*, I: float, P: float, lam: float) -> Values:  # noqa: E741 - the source's letter
    return I / P, I / P / quantum(1.0, lam)


def with_power(*, eta: float, lam: float, I: float) -> Values:  # noqa: E741 - the source's letter
    return quantum(eta, lam), I / quantum(eta, lam)


HELD: dict[str, Callable[..., Values]] = {
    "TIA-26": lambda Rf, T: float(noise.thermal_current(Rf, T)),
    "TIA-27": lambda Rf, Rt: 20 * np.log10(thermal_amps(Rf, 300) / thermal_amps(Rt, 300)),
    "NOI-03": thermal_volts,
    "NOI-04": thermal_amps,
    "NOI-05": lambda R, T, fl, fh: within(thermal_volts(R, T), fh - fl),
    "NOI-07": stage_noise,
    "NOI-16": lambda en: en**2 / float(noise.thermal_voltage(1.0, ROOM)),
    "NOI-18a": thermal_volts,
    "NOI-18b": thermal_volts,
    "NOI-18c": thermal_volts,
    "NOI-18d": thermal_volts,
    "NOI-19b": lambda I: I / shot_amps(I),  # noqa: E741 - the source's letter
    "NOI-19c": lambda I: I / shot_amps(I),  # noqa: E741 - the source's letter
    "NOI-20": shot_amps,
    "NOI-21": lambda I, B: within(shot_amps(I), B),  # noqa: E741 - the source's letter
    "NOI-25": lambda R, B, T: within(thermal_volts(R, T), B),
    "NOI-26": lambda I, B: within(shot_amps(I), B),  # noqa: E741 - the source's letter
    "NOI-28": lambda R, T, B: within(thermal_amps(R, T), B),
    "NOI-32": lambda **inputs: pin_receiver(inputs),
    "NOI-01a": corner_rms,
    "NOI-01b": corner_rms,
    "NOI-06b": shot_limit,
    "NOI-22b": bias_box,
    "NOI-35": power_ratio,
    "NOI-36": loaded_ratio,
    "NOI-41": quantum_limit,
    "NOI-09": piecewise_receiver,
    "NOI-13a": two_resistors,
    "NOI-13b": lambda **i: within(i["en"], budget(i).noise_gain_zero),
    "NOI-13c": lambda **i: within(i["en"], budget(i).noise_gain_zero) * budget(i).high_noise_gain,
    "NOI-13d": lambda **i: within(i["en"], 1.57 * i["GBP"] * budget(i).high_noise_gain),
    "NOI-14a": resistor_part,
    "NOI-15": mean_input,
    "NOI-34": lambda **inputs: pin_receiver(inputs),
    "NOI-40": shot_and_thermal,
    "NOI-11": lambda Rf, Ct: Receiver(1e6, Rf, 0.0, Ct).noise_gain_zero,
    "NOI-23a": spot_row("thermal"),
    "NOI-23b": spot_row("current"),
    "NOI-23c": spot_row("voltage"),
    "NOI-23d": spot_row("shot"),
    "NOI-24": lambda Rf, Cf, Cp: (ideal(Rf, Cf).bandwidth, Receiver(1e6, Rf, Cf, Cp).noise_gain_zero),
    "NOI-30": dark_nep,
    "NOI-37": dark_nep,
    "PHY-01a": quantum,
    "PHY-01b": quantum,
    "PHY-01d": quantum,
    "PHY-01e": quantum,
    "PHY-02": with_power,
    "PHY-03": lambda: photon_wavelength(constants.ELEMENTARY_CHARGE) * 1e9,
    "PHY-04": lambda eta, E, I: I / quantum(eta, photon_wavelength(E)),  # noqa: E741 - the source's letter
    "PHY-22": lambda eta, lam, P: quantum(eta, lam) * P,
    "PHY-23": efficiency,
    "PHY-24": lambda Eg_eV: photon_wavelength(Eg_eV * constants.ELEMENTARY_CHARGE),
    "PHY-25": with_power,
    "PHY-06": junction,
    "PHY-07": junction,
    "PHY-09": doubled,
    "PHY-10": doubled,
    "OPA-06": doubled,
    "OPA-07": lambda: float(COLUMNS["photodiodes"]["dark_doubling"].default_text.split()[0]),
    "ADC-01": lambda N, FS: float(np.sqrt(noise.quantisation(FS, N))),
    "ADC-02": converter_snr,
    "ADC-03": lambda SINAD: brentq(lambda bits: converter_snr(bits) - SINAD, 1, 30),
    "ADC-04": converter_step,
    "ADC-05": lambda FS, N: (converter_step(FS, N), 20 * np.log10(FS / converter_step(FS, N))),
    "ADC-06": converter_step,
    "CON-01": lambda: constants.BOLTZMANN,
    "CON-02": lambda: constants.ELEMENTARY_CHARGE,
    "CON-03": lambda: constants.PLANCK,
    "CON-04": lambda: constants.LIGHT_SPEED,
    "CON-05": lambda T: float(noise.thermal_voltage(1.0, T)),
}
