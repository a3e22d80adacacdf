"""Totals by week: what the freight came to, what was delivered and what went short."""

from collections.abc import Sequence

import altair as alt
import pandas as pd
import streamlit as st

from app.access import totals
from app.parts.words import money, quantity
from engine.records import WeekTotals


def totals_chart(mark: str) -> None:
    """The latest weeks as bars, and the same as a table."""
    found = totals()
    if not found:
        st.caption("No week was planned yet: totals stand here once one is.")
        return
    latest = found[-1].week
    alike = [one for one in found if (one.week.unit, one.week.currency) == (latest.unit, latest.currency)]
    left, right = st.columns(2)
    left.altair_chart(_freight(alike, latest.currency))
    right.altair_chart(_quantities(alike, latest.unit))
    if len(alike) < len(found):
        st.caption("Weeks in another unit or currency stand in the table only.")
    st.dataframe(_table(found, mark), hide_index=True, alt="Totals by week")


def _frame(found: Sequence[WeekTotals]) -> pd.DataFrame:
    return pd.DataFrame(
        {
            "place": range(len(found)),
            "Week": [f"{one.week.name} ({one.week.created:%d %b})" for one in found],
            "Freight": [float(one.freight_payable) for one in found],
            "Delivered": [float(one.delivered) for one in found],
            "Short": [float(one.short) for one in found],
        }
    )


def _weeks() -> alt.X:
    return alt.X("Week:N", sort=alt.EncodingSortField("place", op="min"), title=None)


def _freight(found: Sequence[WeekTotals], currency: str) -> alt.Chart:
    drawn: alt.Chart = (
        alt.Chart(_frame(found), title=f"Freight payable, {currency}", height=260)
        .mark_bar()
        .encode(x=_weeks(), y=alt.Y("Freight:Q", title=None), tooltip=["Week:N", "Freight:Q"])
    )
    return drawn


def _quantities(found: Sequence[WeekTotals], unit: str) -> alt.Chart:
    long = _frame(found).melt(["place", "Week"], ["Delivered", "Short"], "What", "Quantity")
    drawn: alt.Chart = (
        alt.Chart(long, title=f"Delivered and short, {unit}", height=260)
        .mark_bar()
        .encode(
            x=_weeks(),
            y=alt.Y("Quantity:Q", title=None),
            color=alt.Color("What:N", title=None, legend=alt.Legend(orient="top")),
            tooltip=["Week:N", "What:N", "Quantity:Q"],
        )
    )
    return drawn


def _table(found: Sequence[WeekTotals], mark: str) -> pd.DataFrame:
    rows = []
    for one in reversed(found):
        unit = one.week.unit
        rows.append(
            {
                "Week": one.week.name,
                "Opened": f"{one.week.created:%d %b %Y}",
                "Freight payable": money(one.freight_payable, one.week.currency, mark),
                "Ordered": quantity(one.ordered, unit, mark),
                "Delivered": quantity(one.delivered, unit, mark),
                "Short": quantity(one.short, unit, mark),
                "Unsent": quantity(one.unsent, unit, mark),
            }
        )
    return pd.DataFrame(rows)
