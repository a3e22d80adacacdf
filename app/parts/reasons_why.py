"""Why this lane: every other way of serving a customer, and what it would cost after what it displaces."""

import streamlit as st

from app.parts.reasons_asked import asked
from app.parts.reasons_chain import chain_panel
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import plain
from app.session import Desk
from engine.planning.plan import Plan
from engine.reasons import Alternative, why

STANDING = {
    "used": "in use",
    "full": "in use, no more can go",
    "unused": "not used",
    "shut": "closed or held at 0",
}


def why_view(state: Desk, plan: Plan) -> None:
    """Choose a customer, compare its lanes, pick one to see what it would displace."""
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    customer = st.selectbox("Customer", list(plan.week.customers), key="why-customer", width=360)
    if customer is None:
        return
    found = asked(plan, ("why", customer), lambda: why(plan, customer))
    left, right = st.columns([11, 9], gap="medium")
    with left:
        if found.note:
            st.info(plain(found.note))
        st.caption(
            "A low rate is not enough: goods sent here are missing elsewhere. 'One more here' is what the "
            "whole week would cost more for each unit on that lane, everything it displaces included."
        )
        headings = [
            Heading("Depot"),
            Heading("Haulier"),
            Heading("Now"),
            Heading(f"Send, {unit}"),
            Heading(f"Rate, {currency}", "Per unit, with the surcharge", money=True),
            Heading(
                f"One more here, {currency}",
                "Rate less the rate it replaces, plus what is displaced",
                money=True,
            ),
            Heading("In place of", "The depot that would bring a unit less to this customer"),
            Heading("Displaced", "What the moved goods cost or save elsewhere, per unit", money=True),
        ]
        rows = [_row(one) for one in found.alternatives]
        besides = [_besides(one) for one in found.alternatives]
        if any(besides):
            headings.insert(6, Heading("And", "What no money makes up for, per unit"))
            rows = [[*row[:6], more, *row[6:]] for row, more in zip(rows, besides, strict=True)]
        picked = reasons_table(
            headings, rows, f"why-{state.generation}-{customer}",
            state.decimal_mark, most_height=480,
        )  # fmt: skip
    with right:
        one = None if picked is None else found.alternatives[picked]
        if one is None:
            st.info("Pick a lane on the left: what more on it would displace is told here.")
        elif one.chain is None:
            st.info("No more can go on this lane: its limit, a hold or a closure stands.")
        else:
            st.header(plain(f"{one.key.depot} to {customer}"), anchor=False)
            chain_panel(plan, one.chain, state.decimal_mark, f"why-chain-{state.generation}")


def _row(one: Alternative) -> list[Cell]:
    return [
        one.key.depot,
        one.key.haulier or "",
        STANDING[one.standing],
        one.quantity,
        one.rate,
        one.dearer,
        _instead(one),
        one.displaced,
    ]


def _besides(one: Alternative) -> str:
    """What no money makes up for: somebody short, or goods left that must move."""
    leg = one.leg
    if leg is None:
        return ""
    said = ["1 more goes short"] if leg.short > 0 else []
    return ", ".join(said + (["1 more stays that must move"] if leg.kept > 0 else []))


def _instead(one: Alternative) -> str:
    if one.chain is None:
        return ""
    if one.instead is None:
        return "goods that are short"
    return f"{one.instead}, {one.instead_haulier}" if one.instead_haulier else one.instead
