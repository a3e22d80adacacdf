"""Issuing a plan: a numbered, frozen plan that was handed out, and what changed since the last one."""

import streamlit as st

from app.keeping import issue
from app.parts.moves_table import moves_table
from app.parts.proposal import shortage
from app.parts.words import counted, money, plain
from app.session import Desk
from engine.planning.differences import difference
from engine.planning.plan import Plan


def issue_panel(state: Desk, plan: Plan) -> None:
    """The plan issued last, what the plan on the desk does otherwise and whom to ring; issue it anew."""
    st.header("Issue", anchor=False)
    last = state.issued
    changed = True
    if last is None:
        later = "" if plan.whole else " Later plans stay nearest to the one issued last."
        st.caption("No plan of this week was issued yet." + later)
    else:
        when = last.issued.astimezone().strftime("%d %b, %H:%M")
        by = f" by {plain(last.who)}" if last.who else ""
        st.markdown(f"Plan **{last.number}** was issued on {when}{by}.")
        changed = _changes(state, plan)
    if state.kept is not None and not state.kept.may_change:
        return
    following = 1 if last is None else last.number + 1
    note = st.text_input(
        "Note for the issue", key=f"issue-note-{following}", placeholder="after the call with Quarry, …"
    )
    if st.button(f"Issue this plan as number {following}", key="issue", disabled=not changed):
        made = issue(state, plan, note.strip())
        if made is not None:
            state.message = ("success", f"Plan {made.number} is issued and kept.")
        st.rerun()


def _changes(state: Desk, plan: Plan) -> bool:
    """Lane by lane what differs from the issued plan; whether anything does."""
    if state.issued is None:
        return True
    found = difference(state.issued, plan)
    if not found.rows:
        st.caption("The plan on the desk sends the same.")
        return bool(found.freight_payable)
    mark, rules = state.decimal_mark, plan.week.rules
    word = "dearer" if found.freight_payable > 0 else "cheaper"
    cost = money(abs(found.freight_payable), rules.currency, mark)
    st.markdown(f"Since then **{counted(len(found.rows), 'rate')} changed**; freight is {cost} {word}.")
    said = shortage(found, rules.unit, mark)
    if said:
        st.markdown(said)
    moves_table(found, rules.unit, mark, key="since-issued")
    st.markdown(f"**To ring:** {plain(', '.join(found.to_ring[:30]))}")
    return True
