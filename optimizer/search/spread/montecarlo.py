"""Monte Carlo of the candidates that are shown: random real parts, and how many receivers would do.

Every draw moves all axes of `spreads` independently and is evaluated whole. The draws of a candidate
follow from the request's seed and the candidate's own names and values: neither its place in the list
nor the other rows change them, and of more draws the first are the same.
"""

from __future__ import annotations

import hashlib
import json
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer import margins, statistics
from optimizer.catalog.parts import Catalogs, Parts
from optimizer.figures import evaluate
from optimizer.request.types import WIRINGS
from optimizer.search.assemble import plain_number
from optimizer.search.result import Simulated
from optimizer.search.space import Choice, Space
from optimizer.search.spread.spreads import AXES, half_widths, moved, moved_checks
from optimizer.vocabulary import VOCABULARY

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

BLOCK = 16384
"""Draws that are evaluated at once."""

DISTRIBUTIONS = {"uniform": statistics.uniform, "normal": statistics.normal}


@dataclass(frozen=True, slots=True)
class Drawn:
    """Some draws of one candidate: each target's figure, and each target and check where it fails."""

    targets: Mapping[str, Floats]
    failures: Mapping[str, Bools]

    @property
    def passed(self) -> int:
        """How many of the draws fail nothing."""
        return int(np.sum(~np.any(list(self.failures.values()), axis=0)))


def monte_carlo(space: Space, catalogs: Catalogs, choice: Choice) -> tuple[Simulated, ...]:
    """The draws of every setting of `choice`, in its order, each as the request's [tolerance] says."""
    settings = range(choice.opamp.size)
    return tuple(_simulated(space, catalogs, choice.take(np.array([row]))) for row in settings)


def samples(space: Space, catalogs: Catalogs, choice: Choice) -> dict[str, Floats]:
    """The figure of every graded target in each draw of `choice`, one setting: those of `monte_carlo`.

    Empty where a spread is unknown.
    """
    if unknown_spreads(space, catalogs, choice):
        return {}
    blocks = [block.targets for block in draws(space, catalogs, choice)]
    return {name: np.concatenate([block[name] for block in blocks]) for name in space.limits}


def _simulated(space: Space, catalogs: Catalogs, choice: Choice) -> Simulated:
    unknown = unknown_spreads(space, catalogs, choice)
    if unknown:
        return Simulated(draws=0, unknown=unknown)
    passed = 0
    failures: Counter[str] = Counter()
    extremes: list[Mapping[str, tuple[float, float]]] = []
    for block in draws(space, catalogs, choice):
        passed += block.passed
        failures.update({name: int(np.sum(fails)) for name, fails in block.failures.items()})
        extremes.append({name: _extremes(name, values) for name, values in block.targets.items()})
    count = space.request.tolerance.draws
    low, high = statistics.wilson(passed, count)
    ends = {name: _extremes(name, np.array([found[name] for found in extremes])) for name in extremes[0]}
    return Simulated(
        draws=count,
        passed=passed,
        yield_=passed / count,
        low=low,
        high=high,
        failures={name: number for name, number in failures.items() if number},
        worst={name: plain_number(worst) for name, (worst, _) in ends.items()},
        best={name: plain_number(best) for name, (_, best) in ends.items()},
    )


def _extremes(name: str, values: Floats) -> tuple[float, float]:
    """The worst and the best value of a target; the worst is NaN where some value is, the best where all."""
    ends = float(np.min(values)), float(np.fmax.reduce(values, axis=None))
    if VOCABULARY[name].better == "higher":
        return ends
    return float(np.max(values)), float(np.fmin.reduce(values, axis=None))


def draws(space: Space, catalogs: Catalogs, choice: Choice) -> Iterator[Drawn]:
    """All draws of `choice`, one setting, in blocks; no spread of it may be unknown."""
    tolerance = space.request.tolerance
    deviate = DISTRIBUTIONS[tolerance.distribution]
    widths = half_widths(space, choice)
    generator = _generator(tolerance.seed, _identity(space, catalogs, choice))
    for start in range(0, tolerance.draws, BLOCK):
        shares = generator.random((min(BLOCK, tolerance.draws - start), len(AXES)))
        deviations = {name: deviate(widths[name], shares[:, k]) for k, name in enumerate(AXES)}
        yield _drawn(space, choice, deviations)


def _drawn(space: Space, choice: Choice, deviations: Mapping[str, Floats]) -> Drawn:
    """Evaluate one setting at all `deviations`."""
    size = next(iter(deviations.values())).size
    every = choice.take(np.zeros(size, dtype=np.int64))
    limits = {**space.limits, **space.musts}
    with np.errstate(all="ignore"):  # absurd but stated values overflow; their figures do not exist
        settings = moved(space, every, deviations)
        found = evaluate(space.bench, settings)
        figures = {name: np.broadcast_to(found.figures[name], (size,)) for name in limits}
        fails = {name: margins.margin(name, figures[name], limit) < 0.0 for name, limit in limits.items()}
        fails |= {**moved_checks(space, every, settings), **found.fails}
    return Drawn(
        targets={name: figures[name] for name in space.limits},
        failures={name: np.broadcast_to(where, (size,)) for name, where in fails.items()},
    )


def unknown_spreads(space: Space, catalogs: Catalogs, choice: Choice) -> tuple[str, ...]:
    """The blank columns that leave a spread of `choice`, one setting, unknown: "resistor.tolerance", ..."""
    widths = half_widths(space, choice)
    if all(np.all(np.isfinite(width)) for width in widths.values()):
        return ()
    r, c = space.resistors, space.capacitors
    resistors = {r.rows[int(r.family[choice.resistor[0]])]}
    if space.contexts.divided[choice.context[0]]:
        resistors.add(int(space.contexts.resistors[choice.context[0]]))
    family = int(c.family[choice.capacitor[0]])
    capacitors = {c.rows[family]} if family >= 0 else set()
    needed = ("tolerance", "tempco") if space.request.ambient.distance else ("tolerance",)
    return (
        *_blanks("resistor", catalogs.resistors, resistors, needed),
        *_blanks("capacitor", catalogs.capacitors, capacitors, ("tolerance",)),
    )


def _blanks(role: str, parts: Parts, rows: set[int], needed: Sequence[str]) -> list[str]:
    return [f"{role}.{name}" for name in needed if any(np.isnan(parts.number[name][row]) for row in rows)]


def _identity(space: Space, catalogs: Catalogs, choice: Choice) -> str:
    """What tells the setting of `choice` from every other, as text, by names and values."""
    o, d, x, r, c, low = (int(column[0]) for column in choice.columns())
    family = int(space.capacitors.family[c])
    named = [
        *(str(catalogs.photodiodes.text[name][d]) for name in ("maker", "part")),
        *(str(catalogs.opamps.text[name][o]) for name in ("maker", "part")),
        WIRINGS[int(space.contexts.wiring[x])],
        *(repr(float(values[x])) for values in (space.contexts.top, space.contexts.bottom)),
        space.resistors.names[int(space.resistors.family[r])],
        repr(float(space.resistors.value[r])),
        space.capacitors.names[family] if family >= 0 else "",
        repr(float(space.capacitors.value[c])),
        repr(float(space.low_passes[low])),
    ]
    return json.dumps(named)


def _generator(seed: int, identity: str) -> np.random.Generator:
    digest = hashlib.sha256(identity.encode()).digest()
    return np.random.default_rng([seed, int.from_bytes(digest, "big")])
