"""Which lanes of a plan the map shows, and how the map and the list beside it follow each other."""

import streamlit as st

from app.parts.flow_map import Focus, MapFlow
from app.parts.reasons_asked import asked
from app.parts.shipments_grid import EVERY
from app.session import Desk
from engine.planning.differences import difference
from engine.planning.plan import Plan
from engine.planning.totals import dearest_lanes

FOLLOWED = "map-followed"
ALL, DEAREST, CHANGED, SHORT = "all", "dearest", "changed", "short"


def list_follows_map(picked: Focus | None) -> None:
    """Sets the list's view and filter to what was picked on the map; to be called before either is drawn."""
    if picked == st.session_state.get(FOLLOWED):
        return
    st.session_state[FOLLOWED] = picked
    if picked is None:
        st.session_state["shown-depot"] = st.session_state["shown-customer"] = EVERY
    elif picked.depot is not None:
        st.session_state["plan-view"], st.session_state["shown-depot"] = "depot", picked.depot
    elif len(picked.customers) == 1:
        st.session_state["plan-view"], st.session_state["shown-customer"] = "customer", picked.customers[0]


def map_follows_list(view: str | None) -> Focus | None:
    """What stands out on the map because the list shows one depot or customer that was not picked on it."""
    name, picked = st.session_state.get(f"shown-{view}", EVERY), st.session_state.get(FOLLOWED)
    if name == EVERY or (picked is not None and name in (picked.depot, *picked.customers)):
        return None
    return Focus(depot=name) if view == "depot" else Focus(customers=(name,))


def chosen_lanes(state: Desk, plan: Plan, lines: list[MapFlow]) -> list[MapFlow]:
    """The lanes that are wanted on the map: all, the dearest, those changed, those to who goes short."""
    names = {ALL: "All lanes on the map", DEAREST: "The dearest: half of the freight"}
    if state.issued is not None:
        names[CHANGED] = f"Changed since plan {state.issued.number}"
    if plan.short:
        names[SHORT] = "To customers who go short"
    choice = st.selectbox(
        "Lanes on the map", list(names), format_func=names.__getitem__, key="map-lanes",
        label_visibility="collapsed",
    )  # fmt: skip
    if choice == DEAREST:
        kept = asked(plan, ("dearest lanes",), lambda: dearest_lanes(plan))
        return [line for line in lines if (line.depot, line.customer) in kept]
    if choice == CHANGED and state.issued is not None:
        rows = difference(state.issued, plan).rows
        changed = {(row.key.depot, row.key.customer) for row in rows}
        return [line for line in lines if (line.depot, line.customer) in changed]
    if choice == SHORT:
        short = {one.customer for one in plan.short}
        return [line for line in lines if line.customer in short]
    return lines
