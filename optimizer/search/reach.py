"""How far a pair gets through the eligibility checks: the check reached by its best setting.

Exact, without evaluating every setting. A few likely settings settle most pairs. For the others: the
dark output and the gain only get worse with Rf, the load does not depend on it, min_gain depends on
Rf only through the resistor's parasitic, so testing the smallest Rf of each parasitic in every context
decides them; only stability needs every value.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import CHECKS, screen
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space, own_code, settings

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

_BLOCK = 65536
_MIN_GAIN = CHECKS.index("min_gain")
_UNSTABLE = CHECKS.index("unstable")


def first_failed(space: Space, choice: Choice) -> Ints:
    """Index of the first check that each setting fails, PASSES where it is eligible."""
    reach = own_code(space, choice)
    with np.errstate(all="ignore"):
        fails = screen(space.bench, settings(space, choice))
    for name, mask in fails.items():
        reach = np.minimum(reach, np.where(mask, CHECKS.index(name), PASSES))
    return reach


def furthest(space: Space, opamp: Ints, diode: Ints) -> Ints:
    """The check reached by the setting of each pair that gets furthest, PASSES where one is eligible."""
    reach = np.full(opamp.size, -1)
    for begin in range(0, opamp.size, _BLOCK):
        part = slice(begin, begin + _BLOCK)
        reach[part] = _witnessed(space, opamp[part], diode[part])
    for row in np.flatnonzero(reach < PASSES):
        reach[row] = _scanned(space, int(opamp[row]), int(diode[row]), int(reach[row]))
    return reach


def _witnessed(space: Space, opamp: Ints, diode: Ints) -> Ints:
    """The best of a few likely settings of each pair."""
    reach = np.full(opamp.size, -1)
    for group in range(int(space.contexts.group[-1]) + 1):
        for resistor, capacitor in _likely(space):
            open_ = np.flatnonzero(reach < PASSES)
            if not open_.size:
                return reach
            context = _likely_context(space, opamp[open_], diode[open_], group)
            same = np.ones(open_.size, dtype=np.int64)
            choice = Choice(opamp[open_], diode[open_], context, resistor * same, capacitor * same, 0 * same)
            reach[open_] = np.maximum(reach[open_], first_failed(space, choice))
    return reach


def _likely(space: Space) -> Iterator[tuple[int, int]]:
    """Resistor and capacitor of settings that often pass: small and large Rf, large to small Cf."""
    resistors = np.argsort(space.resistors.value, kind="stable")
    capacitors = np.argsort(space.capacitors.value, kind="stable")
    for r in (0, resistors.size - 1) if space.bench.dark_on_rail else (0,):
        for c in (capacitors.size - 1, capacitors.size // 2, 0):
            yield int(resistors[r]), int(capacitors[c])


def _likely_context(space: Space, opamp: Ints, diode: Ints, group: int) -> Ints:
    """The context of `group` that both parts pass, nearest the middle of the output's range."""
    members = np.flatnonzero(space.contexts.group == group)
    o, bench = space.opamps, space.bench
    middle = 0.5 * (bench.low + o.output_low + bench.high - o.output_high)
    if bench.converter is not None:
        middle = np.clip(middle, bench.converter[0], bench.converter[1])
    wanted = np.searchsorted(space.contexts.vref[members], middle[opamp])
    passes = space.opamp_verdicts.code[:, members] == PASSES
    allows = space.diode_verdicts.code[:, members] == PASSES
    low = np.maximum(passes.argmax(axis=1)[opamp], allows.argmax(axis=1)[diode])
    last = members.size - 1
    high = np.minimum(
        last - passes[:, ::-1].argmax(axis=1)[opamp], last - allows[:, ::-1].argmax(axis=1)[diode]
    )
    return members[np.clip(np.clip(wanted, 0, last), np.minimum(low, high), high)]


def _scanned(space: Space, opamp: int, diode: int, known: int) -> int:
    """The check reached by one pair, by scanning what can matter."""
    code = np.minimum(space.opamp_verdicts.code[opamp], space.diode_verdicts.code[diode])
    contexts = np.flatnonzero(code == PASSES)
    known = max(known, int(code[code < PASSES].max(initial=-1)))
    if not contexts.size:
        return known
    smallest = np.argmin(space.capacitors.value)
    few = _few_resistors(space)
    reach = _grid(space, (opamp, diode), (contexts, few, np.array([smallest])))
    if space.bench.dark_on_rail:
        every = np.arange(space.resistors.size)
        rail = contexts[~space.contexts.divided[contexts] & (space.contexts.sign[contexts] > 0)]
        reach = max(reach, _grid(space, (opamp, diode), (rail, every, np.array([smallest]))))
    known = max(known, reach)
    if known != _UNSTABLE:
        return known
    every = (contexts, np.arange(space.resistors.size), np.arange(space.capacitors.size))
    return _grid(space, (opamp, diode), every)


def _few_resistors(space: Space) -> Ints:
    """The smallest resistor of each parasitic capacitance."""
    order = np.lexsort((space.resistors.value, space.resistors.parasitic))
    parasitic = space.resistors.parasitic[order]
    return order[np.r_[True, np.diff(parasitic) != 0.0]]


def _grid(space: Space, pair: tuple[int, int], axes: tuple[Ints, Ints, Ints]) -> int:
    """The furthest check reached over a grid of contexts, resistors and capacitors of one pair."""
    sizes = tuple(axis.size for axis in axes)
    total, reach = int(np.prod(sizes)), -1
    for start in range(0, total, _BLOCK):
        index = np.unravel_index(np.arange(start, min(start + _BLOCK, total)), sizes)
        context, resistor, capacitor = (axis[i] for axis, i in zip(axes, index, strict=True))
        same = np.ones(context.size, dtype=np.int64)
        choice = Choice(pair[0] * same, pair[1] * same, context, resistor, capacitor, 0 * same)
        reach = max(reach, int(first_failed(space, choice).max()))
        if reach == PASSES:
            break
    return reach
