"""Who may import whom, and how large a piece of code may get: read from the source, module by module.

That `luxsift --help` loads nothing heavy is held in cli/test_shortlist.py.
"""

from __future__ import annotations

import ast
import sys
from collections.abc import Iterator
from fnmatch import fnmatch
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PACKAGE = ROOT / "optimizer"
MODULES = sorted(PACKAGE.rglob("*.py"))
TESTS = sorted((ROOT / "tests").rglob("*.py"))

MOST_LINES, MOST_FUNCTION_LINES = 400, 60
TOP_LEVEL = {"README.md", "pyproject.toml", "optimizer", "catalogs", "tests", "examples"}

# Each room and the rooms it may import, besides `errors`. The top modules stand for the whole tool.
ROOMS: dict[str, set[str]] = {
    "errors": set(),
    "input_file": set(),
    "toml": {"input_file"},
    "quantities": set(),
    "vocabulary": {"quantities"},
    "series": set(),
    "physics": set(),
    "request": {"input_file", "toml", "quantities", "series", "vocabulary"},
    "catalog": {"input_file", "toml", "quantities", "series", "vocabulary"},
    "study": {"catalog", "request", "toml", "vocabulary"},
    "figures": {"physics", "catalog", "request"},
    "margins": {"quantities", "request"},
    "statistics": set(),
    "search": {
        "physics", "figures", "margins", "catalog", "request", "quantities", "series", "statistics",
        "vocabulary",
    },
    "board": {"search", "study", "request", "catalog", "quantities"},
    "planning": {
        "board", "search", "study", "request", "catalog", "quantities", "toml", "input_file", "vocabulary",
        "margins", "figures", "physics", "series",
    },
    "record": {"planning", "search", "study", "request", "catalog", "quantities", "vocabulary"},
    "review": {
        "planning", "search", "board", "study", "record", "request", "figures", "margins", "catalog",
        "quantities", "vocabulary",
    },
    "report": {"planning", "review", "record", "search", "catalog", "quantities", "vocabulary"},
    "cli": {"planning", "record", "review", "report", "search", "study", "request", "catalog", "toml"},
}  # fmt: skip
TOP_MODULES = {"__init__", "__main__"}

# What a room may import from outside the standard library.
OUTSIDE: dict[str, set[str]] = {
    "series": {"numpy"},
    "physics": {"numpy", "scipy"},
    "catalog": {"numpy", "pandas", "openpyxl"},
    "figures": {"numpy"},
    "margins": {"numpy"},
    "statistics": {"numpy", "scipy"},
    "search": {"numpy", "scipy"},
    "board": {"numpy", "pulp", "highspy"},
    "planning": {"numpy"},
    "record": {"pandas"},
    "review": {"numpy"},
    "report": {"rich", "numpy", "matplotlib", "jinja2", "markupsafe"},
    "cli": {"rich"},
}


def room_of(module: str) -> str:
    """The room that `optimizer.<room>...` names; the modules request_* are one room."""
    name = module.split(".")[1] if "." in module else "__init__"
    return "request" if name.startswith("request_") else name


def room_of_file(file: Path) -> str:
    parts = file.relative_to(ROOT).with_suffix("").parts
    return room_of(".".join(parts))


def imported(node: ast.AST) -> Iterator[str]:
    """Full names of what an import statement may load: of `from a import b`, a.b where that is a module."""
    if isinstance(node, ast.Import):
        yield from (alias.name for alias in node.names)
    elif isinstance(node, ast.ImportFrom):
        assert node.level == 0, f"line {node.lineno}: a relative import"
        module = str(node.module)
        if module == "optimizer":
            yield from (f"optimizer.{alias.name}" for alias in node.names)
        else:
            yield module


def imports(file: Path) -> set[str]:
    return {name for node in ast.walk(ast.parse(file.read_text("utf-8"))) for name in imported(node)}


def named(file: Path) -> str:
    return str(file.relative_to(ROOT))


def test_every_room_stands_in_the_table_and_every_entry_is_a_room() -> None:
    assert {room_of_file(file) for file in MODULES} == ROOMS.keys() | TOP_MODULES


def test_rooms_do_not_import_in_a_circle() -> None:
    """The table is in order: a room may import only rooms that stand above it."""
    above: set[str] = set()
    for room, allowed in ROOMS.items():
        assert allowed <= above, f"{room} may import {allowed - above}, which stand below it"
        above.add(room)


@pytest.mark.parametrize("file", MODULES, ids=named)
def test_imports_only_what_the_table_allows(file: Path) -> None:
    room = room_of_file(file)
    used = imports(file)
    rooms = {room_of(name) for name in used if name.split(".")[0] == "optimizer"}
    if room not in TOP_MODULES:
        assert rooms <= ROOMS[room] | {room, "errors"}
    outside = {name.split(".")[0] for name in used} - {"optimizer"} - sys.stdlib_module_names
    assert outside <= OUTSIDE.get(room, set())


@pytest.mark.parametrize("file", [*MODULES, *TESTS], ids=named)
def test_is_small(file: Path) -> None:
    text = file.read_text("utf-8")
    height = text.count("\n")
    assert height <= MOST_LINES
    long = {
        f"{node.name}, {node.end_lineno - node.lineno + 1} lines"
        for node in ast.walk(ast.parse(text))
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)
        and node.end_lineno is not None
        and node.end_lineno - node.lineno + 1 > MOST_FUNCTION_LINES
    }
    assert not long


def public(
    node: ast.Module | ast.ClassDef,
) -> Iterator[ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef]:
    """The functions and classes that a module or class shows, methods included."""
    for child in node.body:
        if isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef):
            if child.name.startswith("_") and child.name != "__call__":
                continue
            yield child
            if isinstance(child, ast.ClassDef):
                yield from public(child)


@pytest.mark.parametrize("file", MODULES, ids=named)
def test_what_is_public_has_a_docstring(file: Path) -> None:
    tree = ast.parse(file.read_text("utf-8"))
    assert ast.get_docstring(tree)
    assert not [node.name for node in public(tree) if not ast.get_docstring(node)]


def ignored_by_git() -> list[str]:
    lines = (ROOT / ".gitignore").read_text("utf-8").splitlines()
    return [line.rstrip("/") for line in lines if line and not line.startswith("#")]


def test_the_top_folder_holds_only_what_belongs_there() -> None:
    patterns = ignored_by_git()
    names = {entry.name for entry in ROOT.iterdir() if not entry.name.startswith(".")}
    kept = {name for name in names if not any(fnmatch(name, pattern) for pattern in patterns)}
    assert kept == TOP_LEVEL


def test_examples_holds_case_folders_only() -> None:
    assert all(entry.is_dir() for entry in (ROOT / "examples").iterdir())
