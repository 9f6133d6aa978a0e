"""Many records taken up again, each request and each set of catalogs read once."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from optimizer import study as studies
from optimizer.catalog import ReadOptions, read_catalogs
from optimizer.catalog.parts import Catalogs
from optimizer.errors import InputError, Problem
from optimizer.review.reopen import Reopened, ReopenError, reopen
from optimizer.study import Study

Tell = Callable[[str], None]
Files = Mapping[str, tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Taken:
    """A record by its name as typed, with its study, and the candidate that it marks as chosen."""

    name: str
    reopened: Reopened
    candidate: Mapping[str, Any]


def take_up(paths: Iterable[str], tell: Tell = lambda _: None) -> list[Taken]:
    """The records at `paths`, each file once, with `tell` called as each is read.

    Raises InputError with the problems of all of them; a record that marks no candidate is one.
    """
    shelf = Shelf()
    places: dict[str, str] = {}
    for path in paths:
        places.setdefault(os.path.realpath(path), path)
    found: list[Taken] = []
    problems: dict[Problem, None] = {}
    for path in places.values():
        tell(path)
        try:
            reopened = reopen(path, load=shelf.study)
            found.append(Taken(path, reopened, _chosen(path, reopened)))
        except ReopenError as error:
            problems |= dict.fromkeys(_from_here(error))
        except InputError as error:
            problems |= dict.fromkeys(error.problems)
    if problems:
        raise InputError(problems)
    return found


def _chosen(path: str, reopened: Reopened) -> Mapping[str, Any]:
    data = reopened.record.data
    for row in reopened.record.candidates:
        if row["rank"] == data["chosen"]:
            return row
    rule = "the record marks no candidate as chosen, so it uses no part"
    raise InputError([Problem(path, None, "chosen", None, rule, "leave it out, or choose one with --choose")])


def _from_here(error: ReopenError) -> Iterator[Problem]:
    """The problems of a request and its catalogs, each file named as seen from here."""
    for problem in error.problems:
        own = problem.file == str(error.request) or Path(problem.file).is_absolute()
        yield problem if own else replace(problem, file=str(error.request.parent / problem.file))


@dataclass(slots=True)
class Shelf:
    """Requests and catalogs that have been read, by their places."""

    studies: dict[str, Study] = field(default_factory=dict)
    catalogs: dict[Any, tuple[int, Catalogs]] = field(default_factory=dict)

    def study(self, place: Path) -> Study:
        """The study of the request at `place`."""
        key = os.path.realpath(place)
        if key not in self.studies:
            self.studies[key] = studies.load(place, read=self.read)
        return replace(self.studies[key], request=replace(self.studies[key].request, path=place))

    def read(self, files: Files, options: ReadOptions) -> Catalogs:
        """The catalogs of `files`. Where rows were left out, that may be for the build quantity's sake."""
        places = tuple(
            (role, name, os.path.realpath(options.folder / name))
            for role, names in files.items()
            for name in names
        )
        key = (places, tuple(sorted(options.assume.items())), options.currency)
        quantity, catalogs = self.catalogs.get(key, (options.quantity, None))
        if catalogs is None or (catalogs.left_out and quantity != options.quantity):
            catalogs = read_catalogs(files, options)
            self.catalogs[key] = (options.quantity, catalogs)
        return catalogs
