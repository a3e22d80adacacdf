"""Weeks over time: freight, freight per unit, what was delivered and short, week after week."""

from decimal import Decimal

import pandas as pd
import streamlit as st

from app.access import totals
from app.parts.compare_charts import figures_by_week
from app.parts.words import money, number, quantity
from app.session import Desk
from engine.money import minor_places, per_unit
from engine.planning.plan import Plan
from engine.records import WeekTotals


def weeks_view(state: Desk, plan: Plan) -> None:
    """The latest weeks in this unit and currency as lines, and the same as a table."""
    rules, mark = plan.week.rules, state.decimal_mark
    found = [one for one in totals() if (one.week.unit, one.week.currency) == (rules.unit, rules.currency)]
    if not found:
        st.caption("No week in this unit and currency was planned yet: they stand here once one is.")
        return
    names = [one.week.name for one in found]
    minor = minor_places(rules.currency)
    left, right = st.columns(2, gap="medium")
    with left:
        figures_by_week(
            names, [one.freight_payable for one in found], f"Freight payable, {rules.currency}", mark, minor
        )
        figures_by_week(names, [one.delivered for one in found], f"Delivered, {rules.unit}", mark, None)
    with right:
        figures_by_week(
            names,
            [_each(one) for one in found],
            f"Freight per unit, {rules.currency} per {rules.unit}",
            mark,
            2,
        )
        figures_by_week(names, [one.short for one in found], f"Short, {rules.unit}", mark, None)
    st.dataframe(_table(found, mark), hide_index=True, key="weeks-over-time")


def _each(one: WeekTotals) -> Decimal:
    """Freight payable per unit delivered, 0 where nothing was."""
    return per_unit(one.freight_payable, one.delivered) or Decimal(0)


def _table(found: list[WeekTotals], mark: str) -> pd.DataFrame:
    return pd.DataFrame(
        [
            {
                "Week": one.week.name,
                "Opened": f"{one.week.created:%d %b %Y}",
                "Freight payable": money(one.freight_payable, one.week.currency, mark),
                "Per unit": number(_each(one), mark, 2),
                "Delivered": quantity(one.delivered, one.week.unit, mark),
                "Short": quantity(one.short, one.week.unit, mark),
                "Unsent": quantity(one.unsent, one.week.unit, mark),
            }
            for one in reversed(found)
        ]
    )
