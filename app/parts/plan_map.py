"""A plan on the map: its depots, customers and flows handed to the map widget, and the same as a table."""

from decimal import Decimal
from functools import partial

import streamlit as st

from app.parts.flow_map import MapFlow, MapPoint, flow_map, flows_table, picked_on_map
from app.parts.map_choice import chosen_lanes, list_follows_map, map_follows_list
from app.parts.reasons_asked import asked
from app.parts.words import number
from app.session import Desk
from engine.planning.plan import Plan
from engine.planning.totals import flows

KEY = "plan-map"
DRAWN = "plan-map-drawn"


def follow_the_map(plan: Plan) -> None:
    """Before the list is drawn: let it show what has just been picked on the map."""
    lines = st.session_state.get(DRAWN)
    list_follows_map(picked_on_map(points_of(plan), lines or (), KEY) if lines else None)


def plan_map(state: Desk, plan: Plan, view: str | None) -> None:
    """The map, and beneath it the table of what it shows; `view` is the list beside it."""
    unit, shown = plan.week.rules.unit, partial(number, mark=state.decimal_mark)
    points = points_of(plan)
    lines = chosen_lanes(state, plan, lines_of(plan))
    st.session_state[DRAWN] = lines
    picked = flow_map(points, lines, unit, key=KEY, instead=map_follows_list(view), number=shown)
    if picked is not None:
        lines = [line for line in lines if picked.holds(line)]
    with st.expander("The map as a table"):
        flows_table(points, lines, unit, key="plan-map-table", number=shown)


def points_of(plan: Plan) -> list[MapPoint]:
    """Depots and customers as the map takes them."""

    def work() -> list[MapPoint]:
        week, short = plan.week, {one.customer: one.quantity for one in plan.short}
        depots = [
            MapPoint("depot", d.name, d.latitude, d.longitude, d.available) for d in week.depots.values()
        ]
        customers = [
            MapPoint("customer", c.name, c.latitude, c.longitude, c.ordered, short.get(c.name, Decimal(0)))
            for c in week.customers.values()
        ]
        return depots + customers

    return asked(plan, ("map points",), work)


def lines_of(plan: Plan) -> list[MapFlow]:
    """The used lanes as the map takes them."""

    def work() -> list[MapFlow]:
        return [MapFlow(flow.depot, flow.customer, flow.quantity) for flow in flows(plan)]

    return asked(plan, ("map lines",), work)
