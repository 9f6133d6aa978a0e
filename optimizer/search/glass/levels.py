"""Where the output of one candidate stands between the rails, from dark to the strongest light."""

from __future__ import annotations

from optimizer.figures import output_limits
from optimizer.search.glass.records import Level, Levels
from optimizer.search.glass.subject import Subject, number


def levels(c: Subject) -> Levels:
    """The levels of `c` at both ends of the supply tolerance, nominal between them."""
    low, high = c.bench.ends
    return tuple(_level(c, end) for end in (low, 1.0, high))


def _level(c: Subject, end: float) -> Level:
    s, bench = c.s, c.bench
    lower, upper = (number(limit) for limit in output_limits(bench, end, s.output_low, s.output_high))
    vref, sign = number(s.vref) * end, number(s.sign)
    error, offset = c.figures["error"], c.figures["offset"]
    moved = vref + sign * offset
    per_light = sign * c.transresistance * number(s.responsivity)
    lit = moved + per_light * bench.background
    return Level(
        end=end,
        rail_low=bench.low * end,
        rail_high=bench.high * end,
        limit_low=lower,
        limit_high=upper,
        guard_low=lower + bench.guard,
        guard_high=upper - bench.guard,
        vref=vref,
        dark_low=min(vref - error, moved),
        dark_high=max(vref + error, moved),
        background=lit,
        weakest=lit + per_light * bench.weakest,
        strongest=lit + per_light * bench.strongest,
    )
