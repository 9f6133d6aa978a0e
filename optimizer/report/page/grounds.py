"""What the decision stands on: assumptions, cautions, what is left out, inputs, and the way to repeat it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from shlex import quote
from typing import Any

from optimizer.errors import clean, printable
from optimizer.report.cautions import DEFER, DUTIES, SOURCES, band, left_out
from optimizer.report.notes import coverage, filled
from optimizer.report.page.blocks import Block, Code, Part, Section, Table, Words, cells
from optimizer.report.words import count
from optimizer.review.dossier import Dossier
from optimizer.review.reopen import Changed
from optimizer.vocabulary import COLUMNS


def limits(dossier: Dossier) -> Section:
    """The section on assumptions, on what the model leaves out, and on cautions."""
    request = dossier.request
    texts = [text for text in (sentenced(SOURCES), band(request)) if text]
    duties = Table("Who decides, by where the receiver is used", ("used", "standard"), _duties())
    parts = (
        Part("Assumed where the catalog leaves a blank", tuple(assumed_blocks(dossier.candidate, request))),
        Part("Not in the model", (Words(sentenced(left_out(request).removeprefix("Not in the model: "))),)),
        Part("Cautions", (Words(" ".join(texts), "caution", "Light"), duties, Words(DEFER))),
    )
    return Section("limits", "Assumptions, limits and cautions", (), parts)


def sentenced(text: str) -> str:
    """`text` with a capital at its beginning."""
    return text[0].upper() + text[1:]


def _duties() -> tuple[Any, ...]:
    return tuple(cells(*pair) for pair in DUTIES)


def has_assumed(row: Mapping[str, Any]) -> bool:
    """Whether a candidate's figures use values that no catalog states, or a model that may not hold."""
    return bool(row["assumed"] or row.get("linear_model"))


def assumed_blocks(row: Mapping[str, Any], request: Mapping[str, Any]) -> Iterator[Block]:
    """What a candidate's figures use that no catalog states."""
    names = row["assumed"]
    if names:
        rows = tuple(
            cells(clean(name), filled(name, request).removeprefix(" = ") or "-", _meaning(name))
            for name in names
        )
        yield Table(
            "Values that no catalog states for these parts", ("column", "taken as", "what it is"), rows
        )
    else:
        yield Words("Nothing: every value that these figures use is stated in the catalogs.")
    if row.get("linear_model"):
        figures = " and ".join(name.replace("_", " ") for name in row["linear_model"])
        text = f"The dark output rests on the lower rail; {figures} are those of the linear model."
        yield Words(text, "note")


def _meaning(name: str) -> str:
    role, _, column = name.partition(".")
    known = COLUMNS.get(f"{role}s", {}).get(column)
    return known.meaning if known else ""


def sources(dossier: Dossier) -> Section:
    """The section on the inputs and on how to repeat the whole."""
    again = Part("To repeat it", (Words("Typed in the same folder:"), Code(tuple(_commands(dossier)))))
    searched = Part("What the search covered", (Words(coverage(dossier.data)),))
    return Section(
        "sources",
        "Inputs and how to repeat it",
        (inputs_table(dossier.data, dossier.changed),),
        (again, searched),
    )


def inputs_table(data: Mapping[str, Any], changes: Sequence[Changed]) -> Table:
    """Every input file with its hash, and whether it is what it was."""
    changed = {change.file: change for change in changes}
    rows = [
        cells(clean(entry["file"]), _rows(entry), entry["sha256"], _state(changed.get(entry["file"])))
        for entry in data["inputs"]
    ]
    known = {entry["file"] for entry in data["inputs"]}
    rows += [cells(clean(file), "-", "-", "new since") for file in changed if file not in known]
    headings = ("file", "rows", "SHA-256 when the record was made", "now")
    return Table("The files that the search read", headings, tuple(rows), numbers=frozenset({1}))


def _rows(entry: Mapping[str, Any]) -> str:
    return count(entry["rows"]) if entry.get("rows") else "-"


def _state(change: Changed | None) -> str:
    if change is None:
        return "unchanged"
    return "changed since" if change.now else "gone since"


def _commands(dossier: Dossier) -> Iterator[str]:
    place, ranking = dossier.place, dossier.request["ranking"]
    search = f"luxsift shortlist {quote(place.request)} --by {ranking['by']} --show {ranking['show']}"
    if "replaces" not in dossier.data:  # else the record of luxsift replace, which does not name its own
        yield printable(f"{search} --save {quote(place.record)}")
    rank = dossier.candidate["rank"]
    compare = "".join(f" {option('--compare', one.name)}" for one in dossier.findings.compared)
    output = option("-o", place.output)
    yield printable(f"luxsift justify {quote(place.record)} --rank {rank}{compare} {output}")


def option(name: str, value: str) -> str:
    """An option with its value, which may begin with a dash."""
    joint = "=" if value.startswith("-") else " "
    return f"{name}{joint}{quote(value)}"
