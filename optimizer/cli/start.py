"""`luxsift start`: a commented request and small catalogs to begin from."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Iterator, Mapping
from importlib.resources import files
from pathlib import Path
from shlex import quote

from optimizer.cli.options.shared import COMMAND_LINE
from optimizer.cli.output import write
from optimizer.errors import InputError, OutputError, Problem, clean, reason

STARTER = ("request.toml", "source.toml", "opamps.csv", "photodiodes.csv", "resistors.csv", "capacitors.csv")


def start(parsed: argparse.Namespace) -> int:
    """Write the starter files into `parsed.folder`; raises InputError where any of them is there already."""
    folder = Path(parsed.folder)
    conflicts = _conflicts(folder)
    if conflicts:
        raise InputError(conflicts)
    source = files("optimizer").joinpath("starter")
    _write_all(folder, {name: source.joinpath(name).read_bytes() for name in STARTER})
    write(sys.stdout, "".join(f"{line}\n" for line in _said(folder)))
    return 0


def _said(folder: Path) -> Iterator[str]:
    yield f"Wrote {len(STARTER)} files; all parts and makers in them are invented:"
    yield from (f"  {clean(folder / name)}" for name in STARTER)
    yield "Next, type:"
    yield f"  luxsift shortlist {quote(str(folder / STARTER[0]))}"


def _conflicts(folder: Path) -> list[Problem]:
    rule, remedy = "there is such a file already; nothing was written", "name another folder"
    try:
        if os.path.lexists(folder) and not folder.is_dir():
            return [Problem(COMMAND_LINE, None, "FOLDER", str(folder), "expected a folder, this is none")]
        taken = [folder / name for name in STARTER if os.path.lexists(folder / name)]
    except (OSError, ValueError) as error:
        return [Problem(COMMAND_LINE, None, "FOLDER", str(folder), f"cannot be used: {error}")]
    return [Problem(str(path), None, None, None, rule, remedy) for path in taken]


def _write_all(folder: Path, contents: Mapping[str, bytes]) -> None:
    """Write every file or none; raises OutputError."""
    written: list[Path] = []
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, content in contents.items():
            with (folder / name).open("xb") as file:
                written.append(folder / name)
                file.write(content)
    except BaseException as error:  # Ctrl-C too
        for path in written:
            path.unlink(missing_ok=True)
        if not isinstance(error, OSError | ValueError):
            raise
        raise OutputError(
            f"{folder}: cannot write the starter files: {reason(error)}; nothing was written"
        ) from error
