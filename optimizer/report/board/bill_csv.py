"""The bill of materials of a plan as CSV text: one row a part number, SI units."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.report.csv_file import table_text

Data = Mapping[str, Any]

COLUMNS = (
    *("role", "part", "maker", "value", "package", "pieces", "needed", "buy"),
    *("unit_price", "cost", "currency", "area"),
)
"""`value` in ohm or F; `pieces` a board, `needed` and `buy` for the build, `cost` a build, `area` a piece."""


def text(plan: Data, data: Data) -> str:
    """The bill of one plan of a record; empty where unknown, no text that a spreadsheet runs as a formula."""
    quantity, currency = data["board"]["quantity"], data.get("currency")
    rows = (
        (
            *(line[name] for name in COLUMNS[:6]),
            line["pieces"] * quantity,
            *(line[name] for name in ("buy", "unit_price", "cost")),
            currency,
            line["area"],
        )
        for line in plan["bill"]
    )
    return table_text(COLUMNS, rows)
