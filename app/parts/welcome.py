"""What somebody sees who opens the desk for the first time: what it does, and the shortest way to a plan."""

from pathlib import Path

import streamlit as st

from app.parts.sample import open_sample
from app.session import Desk

PAGES = Path(__file__).parents[1] / "pages"

STEPS = (
    (
        "1 · Figures",
        "Give it the week's spreadsheets: what depots can send, what customers ordered, what each haulier "
        "charges on each lane. It reads them as they are and asks about what looks wrong, cell by cell.",
    ),
    (
        "2 · Plan",
        "It works out **who sends how much to whom, by which haulier, at the least freight cost**, and "
        "proves that no other plan costs less. Adjust it by hand: each change shows its price before "
        "it is made.",
    ),
    (
        "3 · Hand over",
        "Loading lists without money for the depots, a workbook that finance can check in its own "
        "spreadsheet, and the reasons and comparisons that a manager asks for.",
    ),
)


def welcome(state: Desk) -> None:
    """Three steps, and one click to the plan of the sample week."""
    for column, (heading, text) in zip(st.columns(3, gap="medium"), STEPS, strict=True):
        with column.container(border=True, height="stretch"):
            st.markdown(f"**{heading}**\n\n{text}")
    with st.container(horizontal=True, vertical_alignment="center"):
        if st.button("See the plan of the sample week", type="primary"):
            open_sample(state)
            if state.message is None:
                st.switch_page(PAGES / "plan.py")
            st.rerun()
        st.page_link(PAGES / "how_it_works.py", label="How it works, in five minutes")
