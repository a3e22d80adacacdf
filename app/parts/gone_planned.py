"""What left as it was planned: shipments ticked, recorded as gone in one go."""

from datetime import date

import pandas as pd
import streamlit as st

from app.parts.words import number, plain
from app.session import Desk
from engine.planning.gone_shipped import NoRateThatDay, gone_as_shipped
from engine.planning.lanes import lanes
from engine.planning.plan import Plan

EVERY = "All"
MOST_ROWS = 2_000


def gone_as_planned(state: Desk, plan: Plan) -> None:
    """The shipments still to go, by depot; the ticked ones are put up as gone, whole."""
    st.markdown("**Tick what left as planned**")
    left, right = st.columns(2)
    depot = left.selectbox("Depot", [EVERY, *plan.week.depots], key="gone-planned-depot")
    day = right.date_input("Day it left", value=None, key="gone-planned-day")
    rows = lanes(plan, depot=None if depot in (EVERY, None) else depot)[:MOST_ROWS]
    if not rows:
        st.caption("Nothing is left to go.")
        return
    unit, mark = plan.week.rules.unit, state.decimal_mark
    chosen = st.dataframe(
        pd.DataFrame(
            {
                "Depot": [row.key.depot for row in rows],
                "Customer": [row.key.customer for row in rows],
                "Haulier": [row.key.haulier or "" for row in rows],
                "Send": [number(row.quantity, mark) for row in rows],
            }
        ),
        key=f"gone-planned-{state.generation}-{depot}",
        hide_index=True,
        height=min(300, 38 + 35 * len(rows)),
        on_select="rerun",
        selection_mode="multi-row",
        column_config={
            "Send": st.column_config.TextColumn(f"Send, {unit}", alignment="right"),
        },
        alt="Shipments that are still to go",
    )
    ticked = [rows[row].key for row in (chosen["selection"]["rows"] if chosen else []) if row < len(rows)]
    if st.button("Record the ticked as gone", disabled=not ticked, key="gone-planned-add"):
        try:
            change = gone_as_shipped(plan, ticked, day if isinstance(day, date) else None)
        except NoRateThatDay as missing:
            st.error(plain(str(missing)))
            return
        state.propose(change)
        st.rerun()
