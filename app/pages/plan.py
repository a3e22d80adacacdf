"""The plan: what it costs, who sends what to whom, and the map; a quantity typed here becomes a hold."""

from pathlib import Path

import streamlit as st

from app.access import answers
from app.parts.costs import cost_line
from app.parts.findings_panel import findings_panel
from app.parts.gone_list import gone_list
from app.parts.holds_list import holds_list
from app.parts.loads_panel import LOADS, loads_panel, loads_view
from app.parts.matrix_grid import matrix_grid
from app.parts.nothing_yet import nothing_yet
from app.parts.plan_map import follow_the_map, plan_map
from app.parts.proposal import proposal
from app.parts.search_panel import search_panel
from app.parts.shipments_grid import shipments_grid
from app.parts.steady import steady
from app.parts.words import plain
from app.preparing import prepared
from app.session import desk

PAGES = Path(__file__).parent

state = desk()
st.title("Plan")
if state.week.is_empty:
    nothing_yet(state, "There is no week to plan yet.")
else:
    with prepared():
        plan = state.planned()
    if state.message:
        kind, text = state.message
        (st.error if kind == "error" else st.success)(plain(text))
        state.message = None
    if plan is None:
        undo = ", or undo the last change" if state.history.entries else ""
        st.error(f"This week cannot be planned as it stands. Mend what is listed here{undo}.")
        if not state.only_reads:
            st.page_link(PAGES / "figures.py", label="Mend it on Figures")
        findings_panel(state.stopped, key="stopped")
    else:
        cost_line(plan, state.decimal_mark)
        put_up = st.container(
            key="put-up"
        )  # filled last: what is typed into the grid below is shown in the same run
        if state.only_reads:
            st.caption("🔒 This link is for reading only: the grids show the plan and take no edits.")
        search_panel(state, plan)
        follow_the_map(plan)
        grid, chart = st.columns([13, 9], gap="medium")
        with grid:
            views = {
                "depot": "By depot",
                "customer": "By customer",
                "matrix": "Matrix",
                "holds": "Holds",
                "gone": "Gone",
                "steady": "Fewer changes",
                **loads_view(plan),
            }
            view = st.segmented_control(
                "View", list(views), default="depot", format_func=views.__getitem__, required=True,
                label_visibility="collapsed", key="plan-view",
            )  # fmt: skip
            if view == "matrix":
                matrix_grid(state, plan)
            elif view == "holds":
                holds_list(state, plan)
            elif view == "gone":
                gone_list(state, plan)
            elif view == "steady":
                steady(state, plan)
            elif view == LOADS:
                loads_panel(state, plan)
            else:
                shipments_grid(state, plan, view or "depot")
        with chart:
            plan_map(state, plan, view)
        findings_panel(plan.findings, key="plan", known=answers())
        with put_up:
            proposal(state)
