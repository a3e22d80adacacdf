"""A plan on the map: its depots, customers and flows handed to the map widget, and the same as a table."""

from decimal import Decimal
from functools import partial

import streamlit as st

from app.parts.flow_map import MapFlow, MapPoint, flow_map, flows_table
from app.parts.words import number
from engine.planning.plan import Plan
from engine.planning.totals import flows


def plan_map(plan: Plan, mark: str) -> None:
    """The map, and beneath it the table of what it shows."""
    rules, short = plan.week.rules, {one.customer: one.quantity for one in plan.short}
    points = [
        MapPoint("depot", d.name, d.latitude, d.longitude, d.available) for d in plan.week.depots.values()
    ]
    points += [
        MapPoint("customer", c.name, c.latitude, c.longitude, c.ordered, short.get(c.name, Decimal(0)))
        for c in plan.week.customers.values()
    ]
    lines = [MapFlow(flow.depot, flow.customer, flow.quantity) for flow in flows(plan)]
    shown = partial(number, mark=mark)
    picked = flow_map(points, lines, rules.unit, key="plan-map", number=shown)
    if picked is not None:
        lines = [line for line in lines if picked.holds(line)]
    with st.expander("The map as a table"):
        flows_table(points, lines, rules.unit, key="plan-map-table", number=shown)
