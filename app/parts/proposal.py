"""A change that is put up: what it would cost, whom it moves, or why it cannot be; accept it or leave it."""

import streamlit as st

from app.parts.price_bounds import between
from app.parts.variant_kept import keep_as_variant
from app.parts.words import counted, money, number, plain
from app.session import Desk
from engine.changes import Change, SetHold, Together
from engine.findings import Severity
from engine.planning.differences import Difference, Outcome

SHOWN = 6
WHY = "proposal-why"


def proposal(state: Desk) -> None:
    """The panel of the proposed change; nothing where none is proposed."""
    if state.proposal is None or state.proposed is None:
        return
    with st.container(border=True, key="proposal"):
        st.markdown("**Not made yet.** " + _headline(state, state.proposed))
        if state.proposed.difference is not None:
            _moves(state, state.proposed.difference)
        for finding in state.proposed.findings:
            if finding.severity is not Severity.STOPS:
                continue
            st.markdown(f":red[■] {plain(finding.message)} *{plain(finding.mend)}*")
        possible = state.proposed.plan is not None
        with st.container(horizontal=True, vertical_alignment="bottom"):
            if possible and _asks_why(state.proposal):
                st.text_input("Reason", key=WHY, placeholder="promised by telephone, …", width=320)
            # as callbacks, so that the page is drawn once and not twice
            st.button(
                "Make the change" if possible else "Make it all the same",
                type="primary" if possible else "secondary",
                key="accept",
                disabled=_bare(state),
                on_click=_accept,
                args=(state,),
            )
            if possible:
                keep_as_variant(state)
            st.button("Leave it", key="leave", on_click=state.take_back)


def _accept(state: Desk) -> None:
    state.accept(str(st.session_state.get(WHY, "")).strip())


def _bare(state: Desk) -> bool:
    """Whether the change does not even fit the week, so that it can only be left."""
    return state.proposed is not None and any(f.rule == "refused" for f in state.proposed.findings)


def _asks_why(change: Change) -> bool:
    if isinstance(change, Together):
        return any(_asks_why(one) for one in change.changes)
    return isinstance(change, SetHold) and not change.reason


def _headline(state: Desk, found: Outcome) -> str:
    if found.difference is None or found.plan is None:
        return "This change cannot be planned:"
    rules, mark, by = state.week.rules, state.decimal_mark, found.difference
    freight = by.freight_payable
    if freight:
        word = "dearer" if freight > 0 else "cheaper"
        cost = f"Freight **{money(abs(freight), rules.currency, mark)} {word}**"
    else:
        cost = "Freight **stays the same**"
    now = money(found.plan.freight_payable, rules.currency, mark)
    said = [f"{cost}, then {now}."]
    if by.short:
        word = "more" if by.short > 0 else "less"
        said.append(f"**{number(abs(by.short), mark)} {plain(rules.unit)} {word} short.**")
    if by.charges:
        word = "more" if by.charges > 0 else "less"
        said.append(f"Charges {money(abs(by.charges), rules.currency, mark)} {word}.")
    said.append(between(found, rules.currency, mark))
    return " ".join(one for one in said if one)


def _moves(state: Desk, by: Difference) -> None:
    """Who sends what more or less to whom, and whom to ring."""
    if not by.rows:
        st.caption("Nothing moves.")
        return
    unit = state.week.rules.unit
    lines = [f"- {plain(row.words(unit))}" for row in by.rows[:SHOWN]]
    if len(by.rows) > SHOWN:
        lines.append(f"- and {counted(len(by.rows) - SHOWN, 'more rate')}")
    st.markdown("\n".join(lines))
