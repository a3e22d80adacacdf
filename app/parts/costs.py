"""The cost of a plan in one line: freight first, charges apart."""

import streamlit as st

from app.parts.words import counted, money, number
from engine.planning.plan import Plan
from engine.planning.totals import totals


def cost_line(plan: Plan, mark: str) -> None:
    """Freight payable, what is delivered, short and unsent, and the charges that are not freight."""
    rules, sums = plan.week.rules, totals(plan)
    freight, delivered, short, unsent = st.columns(4)
    freight.metric(
        f"Freight payable, {rules.currency}",
        money(plan.freight_payable, rules.currency, mark)[: -len(rules.currency) - 1],
    )
    delivered.metric(
        f"Delivered, {rules.unit}", number(sums.delivered, mark), help="Of what was ordered this week"
    )
    short.metric(f"Short, {rules.unit}", number(sums.short, mark))
    unsent.metric(f"Unsent, {rules.unit}", number(sums.unsent, mark))
    st.caption(
        f"{counted(len(plan.shipments), 'rate')} used on {counted(sums.lanes, 'lane')}. "
        f"Charges beside freight: short {money(plan.short_cost, rules.currency, mark)}, "
        f"unsent {money(plan.unsent_cost, rules.currency, mark)}. "
        "Proved in whole numbers: no other plan that serves these aims costs less."
    )
