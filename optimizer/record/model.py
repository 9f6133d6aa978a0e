"""The record as one frozen value, with its tables for a notebook."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    import pandas as pd

FORMAT = "luxsift-shortlist/1"
BOARD_FORMAT = "luxsift-board/1"


@dataclass(frozen=True, repr=False)
class Record:
    """What one run decided: `data` is the JSON document that `--save` writes, in SI units."""

    data: Mapping[str, Any]

    @property
    def candidates(self) -> list[dict[str, Any]]:
        """The candidates that meet the request, best first."""
        return list(self.data["candidates"])

    @property
    def near_misses(self) -> list[dict[str, Any]]:
        """The eligible candidates that miss a target, nearest first."""
        return list(self.data["near_misses"])

    @property
    def table(self) -> pd.DataFrame:
        """The candidates as a DataFrame, one row each, numbers in SI units."""
        from optimizer.record.rows import frame

        return frame(self.candidates, self.data["request"])

    @property
    def near_miss_table(self) -> pd.DataFrame:
        """The near misses as a DataFrame with the columns of `table`."""
        from optimizer.record.rows import frame

        return frame(self.near_misses, self.data["request"])

    def __repr__(self) -> str:
        from optimizer.record.views import summary

        return f"<Record {summary(self.data)}>"

    def __str__(self) -> str:
        from optimizer.record.views import as_text

        return as_text(self.data, self._shown)

    def _repr_html_(self) -> str:
        from optimizer.record.views import as_html

        return as_html(self.data, self._shown)

    @property
    def _shown(self) -> pd.DataFrame:
        """What to look at first: the candidates, or the near misses where nothing meets."""
        return self.table if self.candidates else self.near_miss_table


@dataclass(frozen=True, repr=False)
class BoardRecord:
    """What planning a board came to: `data` is the JSON document that `board --save` writes, in SI units."""

    data: Mapping[str, Any]

    @property
    def plans(self) -> list[dict[str, Any]]:
        """The plans, the best first."""
        return list(self.data["plans"])

    @property
    def chosen(self) -> dict[str, Any] | None:
        """The plan that is marked as chosen; None where there is none."""
        return next((plan for plan in self.plans if plan["rank"] == self.data["chosen"]), None)

    def __repr__(self) -> str:
        return f"<BoardRecord {self.data['name']}: {len(self.plans)} plans>"
