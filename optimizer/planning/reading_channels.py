"""The requests that the channels of a board name, each file read once, and what is wrong with them."""

from __future__ import annotations

import os
from dataclasses import dataclass, field, replace
from pathlib import Path

from optimizer.catalog.shelf import CatalogShelf
from optimizer.errors import InputError, Problem
from optimizer.input_file import read_input
from optimizer.request.draft import Draft, drafted, is_board, other_requests
from optimizer.request.values import CATALOG_CURRENCY
from optimizer.study import Study, complete, from_here
from optimizer.toml.document import Document, read_document
from optimizer.toml.reading import Reading

_REQUEST = ("request",)


def name_of(row: Reading) -> str | None:
    """The name of a channel, else that of its request's file; None where both are unknown."""
    if row.is_wrong(("name",)):
        return None
    name, request = row.value(("name",)), row.value(_REQUEST)
    return name or (Path(request).stem or None if request else None)


class _Unfit(Exception):
    """A file that is no request of a channel, with why and what to do about it."""

    def __init__(self, rule: str, remedy: str) -> None:
        self.rule, self.remedy = rule, remedy
        super().__init__(rule)


@dataclass(slots=True)
class Requests:
    """What the channels of the board file at `board` ask for, by the places of their requests' files.

    `quantity` boards are built; each op-amp must be had from `sources` makers at least.
    """

    board: Path
    quantity: int
    sources: int
    catalogs: CatalogShelf = field(default_factory=CatalogShelf)
    studies: dict[str, Study] = field(default_factory=dict)
    unfit: dict[str, _Unfit] = field(default_factory=dict)
    currencies: dict[str, tuple[str, Reading]] = field(default_factory=dict)
    kept: dict[Problem, Problem] = field(default_factory=dict)
    seen: set[str] = field(default_factory=set)

    @property
    def problems(self) -> list[Problem]:
        """The problems of the requests and of their catalogs, each file named as seen from here."""
        return list(self.kept.values())

    @property
    def currency(self) -> str | None:
        """The currency of the first channel that has one."""
        return next((code for code, _ in self.currencies.values()), None)

    def study(self, row: Reading) -> Study:
        """The study of a channel without problems."""
        return self.studies[self._key(row)]

    def take(self, row: Reading) -> None:
        """Read the request of a channel where it is not read yet; a file unfit for one is told at the row."""
        if _REQUEST not in row.values:
            return
        key = self._key(row)
        if key not in self.seen:
            self.seen.add(key)
            self._read(row, key)
        if key in self.unfit:
            row.refuse(_REQUEST, row.cells[_REQUEST], self.unfit[key].rule, self.unfit[key].remedy)

    def check_currencies(self) -> None:
        """Refuse every request whose prices are in another currency than those of the first that has one."""
        for code, row in self.currencies.values():
            first, anchor = next(iter(self.currencies.values()))
            if code != first:
                rule = (
                    f"two currencies on one board: its prices are in {code}, "
                    f"those of {anchor.cells[_REQUEST]} in {first}"
                )
                remedy = "bring all prices and limits into one currency"
                row.refuse(_REQUEST, row.cells[_REQUEST], rule, remedy)

    def _key(self, row: Reading) -> str:
        return os.path.realpath(self._place(row))

    def _place(self, row: Reading) -> Path:
        return self.board.parent / str(row.value(_REQUEST))

    def _read(self, row: Reading, key: str) -> None:
        place = self._place(row)
        try:
            draft = self._in_force(drafted(self._document(place), place))
            if draft.request.currency != CATALOG_CURRENCY:
                self.currencies[key] = (draft.request.currency, row)
            study = complete(draft, read=self.catalogs.read)
        except _Unfit as unfit:
            self.unfit[key] = unfit
        except InputError as error:
            self._keep(error, place)
        else:
            self.studies[key] = study
            if study.catalogs.currency is not None:
                self.currencies[key] = (study.catalogs.currency, row)

    def _document(self, place: Path) -> Document:
        """The tables of a request's file; raises _Unfit where there is none, or it is a board file."""
        if os.path.realpath(place) == os.path.realpath(self.board):
            raise _Unfit("this is the board file itself", "name the request of the channel's receiver")
        try:
            source = read_input(place, str(place), expected="a request file", hint=self._others)
        except InputError as error:
            raise _Unfit(error.problems[0].rule, error.problems[0].remedy) from None
        document = read_document(source)
        if is_board(document.tables):
            rule = "this is a board file, and a channel of a board is no board"
            raise _Unfit(rule, "name the request of one receiver; its channels can stand in this file")
        return document

    def _others(self, folder: Path, wanted: str) -> str:
        return other_requests(folder, wanted, besides=self.board.name)

    def _in_force(self, draft: Draft) -> Draft:
        """The draft with what the board says for all of its channels."""
        request = draft.request
        sources = max(request.resilience.opamp_sources, self.sources)
        resilience = replace(request.resilience, opamp_sources=sources)
        return replace(draft, request=replace(request, quantity=self.quantity, resilience=resilience))

    def _keep(self, error: InputError, place: Path) -> None:
        """Keep problems once, however many requests name the catalog that they are in."""
        for problem in from_here(error.problems, place):
            same = replace(problem, file=os.path.realpath(problem.file))
            self.kept.setdefault(same, problem)
