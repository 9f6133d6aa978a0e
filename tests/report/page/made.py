"""Dossiers of the starter: as it is, with tolerances, with every finding, and with awkward names."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from optimizer.cli import main
from optimizer.review.dossier import Dossier, gather, place_of
from optimizer.review.findings import Cloud, Compared, Exposed, Findings, Price, Reach
from optimizer.review.reopen import Reopened, reopen

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


@dataclass(frozen=True, slots=True)
class Case:
    """A folder with a request, its catalogs and the record of its search, opened again."""

    record: Path
    reopened: Reopened

    @property
    def dossier(self) -> Dossier:
        return gather(self.reopened, place_of(self.record, self.reopened, "review.html"))


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


def with_everything(dossier: Dossier) -> Dossier:
    """The dossier with made-up findings of every kind besides those that it has."""
    return replace(dossier, findings=replace(findings(), drawn=dossier.findings.drawn))


def findings() -> Findings:
    """Made-up findings, one or more of each kind, computed by nobody."""
    rng = np.random.default_rng(5)
    cost = np.sort(rng.uniform(1.0, 4.0, 60)).round(2)
    cloud = Cloud(
        cost, rng.uniform(0.0, 0.9, 60).round(3), tuple(f"YZ-{i}" for i in range(60)), complete=True
    )
    prices = (
        Price("snr", 0.2, 36.8, 1.05, 0.11, (("opamp", "YZA-11 -> YZA-12"),)),
        Price("snr", -0.5, 69.0, None, None),
        Price("bandwidth", None, None, 0.98, 0.3),
    )
    exposure = (
        Exposed("YZD-9", "photodiode", "active", 120.0, 200, 14.0, 1, 0, 0),
        Exposed("YZA-11", "op-amp", "not-for-new-designs", None, 200, None, 2, 3, 5),
    )
    reaches = (Reach("snr", 46.0, 51.2, 44.1, -0.2), Reach("cost", 4.0, 1.2, 1.9, 0.4))
    compared = (
        Compared("YZA-99", (("stock", "40 in stock, 200 needed"),), (), "stock", None, None),
        Compared("YZA-50", (), reaches, "snr", -0.2, "YZD-9"),
    )
    return Findings({}, cloud, prices, exposure, compared)
