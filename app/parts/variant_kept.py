"""What is put up can be kept as a variant instead of being made: to be compared, and made later."""

import streamlit as st

from app.session import Desk
from engine.changes import Change, Together
from engine.records import Missing, NotSaved, save_variant
from engine.records.encode import NotUnderstood

NAMING = "variant-naming"
"""The proposal that is being given a name."""


def keep_as_variant(state: Desk) -> None:
    """A name and a button beside the proposed change; nothing where the week is not in the records."""
    kept, proposal = state.kept, state.proposal
    if kept is None or not kept.may_change or proposal is None:
        return
    change: Change = proposal
    if st.session_state.get(NAMING) is not proposal:
        if st.button(
            "Keep as a variant", key="variant-open", help="To compare it, and make it later or never"
        ):
            st.session_state[NAMING] = proposal
            st.rerun()
        return
    name = st.text_input(
        "Name of the variant",
        key="variant-name",
        value=named(change),
        placeholder="without Quarry, …",
        width=240,
    ).strip()
    if not st.button("Keep it", key="variant-keep", disabled=not name):
        return
    try:
        save_variant(kept.records, kept.week_id, name, parts(change), state.who)
    except (NotSaved, Missing, NotUnderstood) as failure:
        state.message = ("error", str(failure))
    else:
        state.take_back()
        state.message = ("success", f"'{name}' is kept as a variant: see Compare, Variants.")
    st.rerun()


def named(proposal: Change) -> str:
    """The name that a proposal brings with it: that of the variant it was put up from."""
    return proposal.note if isinstance(proposal, Together) else ""


def parts(proposal: Change) -> tuple[Change, ...]:
    """The changes that a proposal consists of."""
    return proposal.changes if isinstance(proposal, Together) else (proposal,)
