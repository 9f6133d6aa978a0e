"""Values of options, read with their problems collected."""

from __future__ import annotations

from collections.abc import Sequence

from optimizer.errors import Problem, did_you_mean
from optimizer.request.types import RANKINGS

COMMAND_LINE = "command line"
STANDARD_OUTPUT = "-"
SAVE = "write the record; - is standard output, all else then goes to standard error"
MOST_ROWS, MOST_WORKERS = 1_000_000, 256


def whole(name: str, text: str | None, problems: list[Problem], *, most: int = MOST_ROWS) -> int | None:
    """The whole number of option `name`, None where it is not given or wrong (a problem is then added)."""
    if text is None:
        return None
    number = int(text) if text.isascii() and text.isdigit() and len(text) <= 9 else 0
    if 1 <= number <= most:
        return number
    rule = f"expected a whole number from 1 to {most:,}"
    problems.append(Problem(COMMAND_LINE, None, name, text, rule))
    return None


def one_of(name: str, text: str | None, known: Sequence[str], problems: list[Problem]) -> str | None:
    """The word of option `name`, None where it is not given or not known (a problem is then added)."""
    if text is None or text in known:
        return text
    rule = f"expected one of {', '.join(known)}"
    problems.append(Problem(COMMAND_LINE, None, name, text, rule, did_you_mean(text, known)))
    return None


def ranking(by: str | None, problems: list[Problem]) -> str | None:
    """The ranking that --by names, None where it is not given or wrong (a problem is then added)."""
    return one_of("--by", by, RANKINGS, problems)
