"""Compare: the week beside the usual way, last week, its variants, and what could befall it."""

from collections.abc import Callable

import streamlit as st

from app.keeping import VIEW
from app.parts.compare_bridge import bridge_view
from app.parts.compare_summary import summary_view
from app.parts.compare_usual import usual_view
from app.parts.compare_variants import variants_view
from app.parts.compare_weeks import weeks_view
from app.parts.findings_panel import findings_panel
from app.parts.frontier_view import frontier_view
from app.parts.nothing_yet import nothing_yet
from app.parts.stress_view import stress_view
from app.parts.words import plain
from app.preparing import prepared
from app.session import Desk, desk
from engine.exact import TooLarge
from engine.planning.plan import Plan
from engine.records import Missing, NotSaved

VIEWS: dict[str, tuple[str, Callable[[Desk, Plan], None]]] = {
    "summary": ("This week", summary_view),
    "usual": ("Usual plan", usual_view),
    "variants": ("Variants", variants_view),
    "bridge": ("Any two plans", bridge_view),
    "weeks": ("Over time", weeks_view),
    "stress": ("Stress", stress_view),
    "frontier": ("Cost and emissions", frontier_view),
}

LAST = "compare-last"  # the view that the session saw last


def _seen_last() -> str:
    """The view to begin with: the one seen last, else the one in the address, else the manager's."""
    found: str = st.session_state.get(LAST, st.query_params.get(VIEW, ""))
    return found if found in VIEWS else next(iter(VIEWS))


def _remember(view: str) -> None:
    st.session_state[LAST] = view
    if st.query_params.get(VIEW) != view:
        st.query_params[VIEW] = view


state = desk()
st.title("Compare")
if state.message:
    kind, text = state.message
    (st.error if kind == "error" else st.success)(plain(text))
    state.message = None
if state.week.is_empty:
    nothing_yet(state, "There is no week to compare yet.")
else:
    with prepared():
        plan = state.planned()
    if plan is None:
        st.error("This week cannot be planned as it stands, so there is nothing to compare.")
        findings_panel(state.stopped, key="stopped")
    else:
        first = _seen_last()
        view = st.segmented_control(
            "View", list(VIEWS), default=first, required=True, key="compare-view",
            format_func=lambda name: VIEWS[name][0], label_visibility="collapsed",
        ) or first  # fmt: skip
        _remember(view)
        try:
            with st.spinner("Comparing …", show_time=True):
                VIEWS[view][1](state, plan)
        except (TooLarge, NotSaved, Missing) as failure:
            st.error(plain(str(failure)))
