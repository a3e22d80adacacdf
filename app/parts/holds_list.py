"""The holds of a week with what each costs today; those chosen are lifted as one act."""

import pandas as pd
import streamlit as st

from app.parts.words import amount, counted, number
from app.session import Desk
from engine.planning.holds import PricedHold, all_lifted, priced_holds
from engine.planning.plan import Plan
from engine.reasons.ground import why_withheld

MOST_PRICED = 60


def holds_list(state: Desk, plan: Plan) -> None:
    """A table of holds with their price, and a button to lift those that are chosen."""
    holds = plan.week.holds
    if not holds:
        st.caption("Nothing is held." if state.only_reads else "Nothing is held. Type a quantity to hold it.")
        return
    if why_withheld(plan):
        st.caption("Holds have no price of their own in this plan: lift one, and the price is shown before.")
        priced = tuple(PricedHold(key, hold, None, None) for key, hold in holds.items())
    elif len(holds) > MOST_PRICED:
        st.caption(f"{counted(len(holds), 'hold')}: too many to price one by one.")
        priced = tuple(PricedHold(key, hold, None, None) for key, hold in holds.items())
    else:
        priced = priced_holds(plan)
    mark, currency, unit = state.decimal_mark, plan.week.rules.currency, plan.week.rules.unit
    table = pd.DataFrame(
        {
            "Depot": [one.key.depot for one in priced],
            "Customer": [one.key.customer for one in priced],
            "Haulier": [one.key.haulier or "" for one in priced],
            "Held": [number(one.hold.quantity, mark) for one in priced],
            "Costs today": [
                "" if one.freight is None else amount(one.freight, currency, mark) for one in priced
            ],
            "Reason": [one.hold.reason for one in priced],
        }
    )
    right = st.column_config.TextColumn
    chosen = st.dataframe(
        table,
        key=f"holds-{state.generation}",
        hide_index=True,
        on_select="rerun",
        selection_mode="multi-row",
        column_config={
            "Held": right(f"Held, {unit}", alignment="right"),
            "Costs today": right(
                f"Costs today, {currency}",
                alignment="right",
                help="What freight would fall by if this hold alone went",
            ),
        },
    )
    if state.only_reads:
        return
    rows = chosen["selection"]["rows"] if chosen else []
    lift = all_lifted(priced[row].key for row in rows if row < len(priced))
    if st.button("Lift the chosen holds", disabled=lift is None, key="lift-chosen") and lift is not None:
        state.propose(lift)
        st.rerun()
