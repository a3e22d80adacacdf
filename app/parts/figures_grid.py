"""A table of figures as a grid of text: what is typed goes through our own reader and becomes changes."""

from typing import Literal

import pandas as pd
import streamlit as st
from streamlit.elements.lib.column_types import ColumnConfig

from app.drafts import edit, start
from app.session import Desk
from engine.changes import Alter, Change, Remove, Together
from engine.columns import Column, Kind
from engine.intake.frames import GRID_COLUMNS

MOST_ROWS = 20_000
NUMBERS = {
    Kind.QUANTITY, Kind.RATE, Kind.CHARGE, Kind.PRICE, Kind.PERCENT, Kind.COUNT, Kind.DISTANCE,
    Kind.LATITUDE, Kind.LONGITUDE,
}  # fmt: skip

MONEY = {Kind.RATE, Kind.CHARGE, Kind.PRICE}


def figures_grid(state: Desk, table: str) -> None:
    """Depots, customers or rates; rows can be added, pasted and taken out."""
    if table == "rates" and len(state.week.rates) > MOST_ROWS:
        st.info(
            f"{len(state.week.rates):,} rates are too many for a grid: mend them in your spreadsheet and "
            "open it again. Quantities, closed rows and holds of single lanes are on *Plan*."
        )
        return
    columns = GRID_COLUMNS[table]
    _grid(state, table, {column.heading: _config(state, column) for column in columns}, "dynamic")


def rules_grid(state: Desk) -> None:
    """The desk's settings for the week, one a row."""
    st.caption("When short is *charge*, *priority* or *even share*.")
    config: dict[str, ColumnConfig] = {
        "Rule": st.column_config.TextColumn("Rule", disabled=True),
        "Value": st.column_config.TextColumn("Value"),
    }
    _grid(state, "rules", config, "fixed")


def _config(state: Desk, column: Column) -> ColumnConfig:
    rules = state.working.rules
    unit = rules.unit if column.kind is Kind.QUANTITY else rules.currency if column.kind in MONEY else ""
    return st.column_config.TextColumn(
        f"{column.heading}, {unit}" if unit else column.heading,
        help=column.about,
        alignment="right" if column.kind in NUMBERS else "left",
        pinned=column.kind is Kind.NAME,
    )


def _grid(
    state: Desk, table: str, config: dict[str, ColumnConfig], rows: Literal["fixed", "dynamic"]
) -> None:
    kept = state.grid(table)
    key = f"{table}-{state.generation}-{kept.again}"
    if kept.key != key or key not in st.session_state:
        # A grid starts afresh from one constant frame; what is edited since is kept apart from it.
        readable = [] if kept.key == key else start(kept, state.working, table, state.style)
        kept.base, kept.key = kept.draft, key
        if readable:
            _propose(state, table, readable)
            st.rerun()
    kept.week = state.working
    edited = st.data_editor(
        kept.base,
        key=key,
        num_rows=rows,
        hide_index=True,
        height=520,
        column_config=config,
        alt=f"{table.capitalize()} of the week",
    )
    if edited.equals(kept.draft):
        return
    _take_edits(state, table, edited)
    st.rerun()


def _take_edits(state: Desk, table: str, edited: pd.DataFrame) -> None:
    """What differs from the last draft, as one change; what cannot be read stays on screen."""
    changes = edit(state.grid(table), edited, state.working, table, state.style)
    if changes:
        _propose(state, table, changes)


def _propose(state: Desk, table: str, changes: list[Change]) -> None:
    named = any(isinstance(change, Alter) and change.field == "name" for change in changes)
    if named or any(isinstance(change, Remove) for change in changes):
        state.start_others_afresh(table, changes)
    state.propose_more(changes[0] if len(changes) == 1 else Together(tuple(changes), f"edit of {table}"))
