"""The integrals over frequency that the noise takes: B and B' of white noise, F and F' of flicker."""

from __future__ import annotations

from math import isnan

from optimizer.report.worked.row import ASTROM, DEFINITION, OWN, Budget, Values, Worked, n, plus, q, times


def bands(v: Values, budget: Budget) -> tuple[Worked, ...]:
    """The integrals that the contributions of `budget` take; none where the loop is unstable."""
    if isnan(v["white_flat"]):
        return ()
    rows = _filtered(v) if v["low_pass_time"] > 0.0 else _plain(v)
    if v["noise_corner"] > 0.0:
        rows += _flicker(v)
    return rows + _bypassed(v) if "reference_divider" in budget else rows


def _plain(v: Values) -> tuple[Worked, ...]:
    """Through the loop alone: D = 1 + e1 s + e2 s^2 + e3 s^3."""
    e1, e2 = n(v["e1"], "s"), n(v["e2"], "s^2")
    below, formula = times("4", e1, e2), "4 e1 e2"
    if v["e3"] > 0.0:
        below, formula = f"4 × ({times(e1, e2)} - {n(v['e3'], 's^3')})", "4 (e1 e2 - e3)"
    return (
        _white("B", f"e2 / ({formula})", f"{e2} / ({below})", v),
        _white("B'", f"1 / ({formula})", f"1 / ({below})", v),
    )


def _filtered(v: Values) -> tuple[Worked, ...]:
    """With the low-pass: D = 1 + d1 s + d2 s^2 + d3 s^3 + d4 s^4."""
    e1, e2, e3, lag = v["e1"], v["e2"], v["e3"], v["low_pass_time"]
    d1, d2, d3, d4 = e1 + lag, e2 + e1 * lag, e3 + e2 * lag, e3 * lag
    tlp = q(lag, "time")
    first = f"{times(n(d2, 's^2'), n(d3, 's^3'))} - {times(n(d1, 's'), n(d4, 's^4'))}"
    second = f"{n(d1, 's')} × ({first}) - ({n(d3, 's^3')})^2"
    return (
        _lag("d1", "e1 + tlp", plus(n(e1, "s"), tlp), n(d1, "s")),
        _lag("d2", "e2 + e1 tlp", plus(n(e2, "s^2"), times(n(e1, "s"), tlp)), n(d2, "s^2")),
        _lag("d3", "e3 + e2 tlp", plus(n(e3, "s^3"), times(n(e2, "s^2"), tlp)), n(d3, "s^3")),
        _lag("d4", "e3 tlp", times(n(e3, "s^3"), tlp), n(d4, "s^4")),
        _white("B", "M / (4 (d1 M - d3^2)), M = d2 d3 - d1 d4", f"({first}) / (4 × ({second}))", v),
        _white("B'", "d3 / (4 (d1 M - d3^2))", f"{n(d3, 's^3')} / (4 × ({second}))", v),
    )


def _lag(name: str, formula: str, numbers: str, value: str) -> Worked:
    return Worked(name, formula, (numbers,), value, DEFINITION)


def _white(name: str, formula: str, numbers: str, v: Values) -> Worked:
    what, value = ("|1/D|^2", q(v["white_flat"], "frequency"))
    if name == "B'":
        what, value = "|s/D|^2", n(v["white_rising"], "Hz/s^2")
    return Worked(name, f"{formula}, the integral of {what} over all frequencies", (numbers,), value, ASTROM)


def _flicker(v: Values) -> tuple[Worked, ...]:
    numbers = (f"sum of the residues at the poles of 1/D, from {q(v['noise_from'], 'frequency')} up",)
    return (
        Worked("F", "integral of |1/D|^2 / f", numbers, n(v["flicker_flat"]), OWN),
        Worked("F'", "integral of |s/D|^2 / f", numbers, n(v["flicker_rising"], "1/s^2"), OWN),
    )


def _bypassed(v: Values) -> tuple[Worked, ...]:
    numbers = (f"as B and B', with the divider's pole of {q(v['divider_time'], 'time')} as well",)
    return (
        Worked(
            "Bd", "integral of |1/D|^2 / |1 + s tb|^2", numbers, q(v["bypassed_flat"], "frequency"), ASTROM
        ),
        Worked(
            "Bd'", "integral of |s/D|^2 / |1 + s tb|^2", numbers, n(v["bypassed_rising"], "Hz/s^2"), ASTROM
        ),
    )
