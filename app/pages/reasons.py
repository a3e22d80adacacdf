"""Reasons: every number of the plan can be asked why, and whom it would move if it were another."""

import streamlit as st

from app.parts.findings_panel import findings_panel
from app.parts.nothing_yet import nothing_yet
from app.parts.reasons_curve import curve_view
from app.parts.reasons_rates import rates_view
from app.parts.reasons_swaps import swaps_view
from app.parts.reasons_values import values_view
from app.parts.reasons_why import why_view
from app.parts.words import plain
from app.session import desk
from engine.exact import TooLarge
from engine.reasons.ground import why_withheld

VIEWS = {
    "rates": ("Rates", rates_view),
    "why": ("Why this lane?", why_view),
    "values": ("One more, one less", values_view),
    "curve": ("Curve", curve_view),
    "swaps": ("Swaps", swaps_view),
}

state = desk()
st.title("Reasons")
if state.week.is_empty:
    nothing_yet(state, "There is no plan to ask about yet.")
else:
    plan = state.planned()
    if plan is None:
        st.error("This week cannot be planned as it stands, so there is nothing to ask about.")
        findings_panel(state.stopped, key="stopped")
    elif because := why_withheld(plan):
        st.info(plain(because))
    else:
        st.caption(
            "Each answer compares this plan with the best plan of the changed week, exactly. "
            "Nothing here changes the week."
        )
        view = st.segmented_control(
            "View", list(VIEWS), default="rates", required=True, key="reasons-view",
            format_func=lambda name: VIEWS[name][0], label_visibility="collapsed",
        ) or "rates"  # fmt: skip
        try:
            with st.spinner("Working it out …", show_time=True):
                VIEWS[view][1](state, plan)
        except TooLarge as too_large:
            st.error(plain(str(too_large)))
