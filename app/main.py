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


def sidebar(state: Desk) -> None:
    """The week, undo and redo: the same on every page."""
    with st.sidebar:
        if state.week.is_empty:
            st.caption("No week is open yet.")
            return
        rules = state.week.rules
        st.markdown(f"**{plain(rules.week)}**")
        st.caption(
            f"{counted(len(state.week.depots), 'depot')}, {counted(len(state.week.customers), 'customer')}, "
            f"{counted(len(state.week.rates), 'rate')}"
        )
        undo, redo = st.columns(2)
        if undo.button(
            "Undo", disabled=state.history.can_undo is None, key="undo", width="stretch", shortcut="Ctrl+Alt+Z"
        ):
            state.undo()
            st.rerun()
        if redo.button(
            "Redo", disabled=state.history.can_redo is None, key="redo", width="stretch", shortcut="Ctrl+Alt+Y"
        ):
            state.redo()
            st.rerun()
        made = len(state.history.entries)
        st.caption(f"{counted(made, 'change')} since the figures were opened" if made else "No changes yet")


def main() -> None:
    st.set_page_config(page_title="Hithe", page_icon="⚓", layout="wide")
    state = desk()
    opened_at_start(state)
    page = st.navigation(
        [
            st.Page(HERE / "pages" / "figures.py", title="Figures", default=True),
            st.Page(HERE / "pages" / "plan.py", title="Plan"),
            st.Page(HERE / "pages" / "handover.py", title="Hand over"),
        ]
    )
    sidebar(state)
    page.run()


main()
