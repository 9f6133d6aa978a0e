"""What was found out about a part in the form of a record, for all that speaks of records."""

from __future__ import annotations

from typing import TYPE_CHECKING

from optimizer.record.build import build
from optimizer.record.model import Record

if TYPE_CHECKING:
    from optimizer.search.inquiry.finding import Finding
    from optimizer.study import Study


def as_record(study: Study, finding: Finding) -> Record:
    """A record whose candidate is the best setting, where one meets, and whose near miss is the setting

    of largest margin, whether it misses or not.
    """
    from optimizer.search.result import Outcome

    outcome = Outcome(
        candidates=() if finding.best is None else (finding.best,),
        near_misses=() if finding.largest is None else (finding.largest,),
        combinations=0,
        pairs=finding.pairs,
        evaluated=0,
        seconds=0.0,
        proven=True,
        impossible=finding.impossible,
    )
    return build(study, outcome)
