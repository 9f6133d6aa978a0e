from pathlib import Path

import pytest

from tests.catalog.made import GOOD, Folder


@pytest.fixture
def folder(tmp_path: Path) -> Folder:
    made = Folder(tmp_path)
    for role, row in GOOD.items():
        made.rows(role, row)
    return made
