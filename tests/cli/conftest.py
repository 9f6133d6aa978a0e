from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.cli import main


@pytest.fixture
def request_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Path:
    main(["start", str(tmp_path)])
    capsys.readouterr()
    return tmp_path / "request.toml"
