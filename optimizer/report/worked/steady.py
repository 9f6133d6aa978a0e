"""The figures that need no frequency: gain, errors, full scale, currents, money."""

from __future__ import annotations

from math import isinf, isnan
from typing import TYPE_CHECKING

from optimizer.report.worked.row import (
    COMMON,
    CURRENT,
    DEFINITION,
    FIORE,
    FRANCO,
    NETWORK,
    OWN,
    UNKNOWN,
    Figures,
    Values,
    Worked,
    money,
    n,
    per_light,
    plus,
    q,
    times,
)

if TYPE_CHECKING:
    from optimizer.search.examine import Glass, Level


def transresistance(v: Values, f: Figures) -> Worked:
    """H0."""
    below = plus(n(v["open_loop_gain"]), "1", *leak(v))
    return Worked(
        "transresistance",
        "H0 = Rf A0 / (A0 + 1 + Rf/Rsh)" if leak(v) else "H0 = Rf A0 / (A0 + 1)",
        (f"{times(q(v['feedback_resistance'], 'resistance'), n(v['open_loop_gain']))} / ({below})",),
        q(f["transresistance"], "resistance"),
        OWN,
    )


def leak(v: Values) -> tuple[str, ...]:
    """Rf/Rsh as a term, none where the shunt is infinite or counts as dark current."""
    if isinf(v["shunt_resistance"]):
        return ()
    return (f"{q(v['feedback_resistance'], 'resistance')} / {q(v['shunt_resistance'], 'resistance')}",)


def error(v: Values, f: Figures) -> Worked:
    """The error of amplifier and reference."""
    offset, bias = q(v["offset_voltage"], "voltage"), q(v["bias_current"], "current")
    formula = "Vos (1 + Rf/Rsh) + Ib Rf" if leak(v) else "Vos + Ib Rf"
    terms = [f"{offset} × ({plus('1', *leak(v))})" if leak(v) else offset]
    terms.append(times(bias, q(v["feedback_resistance"], "resistance")))
    if v["divided"]:
        formula += " + Ib Rp"
        terms.append(times(bias, q(v["divider_resistance"], "resistance")))
    if v["buffered"]:
        formula += " + Vos of the buffer"
        terms.append(offset)
    return Worked(
        "error", formula, (plus(*terms),), q(f["error"], "voltage"), f"{FIORE}, example 5.9 (Vos NG + Ib Rf)"
    )


def offset(v: Values, f: Figures) -> Worked:
    """The error with the dark current on top."""
    formula, numbers = "error, for no dark current flows", q(f["error"], "voltage")
    if v["dark_current"] > 0.0:
        formula = "error + Idk H0"
        dark = times(q(v["dark_current"], "current"), q(f["transresistance"], "resistance"))
        numbers = plus(numbers, dark)
    return Worked("offset", formula, (numbers,), q(f["offset"], "voltage"), CURRENT)


def full_scale(v: Values, f: Figures, light: str) -> Worked:
    """The strongest light that fits."""
    swing = min(v["swing_low_end"], v["swing_high_end"])
    gain = times(q(f["transresistance"], "resistance"), per_light(v["responsivity"], light))
    used = f"({q(swing, 'voltage')} - {q(f['offset'], 'voltage')}) / ({gain}) - {q(v['background'], light)}"
    return Worked(
        "full_scale",
        "(swing - offset) / (H0 R) - Pbackground, not below 0, swing at the worse end of the supply",
        (used if f["full_scale"] > 0.0 else f"max(0, {used})",),
        q(f["full_scale"], light),
        DEFINITION,
    )


def slew(v: Values, f: Figures, light: str) -> Worked:
    """Slew rate over what the strongest light needs."""
    formula = "SR / (pi f H0 R Pstrongest), f the bandwidth target"
    source = f"{FRANCO}, example 6.8 (full-power bandwidth, here with the peak-to-peak amplitude)"
    if isnan(f["slew"]):
        return Worked("slew", formula, (_why_no_slew(v),), "-", source)
    amplitude = times(
        q(f["transresistance"], "resistance"), per_light(v["responsivity"], light), q(v["strongest"], light)
    )
    numbers = (
        f"{q(v['slew_rate'], 'slew_rate')} / (pi × {q(v['bandwidth_target'], 'frequency')} × {amplitude})"
    )
    return Worked("slew", formula, (numbers,), q(f["slew"], "ratio"), source)


def _why_no_slew(v: Values) -> str:
    return "no bandwidth target is stated" if isnan(v["bandwidth_target"]) else UNKNOWN


def supply_current(v: Values, f: Figures) -> Worked:
    """Packages and divider."""
    formula, terms = (
        "packages × current of one",
        [times(n(v["packages"]), q(v["package_current"], "current"))],
    )
    if v["divided"]:
        formula += " + (V+ - V-) / (R1 + R2)"
        terms.append(f"({rails(v)}) / ({divider(v)})")
    known = not isnan(f["supply_current"])
    return Worked(
        "supply_current",
        formula,
        (plus(*terms) if known else UNKNOWN,),
        q(f["supply_current"], "current"),
        COMMON,
    )


def rails(v: Values) -> str:
    """V+ - V- at nominal."""
    return minus(q(v["supply_high"], "voltage"), v["supply_low"])


def minus(text: str, value: float) -> str:
    """`text` less a voltage, whose own sign is not written twice."""
    return f"{text} - {q(value, 'voltage')}" if value >= 0.0 else f"{text} + {q(-value, 'voltage')}"


def divider(v: Values) -> str:
    """R1 + R2."""
    return plus(q(v["divider_top"], "resistance"), q(v["divider_bottom"], "resistance"))


def cost(v: Values, f: Figures) -> Worked:
    """What is bought."""
    formula, prices = "photodiode + op-amp + Rf", ["price_photodiode", "price_opamps", "price_resistor"]
    if v["packages"] > 1.0:
        formula = formula.replace("op-amp", "two op-amps at twice the quantity")
    if v["placed_capacitance"] > 0.0:
        formula, prices = f"{formula} + Cf", [*prices, "price_capacitor"]
    if v["divided"]:
        formula, prices = f"{formula} + divider with bypass", [*prices, "price_divider"]
    return Worked(
        "cost", formula, (plus(*(money(v[name]) for name in prices)),), money(f["cost"]), DEFINITION
    )


def reverse_bias(v: Values, f: Figures) -> Worked:
    """Across the diode, at nominal."""
    if not v["biased"]:
        formula, numbers = "0: the diode stands between the summing node and Vref", "0 V"
    elif v["sign"] > 0.0:
        formula, numbers = "Vref - V-", minus(q(v["vref"], "voltage"), v["supply_low"])
    else:
        formula, numbers = "V+ - Vref", minus(q(v["supply_high"], "voltage"), v["vref"])
    return Worked("reverse_bias", formula, (numbers,), q(f["reverse_bias"], "voltage"), DEFINITION)


def input_capacitance(v: Values, f: Figures) -> Worked:
    """At the summing node."""
    names = ("diode_capacitance", "common_capacitance", "differential_capacitance", "stray_capacitance")
    return Worked(
        "input_capacitance",
        "Cin = Cpd + Ccm + Cdiff + Cstray",
        (plus(*(q(v[name], "capacitance") for name in names)),),
        q(f["input_capacitance"], "capacitance"),
        COMMON,
    )


def temperature(v: Values) -> Worked:
    """T of every temperature law, in kelvin."""
    return Worked(
        "T", "hottest ambient + 273.15", (f"{n(v['hottest'])} + 273.15",), n(v["kelvin"], "K"), DEFINITION
    )


def vref(v: Values) -> Worked:
    """The reference of a divider."""
    low, span = q(v["supply_low"], "voltage"), f"({rails(v)})"
    ratio = f"{q(v['divider_bottom'], 'resistance')} / ({divider(v)})"
    return Worked(
        "Vref",
        "V- + (V+ - V-) R2 / (R1 + R2)",
        (f"{low} + {span} × {ratio}",),
        q(v["vref"], "voltage"),
        NETWORK,
    )


def divider_resistance(v: Values) -> Worked:
    """What the divider's noise and the bias current see."""
    top, bottom = q(v["divider_top"], "resistance"), q(v["divider_bottom"], "resistance")
    numbers = f"{times(top, bottom)} / ({divider(v)})"
    return Worked("Rp", "R1 R2 / (R1 + R2)", (numbers,), q(v["divider_resistance"], "resistance"), COMMON)


def swing(glass: Glass) -> tuple[Worked, Worked]:
    """From Vref to the limit in the direction of light, at the worse end of the supply; the limit first."""
    v = glass.values
    level = glass.levels[0 if v["swing_low_end"] <= v["swing_high_end"] else -1]
    rising, guard = v["sign"] > 0.0, q(v["guard"], "voltage")
    room = min(v["swing_low_end"], v["swing_high_end"])
    if rising:
        formula = "upper limit - guard - Vref"
        numbers = minus(f"{q(level.limit_high, 'voltage')} - {guard}", level.vref)
    else:
        formula = "Vref - (lower limit + guard)"
        numbers = f"{q(level.vref, 'voltage')} - ({q(level.limit_low, 'voltage')} + {guard})"
    return (
        _limit(v, level, rising=rising),
        Worked("swing", formula, (numbers,), q(room, "voltage"), DEFINITION),
    )


def _limit(v: Values, level: Level, *, rising: bool) -> Worked:
    """The output limit in the direction of light."""
    end = n(level.end)
    if rising:
        name, own, value = "upper limit", v["output_high"], level.limit_high
        formula, numbers = (
            "V+ - output_high",
            f"{q(v['supply_high'], 'voltage')} × {end} - {q(own, 'voltage')}",
        )
        cut = value < level.rail_high - own
    else:
        name, own, value = "lower limit", v["output_low"], level.limit_low
        formula, numbers = "V- + output_low", f"{q(v['supply_low'], 'voltage')} × {end} + {q(own, 'voltage')}"
        cut = value > level.rail_low + own
    if cut:
        formula, numbers = "the end of the converter's range", q(value, "voltage")
    return Worked(name, f"{formula}, at the worse end of the supply", (numbers,), q(value, "voltage"), COMMON)


def noise_gain(v: Values) -> Worked:
    """g, the noise gain at rest."""
    formula = "1 + Rf/Rsh" if leak(v) else "1, for no shunt carries current"
    return Worked("g", formula, (plus("1", *leak(v)),), n(v["dc_noise_gain"]), COMMON)


def feedback_capacitance(v: Values) -> Worked:
    """Cf, placed and parasitic."""
    terms = plus(*(q(v[name], "capacitance") for name in ("placed_capacitance", "parasitic_capacitance")))
    return Worked(
        "Cf",
        "placed + parasitic of the resistor",
        (terms,),
        q(v["feedback_capacitance"], "capacitance"),
        COMMON,
    )
