"""A haulier raises its rates: all of them by a percentage, put up as one change with its price."""

from decimal import Decimal

import streamlit as st

from app.parts.words import counted, plain
from app.session import Desk
from engine.columns import Column, Kind
from engine.intake.fields import read_field
from engine.planning.raised import haulier_rates, raised

_PERCENT = Column("Change in %", "percent", Kind.RATE, "")
MOST_ROWS = 20_000


def raise_rates(state: Desk) -> None:
    """Which haulier, by how much; nothing where no haulier has a name."""
    names = list(state.week.rates.flat.haulier_names)
    if not names:
        return
    with (
        st.form("raise-rates", border=False),
        st.container(horizontal=True, vertical_alignment="bottom"),
    ):
        haulier = st.selectbox("All rates of", names, key="raise-haulier", width=220)
        text = st.text_input("change by, %", key="raise-percent", placeholder="4.5 or -2", width=140)
        asked = st.form_submit_button("Put it up", key="raise-go")
    if asked and haulier is not None:
        _put_up(state, haulier, text)


def _put_up(state: Desk, haulier: str, text: str) -> None:
    percent, finding = read_field(_PERCENT, text.strip().removesuffix("%"), state.style)
    if not isinstance(percent, Decimal) or not percent or percent <= -100:
        st.error(plain(f"{finding.message} {finding.mend}" if finding else "Type a percentage: 4.5, or -2."))
        return
    rows = haulier_rates(state.working, haulier)
    if rows > MOST_ROWS:
        st.error(plain(f"{haulier} has {counted(rows, 'rate')}: change them in the spreadsheet and open it."))
        return
    state.propose_more(raised(state.working, haulier, percent))
    state.start_afresh()
    st.rerun()
