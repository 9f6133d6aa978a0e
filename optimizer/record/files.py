"""Files written whole or not at all, and records read back."""

from __future__ import annotations

import json
import os
import secrets
import stat
from collections.abc import Mapping
from pathlib import Path
from typing import Any, NoReturn

from optimizer.errors import InputError, OutputError, Problem, reason
from optimizer.record.board_check import board_problems, is_board
from optimizer.record.check import document_problems
from optimizer.record.model import BoardRecord, Record


def to_json(record: Record | BoardRecord) -> str:
    """The record as JSON text, indented, ending in a newline."""
    return json.dumps(record.data, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def write(record: Record | BoardRecord, path: str | Path) -> None:
    """Write the record as JSON; raises OutputError and leaves the old file as it was on failure."""
    write_text(path, to_json(record))


def write_text(path: str | Path, text: str) -> None:
    """Replace `path` by `text` in UTF-8, whole or not at all.

    Raises OutputError, naming the file and the reason; what was there stays as it was.
    """
    check_writable(path)
    target = Path(os.path.realpath(path))
    temporary = target.with_name(f".luxsift-{secrets.token_hex(6)}.tmp")
    try:
        _fill(temporary, text)
        if target.exists():
            temporary.chmod(stat.S_IMODE(target.stat().st_mode))
        os.replace(temporary, target)
    except OSError as error:
        raise OutputError(f"{path}: cannot be written: {reason(error)}; nothing was changed") from error
    finally:
        temporary.unlink(missing_ok=True)


def check_writable(path: str | Path) -> None:
    """Raise OutputError where `path` plainly cannot be written, before work is spent on it."""
    target = Path(os.path.realpath(path))
    try:
        if not target.parent.is_dir():
            raise OutputError(f"{path}: cannot be written: there is no folder {str(target.parent)!r}")
        if target.is_dir():
            raise OutputError(f"{path}: cannot be written: that is a folder; give a file name")
        if target.exists() and not target.is_file():
            raise OutputError(f"{path}: cannot be written: that is no ordinary file")
        if target.exists() and not os.access(target, os.W_OK):
            raise OutputError(f"{path}: cannot be written: the file is read-only")
    except (OSError, ValueError) as error:
        raise OutputError(f"{path}: cannot be written: {reason(error)}") from error


def read(path: str | Path) -> Record:
    """Read a record that `write` wrote; keys that are not known are kept and ignored.

    Raises InputError where the file is missing, is not JSON, or is no record of this format.
    """
    return _shortlist(path, _parse(path, _text(path)))


def read_any(path: str | Path) -> Record | BoardRecord:
    """Read a record of either kind, of a shortlist or of a board; see `read`."""
    data = _parse(path, _text(path))
    return _board(path, data) if is_board(data) else _shortlist(path, data)


def says_board(path: str | Path) -> bool:
    """Whether the file at `path` says that it is a board's record, be it in order or not."""
    try:
        return is_board(_parse(path, _text(path)))
    except InputError:
        return False


def read_board(path: str | Path) -> BoardRecord:
    """Read the record of a board; see `read`."""
    return _board(path, _parse(path, _text(path)))


def _shortlist(path: str | Path, data: Any) -> Record:
    problems = document_problems(str(path), data)
    if problems:
        raise InputError(problems)
    assert isinstance(data, Mapping)  # document_problems has just said so
    return Record(dict(data))


def _board(path: str | Path, data: Any) -> BoardRecord:
    problems = board_problems(str(path), data)
    if problems:
        raise InputError(problems)
    assert isinstance(data, Mapping)  # board_problems has just said so
    return BoardRecord(dict(data))


def _fill(path: Path, text: str) -> None:
    with path.open("xb") as file:
        file.write(text.encode("utf-8", errors="backslashreplace"))
        file.flush()
        os.fsync(file.fileno())


def _text(path: str | Path) -> str:
    try:
        return Path(path).read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError as error:
        _refuse(path, f"expected a record in UTF-8; byte {error.start} is not")
    except (OSError, ValueError) as error:
        _refuse(path, f"the record cannot be read: {reason(error)}")


def _parse(path: str | Path, text: str) -> Any:
    try:
        return json.loads(text, parse_constant=_no_constant)
    except json.JSONDecodeError as error:
        rule = f"expected a record in JSON, but at character {error.colno}: {error.msg}"
        raise InputError([Problem(str(path), error.lineno, None, None, rule)]) from None
    except (ValueError, RecursionError) as error:
        _refuse(path, f"expected a record in JSON: {error}")


def _no_constant(name: str) -> NoReturn:
    raise ValueError(f"{name} is not a number in JSON")


def _refuse(path: str | Path, rule: str) -> NoReturn:
    raise InputError([Problem(str(path), None, None, None, rule)]) from None
