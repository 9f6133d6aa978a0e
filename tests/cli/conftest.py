from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.cli import main
from tests.planning.made_plan import COUNTS, QUANTITY

BOARD = f"""\
name = "sorting line, optical board"
quantity = {QUANTITY}
[limits]
cost = 9
supply_current = "2.2 mA"
area = "500 mm2"
line_items = 14
[costs]
line_item = 15
placement = 0.01
"""


@pytest.fixture
def request_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Path:
    main(["start", str(tmp_path)])
    capsys.readouterr()
    return tmp_path / "request.toml"


@pytest.fixture
def board_file(request_file: Path) -> Path:
    """A board file beside the starter's request, which is that of all of its channels."""
    for name in COUNTS:
        request_file.with_name(f"{name}.toml").write_text(request_file.read_text("utf-8"), "utf-8")
    rows = [
        f'[[channels]]\nname = "{name}"\nrequest = "{name}.toml"\ncount = {count}\n'
        for name, count in COUNTS.items()
    ]
    path = request_file.with_name("board.toml")
    path.write_text(BOARD + "".join(rows), "utf-8")
    return path
