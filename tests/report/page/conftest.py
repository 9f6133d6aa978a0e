from __future__ import annotations

import pytest

from optimizer.report.page import compose, to_html
from optimizer.review.dossier import Dossier
from tests.report.page.made import COMPARED, CORNERS, HOSTILE, MARKUP, SCRIPT, TOLERANCE, case


@pytest.fixture(scope="session")
def dossier(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The starter's best candidate."""
    return case(tmp_path_factory.mktemp("starter")).dossier


@pytest.fixture(scope="session")
def full(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The same with tolerances, and beside other parts."""
    return case(tmp_path_factory.mktemp("full"), TOLERANCE).weighed(COMPARED)


@pytest.fixture(scope="session")
def cornered(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The starter's best candidate where every target is graded at its worst corner."""
    return case(tmp_path_factory.mktemp("cornered"), CORNERS).dossier


@pytest.fixture(scope="session")
def hostile(tmp_path_factory: pytest.TempPathFactory) -> Dossier:
    """The same, its parts named so that they would do harm if they were not escaped."""
    name = 'name = "<script>alert(2)</script>"'
    folder = tmp_path_factory.mktemp("hostile")
    return case(folder, names=HOSTILE, title=name).weighed((SCRIPT, MARKUP))


@pytest.fixture(scope="session")
def html(full: Dossier) -> str:
    """The whole page as HTML."""
    return to_html(compose(full))
