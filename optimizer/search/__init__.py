"""The exact search: the declared space, proved bounds, the shortlist."""

from optimizer.search.result import Candidate, Outcome, Progress, Reference, TargetValue
from optimizer.search.shortlist import Interrupted, shortlist

__all__ = ["Candidate", "Interrupted", "Outcome", "Progress", "Reference", "TargetValue", "shortlist"]
