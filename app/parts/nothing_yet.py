"""What a page shows while no week is open."""

from pathlib import Path

import streamlit as st

FIGURES = Path(__file__).parents[1] / "pages" / "figures.py"


def nothing_yet(sentence: str) -> None:
    """Say that there is no week, and lead to where one is opened."""
    st.info(f"{sentence} Open your spreadsheets, or the sample week, on *Figures*.")
    st.page_link(FIGURES, label="Go to Figures")
