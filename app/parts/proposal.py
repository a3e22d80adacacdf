"""A change that is put up: what it would cost, whom it moves, or why it cannot be; accept it or leave it."""

from decimal import Decimal

import streamlit as st

from app.parts.change_words import words_of
from app.parts.moves_table import moves_table
from app.parts.price_bounds import between
from app.parts.variant_kept import keep_as_variant
from app.parts.words import counted, money, number, plain
from app.session import Desk
from engine.changes import Change, SetHold, Together
from engine.findings import Severity
from engine.planning.differences import Difference, Outcome

SHOWN = 4
MOST_SHORT, MOST_RUNG, LONGEST = 6, 30, 160
WHY = "proposal-why"


def proposal(state: Desk) -> None:
    """The panel of the proposed change; nothing where none is proposed."""
    if state.proposal is None or state.proposed is None:
        return
    with st.container(border=True, key="proposal"):
        st.markdown("**Not made yet.** " + _headline(state, state.proposed))
        said = words_of(state.proposal)
        st.caption(plain(said if len(said) <= LONGEST else f"{said[:LONGEST]} …"))
        if state.proposed.difference is not None:
            _moves(state, state.proposed.difference)
        for finding in state.proposed.findings:
            if finding.severity is not Severity.STOPS:
                continue
            st.markdown(f":red[■] {plain(finding.message)} *{plain(finding.mend)}*")
        possible = state.proposed.plan is not None
        with st.container(horizontal=True, vertical_alignment="bottom"):
            if possible:
                st.text_input("Reason", key=WHY, placeholder=_for_example(state.proposal), width=320)
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


def _for_example(change: Change) -> str:
    """What a reason for such a change may sound like."""
    if isinstance(change, Together):
        return _for_example(change.changes[0]) if change.changes else ""
    return "promised by telephone, …" if isinstance(change, SetHold) else "a silo lost on Tuesday, …"


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
    said = [shortage(by, rules.unit, mark), f"{cost}, then {now}."]
    if by.charges:
        word = "more" if by.charges > 0 else "less"
        said.append(f"Charges {money(abs(by.charges), rules.currency, mark)} {word}.")
    said.append(between(found, rules.currency, mark))
    return " ".join(one for one in said if one)


def shortage(by: Difference, unit: str, mark: str) -> str:
    """Who goes short of more, or of less, in Markdown; nothing where nobody does."""
    if not by.who_short:
        return ""
    said = ""
    if by.short:
        word = "more" if by.short > 0 else "less"
        said = f"**{number(abs(by.short), mark)} {plain(unit)} {word} short:** "
    else:
        said = "**Others go short:** "
    names = [f"{plain(one.customer)} {_signed(one.more, mark)}" for one in by.who_short[:MOST_SHORT]]
    if len(by.who_short) > MOST_SHORT:
        names.append(f"{counted(len(by.who_short) - MOST_SHORT, 'more customer')}")
    return said + ", ".join(names) + "."


def _signed(value: Decimal, mark: str) -> str:
    return f"+{number(value, mark)}" if value > 0 else number(value, mark)


def _moves(state: Desk, by: Difference) -> None:
    """Who sends what more or less to whom, and whom to ring."""
    if not by.rows:
        st.caption("Nothing moves.")
        return
    unit, mark = state.week.rules.unit, state.decimal_mark
    st.markdown("\n".join(f"- {plain(row.words(unit))}" for row in by.rows[:SHOWN]))
    if len(by.rows) <= SHOWN:
        return
    with st.expander(f"All {counted(len(by.rows), 'rate')} that would change, and whom to ring"):
        moves_table(by, unit, mark, key="proposal-moves")
        st.markdown(f"**To ring:** {plain(', '.join(by.to_ring[:MOST_RUNG]))}")
