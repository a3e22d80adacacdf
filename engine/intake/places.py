"""Where on the sheets each figure of a week stands, so that a remark can name the cell."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import numpy.typing as npt

from engine.intake.cells import Sheet, address
from engine.intake.headings import TITLES

Where = Callable[[str, Any, str], tuple[str, str, str]]
"""File, sheet and cell of a figure, by table, name (or position of a rate row) and field."""


@dataclass(frozen=True, slots=True)
class Spot:
    """The row of a depot, a customer or a rule, and the column of each field."""

    sheet: Sheet
    row: int
    columns: Mapping[str, int]


@dataclass(frozen=True, eq=False)
class RateRows:
    """Rate rows that came from one table: `start` is the position of the first, then one row each.

    rows: sheet row of each rate row; across: sheet column of each, where the table is a grid
    """

    start: int
    sheet: Sheet
    rows: npt.NDArray[np.int64]
    columns: Mapping[str, int]
    across: npt.NDArray[np.int64] | None = None


@dataclass(frozen=True)
class Places:
    """The places of all figures of one reading."""

    spots: Mapping[tuple[str, str], Spot] = field(default_factory=dict)
    rates: tuple[RateRows, ...] = ()

    def where(self, table: str, key: Any, name: str) -> tuple[str, str, str]:
        """File, sheet and cell of a figure; a `Where`."""
        if table == "rates" and isinstance(key, int):
            for part in self.rates:
                if part.start <= key < part.start + len(part.rows):
                    row = int(part.rows[key - part.start])
                    if part.across is not None:
                        return (
                            part.sheet.file,
                            part.sheet.name,
                            address(row, int(part.across[key - part.start])),
                        )
                    return part.sheet.file, part.sheet.name, _cell(row, part.columns, name)
        spot = self.spots.get((table, key)) if isinstance(key, str) else None
        if spot is None:
            return nowhere(table, key, name)
        return spot.sheet.file, spot.sheet.name, _cell(spot.row, spot.columns, name)


def nowhere(table: str, key: Any, name: str) -> tuple[str, str, str]:
    """The place of a figure that came from no sheet: the table alone. A `Where`."""
    return "", TITLES.get(table, ""), ""


def _cell(row: int, columns: Mapping[str, int], name: str) -> str:
    column = columns.get(name, columns.get("rate", min(columns.values(), default=0)))
    return address(row, column)
