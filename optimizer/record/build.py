"""From a study and the outcome of its search to the record."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping
from dataclasses import asdict
from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any

from optimizer.errors import InputError, Problem
from optimizer.record.model import FORMAT, Record
from optimizer.vocabulary import VOCABULARY

if TYPE_CHECKING:
    from optimizer.search.result import Candidate, Outcome, Simulated, TargetValue
    from optimizer.study import Study


def build(study: Study, outcome: Outcome, chosen: int | None = 1) -> Record:
    """Write down what was asked and what the search decided.

    `chosen` is the rank of the row to mark; without candidates nothing is chosen.
    Raises InputError where `chosen` is no rank of a candidate.
    """
    from optimizer.request.in_force import in_force

    shown, wanted = len(outcome.candidates), study.request.tolerance.yield_
    if shown and chosen is not None and not 1 <= chosen <= shown:
        raise InputError([choice_problem(chosen, shown)])
    data = {
        "format": FORMAT,
        "name": study.request.name,
        "created": datetime.now(UTC).isoformat(timespec="seconds"),
        "version": installed_version(),
        "request": in_force(study.request),
        "request_file": study.request.path.as_posix(),
        "chosen": chosen if shown else None,
        "currency": _currency(study),
        "inputs": [{"file": s.file, "sha256": s.sha256, "rows": s.rows} for s in study.inputs],
        "left_out": _left_out(study),
        "search": _search(outcome),
        "candidates": [
            candidate_row(c, rank) | yield_row(c.simulated, wanted)
            for rank, c in enumerate(outcome.candidates, 1)
        ],
        "near_misses": [
            candidate_row(c, rank) | {"missed": list(c.missed)}
            for rank, c in enumerate(outcome.near_misses, shown + 1)
        ],
    }
    return Record(plain(data))


def choice_problem(chosen: int, shown: int) -> Problem:
    """What to say where `chosen` is no rank of the `shown` candidates."""
    rows = "the one row that meets the request" if shown == 1 else f"a rank from 1 to {shown}"
    return Problem("command line", None, "--choose", str(chosen), f"expected {rows}")


def installed_version() -> str:
    """The version of the installed distribution, "unknown" where the source tree runs uninstalled."""
    from importlib.metadata import PackageNotFoundError, version

    try:
        return version("luxsift")
    except PackageNotFoundError:
        return "unknown"


def plain(value: Any) -> Any:
    """Give `value` in JSON's own types: null for what is not finite, no numpy scalar, no -0.0."""
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [plain(item) for item in value]
    if value is None or isinstance(value, bool | str | int):
        return value
    number = value.item() if hasattr(value, "item") else value
    if isinstance(number, float):
        return number + 0.0 if math.isfinite(number) else None
    return number


def _currency(study: Study) -> str | None:
    from optimizer.request.values import CATALOG_CURRENCY

    stated: str = study.request.currency
    return study.catalogs.currency or (None if stated == CATALOG_CURRENCY else stated)


def _left_out(study: Study) -> list[dict[str, Any]]:
    rows = Counter(entry.file for entry in study.catalogs.left_out)
    return [{"file": file, "rows": count} for file, count in sorted(rows.items())]


def _search(outcome: Outcome) -> dict[str, Any]:
    return {
        "combinations": outcome.combinations,
        "pairs": outcome.pairs,
        "evaluated": outcome.evaluated,
        "seconds": outcome.seconds,
        "proven": outcome.proven,
        "dropped": dict(sorted(outcome.dropped.items())),
        "impossible": outcome.impossible,
        "blocking": outcome.blocking,
        "unusable": [asdict(family) for family in outcome.unusable],
    }


def candidate_row(candidate: Candidate, rank: int) -> dict[str, Any]:
    """A candidate as a row of a record, its yield left out; see `plain` for JSON's own types."""
    return {
        "rank": rank,
        "photodiode": candidate.photodiode,
        "opamp": candidate.opamp,
        "photodiode_maker": candidate.photodiode_maker,
        "opamp_maker": candidate.opamp_maker,
        "wiring": candidate.wiring,
        "reference": asdict(candidate.reference),
        "feedback_resistance": candidate.feedback_resistance,
        "resistor_family": candidate.resistor_family,
        "feedback_capacitance": candidate.feedback_capacitance,
        "capacitor_family": candidate.capacitor_family,
        "low_pass": candidate.low_pass,
        "figures": {name: candidate.figures.get(name) for name in VOCABULARY},
        "targets": [_target(target) for target in candidate.targets],
        "limiting": candidate.limiting,
        "margin": candidate.margin,
        "assumed": sorted(candidate.assumed),
        "linear_model": list(candidate.linear_model),
        **candidate.outlines,
        **({"alternates": [asdict(other) for other in candidate.alternates]} if candidate.alternates else {}),
    }


def _target(target: TargetValue) -> dict[str, Any]:
    """One target; its worst corner only where corners are graded."""
    graded = asdict(target)
    if target.corner is None:
        del graded["worst"], graded["corner"]
    return graded


def yield_row(simulated: Simulated | None, wanted: float | None) -> dict[str, Any]:
    """The key `yield` of a candidate; nothing where nothing was drawn at random."""
    if simulated is None:
        return {}
    found = {
        "draws": simulated.draws,
        "passed": simulated.passed,
        "yield": simulated.yield_,
        "low": simulated.low,
        "high": simulated.high,
        "failures": dict(sorted(simulated.failures.items())),
        "worst": simulated.worst,
        "unknown": simulated.unknown,
        "meets": None if wanted is None else simulated.reaches(wanted),
    }
    return {"yield": found}
