"""Fewer lanes changed for some money: the whole trade against the issued plan, for the dispatcher to pick."""

from decimal import Decimal

import pandas as pd
import streamlit as st

from app.parts.steady_chart import trade_chart
from app.parts.words import amount, counted, money, plain
from app.session import Desk
from engine.columns import RATE_COLUMNS
from engine.exact import TooLarge
from engine.intake.fields import read_field
from engine.planning.plan import Plan
from engine.planning.steady import Point, Trade, at_most, holds_for, trade, within, worth
from engine.records import Issued

FIRST_SECONDS, LONG_SECONDS = 4.0, 30.0
KEY = "steady-trade"
MONEY = next(column for column in RATE_COLUMNS if column.field == "rate")
RESTS = {"whole numbers": "proved", "solver": "least, says the solver", "open": "best found"}
ASKED = {
    "lanes": "Change at most … lanes",
    "spend": "Spend at most … to change fewer",
    "worth": "Only changes that save at least … each",
}


def steady(state: Desk, plan: Plan) -> None:
    """What changing fewer lanes than the least-cost plan costs; a plan picked from it is put up as holds."""
    if state.issued is None:
        st.caption(
            "No plan of this week was issued yet. Issue one on Hand over: later plans are compared here."
        )
        return
    if plan.whole is not None:
        st.caption("In a week with whole loads lanes cannot be traded against money yet.")
        return
    found = _worked_out(state, plan, state.issued)
    if found is None:
        return
    last, first = found.points[-1], found.points[0]
    if len(found.points) == 1:
        number = counted(last.lanes, "lane")
        st.caption(
            f"Against plan {state.issued.number}, {number} must change, and no choice of lanes costs less."
            if last.lanes
            else f"The plan on the desk sends what plan {state.issued.number} sends."
        )
        return
    cost = money(first.extra, plan.week.rules.currency, state.decimal_mark)
    st.markdown(
        f"Against plan {state.issued.number} the least cost changes **{counted(last.lanes, 'lane')}**. "
        f"Keeping to it as far as possible changes {first.lanes} and costs **{cost}** more."
    )
    picked = _table(state, found)
    trade_chart(found, plan.week.rules.currency)
    _longer(plan, state.issued, found)
    if not state.only_reads:
        if picked is not None:
            _offer(state, found, picked)
        else:
            _pick(state, found)
    st.caption(
        "A lane is a depot, a customer and a haulier, changed where its quantity of the week is another. "
        "Only plans that deliver as much as the least-cost plan, priority by priority, are compared; within "
        "a priority others may go short, at their charges, and what is put up names them."
    )


def _worked_out(state: Desk, plan: Plan, issued: Issued) -> Trade | None:
    """The trade of this plan, kept until the week or the issued plan is another."""
    kept = st.session_state.get(KEY)
    if kept is not None and kept[0] is plan and kept[1] is issued:
        found: Trade = kept[2]
        return found
    return _search(plan, issued, FIRST_SECONDS)


def _search(plan: Plan, issued: Issued, seconds: float) -> Trade | None:
    try:
        with st.spinner("Looking for plans that change fewer lanes"):
            found = trade(plan, issued.quantities, seconds)
    except TooLarge as too_large:
        st.error(plain(str(too_large)))
        return None
    st.session_state[KEY] = (plan, issued, found)
    return found


def _table(state: Desk, found: Trade) -> Point | None:
    """The whole trade, a plan a row; the plan whose row is picked."""
    mark, currency = state.decimal_mark, found.lanes.plan.week.rules.currency
    right = st.column_config.TextColumn
    shown = st.dataframe(
        pd.DataFrame(
            {
                "Lanes changed": [str(point.lanes) for point in found.points],
                "Costs more": [amount(point.extra, currency, mark) for point in found.points],
                "Cannot cost less than": [amount(point.bound, currency, mark) for point in found.points],
                "": [RESTS[point.rests] for point in found.points],
            }
        ),
        hide_index=True,
        column_config={
            "Lanes changed": right(alignment="right", width="small"),
            "Costs more": right(
                f"Costs more, {currency}",
                alignment="right",
                help="Freight and charges above the least-cost plan",
            ),
            "Cannot cost less than": right(
                f"Not below, {currency}",
                alignment="right",
                help="No plan that changes at most so many lanes costs less",
            ),
        },
        alt="Lanes changed against cost above the least",
        key="steady-table",
        on_select="ignore" if state.only_reads else "rerun",
        selection_mode="single-row",
    )
    if found.fewest < found.points[0].lanes:
        st.caption(f"Whether fewer lanes, from {found.fewest} on, could be enough is open.")
    rows: list[int] = [] if state.only_reads else shown["selection"]["rows"]  # type: ignore[index]
    return found.points[rows[0]] if rows and rows[0] < len(found.points) else None


def _longer(plan: Plan, issued: Issued, found: Trade) -> None:
    if found.closed:
        return
    if st.button(f"Search for {LONG_SECONDS:g} seconds more", key="steady-longer"):
        _search(plan, issued, LONG_SECONDS)
        st.rerun()


def _pick(state: Desk, found: Trade) -> None:
    """One of three questions, its answer, and the answer put up as a change."""
    currency = found.lanes.plan.week.rules.currency
    left, right = st.columns([3, 2], vertical_alignment="bottom")
    asked = left.selectbox(
        "Pick a plan: tick its row, or ask", list(ASKED), format_func=ASKED.__getitem__, key="steady-asked"
    )
    unit = "lanes" if asked == "lanes" else currency
    text = right.text_input(f"How much, {plain(unit)}", key="steady-much")
    if not text.strip():
        return
    much, finding = read_field(MONEY, text, state.style)
    if not isinstance(much, Decimal) or much < 0:
        st.error(plain(f"{finding.message} {finding.mend}" if finding else "Type a number, 0 or more."))
        return
    point = _answer(found, asked, much)
    if point is None:
        st.info(f"No plan was found that changes so few lanes: the fewest are {found.points[0].lanes}.")
        return
    _offer(state, found, point)


def _answer(found: Trade, asked: str, much: Decimal) -> Point | None:
    if asked == "lanes":
        return at_most(found, int(much))
    return within(found, much) if asked == "spend" else worth(found, much)


def _offer(state: Desk, found: Trade, point: Point) -> None:
    """What the plan that was picked changes, and the way to put it up."""
    rules, mark = found.lanes.plan.week.rules, state.decimal_mark
    fewer = found.points[-1].lanes - point.lanes
    st.markdown(
        f"**{counted(point.lanes, 'lane')} changed**, {fewer} fewer than at least cost, for "
        f"**{money(point.extra, rules.currency, mark)}** more."
    )
    with st.expander("Whom to ring"):
        st.dataframe(
            pd.DataFrame(
                [(d, c, h or "") for d, c, h in point.names], columns=["Depot", "Customer", "Haulier"]
            ),
            hide_index=True,
        )
    if point is found.points[-1]:
        st.caption("That is the plan on the desk.")
        return
    if st.button("Put this plan up", key="steady-take", type="primary"):
        number = state.issued.number if state.issued else 0
        change = holds_for(found, point, f"kept as in plan {number}")
        if change is not None:
            state.propose(change)
        st.rerun()
