from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.cli import main


@pytest.fixture
def saved(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Path:
    """A record that `shortlist` saved beside its request and catalogs."""
    request, record = tmp_path / "request.toml", tmp_path / "record.json"
    main(["start", str(tmp_path)])
    assert main(["shortlist", str(request), "--quiet", "--save", str(record)]) == 0
    capsys.readouterr()
    return record
