"""A choice weighed against all else: what meets the request, what its targets cost, why not a certain part.

Entry point: `weigh`; `unknown_parts` says which names cannot be compared, before any work.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

import numpy as np

from optimizer.catalog.parts import Catalogs
from optimizer.errors import InputError, Problem
from optimizer.record.whynot import as_record
from optimizer.review.dossier import Dossier
from optimizer.review.exposure import exposed
from optimizer.review.findings import Cloud, Compared
from optimizer.review.reopen import Reopened
from optimizer.search.hunt import Rules
from optimizer.search.inquiry.lookup import lookup
from optimizer.search.inquiry.whynot import whynot
from optimizer.search.query import ask_pairs
from optimizer.search.weigh.ground import lay_out
from optimizer.search.weigh.tradeoff import tradeoff
from optimizer.study import Study

MOST = 200
"""Pairs of a cloud; more would neither be told apart nor be found soon."""


Tell = Callable[[str], None]
SUPPLY, CLOUD, PRICES = "supply of each part", "cost against margin", "what each target costs"


def steps(compare: Sequence[str]) -> tuple[str, ...]:
    """What `weigh` does, in order."""
    return (SUPPLY, CLOUD, PRICES, *compare)


def weigh(dossier: Dossier, compare: Sequence[str] = (), tell: Tell = lambda _step: None) -> Dossier:
    """`dossier` with everything that takes a search, and with the parts to `compare`.

    `tell` is called with each of `steps(compare)` as it begins.
    """
    study = dossier.study
    tell(SUPPLY)
    exposure = exposed(Reopened(dossier.record, study, dossier.changed), dossier.candidate)
    tell(CLOUD)
    everything = cloud(study)
    tell(PRICES)
    prices = tradeoff(study.request, study.catalogs)
    others = []
    for name in compare:
        tell(name)
        others.append(compared(study, name))
    found = replace(
        dossier.findings, cloud=everything, prices=prices, exposure=exposure, compared=tuple(others)
    )
    return replace(dossier, findings=found)


def cloud(study: Study, most: int = MOST) -> Cloud | None:
    """Cost and margin of the pairs that meet the request, the `most` cheapest of them; None without any."""
    _space, ground = lay_out(study.request, study.catalogs)
    if ground is None:
        return None
    found = ask_pairs(ground.asked, ground.pairs, Rules("cost", most, 0.0))
    if not found.cost.size:
        return None
    diodes, opamps = study.catalogs.photodiodes.text["part"], study.catalogs.opamps.text["part"]
    choice = found.choice
    return Cloud(
        names=tuple(f"{diodes[d]} with {opamps[o]}" for d, o in zip(choice.diode, choice.opamp, strict=True)),
        cost=found.cost,
        margin=np.asarray(found.margin_columns.min(axis=1)),
        complete=found.cost.size < most or ground.pairs.size <= most,
    )


def compared(study: Study, name: str) -> Compared:
    """What was found out about the part called `name`; raises InputError where there is none."""
    finding = whynot(study.request, study.catalogs, [name])
    return Compared(name, finding, as_record(study, finding).data)


def unknown_parts(catalogs: Catalogs, names: Sequence[str]) -> Iterator[Problem]:
    """Why some of `names`, given by --compare, stand for no part or for several."""
    for name in names:
        try:
            lookup(catalogs, [name])
        except InputError as error:
            yield from (replace(problem, column="--compare") for problem in error.problems)
