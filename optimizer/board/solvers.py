"""Mixed-integer solvers behind one call, each in a process of its own: what they say, and no more than that.

A solver that is absent, dies, is killed or runs out of time is a `Run` that says so. Bounds are the
solver's own. PuLP takes a plan that the clock cut short for an optimum; so the solvers' own words are
read: CBC's from its log and solution file, HiGHS's from the status and bounds of its model object.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.board import cbc, highs
from optimizer.board.runs import Run, Task

NAMES = ("highs", "cbc")
"""The better one first."""

_REMEDIES = {
    "highs": "HiGHS comes with the extra 'highs'; CBC needs none",
    "cbc": "PuLP brings CBC for most machines; HiGHS comes with the extra 'highs'",
}

_MODULES: Mapping[str, Any] = {"cbc": cbc, "highs": highs}


def available(name: str) -> bool:
    """Whether the solver can be started here."""
    return bool(_MODULES[name].available())


def absence(name: str) -> str:
    """What to say, and to do, where the solver `name` cannot be started here."""
    remedy = _REMEDIES.get(name, _REMEDIES["cbc"])
    return f"the solver {name} is not available here ({remedy})"


def resolved(name: str) -> str | None:
    """The solver meant by `name`: itself, or for `auto` the better one there is; None where it is absent."""
    if name == "auto":
        return next((known for known in NAMES if available(known)), None)
    return name if available(name) else None


def run(name: str, task: Task) -> Run:
    """Let the solver `name` work on a task; what goes wrong is in the answer."""
    answer = _MODULES[name].run(task)
    assert isinstance(answer, Run)
    return answer
