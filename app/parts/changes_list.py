"""The list of changes: who did what, when and why; take one back, go back to a version, compare."""

from typing import Any

import pandas as pd
import streamlit as st

from app.access import restored
from app.keeping import show
from app.parts.change_words import HEADINGS, shown, words_of
from app.session import Desk
from engine.altered import altered
from engine.figures import RateKey
from engine.week import describe

MOST = 500
PICKED = "change-picked"


def changes_list(state: Desk) -> None:
    """All changes of the week on the desk, the latest first, and what can be done about them."""
    history = state.history
    if not history.entries:
        st.caption("Nothing was changed since the figures were opened.")
        return
    count = len(history.entries)
    shown = st.dataframe(
        _frame(state),
        hide_index=True,
        height=min(360, 38 + 35 * count),
        alt="Changes of this week",
        key=f"changes-{count}",
        on_select="rerun",
        selection_mode="single-row",
        column_config={
            "No.": st.column_config.NumberColumn(width=50),
            "Change": st.column_config.TextColumn(width="large"),
            "Who": st.column_config.TextColumn(width="small"),
            "When (UTC)": st.column_config.TextColumn(width=130),
            "Why": st.column_config.TextColumn(width="medium"),
            "": st.column_config.TextColumn(width=90),
        },
    )
    picked = (count, *(shown["selection"]["rows"] if shown else ()))
    if picked != st.session_state.get(PICKED):  # the row that was ticked last, else the latest change
        st.session_state[PICKED] = picked
        st.session_state["change-number"] = count - (picked[1] if len(picked) > 1 else 0)
    if len(history.entries) > MOST:
        st.caption(f"The latest {MOST} of {len(history.entries)} changes are shown.")
    with st.container(horizontal=True, vertical_alignment="bottom"):
        number = st.number_input(
            "Change: tick its row, or type its number", 1, count, key="change-number", width=260
        )
        if st.button("Take back only this change", key="revert"):
            if state.make(lambda now: now.reverted(int(number) - 1, state.who)):
                state.start_afresh()
            st.rerun()
        if st.button(
            "Go back to before it", key="back", help="One change that takes back it and all later ones"
        ):
            if state.make(lambda now: now.back_to(int(number) - 1, state.who)):
                state.start_afresh()
            st.rerun()
        if st.button("Open as it was before it, as a new week", key="restore") and state.kept is not None:
            name = f"{state.week.rules.week}, as before change {number}"
            show(state, restored(state.kept.week_id, int(number) - 1, name))
            st.rerun()
    st.header("Against the figures as uploaded")
    _compared(state)


def _frame(state: Desk) -> pd.DataFrame:
    rows: list[dict[str, Any]] = []
    entries = state.history.entries
    for position in range(len(entries) - 1, max(-1, len(entries) - 1 - MOST), -1):
        entry = entries[position]
        undone = entry.undoes is None and not state.history.in_force(position)
        of = "" if entry.undoes is None else f"takes back {entry.undoes + 1}: "
        rows.append(
            {
                "No.": position + 1,
                "Change": of + words_of(entry.change),
                "Who": entry.who,
                "When (UTC)": "" if entry.when is None else f"{entry.when:%d %b %H:%M:%S}",
                "Why": entry.why,
                "": "taken back" if undone else "",
            }
        )
    return pd.DataFrame(rows)


def _compared(state: Desk) -> None:
    found = altered(state.history.uploaded, state.week)
    if not found:
        st.caption("The figures are as they were uploaded.")
        return
    rows = []
    for one in found[:MOST]:
        named = describe(one.key) if isinstance(one.key, RateKey) else one.key
        heading = HEADINGS.get(one.what, {}).get("ordered" if one.field == "orders" else one.field, one.field)
        rows.append(
            {
                "What": one.what.capitalize(),
                "Name": named,
                "Figure": heading,
                "Uploaded": _cell(one.before, one.field),
                "Now": _cell(one.after, one.field),
            }
        )
    right = st.column_config.TextColumn(alignment="right")
    st.dataframe(
        pd.DataFrame(rows),
        hide_index=True,
        column_config={"Uploaded": right, "Now": right},
        alt="What differs from the figures as uploaded",
    )
    if len(found) > MOST:
        st.caption(f"The first {MOST} of {len(found)} figures that differ are shown.")


def _cell(value: Any, field: str) -> str:
    if field or value is None:
        return "" if value is None else shown(value)
    quantity = getattr(value, "quantity", None)
    return "there" if quantity is None else shown(quantity)
