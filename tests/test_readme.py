"""README.md held to the program: its outputs, its files, its names, its numbers."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator, Mapping
from pathlib import Path

import pytest

import optimizer as lux
from optimizer.cli.arguments import COMMANDS, options_of, parse
from optimizer.request.schema import KEYS
from optimizer.request.types import RANKINGS, WIRINGS, Request
from optimizer.vocabulary import COLUMNS, TARGETS, VOCABULARY
from tests import readme
from tests.published import test_published
from tests.published.rows import rows

TEXT = readme.text()
BLOCKS = readme.blocks()
OWN_REQUEST = "receiver/mine.toml"
SHOWN = [number for number, block in enumerate(BLOCKS) if block.kind in ("console", "text")]


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("reader")


@pytest.fixture(scope="module")
def session(folder: Path) -> list[tuple[readme.Block, readme.Block]]:
    """Every block with what it should be; `folder` then holds the files that a reader would have."""
    return list(readme.acted_out(folder))


def table(heading: str) -> list[list[str]]:
    """The cells of the rows of the table whose first heading is `heading`."""
    lines = TEXT.partition(f"\n| {heading} |")[2].splitlines()[2:]
    body = iter(lines)
    found = []
    for line in body:
        if not line.startswith("|"):
            break
        found.append([cell.strip() for cell in line.strip("|").split(" | ")])
    assert found, heading
    return found


def quoted(cell: str) -> list[str]:
    return re.findall(r"`([^`]+)`", cell)


# Blocks


@pytest.mark.parametrize("number", SHOWN)
def test_outputs_are_what_the_program_prints(
    session: list[tuple[readme.Block, readme.Block]], number: int
) -> None:
    shown, printed = session[number]
    assert shown.text == printed.text


def test_the_first_two_commands_install_run_and_test() -> None:
    install, check = (block.text.strip() for block in BLOCKS if block.kind == "sh")
    assert "\n" not in install + check
    assert install.endswith(".venv/bin/luxsift shortlist examples/turbidity/request.toml")
    assert check.endswith(".venv/bin/python -m pytest -n auto --dist loadfile")


def test_every_block_is_of_a_kind_that_is_acted_on() -> None:
    assert len(BLOCKS) * 2 == len(re.findall(r"^```", TEXT, re.MULTILINE))
    for block in BLOCKS:
        assert (block.kind, bool(block.file)) in {
            ("sh", False), ("console", False), ("python", False), ("text", False),
            ("toml", True), ("csv", True),
        }  # fmt: skip
        assert block.kind != "console" or block.commands


def test_the_outputs_cover_every_command_and_every_status_that_ends_by_itself() -> None:
    shown = "".join(block.text for block in BLOCKS if block.kind == "console")
    for command in COMMANDS:
        assert f"luxsift {command} " in shown
    assert {"exit status 1", "exit status 2"} <= set(shown.splitlines())


# The request


def own_request() -> str:
    return next(block.text for block in BLOCKS if block.file == OWN_REQUEST)


def read_as(folder: Path, text: str) -> Request:
    """The request that `text` is, in place of the one on the page."""
    path = folder / OWN_REQUEST
    path.write_text(text, "utf-8")
    return lux.read_request(path)


def leaves(value: object, at: tuple[str, ...] = ()) -> Iterator[tuple[str, ...]]:
    if isinstance(value, Mapping):
        for key, inner in value.items():
            yield from leaves(inner, (*at, key))
    else:
        yield at


def test_the_request_states_every_key() -> None:
    assumed = ("assume", "opamps", "output_low")
    assert set(leaves(tomllib.loads(own_request()))) == KEYS.keys() | {assumed}


LEFT_OUT = re.compile(r"^(?P<key>\w+) = (?P<value>.+?) +# .*\((?P<usual>[^()]+)\)$")
IN_WORDS = {"any", "nothing", "the catalogs' own"}
STATED = {
    found["key"]: (line, found["value"], found["usual"])
    for line in own_request().splitlines()
    if (found := LEFT_OUT.match(line)) and found["usual"] not in IN_WORDS
}


@pytest.mark.parametrize("key", STATED)
def test_a_line_left_out_means_what_stands_in_parentheses(folder: Path, session: object, key: str) -> None:
    line, value, usual = STATED[key]
    written = value if usual == "as here" else usual
    if re.match(r"[\d.]+ \w+$", written):
        written = f'"{written}"'
    left_out = read_as(folder, own_request().replace(f"{line}\n", ""))
    assert left_out == read_as(folder, own_request().replace(line, f"{key} = {written}"))
    if usual != "as here" and written != value:
        assert left_out != read_as(folder, own_request())


def test_most_lines_say_what_holds_without_them() -> None:
    assert len(STATED) >= 18


# Names


def test_the_table_of_figures_is_the_vocabulary() -> None:
    named = [name for row in table("figure") for name in quoted(row[0])]
    assert sorted(named) == sorted(VOCABULARY)


def test_the_table_of_margins_holds_every_target_on_its_side() -> None:
    sides = {name: row[1] for row in table("target") for name in quoted(row[0])}
    assert sides.keys() == set(TARGETS)
    for name, words in sides.items():
        assert words.startswith("at least" if VOCABULARY[name].better == "higher" else "at most")


def test_the_table_of_wirings_is_in_order() -> None:
    assert tuple(quoted(row[0])[0] for row in table("wiring")) == tuple(WIRINGS)


def test_the_table_of_columns_is_that_of_the_reader() -> None:
    listed = {quoted(row[0])[0].removesuffix(".csv"): row[1] for row in table("file")}
    assert listed.keys() == COLUMNS.keys()
    for role, columns in COLUMNS.items():
        expected = []
        for column in columns.values():
            name = f"**{column.name}**" if column.required else column.name
            default = "" if column.name == "family" else column.default_text
            expected.append(f"{name} ({default})" if default else name)
        assert listed[role] == ", ".join(expected)


def test_the_options_are_those_of_the_command() -> None:
    named = {quoted(row[0])[0].split()[0]: row for row in table("option of `shortlist`")}
    assert named.keys() == set(options_of("shortlist"))
    assert tuple(quoted(named["--by"][1])) == tuple(RANKINGS)
    assert parse(["shortlist", "request.toml"]).request == "request.toml"


def test_the_commands_are_those_that_exist() -> None:
    named = [quoted(row[0])[0].split()[1] for row in table("command")]
    assert sorted(named) == sorted(COMMANDS)


# Numbers and places


def test_the_count_of_published_values_is_that_of_the_suite() -> None:
    elsewhere = {row.id for row in rows().values() if row.topic in test_published.ELSEWHERE}
    held = elsewhere | test_published.HELD.keys()
    assert f"to {len(held)} values printed in" in TEXT


def test_sources_are_those_of_the_published_checks() -> None:
    listed = TEXT.partition("\n## Sources")[2].partition("\n## ")[0]
    titles = re.findall(r"\*([^*]+)\*", listed)
    held = [row.source for row in rows().values() if row.id in test_published.HELD]
    assert len(titles) >= 8
    for title in titles:
        assert any(source.startswith(title) for source in held), title


def test_links_lead_somewhere() -> None:
    targets = re.findall(r"\]\(([^)]+)\)", TEXT)
    assert targets
    for target in targets:
        assert (readme.ROOT / target).exists(), target


def test_paths_of_the_checkout_exist() -> None:
    prose = re.sub(r"^```.*?^```$", "", TEXT, flags=re.MULTILINE | re.DOTALL)
    paths = {word for word in quoted(prose) if re.match(r"(\.ci|tests|examples|catalogs|optimizer)/", word)}
    modules = re.findall(r"python -m ((?:tests|optimizer)[\w.]*)", TEXT)
    assert paths
    assert modules
    for path in [*paths, *(f"{module.replace('.', '/')}.py" for module in modules)]:
        assert (readme.ROOT / path).exists(), path


def test_cautions_name_the_standards_of_the_report() -> None:
    from optimizer.report import cautions

    for standard in re.findall(r"(?:IEC|ISO|EN) [\d-]+", cautions.SOURCES + cautions.GENERAL):
        assert standard in TEXT.partition("\n## Cautions")[2]


def test_no_path_or_host_of_the_machine_that_wrote_it() -> None:
    for name in ("README.md", ".ci/run", "pyproject.toml"):
        held = (readme.ROOT / name).read_text("utf-8")
        assert not re.search(r"/work\b|/tmp/|/home/|/root/|https?://", held), name
