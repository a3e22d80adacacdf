"""What a page shows while no week is open."""

from pathlib import Path

import streamlit as st

from app.parts.sample import open_sample
from app.rights import person
from app.session import Desk

PAGES = Path(__file__).parents[1] / "pages"


def nothing_yet(state: Desk, sentence: str) -> None:
    """Say that there is no week, and offer the ways to one."""
    if not person().may_change:
        st.info(f"{sentence} Open a week to read on *Weeks*.")
        st.page_link(PAGES / "weeks.py", label="Go to Weeks")
        return
    st.markdown(f"{sentence} Open your own spreadsheets on *Figures*, or look round with the sample week.")
    with st.container(horizontal=True, vertical_alignment="center"):
        if st.button("Open the sample week", type="primary"):
            open_sample(state)
            st.rerun()
        st.page_link(PAGES / "figures.py", label="Go to Figures")
        st.page_link(PAGES / "how_it_works.py", label="How it works")
