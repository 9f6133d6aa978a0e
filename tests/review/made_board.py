"""A small board that can be built: its files, its outline, and plans put together by hand from shortlists.

Nothing here plans: each channel takes the row of its own shortlist that it is told to, and packages, bill
and totals are counted and priced by code of its own.
"""

from __future__ import annotations

import json
import shutil
import tempfile
from collections import Counter
from collections.abc import Iterable, Sequence
from contextlib import redirect_stdout
from decimal import ROUND_HALF_UP, Decimal
from functools import cache
from io import StringIO
from pathlib import Path

from optimizer.catalog.parts import Parts
from optimizer.cli import main
from optimizer.planning.outline import Outline
from optimizer.planning.plan import (
    POOLS,
    Alone,
    BoardPlan,
    Build,
    Level,
    LineItem,
    Package,
    Place,
    Planned,
    Pool,
    Total,
)
from optimizer.planning.reading import read_board
from optimizer.record import write
from optimizer.record.board import build
from optimizer.search.result import Candidate
from optimizer.search.shortlist import shortlist

Key = tuple[str, str, str, float | None]

BOARD = """\
name = "two gates and a level"
quantity = {quantity}

[[channels]]
name = "gate"
request = "channels/gate.toml"
count = 2

[[channels]]
name = "level"
request = "channels/level.toml"
count = 1

[limits]
cost = 40.0
line_items = 16

[costs]
line_item = 15.0
placement = 0.01
"""


def written_in(folder: Path, quantity: int = 200) -> Path:
    """A board file with its requests in a folder of their own, and the starter's catalogs beside it."""
    assert main(["start", str(folder)]) == 0
    text = (folder / "request.toml").read_text("utf-8")
    (folder / "request.toml").unlink()
    for name in ("opamps", "photodiodes", "resistors", "capacitors"):
        text = text.replace(f'"{name}.csv"', f'"../{name}.csv"')
    (folder / "channels").mkdir()
    (folder / "channels" / "gate.toml").write_text(text, "utf-8")
    slower = text.replace('bandwidth = "30 kHz"', 'bandwidth = "3 kHz"')
    slower = slower.replace('name = "light gate, receive channel"', 'name = "level, receive channel"')
    (folder / "channels" / "level.toml").write_text(slower, "utf-8")
    path = folder / "board.toml"
    path.write_text(BOARD.format(quantity=quantity), "utf-8")
    return path


def candidates_of(outline: Outline) -> dict[str, tuple[Candidate, ...]]:
    """What each channel's own shortlist shows."""
    return {
        channel.name: shortlist(channel.study.request, channel.study.catalogs).candidates
        for channel in outline.channels
    }


def planned(outline: Outline, *ranked: Sequence[Build]) -> Planned:
    """Plans of the builds given, as if a solver had found and proven them over pools."""
    plans = tuple(plan_of(outline, builds, rank) for rank, builds in enumerate(ranked, 1))
    pools = tuple(Pool(c.name, 1_000_000, 60, 40, complete=False, left_out=7) for c in outline.channels)
    alone = Alone(cost=plans[0].cost + 2500, line_items=9, packages=4) if plans else None
    return Planned("proven", plans, pools, "highs", 1.25, rounds=2, alone=alone)


def plan_of(outline: Outline, builds: Sequence[Build], rank: int = 1) -> BoardPlan:
    """One plan, every package, line and total counted anew."""
    levels = levels_of(builds)
    packages = packages_of(outline, builds, levels)
    bill = bill_of(outline, builds, packages, levels)
    cost = cents_of(outline, bill)
    lines = len(bill)
    totals = (
        Total("cost", cost / 100 / outline.quantity, outline.limits.cost),
        Total("supply_current", _current(outline, packages, builds), outline.limits.supply_current),
        Total("area", None, outline.limits.area),
        Total("line_items", lines, outline.limits.line_items),
        Total("opamp_parts", len({package.opamp for package in packages}), None),
        Total("packages", len(packages), None),
        Total("placements", sum(line.pieces for line in bill), None),
    )
    margins = {t.name: t.margin for t in totals if t.margin is not None}
    limiting = min(margins, key=lambda name: margins[name], default=None)
    return BoardPlan(
        rank=rank,
        builds=tuple(builds),
        packages=packages,
        levels=levels,
        bill=bill,
        totals=totals,
        limiting=limiting,
        cost=cost,
        bound=cost,
        proven=POOLS,
    )


def levels_of(builds: Sequence[Build]) -> tuple[Level, ...]:
    """The shared levels that the builds name."""
    found = {}
    for one in builds:
        if one.level is not None and one.level not in found:
            reference, outlines = one.candidate.reference, one.candidate.outlines
            users = tuple(dict.fromkeys(b.channel for b in builds if b.level == one.level))
            assert reference.top is not None
            assert reference.bottom is not None
            found[one.level] = Level(
                one.level,
                reference.voltage,
                reference.top,
                reference.bottom,
                100e-9,
                str(outlines["divider_family"]),
                str(outlines["bypass_family"]),
                one.opamp or one.candidate.opamp,
                users,
            )
    return tuple(found.values())


def packages_of(outline: Outline, builds: Sequence[Build], levels: Sequence[Level]) -> tuple[Package, ...]:
    """Packages filled in the order of the channels, then the buffers."""
    parts = outline.channels[0].study.catalogs.opamps
    wanted: dict[tuple[str, str], list[Place]] = {}
    for one in builds:
        own = wanted.setdefault(_package(one), [])
        for copy in one.copies:
            own.append(Place(one.channel, copy))
    for level in levels:
        package = next(_package(b) for b in builds if b.level == level.name)
        wanted[package].append(Place(None, 0, level.name))
    found = []
    for (part, maker), places in wanted.items():
        size = int(parts.number["channels"][_row(parts, "part", part)])
        found += [
            Package(part, maker, size, tuple(places[at : at + size])) for at in range(0, len(places), size)
        ]
    return tuple(found)


def _package(one: Build) -> tuple[str, str]:
    return one.opamp or one.candidate.opamp, one.opamp_maker or one.candidate.opamp_maker


def bill_of(
    outline: Outline, builds: Sequence[Build], packages: Iterable[Package], levels: Iterable[Level]
) -> tuple[LineItem, ...]:
    """Every part number with its pieces, bought as cheaply as the breaks allow."""
    pieces: Counter[Key] = Counter()
    for one in builds:
        c, n = one.candidate, len(one.copies)
        pieces["photodiode", c.photodiode, c.photodiode_maker, None] += n
        pieces["resistor", c.resistor_family, str(c.outlines["resistor_maker"]), c.feedback_resistance] += n
        if c.capacitor_family is not None:
            maker = str(c.outlines["capacitor_maker"])
            pieces["capacitor", c.capacitor_family, maker, c.feedback_capacitance] += n
        if c.reference.kind == "divider" and one.level is None:
            _divider(pieces, c, n)
    for level in levels:
        _divider(pieces, next(b.candidate for b in builds if b.level == level.name), 1)
    for package in packages:
        pieces["opamp", package.opamp, package.maker, None] += 1
    return tuple(_line(outline, key, n) for key, n in pieces.items())


def _divider(pieces: Counter[Key], c: Candidate, number: int) -> None:
    family, maker = str(c.outlines["divider_family"]), str(c.outlines["divider_maker"])
    for value in (c.reference.top, c.reference.bottom):
        pieces["resistor", family, maker, value] += number
    bypass = str(c.outlines["bypass_family"]), str(c.outlines["bypass_maker"])
    pieces["capacitor", *bypass, 100e-9] += number


def _line(outline: Outline, key: Key, pieces: int) -> LineItem:
    role, part, maker, value = key
    parts: Parts = getattr(outline.channels[0].study.catalogs, f"{role}s")
    row = _row(parts, "part" if role in ("photodiode", "opamp") else "family", part)
    buy, unit, cents = bought(parts.points["price"][row], outline.quantity * pieces)
    package = str(parts.text["package"][row]) or None
    return LineItem(role, part, maker, value, package, pieces, buy, unit, cents / 100, None)


def bought(breaks: Sequence[tuple[float, float]], need: int) -> tuple[int, float, int]:
    """Quantity, unit price and cents of the cheapest way to have `need`: every break tried."""
    ways = []
    for quantity in {need, *(int(first) for first, _ in breaks if first > need)}:
        unit = breaks[0][1]
        for first, price in breaks:
            unit = price if quantity >= first else unit
        money = (Decimal(str(unit)) * quantity * 100).quantize(Decimal(1), ROUND_HALF_UP)
        ways.append((int(money), quantity, unit))
    cents, quantity, unit = min(ways)
    return quantity, unit, cents


def cents_of(outline: Outline, bill: Sequence[LineItem]) -> int:
    """Parts, line items and placements of a build, in cents."""
    each = round(outline.costs.line_item * 100) * len(bill)
    placed = round(outline.costs.placement * 100) * outline.quantity * sum(line.pieces for line in bill)
    return round(sum(line.cost for line in bill) * 100) + each + placed


def _current(outline: Outline, packages: Iterable[Package], builds: Sequence[Build]) -> float:
    parts = outline.channels[0].study.catalogs.opamps
    total = 0.0
    for package in packages:
        row = _row(parts, "part", package.opamp)
        total += package.amplifiers * float(parts.number["quiescent_current"][row])
    levels: set[str] = set()
    for one in builds:
        reference = one.candidate.reference
        if reference.top is None or reference.bottom is None or one.level in levels:
            continue
        rails = outline.channels[0].study.request.supply
        drawn = (rails.high - rails.low) / (reference.top + reference.bottom)
        total += drawn * (1 if one.level else len(one.copies))
        levels |= {one.level} if one.level else set()
    return total


def _row(parts: Parts, column: str, name: str) -> int:
    return int(parts.text[column].tolist().index(name))


def saved_board_in(folder: Path) -> Path:
    """A board's record beside its files: each channel's cheapest receiver, and a second plan."""
    with redirect_stdout(StringIO()):
        path = written_in(folder)
    outline = read_board(path)
    found = candidates_of(outline)
    gate, level = found["gate"], found["level"]
    first = [Build("gate", (1, 2), gate[0]), Build("level", (1,), level[0])]
    second = [Build("gate", (1,), gate[0]), Build("gate", (2,), gate[1]), Build("level", (1,), level[0])]
    record = folder / "board.json"
    write(build(outline, planned(outline, first, second)), record)
    return record


def moved_to(folder: Path, record: Path) -> Path:
    """A copy of a board's record with all of its files in a folder of their own, to be changed at will."""
    shutil.copytree(record.parent, folder)
    path = folder / record.name
    data = json.loads(path.read_text("utf-8")) | {"board_file": (folder / "board.toml").as_posix()}
    path.write_text(json.dumps(data), "utf-8")
    return path


@cache
def _saved() -> Path:
    return saved_board_in(Path(tempfile.mkdtemp(prefix="luxsift-")))


def saved_board(folder: Path) -> Path:
    """`saved_board_in` a new folder, made once."""
    return moved_to(folder, _saved())
