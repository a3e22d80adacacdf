"""What a page shows while no week is open."""

from pathlib import Path

import streamlit as st

from app.rights import person

PAGES = Path(__file__).parents[1] / "pages"


def nothing_yet(sentence: str) -> None:
    """Say that there is no week, and lead to where one is opened."""
    if not person().may_change:
        st.info(f"{sentence} Open a week to read on *Weeks*.")
        st.page_link(PAGES / "weeks.py", label="Go to Weeks")
        return
    st.info(f"{sentence} Open your spreadsheets, or the sample week, on *Figures*.")
    st.page_link(PAGES / "figures.py", label="Go to Figures")
