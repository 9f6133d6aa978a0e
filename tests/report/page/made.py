"""Dossiers of the starter: as it is, with tolerances, with parts compared, and with awkward names."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from optimizer.cli import main
from optimizer.review.dossier import Dossier, gather, place_of
from optimizer.review.reopen import Reopened, reopen
from optimizer.review.weighing import weigh

TOLERANCE = """
[tolerance]
yield = "99 %"
draws = 2000
gbw = "30 %"
voltage_noise = "20 %"
responsivity = "10 %"
dark_current = "50 %"
diode_capacitance = "10 %"
"""
CORNERS = """
[tolerance]
method = "corners"
draws = 500
gbw = "10 %"
responsivity = "2 %"
"""
TITLE = 'name = "light gate, receive channel"'
SCRIPT = "<script>alert(1)</script>"
MARKUP = "a`b|c**d** ![x](http://made.up/x.png) $\\frac{1}{2}$ </svg><b>&amp;"
LONG = "Q" * 180
HOSTILE = {"photodiode": SCRIPT, "opamp": MARKUP}
COMPARED = ("YZA-41", "YZA-31", "Yonderbeck Analog/YZA-22", "YZR-N")
"""Parts of the starter: one fails a check, one misses a target, one meets, and a family of resistors."""


@dataclass(frozen=True, slots=True)
class Case:
    """A folder with a request, its catalogs and the record of its search, opened again."""

    record: Path
    reopened: Reopened

    @property
    def dossier(self) -> Dossier:
        return gather(self.reopened, place_of(self.record, self.reopened, "review.html"))

    def weighed(self, compare: Sequence[str] = ()) -> Dossier:
        """The dossier with everything that takes a search, and with parts to compare."""
        return weigh(self.dossier, compare)


def case(folder: Path, extra: str = "", *, names: dict[str, str] | None = None, title: str = TITLE) -> Case:
    """The starter's request with `extra` tables and its `title`, its best parts renamed to `names`."""
    main(["start", str(folder)])
    request, record = folder / "request.toml", folder / "record.json"
    text = request.read_text("utf-8")
    assert TITLE in text
    request.write_text(text.replace(TITLE, title) + extra, "utf-8")
    save(request, record)
    if names:
        best = reopen(record).record.candidates[0]
        for role, name in names.items():
            _rename(folder / f"{role}s.csv", best[role], name)
        save(request, record)
    return Case(record, reopen(record))


def save(request: Path, record: Path) -> None:
    """Save the record of the search that `request` asks for."""
    assert main(["shortlist", str(request), "--quiet", "--save", str(record)]) == 0


def _rename(catalog: Path, old: str, new: str) -> None:
    quoted = '"' + new.replace('"', '""') + '"'
    text = catalog.read_text("utf-8")
    assert f"\n{old}," in text
    catalog.write_text(text.replace(f"\n{old},", f"\n{quoted},"), "utf-8")
