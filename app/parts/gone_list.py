"""What has gone: entered as it left, at the rate valid on its day; no later plan moves or reprices it."""

from datetime import date
from decimal import Decimal

import pandas as pd
import streamlit as st

from app.parts.gone_planned import gone_as_planned
from app.parts.words import amount, number, plain
from app.session import Desk
from engine.changes import Add, Remove, Together
from engine.columns import SEND
from engine.figures import Gone
from engine.intake.fields import read_field
from engine.planning.gone import cost_of, hauliers_of, paid_per_unit, unused_name
from engine.planning.plan import Plan


def gone_list(state: Desk, plan: Plan) -> None:
    """The quantities that have gone, a form to enter one more, and a way to take a wrong one out."""
    st.caption(
        "Ordered and Available state the whole week: what has gone counts against both, and limits and holds "
        "count it too."
    )
    _table(state)
    if not state.only_reads:
        gone_as_planned(state, plan)
        with st.expander("Enter one load by hand, planned or not"):
            _form(state, plan)


def _table(state: Desk) -> None:
    gone = list(state.week.gone.values())
    if not gone:
        st.caption("Nothing has gone yet.")
        return
    mark, rules = state.decimal_mark, state.week.rules
    right = st.column_config.TextColumn
    chosen = st.dataframe(
        pd.DataFrame(
            {
                "Load": [one.name for one in gone],
                "Day": [one.day.isoformat() if one.day else "" for one in gone],
                "Depot": [one.depot for one in gone],
                "Customer": [one.customer for one in gone],
                "Haulier": [one.haulier or "" for one in gone],
                "Quantity": [number(one.quantity, mark) for one in gone],
                "Rate": [number(one.rate, mark) for one in gone],
                "Cost": [amount(cost_of(one), rules.currency, mark) for one in gone],
            }
        ),
        key=f"gone-{state.generation}",
        hide_index=True,
        on_select="rerun",
        selection_mode="multi-row",
        column_config={
            name: right(f"{name}, {unit}", alignment="right")
            for name, unit in (("Quantity", rules.unit), ("Rate", rules.currency), ("Cost", rules.currency))
        },
    )
    if state.only_reads:
        return
    rows = chosen["selection"]["rows"] if chosen else []
    wrong = tuple(Remove("gone", gone[row].name) for row in rows if row < len(gone))
    if st.button("Take the chosen out: they have not gone", disabled=not wrong, key="not-gone"):
        state.propose(wrong[0] if len(wrong) == 1 else Together(wrong))
        st.rerun()


def _form(state: Desk, plan: Plan) -> None:
    week = state.week
    left, middle, right = st.columns(3)
    depot = left.selectbox("From depot", list(week.depots), key="gone-depot")
    customer = middle.selectbox("To customer", list(week.customers), key="gone-customer")
    hauliers = hauliers_of(week, depot, customer) if depot and customer else []
    haulier = right.selectbox(
        "By haulier", hauliers, key="gone-haulier", format_func=lambda name: name or "(no haulier named)"
    )
    left, middle, right = st.columns(3)
    made = f"gone-quantity-{len(week.gone)}"  # blank again once a load is recorded, so that none is twice
    text = left.text_input(f"Quantity, {week.rules.unit}", key=made)
    day = middle.date_input("Day it left", value=None, key="gone-day")
    load = right.text_input(
        "Load or note number", key=f"gone-load-{len(week.gone)}", placeholder=unused_name(week)
    )
    if not hauliers:
        st.caption("No rate is quoted on this lane: give one on Figures first.")
        return
    on = day if isinstance(day, date) else None
    much, finding = read_field(SEND, text, state.style)
    rate = paid_per_unit(week, str(depot), str(customer), haulier, on, much or Decimal(0))
    if rate is None and much:
        st.caption("No rate was valid on this lane that day: give one on Figures first.")
        return
    if rate is not None:
        said = f"{number(rate, state.decimal_mark)} {plain(plan.week.rules.currency)}"
        st.caption(f"Paid per unit, surcharge and whole loads included: {said}")
    if not st.button("Record as gone", key="gone-add"):
        return
    if much is None or rate is None:
        said = f"{finding.message} {finding.mend}" if finding else "Type the quantity that left."
        st.error(plain(said))
        return
    name = load.strip() or unused_name(week)
    state.propose(Add(Gone(name, str(depot), str(customer), much, rate, haulier, on)))
    st.rerun()
