"""A request together with the catalogs that it names, checked against each other."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from optimizer.catalog import ReadOptions, read_catalogs
from optimizer.catalog.parts import Catalogs, Parts, Source
from optimizer.errors import InputError, Problem, did_you_mean
from optimizer.request.draft import Draft, examine
from optimizer.request.in_force import in_force
from optimizer.request.types import Request, Space
from optimizer.request.values import CATALOG_CURRENCY
from optimizer.toml.place import Place
from optimizer.vocabulary import NAMES

Reader = Callable[[Mapping[str, tuple[str, ...]], ReadOptions], Catalogs]


@dataclass(frozen=True, slots=True)
class Study:
    """All that one run reads: the request, its catalogs, and the request's own file."""

    request: Request
    catalogs: Catalogs
    request_source: Source

    @property
    def inputs(self) -> tuple[Source, ...]:
        """Every input file, the request first."""
        return (self.request_source, *self.catalogs.sources)


def load(source: str | Path | Request, *, read: Reader = read_catalogs) -> Study:
    """Read the request at a path (or take one that is read already) and the catalogs that it names.

    `read` reads the catalogs; one that remembers them saves reading those of several requests again.

    Raises:
        InputError: with every problem of the request and of its catalogs at once, names in the
            request that no catalog holds among them.
    """
    return complete(_draft_of(source) if isinstance(source, Request) else examine(source), read=read)


def complete(draft: Draft, *, read: Reader = read_catalogs) -> Study:
    """Read the catalogs that a draft names; as `load`, for a request whose file is read already."""
    problems = list(draft.problems)
    catalogs = None
    try:
        catalogs = _read_catalogs(draft, read)
    except InputError as error:
        problems += error.problems
    if catalogs is not None:
        problems += _unknown_names(draft.request.space, catalogs, draft.place)
    if problems or catalogs is None:
        raise InputError(problems)
    return Study(draft.request, catalogs, Source(draft.request.path.name, draft.sha256, 0))


def from_here(problems: Iterable[Problem], request: Path) -> Iterator[Problem]:
    """The problems of the request at a path and of its catalogs, each file named as seen from here.

    Catalogs are named in their problems as the request names them, so as seen from its folder.
    """
    for problem in problems:
        own = problem.file == str(request) or Path(problem.file).is_absolute()
        yield problem if own else replace(problem, file=str(request.parent / problem.file))


def _draft_of(request: Request) -> Draft:
    """Return the draft of a request in memory; lines and hash are its file's where that says the same."""
    try:
        on_disk = examine(request.path)
    except InputError:
        on_disk = None
    if on_disk is not None and not on_disk.problems and on_disk.request == request:
        return on_disk
    text = json.dumps(in_force(request), sort_keys=True)
    return Draft(request, (), Place(str(request.path)), hashlib.sha256(text.encode()).hexdigest(), True)


def _read_catalogs(draft: Draft, read: Reader) -> Catalogs | None:
    """Return the catalogs; None where the request does not say which they are."""
    request = draft.request
    if not draft.catalogs_known:
        return None
    options = ReadOptions(
        assume=request.assume,
        quantity=request.quantity,
        currency=None if request.currency == CATALOG_CURRENCY else request.currency,
        folder=request.path.parent,
    )
    return read(request.catalogs, options)


def _unknown_names(space: Space, catalogs: Catalogs, place: Place) -> Iterator[Problem]:
    """Yield every part, maker and package that the request names and no catalog holds."""
    active = (catalogs.opamps, catalogs.photodiodes)
    parts = set(part_names(catalogs))
    yield from _unknown("require", space.require, parts, place)
    yield from _unknown("exclude", space.exclude, parts, place)
    yield from _unknown("makers", space.makers, set(_texts("maker", active)), place)
    yield from _unknown("packages", space.packages, set(_texts("package", active)), place)


def _unknown(key: str, names: Iterable[str], known: set[str], place: Place) -> Iterator[Problem]:
    what = {"makers": "maker", "packages": "package"}.get(key, "part")
    for item, name in enumerate(names):
        if name not in known:
            remedy = did_you_mean(name, sorted(known))
            rule = f"the catalogs hold no such {what}"
            yield place.problem(("space", key, item), name, rule, remedy)


def part_names(catalogs: Catalogs) -> Iterator[str]:
    """Yield every part as its name alone and as maker/part; of resistors and capacitors, the family."""
    for parts in (catalogs.opamps, catalogs.photodiodes, catalogs.resistors, catalogs.capacitors):
        names = parts.text[NAMES[parts.role]].tolist()
        makers = parts.text["maker"].tolist() if "maker" in parts.text else [""] * len(names)
        for name, maker in zip(names, makers, strict=True):
            yield name
            if maker:
                yield f"{maker}/{name}"


def _texts(column: str, roles: Iterable[Parts]) -> Iterator[str]:
    for parts in roles:
        if column in parts.text:
            yield from (text for text in parts.text[column].tolist() if text)
