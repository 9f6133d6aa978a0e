"""The noise figures, and the contributions and integrals that they are made of."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from math import isnan, sqrt

from optimizer.report.worked.row import (
    ASTROM,
    COMMON,
    DEFINITION,
    FRANCO,
    JOHNSON,
    OWN,
    UNSTABLE,
    Budget,
    Figures,
    Values,
    Worked,
    n,
    per_light,
    plus,
    q,
    times,
)

SIGNAL = "signal_shot"
THERMAL = f"density: {FRANCO}, example 7.4; bandwidth: {ASTROM}"
SHOT = f"density: {JOHNSON}, p. 51; bandwidth: {ASTROM}"
FLICKER = f"density en^2 fce/f: {COMMON}; integrals: {OWN}"
QUANTISATION = f"{FRANCO}, example 12.2 (step / sqrt 12)"


def output_noise(name: str, f: Figures, budget: Budget) -> Worked:
    """`output_noise_dark` or `output_noise_weak`: the root of the sum of mean squares."""
    dark = name == "output_noise_dark"
    but = ", without the weakest light's own shot noise" if dark else ""
    squares = [square for part, square in budget.items() if not (dark and part == SIGNAL)]
    terms = plus(*(f"({q(sqrt(square), 'voltage')})^2" for square in squares))
    return Worked(
        name,
        f"sqrt(sum of the squares of all contributions{but})",
        (UNSTABLE if isnan(f[name]) else f"sqrt({terms})",),
        q(f[name], "voltage"),
        f"mean squares of independent sources add: {COMMON}",
    )


def snr(v: Values, f: Figures, light: str) -> Worked:
    """Signal at the weakest light over its noise."""
    formula = "20 log10(R Pweakest H0 / vn), vn the noise at the weakest light"
    numbers = _decibels(v, f, light, (v["weakest"], f["output_noise_weak"]))
    known = not isnan(f["snr"])
    return Worked("snr", formula, (numbers if known else UNSTABLE,), q(f["snr"], "level"), DEFINITION)


def dynamic_range(v: Values, f: Figures, light: str) -> Worked:
    """The largest signal over the noise without light."""
    formula = "20 log10(R Pfull scale H0 / vn), vn the noise without light"
    numbers = _decibels(v, f, light, (f["full_scale"], f["output_noise_dark"]))
    if isnan(f["dynamic_range"]):
        numbers = UNSTABLE if isnan(f["output_noise_dark"]) else "full scale is 0"
    return Worked("dynamic_range", formula, (numbers,), q(f["dynamic_range"], "level"), DEFINITION)


def _decibels(v: Values, f: Figures, light: str, pair: tuple[float, float]) -> str:
    signal, noise = pair
    per = per_light(v["responsivity"], light)
    above = times(per, q(signal, light), q(f["transresistance"], "resistance"))
    return f"20 × log10({above} / {q(noise, 'voltage')})"


def noise_equivalent_light(v: Values, f: Figures, light: str) -> Worked:
    """Noise without light as light."""
    below = times(q(f["transresistance"], "resistance"), per_light(v["responsivity"], light))
    numbers = f"{q(f['output_noise_dark'], 'voltage')} / ({below})"
    known = not isnan(f["noise_equivalent_light"])
    return Worked(
        "noise_equivalent_light",
        "vn / (H0 R), vn the noise without light, over the whole band",
        (numbers if known else UNSTABLE,),
        q(f["noise_equivalent_light"], light),
        DEFINITION,
    )


def contributions(v: Values, budget: Budget) -> tuple[Worked, ...]:
    """Each contribution [V rms] at the output."""
    if any(isnan(square) for square in budget.values()):
        return ()
    rows = []
    for name, square in budget.items():
        formula, numbers, source = _CONTRIBUTIONS[name](v)
        rows.append(Worked(name, formula, (numbers,), q(sqrt(square), "voltage"), source))
    return tuple(rows)


Text = tuple[str, str, str]
"""Formula, numbers, source."""


def _current(v: Values, formula: str, square: str, source: str) -> Text:
    """A noise current through H0; `square`: its mean square over the noise bandwidth B."""
    return f"H0 sqrt({formula})", f"{q(v['transresistance'], 'resistance')} × sqrt({square})", source


def _band(v: Values) -> str:
    return q(v["white_flat"], "frequency")


def _thermal(v: Values) -> str:
    return f"4 × {v['boltzmann']} J/K × {n(v['kelvin'])} K"


def _thermal_of(name: str, symbol: str) -> Callable[[Values], Text]:
    def text(v: Values) -> Text:
        square = f"{times(_thermal(v), _band(v))} / {q(v[name], 'resistance')}"
        return _current(v, f"4 k T B/{symbol}", square, THERMAL)

    return text


def _shot_of(name: str, symbol: str) -> Callable[[Values], Text]:
    def text(v: Values) -> Text:
        square = times("2", f"{v['elementary_charge']} C", q(v[name], "current"), _band(v))
        return _current(v, f"2 q {symbol} B", square, SHOT)

    return text


def _amplifier_current(v: Values) -> Text:
    square = f"({q(v['current_noise'], 'current_noise')})^2 × {_band(v)}"
    return _current(v, "in^2 B", square, f"bandwidth: {ASTROM}")


def _own(v: Values, kind: str) -> str:
    """g^2 and t^2 with the integrals of this kind."""
    flat, rising = _integrals(v, kind)
    return f"{n(v['dc_noise_gain'])}^2 × {flat} + ({q(v['total_time'], 'time')})^2 × {rising}"


def _moved(v: Values, kind: str) -> str:
    """The same for what moves with Vref."""
    flat, rising = _integrals(v, kind)
    return f"{flat} + ({q(v['reference_time'], 'time')})^2 × {rising}"


def _integrals(v: Values, kind: str) -> tuple[str, str]:
    if kind == "flicker":
        return n(v["flicker_flat"]), n(v["flicker_rising"], "1/s^2")
    return q(v[f"{kind}_flat"], "frequency"), n(v[f"{kind}_rising"], "Hz/s^2")


def _share(v: Values) -> str:
    """A0/(A0 + g), times the density of the op-amp's voltage noise."""
    return times(n(v["gain_ratio"]), q(v["voltage_noise"], "voltage_noise"))


def _amplifier_voltage(v: Values) -> Text:
    numbers = f"{_share(v)} × sqrt({_own(v, 'white')})"
    return "G en sqrt(g^2 B + t^2 B'), G = A0/(A0 + g)", numbers, f"bandwidths: {ASTROM}"


def _amplifier_flicker(v: Values) -> Text:
    numbers = f"{_share(v)} × sqrt({q(v['noise_corner'], 'frequency')} × ({_own(v, 'flicker')}))"
    return "G en sqrt(fce (g^2 F + t^2 F')), G = A0/(A0 + g)", numbers, FLICKER


def _reference_divider(v: Values) -> Text:
    resistance = q(v["divider_resistance"], "resistance")
    density = f"{_thermal(v)} × {resistance} + ({q(v['current_noise'], 'current_noise')} × {resistance})^2"
    numbers = f"{n(v['gain_ratio'])} × sqrt(({density}) × ({_moved(v, 'bypassed')}))"
    formula = "G sqrt((4 k T Rp + in^2 Rp^2) (Bd + tr^2 Bd')), tr = Rf (Cf + Cref), G = A0/(A0 + g)"
    return formula, numbers, THERMAL


def _reference_buffer(v: Values) -> Text:
    inner = _moved(v, "white")
    formula = "G en sqrt(B + tr^2 B'"
    if v["noise_corner"] > 0.0:
        inner += f" + {q(v['noise_corner'], 'frequency')} × ({_moved(v, 'flicker')})"
        formula += " + fce (F + tr^2 F')"
    formula += "), tr = Rf (Cf + Cref), G = A0/(A0 + g)"
    return formula, f"{_share(v)} × sqrt({inner})", f"bandwidths: {ASTROM}; integrals of flicker: {OWN}"


def _converter(v: Values) -> Text:
    numbers = f"{q(v['converter_span'], 'voltage')} / 2^{n(v['converter_bits'])} / sqrt(12)"
    return "range / 2^bits / sqrt(12)", numbers, QUANTISATION


_CONTRIBUTIONS: Mapping[str, Callable[[Values], Text]] = {
    "feedback_resistor": _thermal_of("feedback_resistance", "Rf"),
    "shunt": _thermal_of("shunt_resistance", "Rsh"),
    SIGNAL: _shot_of("weakest_current", "R Pweakest"),
    "background_shot": _shot_of("background_current", "R Pbackground"),
    "dark_shot": _shot_of("dark_current", "Idk"),
    "amplifier_current": _amplifier_current,
    "amplifier_voltage": _amplifier_voltage,
    "amplifier_flicker": _amplifier_flicker,
    "reference_divider": _reference_divider,
    "reference_buffer": _reference_buffer,
    "converter": _converter,
}
