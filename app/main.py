"""The desk in the browser: its pages, and what stands beside all of them."""

import sys
from pathlib import Path

import streamlit as st

import sample_data
from app.parts.words import counted, plain
from app.session import Desk, desk, read_files

HERE = Path(__file__).parent


def opened_at_start(state: Desk) -> None:
    """The week named when the desk was started, once a session."""
    if state.started:
        return
    files = [Path(argument) for argument in sys.argv[1:] if argument != "--sample"]
    if "--sample" in sys.argv[1:]:
        files = [sample_data.path("small_week.xlsx")]
    if files:
        reading, findings = read_files(files)
        if reading is None:
            state.message = ("error", findings[0].message)
        else:
            state.open(reading)
    state.started = True


def toolbar(state: Desk) -> None:
    """The week, undo and redo: the same above every page."""
    if state.week.is_empty:
        return
    made = len(state.history.entries)
    with st.container(horizontal=True, vertical_alignment="center", gap="small", key="toolbar"):
        st.markdown(f"**{plain(state.week.rules.week)}**", width="content")
        st.caption(
            f"{counted(len(state.week.depots), 'depot')}, {counted(len(state.week.customers), 'customer')}, "
            f"{counted(len(state.week.rates), 'rate')} · "
            + (f"{counted(made, 'change')} since it was opened" if made else "as it was opened")
        )
        if st.button(
            "↶ Undo", disabled=state.history.can_undo is None, key="undo", help="Take the last change back"
        ):
            state.undo()
            st.rerun()
        if st.button("↷ Redo", disabled=state.history.can_redo is None, key="redo", help="Make it again"):
            state.redo()
            st.rerun()


def main() -> None:
    st.set_page_config(page_title="Hithe", page_icon="⚓", layout="wide", initial_sidebar_state="collapsed")
    st.html(HERE / "desk.css")
    state = desk()
    opened_at_start(state)
    page = st.navigation(
        [
            st.Page(HERE / "pages" / "figures.py", title="Figures", default=True),
            st.Page(HERE / "pages" / "plan.py", title="Plan"),
            st.Page(HERE / "pages" / "handover.py", title="Hand over"),
        ],
        position="top",
    )
    toolbar(state)
    page.run()


main()
