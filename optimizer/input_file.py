"""One input file as it lies on the disk, or what to do where it cannot be had."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from optimizer.errors import InputError, Problem, reason

Hint = Callable[[Path, str], str]


@dataclass(frozen=True, slots=True)
class InputFile:
    """The bytes of one input file with their SHA-256; `file` is its name as the user wrote it."""

    file: str
    data: bytes
    sha256: str


def read_input(path: Path, file: str, *, expected: str, hint: Hint) -> InputFile:
    """Read the file at `path`, which the user wrote as `file`.

    `expected` says what kind of file is wanted; `hint` gives the remedy out of a folder and the name
    looked for in it ('' where the folder itself was named). Raises InputError.
    """
    try:
        data = path.read_bytes()
    except FileNotFoundError:
        rule, remedy = "there is no such file", hint(path.parent, path.name)
    except IsADirectoryError:
        rule, remedy = f"this is a folder, expected {expected}", hint(path, "")
    except (OSError, ValueError) as error:
        rule, remedy = f"the file cannot be read: {reason(error)}", ""
    else:
        return InputFile(file, data, hashlib.sha256(data).hexdigest())
    raise InputError([Problem(file, None, None, None, rule, remedy)])
