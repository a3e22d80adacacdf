"""Tables of reasons: numbers that sort as numbers and read as the desk writes them, rows to pick."""

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from functools import partial
from math import isnan
from typing import Any

import pandas as pd
import streamlit as st

from app.parts.words import number
from engine.exact import places_needed

ROW = 35
"""Pixels of a row in a table."""

MOST_ROWS = 5_000
"""A browser is given no more rows than this; the rest are counted below the table."""

MANY_PLACES, OWN_PLACES = 4, -1

Cell = str | Decimal | None


@dataclass(frozen=True, slots=True)
class Heading:
    """A column of a table; `about` is said beside it.

    `places` fixes the decimals of its numbers; `money` shows as many as any of them needs, two at least; but
    where one needs very many, each shows its own.
    """

    name: str
    about: str = ""
    places: int | None = None
    money: bool = False


def reasons_table(
    headings: Sequence[Heading],
    rows: Sequence[Sequence[Cell]],
    key: str,
    mark: str,
    *,
    pick: bool = True,
    most_height: int = 520,
) -> int | None:
    """Shows rows of texts and decimals (None: blank); answers which row is picked, None for none."""
    shown = list(rows[:MOST_ROWS])
    kinds = [any(isinstance(row[n], Decimal) for row in shown) for n in range(len(headings))]
    frame = pd.DataFrame(
        {
            heading.name: pd.Series(
                [_sortable(row[n]) for row in shown], dtype="float" if kinds[n] else "object"
            )
            for n, heading in enumerate(headings)
        }
    )
    formats: Any = {
        heading.name: partial(_written, mark, _places(heading, [row[n] for row in shown]))
        for n, (heading, is_number) in enumerate(zip(headings, kinds, strict=True))
        if is_number
    }
    about = {h.name: st.column_config.Column(help=h.about or None) for h in headings if h.about}
    styled: Any = frame.style.format(formats)
    height = min(most_height, ROW * (len(shown) + 1) + 3)
    if not pick:
        st.dataframe(styled, key=key, hide_index=True, placeholder="", column_config=about, height=height)
    else:
        event = st.dataframe(
            styled, key=key, hide_index=True, placeholder="", column_config=about,
            on_select="rerun", selection_mode="single-row", height=height,
        )  # fmt: skip
    if len(rows) > MOST_ROWS:
        st.caption(f"The first {MOST_ROWS:,} of {len(rows):,} rows.")
    if not pick:
        return None
    picked = [row for row in event.selection.rows if 0 <= row < len(shown)]
    return picked[0] if picked else None


def _places(heading: Heading, cells: Sequence[Cell]) -> int | None:
    if not heading.money:
        return heading.places
    most = max((places_needed(cell) for cell in cells if isinstance(cell, Decimal)), default=2)
    return max(2, most) if most <= MANY_PLACES else OWN_PLACES


def _sortable(cell: Cell) -> str | float | None:
    return float(cell) if isinstance(cell, Decimal) else cell


def _written(mark: str, places: int | None, value: float) -> str:
    """A number of the table; blank where there is none."""
    if value is None or isnan(value):
        return ""
    exact = Decimal(repr(float(value)))
    return number(exact, mark, max(2, places_needed(exact)) if places == OWN_PLACES else places)
