"""The vehicles of a plan: how many each depot loads, and the badly filled ones with what would fill them."""

import pandas as pd
import streamlit as st

from app.parts.words import counted, money, number, plain
from app.session import Desk
from engine.planning.fills import BadlyFilled, Vehicles, badly_filled, loads_total, vehicles
from engine.planning.plan import Plan

LOADS = "loads"
SHOWN = 200


def loads_view(plan: Plan) -> dict[str, str]:
    """The view of vehicles, where a plan has any that are counted."""
    return {} if loads_total(plan) is None else {LOADS: "Loads"}


def loads_panel(state: Desk, plan: Plan) -> None:
    """Vehicles by depot, then the loads that are far from full."""
    mark, unit = state.decimal_mark, plan.week.rules.unit
    st.markdown("**Vehicles by depot**")
    st.dataframe(
        pd.DataFrame([_of_depot(one, unit, mark) for one in vehicles(plan)], dtype="string"),
        hide_index=True,
        column_config={
            name: st.column_config.TextColumn(name, alignment="right")
            for name in (f"Send, {unit}", "Loads", "Full", "Filled", "May leave", "Free")
        },
    )
    badly = badly_filled(plan)
    if not badly:
        st.caption("Every load is at least three quarters full.")
        return
    st.markdown(f"**{counted(len(badly), 'load')} less than three quarters full**")
    rows = [_of_load(plan, one, mark) for one in badly[:SHOWN]]
    st.dataframe(
        pd.DataFrame(rows, dtype="string"),
        hide_index=True,
        column_config={
            "Paid for empty room": st.column_config.TextColumn(alignment="right"),
            "What would fill or save it": st.column_config.TextColumn(width="large"),
        },
    )
    if len(badly) > SHOWN:
        st.caption(f"And {counted(len(badly) - SHOWN, 'more load')}.")
    st.caption(
        plain("An order that is smaller, or larger, can be put up on Figures: its price is shown first.")
    )


def _of_depot(one: Vehicles, unit: str, mark: str) -> dict[str, str]:
    return {
        "Depot": one.depot,
        f"Send, {unit}": number(one.quantity, mark),
        "Loads": f"{one.loads:,}",
        "Full": f"{one.full:,}",
        "Filled": "" if one.fill is None else f"{number(100 * one.fill, mark, 0)} %",
        "May leave": "" if one.most is None else f"{one.most:,}",
        "Free": "" if one.left is None else f"{one.left:,}",
    }


def _of_load(plan: Plan, one: BadlyFilled, mark: str) -> dict[str, str]:
    rules, shipment = plan.week.rules, one.shipment
    return {
        "Depot": shipment.depot,
        "Customer": shipment.customer,
        "Haulier": shipment.haulier or "",
        "Loads": one.fill.words(),
        "Paid for empty room": money(one.idle, rules.currency, mark) if one.idle else "",
        "What would fill or save it": one.words(
            rules.unit, lambda n: number(n, mark), lambda n: money(n, rules.currency, mark)
        ),
    }
