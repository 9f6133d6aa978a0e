"""Reads README.md into its fenced blocks and acts on them in order, as a reader would, in a new folder.

A block is marked by the word after its fence: `sh` (the two commands of the top, which `.ci/run` runs),
`console` (lines with `$ ` are commands, the lines after each are what it prints), `toml` and `csv` (a
file to save under the name that follows), `python` (a program) and `text` (what that program prints).

`python -m tests.readme --write` writes the outputs in README.md anew.
"""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path

from tests.masking import WIDTH, masked

ROOT = Path(__file__).parents[1]
README = ROOT / "README.md"
FENCE = re.compile(r"^```(\w+)(?: (\S+))?\n(.*?)^```$", re.MULTILINE | re.DOTALL)
PROMPT = "$ "
END = "end of one command"


@dataclass(frozen=True)
class Block:
    """One fenced block: its first word, the file name that may follow, its text and where that stands."""

    kind: str
    file: str
    text: str
    span: tuple[int, int]

    @property
    def commands(self) -> list[str]:
        """The commands of a console block."""
        return [line.removeprefix(PROMPT) for line in self.text.splitlines() if line.startswith(PROMPT)]


def text() -> str:
    return README.read_text("utf-8")


def blocks() -> list[Block]:
    return [Block(found[1], found[2] or "", found[3], found.span(3)) for found in FENCE.finditer(text())]


def acted_out(folder: Path) -> Iterator[tuple[Block, Block]]:
    """Each block and what it should be: itself, with the outputs that the program gives in `folder`."""
    environment = prepare(folder)
    printed = ""
    for block in blocks():
        shown = block.text
        if block.file:
            (folder / block.file).parent.mkdir(exist_ok=True)
            (folder / block.file).write_text(block.text, "utf-8")
        elif block.kind == "console":
            shown = session(block.commands, folder, environment)
        elif block.kind == "python":
            printed = _run([sys.executable, "-c", block.text], folder, environment)
        elif block.kind == "text":
            shown = printed
        yield block, replace(block, text=shown)


def prepare(folder: Path) -> dict[str, str]:
    """Lay out what a checkout holds, with a `luxsift` that runs this checkout; the environment to use."""
    for name in ("examples", "catalogs"):
        shutil.copytree(ROOT / name, folder / name)
    programs = folder / "programs"
    programs.mkdir()
    luxsift = programs / "luxsift"
    luxsift.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m optimizer "$@"\n', "utf-8")
    luxsift.chmod(0o755)
    return {
        **os.environ,
        "COLUMNS": str(WIDTH),
        "PATH": f"{programs}{os.pathsep}{os.environ['PATH']}",
        "PYTHONPATH": str(ROOT),
        "PYTHONIOENCODING": "utf-8",
    }


def session(commands: list[str], folder: Path, environment: dict[str, str]) -> str:
    """The commands of a block in one shell, each with what it prints on either stream."""
    script = "exec 2>&1\n" + "".join(
        f"{command}\nstatus=$?; echo '{END}'; (exit $status)\n" for command in commands
    )
    outputs = _run(["bash", "-c", script], folder, environment).split(f"{END}\n")[:-1]
    pairs = zip(commands, outputs, strict=True)
    return "".join(f"{PROMPT}{command}\n{masked(output)}" for command, output in pairs)


def _run(words: list[str], folder: Path, environment: dict[str, str]) -> str:
    done = subprocess.run(
        words, cwd=folder, env=environment, stdout=subprocess.PIPE, encoding="utf-8", check=False
    )
    return done.stdout


def write() -> None:
    """Put the outputs that the program gives now into README.md."""
    old, new, at = text(), "", 0
    with tempfile.TemporaryDirectory() as folder:
        for block, should_be in acted_out(Path(folder)):
            new += old[at : block.span[0]] + should_be.text
            at = block.span[1]
    README.write_text(new + old[at:], "utf-8")


if __name__ == "__main__":
    if sys.argv[1:] != ["--write"]:
        sys.exit("usage: python -m tests.readme --write")
    write()
