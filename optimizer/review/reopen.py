"""A saved record found again together with its request and catalogs, as they are now.

Entry points: `reopen(path, request)` reads all three and says which input files have changed since;
`chosen_of(record, rank)` is the candidate that is meant.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, NoReturn

from optimizer import record as records
from optimizer import study as studies
from optimizer.catalog.parts import Source
from optimizer.errors import InputError, Problem, did_you_mean
from optimizer.record import Record
from optimizer.request.types import RANKINGS, Ranking, Space
from optimizer.study import Study

COMMAND_LINE = "command line"
OVERRIDE = "give --request FILE to say where it is now"
Load = Callable[[Path], Study]
GONE = "the record was made with it: put it back, or give --request FILE with a request that names others"


@dataclass(frozen=True, slots=True)
class Changed:
    """One input file that is not what it was: its SHA-256 `then` and `now`, None where it is new or gone."""

    file: str
    then: str | None
    now: str | None


@dataclass(frozen=True, slots=True)
class Reopened:
    """A record, its study as the files say now (ranking as the record has it), and what changed since."""

    record: Record
    study: Study
    changed: tuple[Changed, ...]


class ReopenError(InputError):
    """Problems of a request that a record names, or of its catalogs; `request` is that request's path."""

    def __init__(self, problems: Sequence[Problem], request: Path) -> None:
        super().__init__(problems)
        self.request = request


def reopen(path: str | Path, request: str | Path | None = None, *, load: Load = studies.load) -> Reopened:
    """Read the record at `path`, its request and that request's catalogs (both by `load`).

    `request` says where the request is; left out, it is looked for by name beside the record, then
    where the record says it was, and the one with the recorded hash is preferred.
    Raises InputError where the record is none or its request cannot be found, ReopenError where the
    request or a catalog cannot be used.
    """
    return reopened(records.read(path), path, request, load=load)


def reopened(
    record: Record, path: str | Path, request: str | Path | None = None, *, load: Load = studies.load
) -> Reopened:
    """The same of a `record` that was read at `path` already."""
    inputs = inputs_of(record.data, str(path))
    recorded = record.data.get("request_file")
    place = Path(request) if request is not None else found_at(Path(path), inputs[0], recorded)
    study = _load(place, inputs, load)
    ranking, space = _ranking(record, study, str(path)), _space(record, study)
    study = replace(study, request=replace(study.request, ranking=ranking, space=space))
    return Reopened(record, study, tuple(changes(inputs, study.inputs)))


def chosen_of(record: Record, rank: int | None = None) -> Mapping[str, Any]:
    """The candidate with `rank`; left out, the one that the record marks as chosen.

    Raises InputError where there is none.
    """
    rows = record.candidates
    wanted = record.data["chosen"] if rank is None else rank
    for row in rows:
        if row["rank"] == wanted:
            return row
    if not rows:
        rule = "the record holds no candidate: nothing met its request"
        raise InputError([Problem(COMMAND_LINE, None, None, _typed(rank), rule)])
    which = "the one row that meets the request, 1" if len(rows) == 1 else f"a rank from 1 to {len(rows)}"
    missed = any(row["rank"] == wanted for row in record.near_misses)
    remedy = "that row is a near miss" if missed else ""
    if rank is None:
        which, remedy = f"{which}: the record marks no row as chosen", "give --rank"
    raise InputError([Problem(COMMAND_LINE, None, "--rank", _typed(rank), f"expected {which}", remedy)])


def _typed(rank: int | None) -> str | None:
    return None if rank is None else str(rank)


def inputs_of(data: Mapping[str, Any], file: str) -> list[Source]:
    """The input files that the record `data`, read from `file`, lists: first the one that names the others.

    Raises InputError where it does not say what they were.
    """
    entries, sources = data["inputs"], []
    for index, entry in enumerate(entries):
        whole = isinstance(entry, dict) and all(isinstance(entry.get(k), str) for k in ("file", "sha256"))
        if not whole:
            _refuse(file, f"inputs[{index}]", "expected a table with file and sha256")
        sources.append(Source(entry["file"], entry["sha256"], entry.get("rows", 0)))
    if not sources:
        _refuse(file, "inputs", "the record names no request")
    return sources


def found_at(path: Path, source: Source, recorded: object, what: str = "request") -> Path:
    """Where the request (or whatever `what`) of the record at `path` is: beside it, or where it was.

    `recorded` is where the record says it was. Raises InputError where it is in neither place.
    """
    places = [path.parent / source.file]
    if isinstance(recorded, str):
        places.append(Path(recorded))
    found = [place for place in places if _is_file(place)]
    same = (place for place in found if _sha256(place) == source.sha256)
    best = next(same, found[0] if found else None)
    if best is None:
        looked = " nor ".join(dict.fromkeys(str(place) for place in places))
        rule = f"the {what} that the record names is neither {looked}"
        if len(set(places)) == 1:
            rule = f"the {what} that the record names is not at {looked}"
        raise InputError([Problem(str(path), None, "inputs[0]", source.file, rule, OVERRIDE)])
    return best


def _is_file(place: Path) -> bool:
    try:
        return place.is_file()
    except (OSError, ValueError):
        return False


def _sha256(place: Path) -> str | None:
    try:
        return hashlib.sha256(place.read_bytes()).hexdigest()
    except OSError:
        return None


def _load(place: Path, inputs: Sequence[Source], load: Load) -> Study:
    try:
        return load(place)
    except InputError as error:
        named = {source.file for source in inputs}
        raise ReopenError([_with_remedy(p, place, named) for p in error.problems], place) from None


def _with_remedy(problem: Problem, place: Path, named: set[str]) -> Problem:
    """The problem of a vanished file with what to do about it."""
    own = problem.file == str(place)
    if not own and (problem.file not in named or _is_file(place.parent / problem.file)):
        return problem
    if own and _is_file(place):
        return problem
    advice = OVERRIDE if own else GONE
    return replace(problem, remedy="; ".join(text for text in (problem.remedy, advice) if text))


def _ranking(record: Record, study: Study, file: str) -> Ranking:
    """The request's ranking with what was in force when the record was made."""
    said = record.data["request"]["ranking"]
    if said["by"] not in RANKINGS:
        remedy = did_you_mean(said["by"], RANKINGS)
        _refuse(file, "request.ranking.by", f"expected one of {', '.join(RANKINGS)}", said["by"], remedy)
    if said["show"] < 1:
        _refuse(file, "request.ranking.show", "expected a whole number from 1", str(said["show"]))
    return replace(study.request.ranking, by=said["by"], show=said["show"])


def _space(record: Record, study: Study) -> Space:
    """The request's space without what the record's substitutes replace: that stays gone."""
    space = study.request.space
    out = record.data.get("replaces", {}).get("out", ())
    return replace(space, exclude=tuple(dict.fromkeys((*space.exclude, *out))))


def changes(then: Sequence[Source], now: Sequence[Source]) -> Iterator[Changed]:
    """What differs between inputs; the first names the others in both, whatever its own name."""
    if then[0].sha256 != now[0].sha256:
        yield Changed(then[0].file, then[0].sha256, now[0].sha256)
    before = {source.file: source.sha256 for source in then[1:]}
    after = {source.file: source.sha256 for source in now[1:]}
    for file in dict.fromkeys((*before, *after)):
        if before.get(file) != after.get(file):
            yield Changed(file, before.get(file), after.get(file))


def _refuse(file: str, column: str, rule: str, cell: str | None = None, remedy: str = "") -> NoReturn:
    raise InputError([Problem(file, None, column, cell, rule, remedy)])
