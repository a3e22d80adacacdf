"""Weeks: what is in the records, what was changed, what it added up to, and who else may look."""

from urllib.parse import urlsplit

import streamlit as st

from app.keeping import READ, WEEK
from app.parts.changes_list import changes_list
from app.parts.depot_page import DEPOT
from app.parts.totals_chart import totals_chart
from app.parts.weeks_list import weeks_list
from app.parts.words import plain
from app.rights import person
from app.session import Desk, desk
from engine.records import Missing, NotSaved
from engine.records.depot_links import depot_link
from engine.week import Refused


def together(state: Desk) -> None:
    """Addresses to hand on, and the name that changes are made under."""
    me = person()
    if me.who:
        st.markdown(f"Your changes carry the name you signed in with: {plain(me.who)}")
    else:
        name = st.text_input("Your name, beside your changes", value=state.who, key="who", width=320)
        if name.strip() and name.strip() != state.who:
            state.who = name.strip()
            st.rerun()
    if state.kept is None:
        st.caption("Open a week first: then its addresses stand here.")
        return
    here = urlsplit(st.context.url or "")
    desk_address = f"{here.scheme}://{here.netloc}/" if here.netloc else "/"
    st.markdown("Whoever has this address can change this week:")
    st.code(f"{desk_address}?{WEEK}={state.kept.week_id}", language=None)
    st.markdown("Whoever has this one can look at the plan and take its files, and change nothing:")
    st.code(f"{desk_address}?{READ}={state.kept.read_id}", language=None)
    st.markdown("And a depot sees its loading list of the plan issued last, without money, at")
    depot = st.selectbox("Depot", list(state.week.depots), key="link-depot", width=320)
    if depot is not None:
        st.code(f"{desk_address}?{DEPOT}={depot_link(state.kept.week_id, depot)}", language=None)


state = desk()
st.title("Weeks")
if state.message:
    kind, text = state.message
    (st.error if kind == "error" else st.success)(plain(text))
    state.message = None
VIEWS = {"weeks": "Weeks", "changes": "Changes", "totals": "Totals", "together": "Together"}
if not person().may_change:
    VIEWS = {name: VIEWS[name] for name in ("weeks", "totals")}
view = st.segmented_control(
    "View", list(VIEWS), default="weeks", format_func=VIEWS.__getitem__, required=True,
    label_visibility="collapsed", key="weeks-view",
)  # fmt: skip
try:
    if view == "changes":
        changes_list(state)
    elif view == "totals":
        totals_chart(state.decimal_mark)
    elif view == "together":
        together(state)
    else:
        weeks_list(state)
except (NotSaved, Missing, Refused) as failure:
    st.error(plain(str(failure)))
