"""What one plan of a board changes against another, position by position, from their rows alone."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from itertools import count
from typing import Any

from optimizer.planning.plan import BoardPlan, Build, Level, Package, Place
from optimizer.record.build import candidate_row, plain
from optimizer.review.board_field import label
from optimizer.review.board_gone import Gone
from optimizer.search.locate import POSITIONS

Row = Mapping[str, Any]
LEVEL = ("top", "bottom", "bypass", "resistor_family", "capacitor_family")
"""What makes a shared level what it is; its buffer is in a package."""
FAMILIES = {
    "feedback_resistance": ("resistor_family", "resistor_maker"),
    "feedback_capacitance": ("capacitor_family", "capacitor_maker"),
}
DIVIDER = ("divider_family", "divider_maker", "bypass_family", "bypass_maker")


@dataclass(frozen=True, slots=True)
class BoardChange:
    """What changes in one place. `where` is 'channel', 'packages' or 'levels'.

    Of a channel: its name and the copies, the positions of each copy that change, the old candidate and
    the new one. Of packages: the op-amps that leave and come. Of levels: the old and the new one (None:
    there is none). `count`: how many positions that are.
    """

    where: str
    count: int
    channel: str | None = None
    copies: tuple[int, ...] = ()
    positions: tuple[str, ...] = ()
    old: Any = None
    new: Any = None


def renamed(plan: BoardPlan, old: Mapping[str, Any], gone: Gone) -> BoardPlan:
    """A plan whose channels are receivers of the `old` one, with the channels' and levels' own names."""
    levels = _level_names(plan, old, gone)
    builds = _merged(build for one in plan.builds for build in _own(one, gone, levels))
    return replace(
        plan,
        builds=builds,
        packages=tuple(_package(package, gone, levels) for package in plan.packages),
        levels=tuple(_level(level, gone, levels) for level in plan.levels),
    )


def _receiver(name: str, gone: Gone) -> tuple[str, tuple[int, ...]]:
    """The channel and the copies that the label of a receiver stands for."""
    place = next(place for place in range(len(gone.hits)) if label(place) == name)
    receiver = gone.hits[place].receiver
    return receiver.channel, receiver.copies


def _own(build: Build, gone: Gone, levels: Mapping[str, str]) -> Iterator[Build]:
    channel, copies = _receiver(build.channel, gone)
    named = tuple(copies[copy - 1] for copy in build.copies)
    yield replace(
        build, channel=channel, copies=named, level=None if build.level is None else levels[build.level]
    )


def _merged(builds: Iterator[Build]) -> tuple[Build, ...]:
    """Builds with the copies together that are alike."""
    alike: list[Build] = []
    for build in builds:
        for place, known in enumerate(alike):
            if replace(known, copies=()) == replace(build, copies=()):
                alike[place] = replace(known, copies=tuple(sorted((*known.copies, *build.copies))))
                break
        else:
            alike.append(build)
    return tuple(alike)


def _package(package: Package, gone: Gone, levels: Mapping[str, str]) -> Package:
    return replace(package, places=tuple(_place(place, gone, levels) for place in package.places))


def _place(place: Place, gone: Gone, levels: Mapping[str, str]) -> Place:
    if place.channel is None:
        return replace(place, level=levels[str(place.level)])
    channel, copies = _receiver(place.channel, gone)
    return replace(place, channel=channel, copy=copies[place.copy - 1])


def _level(level: Level, gone: Gone, levels: Mapping[str, str]) -> Level:
    users = dict.fromkeys(_receiver(name, gone)[0] for name in level.channels)
    return replace(level, name=levels[level.name], channels=tuple(users))


def _level_names(plan: BoardPlan, old: Mapping[str, Any], gone: Gone) -> dict[str, str]:
    """Levels that stay keep their names, of equal ones those that share most copies; others get new names."""
    users = _users_of_labels(plan, gone)
    stays = [
        (-users[level["name"], one.name], level["name"], one.name)
        for level in old["levels"]
        for one in plan.levels
        if _what(level) == _what(plain(asdict(one)))
    ]
    names: dict[str, str] = {}
    for _, before, after in sorted(stays):
        if before not in names.values():
            names.setdefault(after, before)
    taken = {level["name"] for level in old["levels"]}
    for one in plan.levels:
        if one.name not in names:
            names[one.name] = next(n for k in count(1) if (n := f"VREF{k}") not in taken)
            taken.add(names[one.name])
    return names


def _users_of_labels(plan: BoardPlan, gone: Gone) -> Counter[tuple[str | None, str]]:
    """How many copies of the receivers went from one level to another."""
    users: Counter[tuple[str | None, str]] = Counter()
    for build in plan.builds:
        home = next(h.receiver.level for i, h in enumerate(gone.hits) if label(i) == build.channel)
        if build.level is not None:
            users[home, build.level] += len(build.copies)
    return users


def _what(level: Mapping[str, Any]) -> tuple[Any, ...]:
    return tuple(level[key] for key in LEVEL)


def changes_of(old: Mapping[str, Any], plan: BoardPlan) -> tuple[BoardChange, ...]:
    """Everything that `plan` changes against the `old` plan of a record."""
    changes = [*_of_channels(old, plan), *_of_packages(old, plan), *_of_levels(old, plan)]
    return tuple(changes)


def _of_channels(old: Mapping[str, Any], plan: BoardPlan) -> Iterator[BoardChange]:
    """The receivers that change, copies with the same change together."""
    before = {(built["channel"], copy): built for built in old["channels"] for copy in built["copies"]}
    for build in plan.builds:
        new = plain(candidate_row(build.candidate, plan.rank))
        groups: dict[tuple[str, ...], list[int]] = {}
        for copy in build.copies:
            positions = moved(before[build.channel, copy], new, build.level)
            groups.setdefault(positions, []).append(copy)
        for positions, copies in groups.items():
            if positions:
                row = before[build.channel, copies[0]]["candidate"]
                number = len(positions) * len(copies)
                yield BoardChange("channel", number, build.channel, tuple(copies), positions, row, new)


def moved(built: Row, new: Row, level: str | None) -> tuple[str, ...]:
    """The positions of one copy that change; a shared level is a position of the board, not of a copy."""
    old = built["candidate"]
    changed = {
        "photodiode": _differ(old, new, ("photodiode", "photodiode_maker")),
        "wiring": old["wiring"] != new["wiring"],
        "reference": _rereferred(built, new, level),
        "low_pass": old["low_pass"] != new["low_pass"],
    }
    for position, family in FAMILIES.items():
        placed = (position, *family) if old[position] or new[position] else (position,)
        changed[position] = _differ(old, new, placed)
    return tuple(position for position in POSITIONS if changed.get(position))


def _rereferred(built: Row, new: Row, level: str | None) -> bool:
    old = built["candidate"]
    if built["level"] is not None or level is not None:
        return (built["level"] is None) != (level is None)
    same = ("kind", "top", "bottom", "buffered")
    apart = any(old["reference"][key] != new["reference"][key] for key in same)
    return apart or (new["reference"]["kind"] == "divider" and _differ(old, new, DIVIDER))


def _differ(old: Row, new: Row, keys: Sequence[str]) -> bool:
    """Whether two rows differ in one of `keys`, unless the old one does not say."""
    return any(key in old and old[key] is not None and old[key] != new.get(key) for key in keys)


def _of_packages(old: Mapping[str, Any], plan: BoardPlan) -> Iterator[BoardChange]:
    before = Counter((package["opamp"], package["maker"]) for package in old["packages"])
    after = Counter((package.opamp, package.maker) for package in plan.packages)
    leave, come = before - after, after - before
    number = max(leave.total(), come.total())
    if number:
        yield BoardChange("packages", number, old=sorted(leave.elements()), new=sorted(come.elements()))


def _of_levels(old: Mapping[str, Any], plan: BoardPlan) -> Iterator[BoardChange]:
    """Levels that go, come or give way, matched in their order; copies that change from one to another."""
    now = {level.name: plain(asdict(level)) for level in plan.levels}
    before = {level["name"]: level for level in old["levels"]}
    gone_ = [level for name, level in before.items() if name not in now]
    new = [level for name, level in now.items() if name not in before]
    follower = _followers(old, plan, [level["name"] for level in gone_], [level["name"] for level in new])
    for level in gone_:
        name = follower.get(level["name"])
        yield BoardChange("levels", 1, old=level, new=None if name is None else now[name])
    for level in new:
        if level["name"] not in follower.values():
            yield BoardChange("levels", 1, old=None, new=level)
    follower |= {name: name for name in before if name in now}
    yield from _leavers(old, plan, follower)


def _users(old: Mapping[str, Any], plan: BoardPlan) -> Counter[tuple[str, str]]:
    """How many copies went from one level to another."""
    homes = {(b["channel"], copy): b["level"] for b in old["channels"] for copy in b["copies"]}
    users: Counter[tuple[str, str]] = Counter()
    for build in plan.builds:
        for copy in build.copies:
            home = homes[build.channel, copy]
            if home is not None and build.level is not None:
                users[home, build.level] += 1
    return users


def _followers(
    old: Mapping[str, Any], plan: BoardPlan, gone: Sequence[str], new: Sequence[str]
) -> dict[str, str]:
    """Which new level takes the place of which old one: those that share most copies first."""
    users, found = _users(old, plan), dict[str, str]()
    pairs = sorted((-users[a, b], a, b) for a in gone for b in new)
    for _, before, after in pairs:
        if before not in found and after not in found.values():
            found[before] = after
    return found


def _leavers(old: Mapping[str, Any], plan: BoardPlan, follower: Mapping[str, str]) -> Iterator[BoardChange]:
    for (home, level), number in sorted(_users(old, plan).items()):
        if follower.get(home) != level:
            yield BoardChange("levels", number, old={"name": home}, new={"name": level})
