"""The weeks in the records: search, open, copy as next week, archive."""

import streamlit as st

from app.access import copied, listed, opened, put_away
from app.keeping import keep_up, show
from app.parts.words import counted, plain
from app.rights import person
from app.session import Desk
from engine.records import Listed
from engine.records.weeks import DESK

MOST = 30


def weeks_list(state: Desk) -> None:
    """One line a week, the latest first."""
    if not person().may_list:
        st.info("On this desk a week opens by its address alone. Keep the address of each week you work on.")
        return
    left, right = st.columns([3, 1], vertical_alignment="bottom")
    search = left.text_input("Search", key="search", placeholder="week, depot or customer")
    archived = right.toggle("Archived", key="archived")
    found = listed(search, archived, MOST + 1)
    if not found:
        st.caption("No week is archived." if archived else "There is no such week here yet.")
    for week in found[:MOST]:
        _week(state, week, archived)
    if len(found) > MOST:
        st.caption(f"Only the latest {MOST} are shown: search for earlier ones.")


def _week(state: Desk, week: Listed, archived: bool) -> None:
    here = state.kept is not None and state.kept.week_id == week.id
    with st.container(horizontal=True, vertical_alignment="center", key=f"week-{week.id}"):
        whose = "" if week.desk in (DESK, person().home) else f" · {plain(week.desk)}"
        st.markdown(f"**{plain(week.name)}**{whose}" + (" · on the desk" if here else ""), width=260)
        st.caption(
            f"opened {week.created:%d %b %Y %H:%M} · {counted(week.version, 'change')} · "
            f"last changed {week.changed:%d %b %H:%M} UTC",
            width="stretch",
        )
        if st.button("Open", key=f"open-{week.id}", disabled=here):
            show(state, opened(week.id))
            st.rerun()
        if not person().may_change:
            return
        if st.button("Copy as next week", key=f"copy-{week.id}"):
            st.session_state["copying"] = week.id
        if st.button("Put back" if archived else "Archive", key=f"archive-{week.id}"):
            put_away(week.id, not archived)
            st.rerun()
    if st.session_state.get("copying") == week.id:
        _copying(state, week)


def _copying(state: Desk, week: Listed) -> None:
    """What the new week is called; holds and gone goods stay with the old one."""
    with st.form(f"copying-{week.id}"):
        name = st.text_input("Name of the new week", value=f"After {week.name}", key=f"name-{week.id}")
        st.caption("Depots, customers, orders, rates and rules are copied; holds and gone goods are not.")
        if st.form_submit_button("Copy and open", type="primary") and name.strip():
            del st.session_state["copying"]
            show(state, copied(week.id, name.strip()))
            keep_up(state)
            st.rerun()
