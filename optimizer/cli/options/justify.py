"""What `luxsift justify` takes."""

from __future__ import annotations

import argparse
from dataclasses import dataclass
from pathlib import PurePath

from optimizer.cli.options.shared import COMMAND_LINE, whole
from optimizer.errors import Problem

SUMMARY = "write the page that a design review works from"
HTML, MARKDOWN = (".html", ".htm"), (".md", ".markdown")


@dataclass(frozen=True, slots=True)
class JustifyOptions:
    """The options of `luxsift justify`; None where the record's own choice stands."""

    record: str
    rank: int | None
    request: str | None
    output: str
    compare: tuple[str, ...] = ()

    @property
    def markdown(self) -> bool:
        """Whether the page is written as Markdown, by the name of its file."""
        return _ending(self.output) in MARKDOWN


def declare(command: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    command.description = (
        "Writes one page that justifies a choice: the decision, every target and its margin, each figure "
        "worked by hand, drawings, alternatives, what each target costs, the supply of each part, "
        "assumptions, cautions and inputs. Of a board's record it justifies a plan: channels, bill of "
        "materials, totals, what is proven, other plans."
    )
    add = command.add_argument
    add("record", metavar="RECORD", help="a record, as shortlist --save or board --save writes it")
    add("-o", "--output", required=True, metavar="FILE", help="the page: FILE.html, or FILE.md")
    add("--rank", metavar="N", help="the row or plan to justify (the record's chosen one)")
    compare = "a part or family to answer for: why not this one (may be repeated)"
    add("--compare", action="append", default=[], metavar="PART", help=compare)
    add("--request", metavar="FILE", help="where the record's request or board file is, if moved")


def justify_options(parsed: argparse.Namespace) -> tuple[JustifyOptions, list[Problem]]:
    """The options with every problem in them; an option with a problem takes its usual value."""
    problems: list[Problem] = []
    options = JustifyOptions(
        record=parsed.record,
        rank=whole("--rank", parsed.rank, problems),
        request=parsed.request,
        output=parsed.output,
        compare=tuple(dict.fromkeys(parsed.compare)),
    )
    if _ending(options.output) not in (*HTML, *MARKDOWN):
        rule = "expected a file name that ends in .html or .md"
        problems.append(Problem(COMMAND_LINE, None, "--output", options.output, rule))
    return options, problems


def _ending(name: str) -> str:
    return PurePath(name).suffix.lower()
