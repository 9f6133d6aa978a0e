"""The walk of examples/withdrawn-part: shortlist, a part goes obsolete, replace, justify."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests import walk


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> dict[str, str]:
    return walk.acted_out(tmp_path_factory.mktemp("walk"))


def test_prints_what_is_shown(made: dict[str, str]) -> None:
    assert made[walk.WALK] == walk.shown(walk.WALK)


@pytest.mark.parametrize("name", walk.PAGES)
def test_writes_the_pages_that_are_shown(made: dict[str, str], name: str) -> None:
    assert walk.settled(made[name]) == walk.settled(walk.shown(name))


def test_every_kind_of_command_is_walked(made: dict[str, str]) -> None:
    for command in ("shortlist", "exposure", "replace", "justify"):
        assert f"$ luxsift {command} " in made[walk.WALK]
    assert "GKW402" in made[walk.WALK]
    assert "GKW402" in made["review.md"]


def test_the_folder_holds_nothing_else() -> None:
    assert {file.name for file in walk.CASE.iterdir()} == {walk.WALK, *walk.PAGES}


def test_settling_leaves_the_words_and_numbers_of_a_page() -> None:
    page = "<p>snr 40.5 dB</p><svg id='a'>1</svg> 2026-12-01T10:00:00+00:00"
    assert walk.settled(page) == "<p>snr 40.5 dB</p>(drawing) (time)"
    assert walk.settled(page.replace("40.5", "40.6")) != walk.settled(page)
    assert Path(walk.CASE).is_dir()
