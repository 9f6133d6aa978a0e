from __future__ import annotations

import pytest

from optimizer.report.page import compose, to_html
from optimizer.review.dossier import Dossier
from tests.report.page.made import CORNERS, HOSTILE, TOLERANCE, case, with_everything


@pytest.fixture(scope="session")
def dossier(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The starter's best candidate."""
    return case(tmp_path_factory.mktemp("starter")).dossier


@pytest.fixture(scope="session")
def full(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The same with tolerances and every other finding."""
    return with_everything(case(tmp_path_factory.mktemp("full"), TOLERANCE).dossier)


@pytest.fixture(scope="session")
def cornered(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The starter's best candidate where every target is graded at its worst corner."""
    return case(tmp_path_factory.mktemp("cornered"), CORNERS).dossier


@pytest.fixture(scope="session")
def hostile(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The same, its parts named so that they would do harm if they were not escaped."""
    name = 'name = "<script>alert(2)</script>"'
    folder = tmp_path_factory.mktemp("hostile")
    return with_everything(case(folder, names=HOSTILE, title=name).dossier)


@pytest.fixture(scope="session")
def html(full: Dossier) -> str:
    """The whole page as HTML."""
    return to_html(compose(full))
