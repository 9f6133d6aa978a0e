"""The other plans, each as its differences from the first in words."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.planning.plan import POOLS, UNPROVEN
from optimizer.report.board.amounts import CENTS, money, of_cents, worded
from optimizer.report.board.channels import as_built
from optimizer.report.board.status import ADMITTED, CONSIDERED, could_save, over_everything
from optimizer.report.changes import ARROW, NAMES
from optimizer.report.conflicts import listed
from optimizer.report.words import count, margin_words, percent, ranges, several

Data = Mapping[str, Any]
Build = Mapping[str, Any]

ACTIVE = ("photodiode", "opamp")
PASSIVE: Mapping[str, tuple[str, ...]] = {
    "wiring": ("wiring",),
    "reference": ("reference",),
    "feedback_resistance": ("feedback_resistance", "resistor_family"),
    "feedback_capacitance": ("feedback_capacitance", "capacitor_family"),
    "low_pass": ("low_pass",),
}
"""Beside the parts, what may differ, by the keys of a candidate that say so."""
FEWER: Mapping[str, str] = {"line_items": "line item", "packages": "op-amp package"}


def difference_words(first: Data, other: Data, data: Data) -> str:
    """What the other plan saves and costs, and whose margins move: one sentence without a full stop."""
    counts = list(_counts(first, other))
    saved = [f"{'saves' if n > 0 else 'takes'} {worded(abs(n), what)}" for n, what in counts]
    said = ", ".join([*saved, _cost(first, other, data["board"]["quantity"])])
    margins = [*_limiting(first, other), *_margins(first, other, data)]
    return "; ".join([said, *([", ".join(margins)] if margins else [])])


def _counts(first: Data, other: Data) -> Iterator[tuple[int, str]]:
    """How many fewer line items and packages the other has; more where negative."""
    before, after = _values(first), _values(other)
    for name, what in FEWER.items():
        fewer = round(before[name] - after[name])
        if fewer:
            yield fewer, what if fewer > 0 else f"more {what}"


def _values(plan: Data) -> dict[str, Any]:
    return {total["name"]: total["value"] for total in plan["totals"]}


def _cost(first: Data, other: Data, quantity: int) -> str:
    more = other["cost"] - first["cost"]
    if not more:
        return "costs the same"
    each = money(abs(more) / CENTS / quantity)
    word = "more" if more > 0 else "less"
    return f"costs {each} {word} a board ({of_cents(abs(more))} a build)"


def _limiting(first: Data, other: Data) -> Iterator[str]:
    """How the limit that is nearest for the other plan has moved."""
    name = other["limiting"]
    (old, new) = (_margins_of(plan).get(name) for plan in (first, other))
    if new is None:
        return
    if name != first["limiting"]:
        yield f"{clean(name)} limits the board then ({margin_words(new)})"
    elif old is not None and margin_words(old) != margin_words(new):
        yield f"the board's {clean(name)} margin {_moved(old, new)}"


def _margins_of(plan: Data) -> dict[str, Any]:
    return {total["name"]: total["margin"] for total in plan["totals"]}


def _margins(first: Data, other: Data, data: Data) -> Iterator[str]:
    """The channels whose least margin moves, comfortable ones being alike."""
    for channel in data["board"]["channels"]:
        name, request = channel["name"], data["requests"][channel["request"]]
        comfort = request["ranking"]["comfort"]
        (old, _), (new, target) = (_least(plan, name) for plan in (first, other))
        if min(old, comfort) == min(new, comfort) or margin_words(old) == margin_words(new):
            continue
        whose, moved = f"{clean(name)}'s", _moved(old, new)
        fell = new < old
        yield f"{whose} {target} margin {moved}" if fell else f"{whose} least margin {moved} ({target})"


def _moved(old: float, new: float) -> str:
    return f"{'falls' if new < old else 'rises'} to {percent(new) if new else 'nothing'}"


def _least(plan: Data, channel: str) -> tuple[float, str]:
    """The least margin of a channel's copies, and its target."""
    rows = [build["candidate"] for build in plan["channels"] if build["channel"] == channel]
    return min((float(row["margin"]), str(row["limiting"])) for row in rows)


def change_rows(first: Data, other: Data, data: Data) -> list[tuple[str, str]]:
    """Each channel that is built in another way, with its parts as 'old -> new' and what else differs;

    then the op-amp packages that go and come.
    """
    rows = []
    for channel in data["board"]["channels"]:
        before, after = (_copies(plan, channel["name"]) for plan in (first, other))
        said = [*_parts(before, after), *_passives(before, after)]
        if said:
            rows.append((clean(channel["name"]), ", ".join(said)))
    packages = [_packages(plan) for plan in (first, other)]
    if packages[0] != packages[1]:
        gone, come = packages[0] - packages[1], packages[1] - packages[0]
        rows.append(("packages", ARROW.join((_tallied(gone), _tallied(come)))))
    return rows


def _packages(plan: Data) -> Counter[str]:
    return Counter(clean(package["opamp"]) for package in plan["packages"])


def _tallied(packages: Counter[str]) -> str:
    """'2 x YZA-21, 1 x YZA-11'."""
    said = (f"{count(number)} x {part}" for part, number in sorted(packages.items()))
    return ", ".join(said) or "none"


def _copies(plan: Data, channel: str) -> list[Build]:
    """How each copy of a channel is built, in the order of the copies."""
    builds = [build for build in plan["channels"] if build["channel"] == channel]
    copies = sorted((copy, place) for place, build in enumerate(builds) for copy in build["copies"])
    return [builds[place] for _, place in copies]


def _parts(before: Sequence[Build], after: Sequence[Build]) -> Iterator[str]:
    """The photodiodes and op-amps that go with those that come; copies are alike, whatever their numbers."""
    for role in ACTIVE:
        old, new = (Counter(_part(build, role) for build in builds) for builds in (before, after))
        gone, come = old - new, new - old
        if not gone:
            continue
        changed = gone.total()
        some = f" in {changed} of {len(before)}" if changed < len(before) else ""
        sides = (listed(sorted(part for part, _ in side)) for side in (gone, come))
        yield f"{NAMES[role]} {ARROW.join(sides)}{some}"


def _part(build: Build, role: str) -> tuple[str, str]:
    row = as_built(build)
    return clean(row[role]), clean(row[f"{role}_maker"])


def _passives(before: Sequence[Build], after: Sequence[Build]) -> Iterator[str]:
    """What else differs, by name alone: 'other Rf, Cf and reference'."""
    names = [NAMES[name] for name, keys in PASSIVE.items() if _tally(before, keys) != _tally(after, keys)]
    if names:
        yield f"other {listed(names)}"


def _tally(builds: Sequence[Build], keys: Sequence[str]) -> Counter[str]:
    """How often each setting of `keys` occurs; a reference counts by its level and its resistors."""
    return Counter(repr([_setting(build, key) for key in keys]) for build in builds)


def _setting(build: Build, key: str) -> Any:
    if key != "reference":
        return build["candidate"][key]
    reference = build["candidate"]["reference"]
    return (build["level"] is None, *(reference[name] for name in ("kind", "top", "bottom")))


def proof_words(data: Data) -> Iterator[str]:
    """Which of the other plans are proven, over what; for each that is not, what could be saved."""
    plans = data["plans"][1:]
    if plans:
        yield "Each has other photodiodes or op-amps than all plans before it."
    for proven in dict.fromkeys(plan["proven"] for plan in plans if plan["proven"] != UNPROVEN):
        ranks = [plan["rank"] for plan in plans if plan["proven"] == proven]
        over = CONSIDERED if proven == POOLS else ADMITTED
        said = f"Plan{'s' if len(ranks) > 1 else ''} {', '.join(ranges(ranks))}"
        yield f"{said}: proven, no other such plan over {over} costs less."
    for plan in (plan for plan in plans if plan["proven"] == UNPROVEN):
        yield f"Plan {plan['rank']}: NOT PROVEN to be the cheapest such plan. {could_save(plan, data)}"


def number_words(data: Data) -> str:
    """Where there are fewer plans than asked for: whether there are no more; else ''."""
    wanted, found = data["board"]["solve"]["plans"], len(data["plans"])
    if found >= wanted or not found:
        return ""
    asked = f"{several(wanted, 'plan')} were asked for"
    if data["search"].get("only"):
        among = "" if over_everything(data) else f", among {CONSIDERED}"
        return f"{asked}; there are no more with other photodiodes or op-amps{among}."
    return f"{asked}; no more were found in the time, though there may be some."
