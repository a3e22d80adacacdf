"""What could be swapped for nothing, or for a chosen amount of money."""

import streamlit as st

from app.parts.reasons_asked import asked
from app.parts.reasons_chain import chain_panel
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import plain
from app.session import Desk
from engine.columns import Column, Kind
from engine.intake.fields import read_field
from engine.planning.plan import Plan
from engine.reasons import Option, chain, more_on, options

AMOUNT = Column("Amount", "amount", Kind.PRICE, "Money that a swap may cost in all")


def swaps_view(state: Desk, plan: Plan) -> None:
    """Options within an amount; the picked one is told."""
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    text = st.text_input(
        f"A swap may cost, {plain(currency)}", "0", key="swaps-within", width=200,
        help="In all. 0 shows what could be swapped for nothing",
    )  # fmt: skip
    within, finding = read_field(AMOUNT, text, state.style)
    if within is None:
        st.error(plain(finding.message) if finding else "Type an amount, 0 for swaps that cost nothing.")
        return
    found = asked(plan, ("options", within), lambda: options(plan, within))
    if not found:
        st.info(
            "Nothing can be swapped for nothing: no lane could carry more at the same cost."
            if not within
            else "No lane could carry more within this amount."
        )
        return
    left, right = st.columns([11, 9], gap="medium")
    with left:
        st.caption(
            "Lanes that could carry more than planned, each on its own. Useful when a haulier is full or a "
            "driver must be kept: these choices cost nothing or little."
        )
        headings = [
            Heading("Depot"),
            Heading("Customer"),
            Heading("Haulier"),
            Heading(f"Send now, {unit}"),
            Heading(f"Could carry more, {unit}"),
            Heading(f"Each unit costs, {currency}", money=True),
            Heading(f"In all, {currency}", places=2),
        ]
        picked = reasons_table(
            headings, [_row(one) for one in found], f"swaps-{state.generation}-{within}", state.decimal_mark,
            most_height=480,
        )  # fmt: skip
    with right:
        if picked is None:
            st.info("Pick a lane on the left: whom the swap moves is told here.")
            return
        one = found[picked]
        st.header(plain(f"{one.key.depot} to {one.key.customer}"), anchor=False)
        change = more_on(plan, one.key, one.quantity)
        told = asked(plan, ("swap", one.key, one.quantity), lambda: chain(plan, change))
        chain_panel(plan, told, state.decimal_mark, f"swap-chain-{state.generation}")


def _row(one: Option) -> list[Cell]:
    key = one.key
    return [key.depot, key.customer, key.haulier or "", one.now, one.quantity, one.extra, one.cost]
