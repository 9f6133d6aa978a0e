"""HiGHS through PuLP, in a process of its own: a crash ends that process only, and its banner stays off."""

from __future__ import annotations

import contextlib
import multiprocessing
import os
import signal
import time
from collections.abc import Mapping
from dataclasses import replace
from multiprocessing.connection import Connection
from typing import Any

from optimizer.board.runs import (
    FAILED,
    GAP,
    GRACE,
    INFEASIBLE,
    INTERRUPTED,
    OPTIMAL,
    POLL,
    STOPPED,
    Run,
    Task,
)

TELL_EVERY = 0.2
UNBOUNDED = 1e20
SEARCHES = ("rins", "rens", "root_reduced_cost", "feasibility_jump")
"""Searches for plans that HiGHS does even without effort: of no use where a good plan is known."""
AGREED = 0.5
"""Cents by which the cost of a plan may differ from what HiGHS states: whole cents never do by as much."""


def available() -> bool:
    """Whether the optional extra `highs` is installed."""
    try:
        import highspy  # noqa: F401
        import pulp  # noqa: F401
    except ImportError:
        return False
    return True


def run(task: Task) -> Run:
    """Solve by HiGHS, within the task's seconds and a little grace."""
    began = time.monotonic()
    method = "fork" if "fork" in multiprocessing.get_all_start_methods() else None
    context: Any = multiprocessing.get_context(method)
    receiver, sender = context.Pipe(duplex=False)
    process = context.Process(target=_work, args=(sender, replace(task, told=None)), daemon=True)
    process.start()
    sender.close()
    followed = _Followed(task, receiver)
    try:
        outcome = followed.until_done(process, began + task.seconds + GRACE)
    except KeyboardInterrupt:
        outcome = INTERRUPTED
    finally:
        if process.is_alive():
            process.kill()
        process.join()
    return followed.run(outcome, process.exitcode, time.monotonic() - began)


class _Followed:
    """What came through the pipe so far."""

    def __init__(self, task: Task, receiver: Connection) -> None:
        self.task, self.receiver = task, receiver
        self.values: Mapping[str, float] | None = None
        self.best: float | None = None
        self.bound: float | None = None
        self.done: str = ""
        self.fault: str = ""

    def until_done(self, process: Any, until: float) -> str:
        """Read until the process has said its last, died, or is far over its time."""
        while not self.done and time.monotonic() < until:
            try:
                if self.receiver.poll(POLL):
                    self._take(*self.receiver.recv())
                elif not process.is_alive():
                    break
            except (EOFError, OSError):
                break
        if self.done:
            return self.done
        return STOPPED if time.monotonic() >= until else FAILED

    def _take(self, kind: str, content: Any) -> None:
        if kind == "values":
            self.values = content
        elif kind == "bounds":
            self.best, self.bound = content
            if self.task.told is not None:
                self.task.told(self.best, self.bound)
        elif kind == "fault":
            self.fault, self.done = content, FAILED
        else:
            self.done, self.bound = content

    def run(self, outcome: str, code: int | None, seconds: float) -> Run:
        """The answer, with the best values that came even where the process died."""
        fault = self.fault
        if outcome == FAILED and not fault:
            how = (
                f"was ended by signal {-code}"
                if code is not None and code < 0
                else f"ended with status {code}"
            )
            fault = f"HiGHS {how} before it had an answer"
        values = None if outcome == INFEASIBLE else self.values
        return Run(outcome, values, self.bound, fault, seconds)


def _work(sender: Connection, task: Task) -> None:
    """What the process does: solve, and send improvements, bounds and how it ended."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # the parent alone acts on Ctrl-C
    quiet = os.open(os.devnull, os.O_WRONLY)
    os.dup2(quiet, 1)
    try:
        outcome = _solved(sender, task)
        sender.send(("done", outcome))
    except Exception as fault:  # whatever it is, the parent must hear of it
        sender.send(("fault", f"HiGHS failed: {type(fault).__name__}: {fault}"))
    finally:
        sender.close()


def _solved(sender: Connection, task: Task) -> tuple[str, float | None]:
    """Solve once, or twice where the values that came back from a start are not the best ones.

    Version 1.16 may give the values of the start back although it has found, and states, a lower cost.
    """
    import pulp

    began = time.monotonic()
    outcome, bound, values = _once(sender, task)
    if (
        values is None
        and outcome in {OPTIMAL, STOPPED}
        and task.problem.sol_status != pulp.LpSolutionNoSolutionFound
    ):
        left = task.seconds - (time.monotonic() - began)
        outcome, bound, values = _once(sender, replace(task, seconds=left, start=None))
    if values is not None:
        sender.send(("values", values))
    elif outcome == OPTIMAL:
        raise ValueError("no values with the cost that it states")
    return outcome, bound


def _once(sender: Connection, task: Task) -> tuple[str, float | None, Mapping[str, float] | None]:
    """One solve: how it ended, the bound, and the values that cost what HiGHS says its best plan costs."""
    import pulp

    problem = task.problem
    teller = _Teller(sender, [variable.name for variable in problem.variables()])
    kinds = pulp.HiGHS.hscb.HighsCallbackType
    solver = _started(task)(
        msg=False,
        gapRel=0.0,
        gapAbs=GAP,
        threads=1,
        timeLimit=max(0.1, task.seconds),
        callbackTuple=(teller.heard, None),
        callbacksToActivate=[kinds.kCallbackMipImprovingSolution, kinds.kCallbackMipInterrupt],
    )
    problem.solve(solver)
    info = problem.solverModel.getInfo()
    status = problem.solverModel.modelStatusToString(problem.solverModel.getModelStatus())
    bound = float(info.mip_dual_bound) if abs(info.mip_dual_bound) < UNBOUNDED else None
    if status == "Infeasible":
        return INFEASIBLE, None, None
    final = {variable.name: variable.varValue for variable in problem.variables()}
    values = _worth(problem, float(info.objective_function_value), [final, teller.values])
    return OPTIMAL if status == "Optimal" else STOPPED, bound, values


def _worth(problem: Any, cost: float, answers: list[Mapping[str, float]]) -> Mapping[str, float] | None:
    """The answer that costs what HiGHS states, None where there is none."""
    for values in answers:
        known = values and None not in values.values()
        if known and abs(sum(c * values[v.name] for v, c in problem.objective.items()) - cost) < AGREED:
            return values
    return None


def _started(task: Task) -> Any:
    """PuLP's interface to HiGHS, which begins from what is known: the values of a plan, or its cost."""
    import pulp

    class Started(pulp.HiGHS):  # type: ignore[misc]
        def callSolver(self, lp: Any) -> None:
            if task.start is not None:
                values = [task.start.get(variable.name, 0.0) for variable in lp.variables()]
                lp.solverModel.setSolution(len(values), list(range(len(values))), values)
            if task.below is not None:
                lp.solverModel.setOptionValue("objective_bound", task.below)
            if task.start is not None or task.below is not None:
                lp.solverModel.setOptionValue("mip_heuristic_effort", 0.0)
                for search in SEARCHES:
                    lp.solverModel.setOptionValue(f"mip_heuristic_run_{search}", False)
            lp.solverModel.run()

    return Started


class _Teller:
    """Hears HiGHS and passes on improvements and bounds, not too often."""

    def __init__(self, sender: Connection, names: list[str]) -> None:
        self.sender, self.names = sender, names
        self.last = 0.0
        self.values: dict[str, float] = {}

    def heard(self, kind: Any, _message: str, out: Any, _in: Any, _data: Any) -> None:
        """One call of HiGHS: its best cost and bound, and the values where they are new."""
        with contextlib.suppress(OSError):
            improved = "ImprovingSolution" in str(kind)
            if improved:
                self.values = dict(zip(self.names, map(float, out.mip_solution), strict=True))
                self.sender.send(("values", self.values))
            now = time.monotonic()
            if improved or now - self.last > TELL_EVERY:
                self.last = now
                bounds = [float(out.mip_primal_bound), float(out.mip_dual_bound)]
                self.sender.send(("bounds", tuple(b if abs(b) < UNBOUNDED else None for b in bounds)))
