"""Files that a command is to write, checked before work is spent on them."""

from __future__ import annotations

import os
from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING

from optimizer.cli.options.shared import COMMAND_LINE, STANDARD_OUTPUT
from optimizer.errors import OutputError, Problem

if TYPE_CHECKING:
    from optimizer.request.types import Request

Output = tuple[str, str | None]
"""An option and the path that it was given; None where it was not."""


def output_problems(outputs: Iterable[Output], inputs: Iterable[Path]) -> list[Problem]:
    """Why a file that is asked for could not be written, or must not be: `inputs` are read by this run."""
    from optimizer.record.files import check_writable

    taken = {os.path.realpath(path) for path in inputs}
    piped = None
    problems = []
    for name, path in outputs:
        if path is None:
            continue
        if path == STANDARD_OUTPUT:
            if piped is not None:
                rule, remedy = f"standard output is taken by {piped} already", "give one of them a file name"
                problems.append(Problem(COMMAND_LINE, None, name, path, rule, remedy))
            piped = name
            continue
        if os.path.realpath(path) in taken:
            rule = "that file is input of this run, or already written by another option"
            problems.append(Problem(COMMAND_LINE, None, name, path, rule, "give another name"))
        taken.add(os.path.realpath(path))
        try:
            check_writable(path)
        except OutputError as error:
            problems.append(Problem(COMMAND_LINE, None, name, None, str(error)))
    return problems


def input_files(request: Request) -> list[Path]:
    """The catalogs that `request` names, as seen from here."""
    return [request.path.parent / file for files in request.catalogs.values() for file in files]
