"""How far a pair gets through the eligibility checks: the check reached by its best setting.

Exact, without evaluating every setting. A few likely settings settle most pairs, an imaginary best
one most of the others. For the rest: the dark output and the gain only get worse with Rf (save where
the dark output may rest on the rail), the load does not depend on it, min_gain asks for small Cf.
Stability, e1 e2 > e3, is convex in Cf at a given Rf and convex in Rf at a given Cf (both leading
coefficients are positive), so over a rectangle of them it holds somewhere only if it holds at a corner.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import (
    CHECKS,
    Settings,
    input_capacitance,
    min_gain_fails,
    screen,
    steady_checks,
    steady_state,
)
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space, own_code, settings

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

_BLOCK = 16384
_QUANTILES = (
    (0.0, 1.0),
    (0.0, 0.0),
    (0.4, 1.0),
    (1.0, 1.0),
    (0.6, 0.0),
    (0.4, 0.0),
    (0.25, 0.0),
    (0.8, 0.0),
    (0.1, 0.2),
)
"""Where in the sorted resistors and capacitors the likely settings lie."""
_UNSTABLE = CHECKS.index("unstable")


def first_failed(space: Space, choice: Choice) -> Ints:
    """Index of the first check that each setting fails, PASSES where it is eligible."""
    with np.errstate(all="ignore"):
        return _worst(own_code(space, choice), screen(space.bench, settings(space, choice)))


def _worst(code: Ints, fails: dict[str, Bools]) -> Ints:
    for name, mask in fails.items():
        code = np.minimum(code, np.where(mask, CHECKS.index(name), PASSES))
    return code


def furthest(space: Space, opamp: Ints, diode: Ints) -> Ints:
    """The check reached by the setting of each pair that gets furthest, PASSES where one is eligible."""
    reach = np.full(opamp.size, -1)
    groups = _groups(space)
    for begin in range(0, opamp.size, _BLOCK):
        part = slice(begin, begin + _BLOCK)
        reach[part] = _witnessed(space, groups, opamp[part], diode[part])
    open_ = np.flatnonzero(reach < PASSES)
    final = _no_further(space, opamp[open_], diode[open_], reach[open_])
    for row in open_[~final]:
        reach[row] = max(reach[row], _scanned(space, int(opamp[row]), int(diode[row])))
    return reach


def _witnessed(space: Space, groups: Sequence[Group], opamp: Ints, diode: Ints) -> Ints:
    """The best of a few likely settings of each pair."""
    reach = np.full(opamp.size, -1)
    for resistor, capacitor in _likely(space):
        for group in groups:
            open_ = np.flatnonzero(reach < PASSES)
            if not open_.size:
                return reach
            context = group.likely(opamp[open_], diode[open_])
            same = np.ones(open_.size, dtype=np.int64)
            choice = Choice(opamp[open_], diode[open_], context, resistor * same, capacitor * same, 0 * same)
            reach[open_] = np.maximum(reach[open_], first_failed(space, choice))
    return reach


def _likely(space: Space) -> Iterator[tuple[int, int]]:
    """Resistor and capacitor of settings that often pass."""
    resistors = np.argsort(space.resistors.value, kind="stable")
    capacitors = np.argsort(space.capacitors.value, kind="stable")
    for r, c in _QUANTILES:
        yield int(resistors[int(r * (resistors.size - 1))]), int(capacitors[int(c * (capacitors.size - 1))])


@dataclass(frozen=True, slots=True)
class Group:
    """The contexts of one wiring and kind of reference; by part, the first and last place that it passes.

    `wanted` is each op-amp's place nearest the middle of its output's range.
    """

    members: Ints
    wanted: Ints
    opamp_first: Ints
    opamp_last: Ints
    diode_first: Ints
    diode_last: Ints

    def likely(self, opamp: Ints, diode: Ints) -> Ints:
        """The context that both parts of each pair pass (if there is one) nearest to the wanted one."""
        low = np.maximum(self.opamp_first[opamp], self.diode_first[diode])
        high = np.minimum(self.opamp_last[opamp], self.diode_last[diode])
        return np.asarray(self.members[np.clip(self.wanted[opamp], np.minimum(low, high), high)])


def _groups(space: Space) -> list[Group]:
    """All groups of contexts."""
    o, bench = space.opamps, space.bench
    middle = 0.5 * (bench.low + o.output_low + bench.high - o.output_high)
    if bench.converter is not None:
        middle = np.clip(middle, bench.converter[0], bench.converter[1])
    groups = []
    for number in range(int(space.contexts.group[-1]) + 1):
        members = np.flatnonzero(space.contexts.group == number)
        last = members.size - 1
        passes = space.opamp_verdicts.code[:, members] == PASSES
        allows = space.diode_verdicts.code[:, members] == PASSES
        groups.append(
            Group(
                members,
                np.clip(np.searchsorted(space.contexts.vref[members], middle), 0, last),
                passes.argmax(axis=1),
                last - passes[:, ::-1].argmax(axis=1),
                allows.argmax(axis=1),
                last - allows[:, ::-1].argmax(axis=1),
            )
        )
    return groups


def _no_further(space: Space, opamp: Ints, diode: Ints, reach: Ints) -> Bools:
    """Where no setting of a pair can get past the check it reached: not even one, in any context, with

    the smallest resistor, the smallest capacitor and the smallest parasitic together.
    """
    final = np.zeros(opamp.size, dtype=bool)
    step = max(_BLOCK // space.contexts.size, 1)
    for begin in range(0, opamp.size, step):
        part = slice(begin, begin + step)
        final[part] = _best_imaginable(space, opamp[part], diode[part]) <= reach[part]
    return final


def _best_imaginable(space: Space, opamp: Ints, diode: Ints) -> Ints:
    """A check that no setting of each pair gets past (stability is taken for granted)."""
    x, count = space.contexts, space.contexts.size
    context = np.tile(np.arange(count), opamp.size)
    none = np.zeros(context.size, dtype=np.int64)
    choice = Choice(np.repeat(opamp, count), np.repeat(diode, count), context, none, none, none)
    least = np.full(context.size, space.capacitors.value.min() + space.resistors.parasitic.min())
    s = replace(settings(space, choice), rf=np.full(context.size, space.resistors.value.min()), cf=least)
    with np.errstate(all="ignore"):
        steady = steady_checks(space.bench, s, steady_state(s))
        # an output that rests on the rail wants a large Rf, not a small one
        steady["dark_output"] &= ~(space.bench.dark_on_rail & (x.sign > 0) & ~x.divided)[context]
        checks = {**steady, "min_gain": min_gain_fails(s)}
        return np.asarray(_worst(own_code(space, choice), checks).reshape(-1, count).max(axis=1))


def _scanned(space: Space, opamp: int, diode: int) -> int:
    """The check reached by one pair, from the settings that can get furthest."""
    code = np.minimum(space.opamp_verdicts.code[opamp], space.diode_verdicts.code[diode])
    contexts = np.flatnonzero(code == PASSES)
    reach = int(code[code < PASSES].max(initial=-1))
    if not contexts.size:
        return reach
    x = space.contexts
    rail = space.bench.dark_on_rail & (x.sign[contexts] > 0) & ~x.divided[contexts]
    for parasitic in np.unique(space.resistors.parasitic):
        resistors = np.flatnonzero(space.resistors.parasitic == parasitic)
        smallest = resistors[[np.argmin(space.resistors.value[resistors])]]
        found = _scanned_class(space, (opamp, diode), contexts, smallest)
        if found == _UNSTABLE:
            found = _scanned_class(space, (opamp, diode), contexts, resistors)
        elif found < PASSES and rail.any():
            found = max(found, _scanned_class(space, (opamp, diode), contexts[rail], resistors))
        reach = max(reach, found)
        if reach == PASSES:
            break
    return reach


def _scanned_class(space: Space, pair: tuple[int, int], contexts: Ints, resistors: Ints) -> int:
    """The check reached with resistors of one parasitic: steady checks, then Cf at its two ends."""
    context, resistor = (grid.ravel() for grid in np.meshgrid(contexts, resistors, indexing="ij"))
    smallest = int(np.argmin(space.capacitors.value))
    choice = _choice(pair, context, resistor, np.full(context.size, smallest))
    s = settings(space, choice)
    with np.errstate(all="ignore"):
        steady = _worst(np.full(context.size, PASSES), steady_checks(space.bench, s, steady_state(s)))
    if not (steady == PASSES).any():
        return int(steady.max())
    context, resistor = _ends(space, context[steady == PASSES], resistor[steady == PASSES])
    least = _choice(pair, context, resistor, np.full(context.size, smallest))
    most = _choice(pair, context, resistor, _largest(space, settings(space, least)))
    return max(int(first_failed(space, least).max()), int(first_failed(space, most).max()))


def _ends(space: Space, context: Ints, resistor: Ints) -> tuple[Ints, Ints]:
    """The smallest and the largest resistor of each context (what passes between is an interval)."""
    order = np.lexsort((space.resistors.value[resistor], context))
    context, resistor = context[order], resistor[order]
    change = np.flatnonzero(np.diff(context) != 0)
    ends = np.unique(np.r_[0, change, change + 1, context.size - 1])
    return context[ends], resistor[ends]


def _largest(space: Space, s: Settings) -> Ints:
    """The largest capacitor that min_gain allows with each setting's resistor, else the smallest."""
    order = np.argsort(space.capacitors.value, kind="stable")
    value = space.capacitors.value[order]
    parasitic = s.cf - value[0]
    cin = input_capacitance(s)
    with np.errstate(divide="ignore"):
        allowed = np.where(s.min_gain > 1.0, cin / (s.min_gain - 1.0), np.inf) - parasitic
    place = np.clip(np.searchsorted(value, allowed * (1.0 + 1e-7), "right") - 1, 0, value.size - 1)
    # the check compares a rounded capacitance: at its very edge one step down is the largest
    over = min_gain_fails(replace(s, cf=value[place] + parasitic))
    return np.asarray(order[np.maximum(place - over, 0)])


def _choice(pair: tuple[int, int], context: Ints, resistor: Ints, capacitor: Ints) -> Choice:
    same = np.ones(context.size, dtype=np.int64)
    return Choice(pair[0] * same, pair[1] * same, context, resistor, capacitor, 0 * same)
