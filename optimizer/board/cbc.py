"""CBC, which PuLP brings: a program of its own, fed by a model file, read by its log and solution file."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import tempfile
import time
from pathlib import Path
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

NUMBER = r"([-+]?\d[\d.]*(?:[eE][-+]?\d+)?)"
NODES = re.compile(rf"After \d+ nodes, \d+ on tree, {NUMBER} best solution, best possible {NUMBER}")
LOWER = re.compile(rf"^Lower bound:\s+{NUMBER}", re.MULTILINE)
ROOT = re.compile(rf"Continuous objective value is {NUMBER}")
NONE_YET = 1e49
"""CBC's 1e+50 for a plan that it does not have."""


def program() -> str:
    """The path of the CBC that PuLP brings."""
    from pulp.apis import PULP_CBC_CMD

    return str(PULP_CBC_CMD.pulp_cbc_path)


def available() -> bool:
    """Whether the program is there and may be run."""
    try:
        return os.access(program(), os.X_OK)
    except ImportError:
        return False


def run(task: Task) -> Run:
    """Solve by CBC, within the task's seconds and a little grace."""
    began = time.monotonic()
    with tempfile.TemporaryDirectory(prefix="luxsift-") as folder:
        try:
            return _Running(task, Path(folder), began).run()
        except OSError as problem:
            return Run(FAILED, fault=f"CBC could not be run: {problem.strerror or problem}")


class _Running:
    """One process of CBC with its files."""

    def __init__(self, task: Task, folder: Path, began: float) -> None:
        self.task, self.began = task, began
        self.model, self.solution = folder / "board.mps", folder / "board.sol"
        self.log, self.start = folder / "board.log", folder / "board.mst"
        self.variables, names, *_ = task.problem.writeMPS(str(self.model), rename=1)
        self.names = {short: name for name, short in names.items()}
        self.position = 0

    def run(self) -> Run:
        """Start the program, follow it, and read what it left."""
        outcome = ""
        with self.log.open("wb") as log:
            process = subprocess.Popen(
                self._command(),
                stdin=subprocess.DEVNULL,
                stdout=log,
                stderr=subprocess.STDOUT,
                start_new_session=True,
            )
            try:
                outcome = self._followed(process)
            except KeyboardInterrupt:
                outcome = INTERRUPTED
                self._asked_to_stop(process)
            finally:
                if process.poll() is None:
                    process.kill()
                process.wait()
        return self._read(outcome, process.returncode)

    def _command(self) -> list[str]:
        command = [program(), str(self.model), "-sec", f"{max(0.1, self.task.seconds):.2f}"]
        command += ["-timeMode", "elapsed", "-allow", f"{GAP}", "-ratio", "0"]
        if self.task.below is not None:
            command += ["-cutoff", f"{self.task.below}"]
        if self.task.start is not None:
            self._write_start(self.task.start)
            command += ["-mips", str(self.start)]
        return [*command, "-solve", "-printingOptions", "all", "-solution", str(self.solution)]

    def _write_start(self, values: Any) -> None:
        lines = ["Stopped on time - objective value 0"]
        for place, (short, name) in enumerate(self.names.items()):
            lines.append(f"{place} {short} {values.get(name, 0.0):.15g} 0")
        self.start.write_text("\n".join(lines) + "\n", encoding="utf-8")

    def _followed(self, process: subprocess.Popen[bytes]) -> str:
        until = self.began + self.task.seconds + GRACE
        while process.poll() is None:
            time.sleep(POLL)
            if time.monotonic() > until:
                return STOPPED
            self._tell()
        return ""

    def _asked_to_stop(self, process: subprocess.Popen[bytes]) -> None:
        """CBC ends a search on an interrupt and writes its best plan, if it gets round to it."""
        process.send_signal(signal.SIGINT)
        try:
            process.wait(timeout=GRACE / 2)
        except subprocess.TimeoutExpired:
            process.kill()

    def _tell(self) -> None:
        if self.task.told is None:
            return
        with self.log.open("rb") as log:
            log.seek(self.position)
            new = log.read()
        cut = new.rfind(b"\n") + 1
        self.position += cut
        found = NODES.findall(new[:cut].decode("ascii", "replace"))
        if found:
            best, bound = map(float, found[-1])
            self.task.told(best if best < NONE_YET else None, bound)

    def _read(self, outcome: str, code: int) -> Run:
        log = self.log.read_text("ascii", "replace")
        seconds = time.monotonic() - self.began
        first, values = self._solution()
        if first.startswith(("Infeasible", "Integer infeasible")):
            return Run(INFEASIBLE, seconds=seconds)
        if first.startswith("Optimal"):
            return Run(OPTIMAL, values, _last_bound(log), seconds=seconds)
        if outcome == INTERRUPTED:
            return Run(INTERRUPTED, values, _last_bound(log), seconds=seconds)
        if first.startswith("Stopped") or outcome == STOPPED:
            return Run(STOPPED, values, _last_bound(log), seconds=seconds)
        how = f"was ended by signal {-code}" if code < 0 else f"ended with status {code}"
        return Run(FAILED, None, _last_bound(log), f"CBC {how} before it had an answer", seconds)

    def _solution(self) -> tuple[str, dict[str, float] | None]:
        """The first line of the solution file, and the values by variable name where it has a plan."""
        if not self.solution.exists():
            return "", None
        first, *rest = self.solution.read_text("ascii", "replace").splitlines() or [""]
        if "no integer solution" in first or not rest:
            return first, None
        values = dict.fromkeys(self.names.values(), 0.0)
        for line in rest:
            cells = line.replace("**", " ").split()
            if len(cells) >= 3 and cells[1] in self.names:
                values[self.names[cells[1]]] = float(cells[2])
        return first, values


def _last_bound(log: str) -> float | None:
    """The best bound in a log: the final one, else the last in the tree, else that of the root."""
    final = LOWER.findall(log)
    if final:
        return float(final[-1])
    nodes = NODES.findall(log)
    if nodes:
        return float(nodes[-1][1])
    root = ROOT.findall(log)
    return float(root[-1]) if root else None
