"""The cost of a plan in one line: freight first, charges apart."""

from decimal import Decimal

import streamlit as st

from app.parts.words import counted, money, number, plain
from engine.planning.fills import loads_total
from engine.planning.plan import Plan
from engine.planning.totals import totals

NAMED = 6


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
        f"{counted(len(plan.shipments), 'rate')} used on {counted(sums.lanes, 'lane')}{_vehicles(plan)}. "
        f"Charges beside freight: short {money(plan.short_cost, rules.currency, mark)}, "
        f"unsent {money(plan.unsent_cost, rules.currency, mark)}{_opened(plan, mark)}. "
        + ("" if plan.whole else "Proved in whole numbers: no other plan that serves these aims costs less.")
    )
    left = [
        _named("Short", {one.customer: one.quantity for one in plan.short}, mark),
        _named("Unsent", {one.depot: one.quantity for one in plan.unsent}, mark),
    ]
    if any(left):
        st.markdown(" ".join(one for one in left if one))


def _named(word: str, quantities: dict[str, Decimal], mark: str) -> str:
    """Who goes short, or what stays where: the most first, in Markdown."""
    names = sorted((name for name in quantities if quantities[name]), key=lambda name: -quantities[name])
    if not names:
        return ""
    said = ", ".join(f"{plain(name)} ({number(quantities[name], mark)})" for name in names[:NAMED])
    more = f" and {counted(len(names) - NAMED, 'more', 'more')}" if len(names) > NAMED else ""
    return f"**{word}:** {said}{more}."


def _opened(plan: Plan, mark: str) -> str:
    """What opening depots costs, where any does."""
    if not plan.openings:
        return ""
    return f", opening {money(plan.opening_cost, plan.week.rules.currency, mark)}"


def _vehicles(plan: Plan) -> str:
    """How many vehicles that takes, where a load size says so."""
    loads = loads_total(plan)
    return "" if loads is None else f" in {counted(loads, 'load')}"
