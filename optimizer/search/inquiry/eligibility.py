"""What each eligibility check says about one part by itself, with the numbers that decide it.

A check is a `Ruling`: where it fails, context by context, and its facts, from which words are made. The
rulings of a part together give the code of `roles`, which the tests hold them to.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.figures import CHECKS, output_limits
from optimizer.physics import photodiode
from optimizer.request.types import Request
from optimizer.search.inquiry.lookup import Part, parts_of
from optimizer.search.roles import PASSES, diodes_need, opamps_need
from optimizer.search.space import Space

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

Fact = float | str | tuple[str, ...]
Facts = dict[str, Fact]

PASSED, PARTLY, FAILED = "passes", "passes in part", "fails"
NOT_CHECKED, UNKNOWN, NOT_REACHED = "not checked", "unknown", "not reached"


@dataclass(frozen=True, slots=True)
class Check:
    """One check: its key, how it came out, the numbers in SI and the names that decide it."""

    key: str
    verdict: str
    facts: Facts


@dataclass(frozen=True, slots=True)
class Ruling:
    """One check of one part in each context; `verdict` where it was not put to the test ('' where it was)."""

    key: str
    fails: Bools
    facts: Facts
    verdict: str = ""

    def check(self) -> Check:
        """The ruling without the contexts."""
        tested = FAILED if self.fails.all() else PARTLY if self.fails.any() else PASSED
        return Check(self.key, self.verdict or tested, self.facts)


def code(rulings: Sequence[Ruling], *, waived: frozenset[str] = frozenset()) -> Ints:
    """Index in CHECKS of the first check failed in each context, PASSES where none; `waived` do not count."""
    first = np.full(rulings[0].fails.size, PASSES, dtype=np.int64)
    for ruling in rulings:
        if ruling.key not in waived:
            first = np.minimum(first, np.where(ruling.fails, CHECKS.index(ruling.key), PASSES))
    return first


def rulings(space: Space, catalogs: Catalogs, part: Part) -> tuple[Ruling, ...]:
    """Every check that an op-amp or photodiode faces by itself, in the order of CHECKS."""
    parts = parts_of(catalogs, part.role)
    own = _of_opamp if part.role == "opamps" else _of_diode
    with np.errstate(invalid="ignore"):
        found = (*_common(space, parts, part), *own(space, parts, part))
    return tuple(sorted(found, key=lambda ruling: CHECKS.index(ruling.key)))


def _everywhere(space: Space, fails: object) -> Bools:
    return np.full(space.contexts.size, bool(fails))


def _common(space: Space, parts: Parts, part: Part) -> Iterator[Ruling]:
    request, row = space.request, part.row
    status = str(parts.text["status"][row])
    admitted = request.space.status
    yield Ruling(
        "status", _everywhere(space, status not in admitted), {"status": status, "admitted": admitted}
    )
    reasons = excluded(request, parts, part)
    yield Ruling("excluded", _everywhere(space, reasons), reasons)
    yield _stock(space, parts, part)
    low, high = (float(parts.number[name][row]) for name in ("temp_min", "temp_max"))
    ambient = request.ambient
    facts: Facts = {"low": low, "high": high, "coldest": ambient.coldest, "hottest": ambient.hottest}
    fails = ambient.stated and (low > ambient.coldest or high < ambient.hottest)
    verdict = "" if ambient.stated and (fails or _known(low, high)) else UNKNOWN
    yield Ruling("temperature", _everywhere(space, fails), facts, verdict if ambient.stated else NOT_CHECKED)


def _known(*values: float) -> bool:
    return not any(np.isnan(value) for value in values)


def excluded(request: Request, parts: Parts, part: Part) -> Facts:
    """Why the request excludes a part or family, by what says so; empty where nothing does."""
    space, row = request.space, part.row
    reasons: Facts = {}
    ruled_out = tuple(word for word in space.exclude if word in (part.name, f"{part.maker}/{part.name}"))
    if ruled_out:
        reasons["exclude"] = ruled_out
    column = "family" if part.role in ("resistors", "capacitors") else "part"
    known = parts.text[column].tolist()
    known += [f"{m}/{n}" for m, n in zip(parts.text["maker"], parts.text[column], strict=True)]
    wanted = tuple(word for word in space.require if word in set(known))
    if wanted and not {part.name, f"{part.maker}/{part.name}"} & set(wanted):
        reasons["require"] = wanted
    if column == "family":
        return reasons
    package = str(parts.text["package"][row])
    if space.makers and part.maker not in space.makers:
        reasons |= {"maker": part.maker, "makers": space.makers}
    if space.packages and package not in space.packages:
        reasons |= {"package": package, "packages": space.packages}
    return reasons | (_area(request, parts, row) if part.role == "photodiodes" else {})


def _area(request: Request, parts: Parts, row: int) -> Facts:
    light = request.light
    least, most = light.area_from or 0.0, np.inf if light.area_to is None else light.area_to
    area = float(parts.number["active_area"][row])
    return {"area": area, "area_from": least, "area_to": most} if area < least or area > most else {}


def _stock(space: Space, parts: Parts, part: Part) -> Ruling:
    """A second package, where a buffer needs one, doubles what the build takes."""
    needed, stock = space.request.quantity, float(parts.number["stock"][part.row])
    fails = _everywhere(space, stock < needed)
    facts: Facts = {"stock": stock, "needed": float(needed)}
    if part.role == "opamps":
        extra = space.contexts.buffered & ~space.opamps.spare[part.row]
        fails = fails | (extra & (stock < 2 * needed))
        facts |= {"with_buffer": 2.0 * needed} if extra.any() else {}
    return Ruling("stock", fails, facts, "" if _known(stock) else NOT_CHECKED)


def _blank(parts: Parts, row: int, columns: Sequence[str]) -> tuple[str, ...]:
    """Which of `columns` the catalog leaves unknown, each once."""
    points = parts.points
    return tuple(
        name
        for name in dict.fromkeys(columns)
        if (not points[name][row] if name in points else np.isnan(parts.number[name][row]))
    )


def _of_opamp(space: Space, parts: Parts, part: Part) -> Iterator[Ruling]:
    bench, row, n = space.bench, part.row, parts.number
    span = bench.high - bench.low
    low, high = (float(n[name][row]) for name in ("supply_min", "supply_max"))
    least, most = span * bench.ends[0], span * bench.ends[1]
    fails = most > high or least < low
    facts: Facts = {"low": low, "high": high, "least": least, "most": most}
    facts |= {"nominal": span, "tolerance": bench.tolerance}
    yield Ruling("supply", _everywhere(space, fails), facts, "" if _known(low, high) or fails else UNKNOWN)
    blank = _blank(parts, row, opamps_need(space.request))
    yield Ruling("missing", _everywhere(space, blank), {"columns": blank, "role": part.role})
    yield _input_range(space, row)
    yield _window(space, row)


def _input_range(space: Space, row: int) -> Ruling:
    bench, o, x = space.bench, space.opamps, space.contexts
    low, high = float(o.input_low[row]), float(o.input_high[row])
    fails = np.zeros(x.size, dtype=bool)
    for end in bench.ends:
        vref = x.vref * end
        fails |= (vref < bench.low * end + low) | (vref > bench.high * end - high)
    floors, ceilings = (
        ((bench.low * e + low) / e for e in bench.ends),
        ((bench.high * e - high) / e for e in bench.ends),
    )
    facts: Facts = {"low": max(floors), "high": min(ceilings)}
    return Ruling("input_range", fails, facts | _levels(space, ~fails), "" if _known(low, high) else UNKNOWN)


def _window(space: Space, row: int) -> Ruling:
    """The room between the output limits at the worse end of the supply tolerance."""
    o = space.opamps
    low, high = o.output_low[[row]], o.output_high[[row]]
    limits = [output_limits(space.bench, end, low, high) for end in space.bench.ends]
    widths = [float((upper - lower)[0]) for lower, upper in limits]
    width = min(widths) if _known(*widths) else float("nan")
    facts: Facts = {"width": width, "from_low": float(low[0]), "from_high": float(high[0])}
    return Ruling("window", _everywhere(space, not width > 0.0), facts, "" if _known(width) else UNKNOWN)


def _of_diode(space: Space, parts: Parts, part: Part) -> Iterator[Ruling]:
    request, x, row = space.request, space.contexts, part.row
    points = parts.points["responsivity"][row]
    wavelength = request.light.wavelength
    here = float(photodiode.responsivity(wavelength, points)) if points else float("nan")
    facts: Facts = {"wavelength": wavelength, "responsivity": here}
    facts |= {"low": points[0][0], "high": points[-1][0]} if points else {}
    deaf = bool(points) and not here > 0.0
    yield Ruling("wavelength", _everywhere(space, deaf), facts, "" if points else UNKNOWN)
    yield _missing_of_diode(space, parts, row)
    most = float(parts.number["reverse_max"][row])
    stress = np.where(x.biased, x.bias * space.bench.ends[1], 0.0)
    facts = {"reverse_max": most, "largest": float(stress.max(initial=0.0))}
    over = x.biased & (stress > most)
    idle = NOT_CHECKED if not x.biased.any() else "" if _known(most) else UNKNOWN
    yield Ruling("reverse_bias", over, facts | _levels(space, ~over), idle)


def _missing_of_diode(space: Space, parts: Parts, row: int) -> Ruling:
    """Wirings that bias need other values than those that do not; only wirings that there are count."""
    biases = space.contexts.biased
    lacking = {
        biased: _blank(parts, row, diodes_need(space.request, biased=biased))
        if (biases == biased).any()
        else ()
        for biased in (True, False)
    }
    facts: Facts = {"columns": tuple(dict.fromkeys(lacking[True] + lacking[False])), "role": "photodiodes"}
    facts |= {"biased": lacking[True], "unbiased": lacking[False]}
    return Ruling("missing", np.where(biases, bool(lacking[True]), bool(lacking[False])), facts)


def _levels(space: Space, passes: Bools) -> Facts:
    """How many of the contexts pass, of how many."""
    return {"passing": float(passes.sum()), "contexts": float(space.contexts.size)}
