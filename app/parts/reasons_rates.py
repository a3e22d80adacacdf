"""Rates: the lanes nearest to paying, to negotiate from, and how far each rate in use may move."""

import streamlit as st

from app.parts.reasons_asked import asked
from app.parts.reasons_chain import chain_panel
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import plain
from app.session import Desk
from engine.planning.plan import Plan
from engine.reasons import NearLane, RateInterval, chain, more_on, nearest_to_paying, rate_intervals, unquoted
from engine.reasons.ground import is_shared

MOST_NEAR = 100
KINDS = {"near": "Nearest to paying", "used": "Lanes in use", "unquoted": "Without a quote"}
BEFORE = "Per unit and before surcharge: the figure that is negotiated"


def rates_view(state: Desk, plan: Plan) -> None:
    """One of three lists, and what the picked lane would displace."""
    kind = st.segmented_control(
        "Which lanes", list(KINDS), default="near", required=True, format_func=KINDS.__getitem__,
        key="rates-kind", label_visibility="collapsed",
    ) or "near"  # fmt: skip
    if is_shared(plan):
        st.info("Goods are shared evenly this week: these figures are given the shares as they are.")
    if kind == "near":
        _near(state, plan)
    elif kind == "used":
        _used(state, plan)
    else:
        _without_quote(state, plan)


def _near(state: Desk, plan: Plan) -> None:
    currency, unit = plan.week.rules.currency, plan.week.rules.unit
    found = asked(plan, ("near",), lambda: nearest_to_paying(plan, MOST_NEAR))
    if not found:
        st.info("No unused lane could pay at any rate: what carries nothing is closed, held or out of reach.")
        return
    left, right = st.columns([11, 9], gap="medium")
    with left:
        st.caption(
            "Lanes that carry nothing now, the nearest first. Below the rate in 'Pays below' a lane comes in "
            "and the whole week gets cheaper; at that very rate it makes no difference. Pick one to see whom "
            "it would move."
        )
        with_loads = any(lane.interval.pays_below_per_load is not None for lane in found)
        headings = [
            Heading("Depot"),
            Heading("Customer"),
            Heading("Haulier"),
            Heading(f"Rate, {currency}", BEFORE, money=True),
            Heading(f"Pays below, {currency}", BEFORE, money=True),
            Heading("Too high by", "The rate less what it pays below", money=True),
            Heading(f"Would carry, {unit}", "What the lane takes over once it pays"),
        ]
        if with_loads:
            headings.append(
                Heading(
                    f"Pays below a load, {currency}", "By the load size of the row or the week", money=True
                )
            )
        picked = reasons_table(
            headings, [_near_row(lane, with_loads) for lane in found], f"near-{state.generation}",
            state.decimal_mark, most_height=520,
        )  # fmt: skip
    with right:
        lane = found[picked or 0]
        if picked is None:
            st.caption("The nearest of them; pick another on the left.")
        st.header(plain(f"{lane.interval.key.depot} to {lane.interval.key.customer}"), anchor=False)
        st.caption("If it were used at today's rate:")
        change = more_on(plan, lane.interval.key, lane.carries)
        told = asked(plan, ("near chain", lane.interval.key), lambda: chain(plan, change))
        chain_panel(plan, told, state.decimal_mark, f"near-chain-{state.generation}")


def _near_row(lane: NearLane, with_loads: bool) -> list[Cell]:
    one = lane.interval
    row: list[Cell] = [*_names(one), one.rate, one.pays_below, one.gap, lane.carries]
    return [*row, one.pays_below_per_load] if with_loads else row


def _names(one: RateInterval) -> list[Cell]:
    return [one.key.depot, one.key.customer, one.key.haulier or ""]


def _used(state: Desk, plan: Plan) -> None:
    currency, unit = plan.week.rules.currency, plan.week.rules.unit

    def work() -> list[RateInterval]:
        intervals = rate_intervals(plan)
        return [intervals.at(row) for row in intervals.rows.tolist() if intervals.ground.quantity[row] > 0]

    found = asked(plan, ("used",), work)
    st.caption(
        "While a rate in use stays between these two figures, the plan stays as it is. Above the upper one "
        "the lane loses goods; below the lower one it wins more. Blank: no rate changes anything."
    )
    headings = [
        Heading("Depot"),
        Heading("Customer"),
        Heading("Haulier"),
        Heading(f"Send, {unit}"),
        Heading(f"Rate, {currency}", BEFORE, money=True),
        Heading("Stays from", BEFORE, money=True),
        Heading("Stays to", BEFORE, money=True),
    ]
    rows: list[list[Cell]] = [
        [*_names(one), one.quantity, one.rate, one.stays_from, one.stays_to] for one in found
    ]
    reasons_table(headings, rows, f"used-{state.generation}", state.decimal_mark, pick=False, most_height=560)


def _without_quote(state: Desk, plan: Plan) -> None:
    currency, unit = plan.week.rules.currency, plan.week.rules.unit
    with st.container(horizontal=True, vertical_alignment="bottom"):
        what = st.segmented_control(
            "Lanes of", ["depot", "customer"], default="depot", required=True, key="unquoted-what",
            format_func={"depot": "From a depot", "customer": "To a customer"}.__getitem__,
            label_visibility="collapsed",
        ) or "depot"  # fmt: skip
        names = list(plan.week.depots if what == "depot" else plan.week.customers)
        name = st.selectbox("Whose", names, key=f"unquoted-{what}", width=320)
    if name is None:
        return
    of = (name, None) if what == "depot" else (None, name)
    found = asked(plan, ("unquoted", *of), lambda: unquoted(plan, *of))
    if not found:
        st.info("Every lane here has a quote, or no quote could bring one in.")
        return
    st.caption(
        "Nobody quotes for these lanes. A quote below this rate would pay, before the week's surcharge."
    )
    headings = [
        Heading("Depot"),
        Heading("Customer"),
        Heading(f"Pays below, {currency}", BEFORE, money=True),
        Heading(f"Would carry, {unit}"),
    ]
    rows: list[list[Cell]] = [[one.depot, one.customer, one.pays_below, one.carries] for one in found]
    reasons_table(
        headings, rows, f"unquoted-{state.generation}-{what}", state.decimal_mark, pick=False, most_height=480
    )
