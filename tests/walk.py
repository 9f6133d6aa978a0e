"""Acts on the walk of examples/withdrawn-part: its commands in order, in a new folder laid out as a checkout.

`walk.txt` holds commands (lines with `$ `) and what each prints; `review.html` and `review.md` are the
pages that the last two write. `python -m tests.walk --write` writes all three anew.
"""

from __future__ import annotations

import re
import sys
import tempfile
from pathlib import Path

from tests.masking import masked
from tests.readme import PROMPT, ROOT, prepare, session

CASE = ROOT / "examples" / "withdrawn-part"
WALK, PAGES = "walk.txt", ("review.html", "review.md")

_DRAWING = re.compile(r"<svg\b.*?</svg>", re.DOTALL)
_MOMENT = re.compile(r"\d{4}-\d\d-\d\d[T ]\d\d:\d\d(:\d\d)?(\+00:00| UTC)?")
_SEARCHED = re.compile(r"\sin\s\S+?\ss,\s[\d,]+\s+of\s+them\s+evaluated,")
_VERSION = re.compile(r"luxsift (\d+\.\d+\.\d+\S*|unknown)")


def shown(name: str) -> str:
    """A file of the walk as it is kept."""
    return (CASE / name).read_text("utf-8")


def acted_out(folder: Path) -> dict[str, str]:
    """What the files of the walk should hold, made in the empty `folder`."""
    environment = prepare(folder)
    commands = [line.removeprefix(PROMPT) for line in shown(WALK).splitlines() if line.startswith(PROMPT)]
    made = {WALK: session(commands, folder, environment)}
    return made | {name: (folder / name).read_text("utf-8") for name in PAGES}


def settled(page: str) -> str:
    """`page` without what differs from run to run or from one drawing library to the next."""
    page = _MOMENT.sub("(time)", _DRAWING.sub("(drawing)", masked(page)))
    return _VERSION.sub("luxsift (version)", _SEARCHED.sub(" in (time), (count) evaluated,", page))


def write() -> None:
    """Put the outputs and pages that the program gives now into the folder of the walk."""
    with tempfile.TemporaryDirectory() as folder:
        for name, text in acted_out(Path(folder)).items():
            (CASE / name).write_text(text, "utf-8")


if __name__ == "__main__":
    if sys.argv[1:] != ["--write"]:
        sys.exit("usage: python -m tests.walk --write")
    write()
