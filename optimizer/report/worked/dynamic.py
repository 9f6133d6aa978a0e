"""The figures that are roots: bandwidth, phase margin, peaking, each shown where its condition holds."""

from __future__ import annotations

from math import isnan

from optimizer.report.worked.row import (
    COMMON,
    DEFINITION,
    JUNCTION,
    OWN,
    UNKNOWN,
    UNSTABLE,
    Figures,
    Values,
    Worked,
    angular,
    n,
    plus,
    q,
    times,
    turns,
)

OUTSIDE = (("diode_time", "tpd", "Ppd"), ("low_pass_time", "tlp", "Plp"))
"""Poles outside the loop: their time constants by name, and the symbols of those and of the poles."""

RESPONSE = "sqrt((1 - e2 w^2)^2 + (e1 w - e3 w^3)^2)"


def bandwidth(v: Values, f: Figures) -> Worked:
    """Where the response is H0/sqrt 2."""
    present = [(name, *symbols) for name, *symbols in OUTSIDE if v[name] != 0.0]
    outside = "".join(f" sqrt(1 + (w {lag})^2)" for _, lag, _ in present)
    formula = f"lowest f with {RESPONSE}{outside} = sqrt(2), w = 2 pi f"
    if isnan(f["bandwidth"]):
        return Worked("bandwidth", formula, (UNKNOWN,), "-", OWN)
    w = turns(f["bandwidth"])
    factors = [fall(v, w), *(f"sqrt(1 + ({n(w)} × {q(v[name], 'time')})^2)" for name, _, _ in present)]
    response = " ".join(("H", *(pole for _, _, pole in present)))
    check = f"H0/|{response}| = {times(*factors)} = sqrt(2)"
    return Worked("bandwidth", formula, (angular(f["bandwidth"]), check), q(f["bandwidth"], "frequency"), OWN)


def fall(v: Values, w: float) -> str:
    """|H0/H| of the loop alone with the numbers put in."""
    even = f"1 - {n(v['e2'], 's^2')} × {n(w)}^2"
    odd = f"{n(v['e1'], 's')} × {n(w)}"
    if v["e3"] > 0.0:
        odd += f" - {n(v['e3'], 's^3')} × {n(w)}^3"
    return f"sqrt(({even})^2 + ({odd})^2)"


def phase_margin(v: Values, f: Figures) -> Worked:
    """180 deg + arg(A/NG) at the crossover."""
    formula = "180 deg - atan(w a) - atan(w b) - atan(w t/g) + atan(w tf) at the crossover"
    if not v["second_time"]:
        formula = formula.replace(" - atan(w b)", "")
    if isnan(v["crossover"]):
        return Worked("phase_margin", formula, ("the loop gain never reaches 1",), "-", OWN)
    w = n(turns(v["crossover"]))
    numbers = f"180 - {_arc(w, v['dominant_time'])}"
    numbers += f" - {_arc(w, v['second_time'])}" if v["second_time"] else ""
    total = f"{q(v['total_time'], 'time')} / {n(v['dc_noise_gain'])}"
    numbers += f" - atan({w} × {total}) + {_arc(w, v['feedback_time'])}"
    return Worked(
        "phase_margin", formula, (angular(v["crossover"]), numbers), q(f["phase_margin"], "angle"), OWN
    )


def _arc(w: str, lag: float) -> str:
    return f"atan({w} × {q(lag, 'time')})"


def crossover(v: Values) -> Worked:
    """Where |A/NG| = 1."""
    second = " sqrt(1 + (w b)^2)" if v["second_time"] else ""
    formula = f"f with A0 sqrt(1 + (w tf)^2) / (sqrt(1 + (w a)^2){second} sqrt(g^2 + (w t)^2)) = 1"
    if isnan(v["crossover"]):
        return Worked("crossover", formula, ("the loop gain never reaches 1",), "-", OWN)
    w = n(turns(v["crossover"]))
    top = times(n(v["open_loop_gain"]), _root(w, v["feedback_time"]))
    below = [_root(w, v["dominant_time"])]
    below += [_root(w, v["second_time"])] if v["second_time"] else []
    below += [f"sqrt({n(v['dc_noise_gain'])}^2 + ({w} × {q(v['total_time'], 'time')})^2)"]
    check = f"|A/NG| = {top} / ({times(*below)}) = 1"
    return Worked("crossover", formula, (angular(v["crossover"]), check), q(v["crossover"], "frequency"), OWN)


def _root(w: str, lag: float) -> str:
    return f"sqrt(1 + ({w} × {q(lag, 'time')})^2)"


def peaking(v: Values, f: Figures) -> Worked:
    """The highest response of the loop alone."""
    formula = f"-20 log10({RESPONSE}) at its largest, where c1 + 2 c2 w^2 + 3 e3^2 w^4 = 0; else 0"
    if isnan(f["peaking"]):
        return Worked("peaking", formula, (UNSTABLE,), "-", OWN)
    if not v["peak_frequency"]:
        return Worked("peaking", formula, _no_peak(v), q(0.0, "level"), OWN)
    level = f"-20 × log10({fall(v, turns(v['peak_frequency']))})"
    numbers = (angular(v["peak_frequency"]), level if f["peaking"] > 0.0 else f"max(0, {level})")
    return Worked("peaking", formula, numbers, q(f["peaking"], "level"), OWN)


def _no_peak(v: Values) -> tuple[str, ...]:
    """Why |H| only falls: no coefficient of |H0/H|^2 is negative, or its slope has no root."""
    e1, e2, e3 = n(v["e1"], "s"), n(v["e2"], "s^2"), n(v["e3"], "s^3")
    c1, c2 = v["e1"] ** 2 - 2.0 * v["e2"], v["e2"] ** 2 - 2.0 * v["e1"] * v["e3"]
    lines = (
        f"c1 = ({e1})^2 - 2 × {e2} = {n(c1, 's^2')}",
        f"c2 = ({e2})^2 - 2 × {times(e1, e3)} = {n(c2, 's^4')}",
    )
    if c2 >= 0.0:
        return (*lines, "neither is negative: |H| only falls")
    root = f"c2^2 - 3 c1 e3^2 = ({n(c2, 's^4')})^2 - 3 × {n(c1, 's^2')} × ({e3})^2"
    return (*lines, f"{root} = {n(c2**2 - 3.0 * c1 * v['e3'] ** 2, 's^8')}", "no root: |H| only falls")


def times_of_loop(v: Values) -> tuple[Worked, ...]:
    """The time constants and coefficients that the loop is made of."""
    a0, rf = n(v["open_loop_gain"]), q(v["feedback_resistance"], "resistance")
    cf, cin = q(v["feedback_capacitance"], "capacitance"), q(v["input_capacitance"], "capacitance")
    a, b = q(v["dominant_time"], "time"), q(v["second_time"], "time")
    return (
        Worked("a", "A0 / (2 pi GBW)", (f"{a0} / (2 pi × {q(v['gbw'], 'frequency')})",), a, COMMON),
        *_second(v, b),
        Worked("tf", "Rf Cf", (times(rf, cf),), q(v["feedback_time"], "time"), DEFINITION),
        Worked("t", "Rf (Cin + Cf)", (f"{rf} × ({plus(cin, cf)})",), q(v["total_time"], "time"), DEFINITION),
        *_lags(v),
    )


def _second(v: Values, b: str) -> tuple[Worked, ...]:
    if not v["second_time"]:
        return ()
    numbers = f"1 / (2 pi × {q(v['second_pole'], 'frequency')})"
    return (Worked("b", "1 / (2 pi f2)", (numbers,), b, COMMON),)


def _lags(v: Values) -> tuple[Worked, ...]:
    rows = []
    if v["diode_time"] > 0.0:
        rise = q(v["diode_time"] * LN9, "time")
        rows.append(Worked("tpd", "tr / ln 9", (f"{rise} / 2.1972",), q(v["diode_time"], "time"), JUNCTION))
    if v["low_pass_time"] > 0.0:
        numbers = f"1 / (2 pi × {q(v['low_pass'], 'frequency')})"
        rows.append(Worked("tlp", "1 / (2 pi flp)", (numbers,), q(v["low_pass_time"], "time"), DEFINITION))
    return tuple(rows)


LN9 = 2.1972245773362196


def coefficients(v: Values) -> tuple[Worked, ...]:
    """e1, e2, e3 of H0/H = 1 + e1 s + e2 s^2 + e3 s^3."""
    a0, g = n(v["open_loop_gain"]), n(v["dc_noise_gain"])
    a, b = q(v["dominant_time"], "time"), q(v["second_time"], "time")
    tf, t, both = q(v["feedback_time"], "time"), q(v["total_time"], "time"), plus(a, b)
    below = f"({plus(a0, g)})"
    first = f"({plus(times(a0, tf), t, times(g, f'({both})'))}) / {below}"
    second = f"({plus(times(f'({both})', t), times(g, a, b))}) / {below}"
    third = f"{times(a, b, t)} / {below}"
    if not v["second_time"]:
        first, second = f"({plus(times(a0, tf), t, times(g, a))}) / {below}", f"{times(a, t)} / {below}"
    rows = [
        Worked("e1", "(A0 tf + t + g (a + b)) / (A0 + g)", (first,), n(v["e1"], "s"), OWN),
        Worked("e2", "((a + b) t + g a b) / (A0 + g)", (second,), n(v["e2"], "s^2"), OWN),
        Worked("e3", "a b t / (A0 + g)", (third,), n(v["e3"], "s^3"), OWN),
    ]
    return tuple(rows if v["second_time"] else rows[:2])
