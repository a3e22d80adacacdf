"""The plan as a matrix, customers down and depots across: a quantity typed for a lane is put up as a hold."""

from decimal import Decimal

import pandas as pd
import streamlit as st
from streamlit.elements.lib.column_types import ColumnConfig

from app.parts.words import number, plain
from app.session import Desk
from engine.changes import Change, Together
from engine.columns import SEND
from engine.intake.fields import read_field, show_field
from engine.planning.holds import NoSingleRow, hold_on_lane
from engine.planning.plan import Plan
from engine.planning.totals import flows

MOST_CELLS = 20_000
CUSTOMER, SUMS = "Customer", ("Ordered", "Short")


def matrix_grid(state: Desk, plan: Plan) -> None:
    """Who sends how much to whom, as one table; for weeks of a size that can be looked at so."""
    depots, customers = list(plan.week.depots), list(plan.week.customers)
    if len(depots) * len(customers) > MOST_CELLS:
        st.info(
            f"{len(depots):,} depots and {len(customers):,} customers are too many for one table: "
            "choose a depot or a customer instead."
        )
        return
    base = _frame(state, plan, depots, customers)
    text = st.column_config.TextColumn
    config: dict[str, ColumnConfig] = {CUSTOMER: text(CUSTOMER, pinned=True, disabled=True)}
    config |= {
        name: text(f"{name}, {plan.week.rules.unit}", alignment="right", width=85, disabled=True)
        for name in SUMS
    }
    config |= {
        f"{i}": text(name, alignment="right", width=max(75, 44 + 7 * len(name)))
        for i, name in enumerate(depots)
    }
    edited = st.data_editor(
        base,
        key=f"matrix-{state.generation}",
        hide_index=True,
        height=560,
        column_config=config,
        disabled=state.only_reads,
        alt="Plan as a matrix: customers down, depots across",
    )
    if not state.only_reads:
        _take_edits(state, plan, depots, customers, base, edited)


def _frame(state: Desk, plan: Plan, depots: list[str], customers: list[str]) -> pd.DataFrame:
    """One text column a depot, named by its position, since two names may look alike."""
    sent = {(flow.depot, flow.customer): flow.quantity for flow in flows(plan)}
    short = {one.customer: one.quantity for one in plan.short}
    mark = state.decimal_mark
    columns = {CUSTOMER: customers}
    columns["Ordered"] = [number(plan.week.customers[customer].ordered, mark) for customer in customers]
    if short:
        columns["Short"] = [number(short[one], mark) if one in short else "" for one in customers]
    for i, depot in enumerate(depots):
        quantities: list[Decimal | None] = [sent.get((depot, customer)) for customer in customers]
        columns[f"{i}"] = [show_field(SEND, q, state.style) if q else "" for q in quantities]
    return pd.DataFrame(columns, dtype="string")


def _take_edits(
    state: Desk,
    plan: Plan,
    depots: list[str],
    customers: list[str],
    base: pd.DataFrame,
    edited: pd.DataFrame,
) -> None:
    changes: list[Change] = []
    cells = edited.fillna("")
    differing = (base.fillna("") != cells).to_numpy()
    for row, column in zip(*differing.nonzero(), strict=True):
        quantity, finding = read_field(SEND, str(cells.iat[row, column]) or "0", state.style)
        if quantity is None:
            if finding is not None:
                st.error(f"{plain(finding.message)} {plain(finding.mend)}")
            return
        try:
            changes.append(hold_on_lane(plan, depots[int(base.columns[column])], customers[row], quantity))
        except NoSingleRow as unclear:
            st.error(plain(str(unclear)))
            return
    if not changes:
        return
    change = changes[0] if len(changes) == 1 else Together(tuple(changes))
    if change != state.proposal:
        state.propose(change)
        st.rerun()
