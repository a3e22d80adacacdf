"""A unit more or less at every depot or customer: what it would cost, how far that holds, whom it moves."""

import streamlit as st

from app.parts.reasons_asked import asked
from app.parts.reasons_chain import chain_panel
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import counted, money, plain
from app.session import Desk
from engine.columns import SEND
from engine.intake.fields import read_field
from engine.planning.plan import Plan
from engine.reasons import UnitValue, chain, pairs, values
from engine.reasons.ends import altered_by

SIDES = {"more": "more", "less": "less"}
MOST_PAIRS = 5


def values_view(state: Desk, plan: Plan) -> None:
    """The table on the left, the chain of the picked row on the right."""
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    found = asked(plan, ("values",), lambda: values(plan, holds=True))
    if found.withheld:
        st.info(plain(f"{found.withheld} So there is no single cost of one more or one less this week."))
        return
    left, right = st.columns([11, 9], gap="medium")
    with left:
        what = st.segmented_control(
            "Where", ["depot", "customer"], default="depot", required=True, key="values-where",
            format_func={"depot": "At depots", "customer": "For customers"}.__getitem__,
            label_visibility="collapsed",
        ) or "depot"  # fmt: skip
        word = "stock" if what == "depot" else "order"
        st.caption(
            f"What the week would cost more (or less, with a minus) if a {word} were one {plain(unit)} "
            "larger or smaller, after everything this displaces. Pick a row to see what that is."
        )
        listed = found.depots if what == "depot" else found.customers
        with_short = any(one.one_more_short or one.one_less_short for one in listed)
        picked = reasons_table(
            _headings(what, unit, currency, with_short),
            [_row(plan, what, one, with_short) for one in listed],
            f"values-{what}-{state.generation}",
            state.decimal_mark,
        )
        _pairs_note(state, plan)
    with right:
        if picked is None:
            st.info("Pick a row on the left: what one more or one less would move is told here.")
        else:
            _picked(state, plan, what, listed[picked])


def _headings(what: str, unit: str, currency: str, with_short: bool) -> list[Heading]:
    figure = "Available" if what == "depot" else "Ordered"
    beyond = "Up to this quantity each unit costs the same; beyond it, other lanes take over. Blank: no end"
    short = f"What one {{}} changes in what goes short, in {unit}"
    headings = [Heading("Depot" if what == "depot" else "Customer"), Heading(f"{figure}, {unit}")]
    for side, space in (("more", ""), ("less", " ")):  # headings must differ
        about = "Cost after less cost before, charges included; a minus is a saving"
        headings.append(Heading(f"One {side} costs, {currency}", f"{about}. Blank: no answer", money=True))
        headings.append(Heading(f"holds for, {unit}{space}", beyond))
        if with_short:
            headings.append(Heading(f"short by{space}", short.format(side)))
    return headings


def _row(plan: Plan, what: str, one: UnitValue, with_short: bool) -> list[Cell]:
    week = plan.week
    figure = week.depots[one.name].available if what == "depot" else week.customers[one.name].ordered
    row: list[Cell] = [one.name, figure]
    for cost, holds, short in (
        (one.one_more, one.one_more_holds_for, one.one_more_short),
        (one.one_less, one.one_less_holds_for, one.one_less_short),
    ):
        row += [cost, holds]
        if with_short:
            row.append(short or None)
    return row


def _picked(state: Desk, plan: Plan, what: str, one: UnitValue) -> None:
    st.header(plain(one.name), anchor=False)
    with st.container(horizontal=True, vertical_alignment="bottom"):
        side = st.segmented_control(
            "Side", list(SIDES), default="more", required=True, format_func=SIDES.__getitem__,
            key="values-side", label_visibility="collapsed",
        ) or "more"  # fmt: skip
        text = st.text_input("How much", "1", key="values-amount", width=140)
    amount, finding = read_field(SEND, text, state.style)
    if amount is None or not amount:
        st.error(plain(finding.message) if finding else "Type a quantity above 0.")
        return
    change = altered_by(plan, "depot" if what == "depot" else "customer", one.name, amount, side == "more")
    try:
        told = asked(plan, ("chain", change), lambda: chain(plan, change))
    except ValueError as refused:
        st.error(plain(str(refused)))
        return
    chain_panel(plan, told, state.decimal_mark, f"values-chain-{state.generation}")


def _pairs_note(state: Desk, plan: Plan) -> None:
    """Where one more at both ends makes the week cheaper: surprising enough to be said."""
    found = asked(plan, ("pairs",), lambda: pairs(plan))
    if not found:
        return
    currency, mark = plan.week.rules.currency, state.decimal_mark
    lines = [
        f"- one more at {plain(pair.depot)} and one more for {plain(pair.customer)}: "
        f"{plain(money(-pair.cost, currency, mark))} cheaper"
        for pair in found[:MOST_PAIRS]
    ]
    more = f"\n- and {counted(len(found) - MOST_PAIRS, 'more pair')}" if len(found) > MOST_PAIRS else ""
    st.info("Here more costs less, because it undoes a detour:\n\n" + "\n".join(lines) + more)
