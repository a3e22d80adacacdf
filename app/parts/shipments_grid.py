"""The shipments of a plan as a grid: a quantity typed into it is held, and the rest is planned again."""

from dataclasses import dataclass

import pandas as pd
import streamlit as st

from app.parts.words import money, number, plain
from app.session import Desk
from engine.changes import Change, Lift, SetHold, Together
from engine.columns import SEND
from engine.findings import Finding
from engine.intake.fields import read_field, show_field
from engine.planning.lanes import Lane, lanes
from engine.planning.plan import Plan

EVERY = "All"
NO_FILTER = "used lanes"
HOLD_REASON = "Hold reason"
MOST_ROWS = 2_000


@dataclass(frozen=True, slots=True)
class _View:
    """Which rows are shown, and in whose order."""

    by: str
    name: str | None
    unused: bool


def shipments_grid(state: Desk, plan: Plan) -> None:
    """The grid with its filters; every edit is one change, refused in words where it cannot be planned."""
    view = _view(state)
    shown = _sorted(
        lanes(
            plan,
            depot=view.name if view.by == "depot" else None,
            customer=view.name if view.by == "customer" else None,
            unused=view.unused,
        ),
        view.by,
    )
    if len(shown) > MOST_ROWS:
        st.caption(
            f"The first {MOST_ROWS:,} of {len(shown):,} rows; choose a {view.by} to see all of its rows."
        )
        shown = shown[:MOST_ROWS]
    base = _frame(state, plan, shown, view.by)
    key = f"shipments-{state.generation}-{view.by}-{view.name}-{view.unused}"
    edited = st.data_editor(
        base,
        key=key,
        hide_index=True,
        height=560,
        disabled=[name for name in base.columns if name not in (SEND.heading, HOLD_REASON)],
        column_config={
            SEND.heading: st.column_config.TextColumn(
                f"{SEND.heading}, {plan.week.rules.unit}", alignment="right", width="small",
                help="Type a quantity to hold it; empty the cell to lift the hold",
            ),
            "Rate": st.column_config.TextColumn(
                f"Rate, {plan.week.rules.currency}", alignment="right", width="small",
                help="Per unit, with the surcharge",
            ),
            "Cost": st.column_config.TextColumn(
                f"Cost, {plan.week.rules.currency}", alignment="right", width="small"
            ),
            "Held": st.column_config.TextColumn("Held", width="small"),
            HOLD_REASON: st.column_config.TextColumn(HOLD_REASON, help="Why the quantity is held"),
        },
        alt="Shipments of the plan: depot, customer, haulier, quantity, rate and cost",
    )  # fmt: skip
    _take_edits(state, shown, base, edited)


def _view(state: Desk) -> _View:
    left, middle, right = st.columns([2, 3, 2], vertical_alignment="bottom")
    by = left.segmented_control(
        "Order by", ["depot", "customer"], default="depot", format_func=str.capitalize, required=True
    )
    by = by or "depot"
    names = list(state.week.depots if by == "depot" else state.week.customers)
    name = middle.selectbox(f"Show {by}", [EVERY, *names], key=f"shown-{by}")
    one = None if name == EVERY or name not in names else name
    unused = right.toggle(
        "Unused lanes too", disabled=one is None, key=f"unused-{by}",
        help="Choose one depot or customer to see the lanes that carry nothing",
    )  # fmt: skip
    return _View(by, one, bool(unused and one is not None))


def _sorted(shown: tuple[Lane, ...], by: str) -> list[Lane]:
    """Grouped by depot or customer in order of first appearance; sheet order within."""
    place: dict[str, int] = {}
    for lane in shown:
        place.setdefault(getattr(lane.key, by), len(place))
    return sorted(shown, key=lambda lane: place[getattr(lane.key, by)])


def _frame(state: Desk, plan: Plan, shown: list[Lane], by: str) -> pd.DataFrame:
    mark, currency = state.decimal_mark, plan.week.rules.currency
    ends = {
        "Depot": [lane.key.depot for lane in shown],
        "Customer": [lane.key.customer for lane in shown],
    }
    if by == "customer":
        ends = dict(reversed(ends.items()))
    return pd.DataFrame(
        {
            **ends,
            "Haulier": [lane.key.haulier or "" for lane in shown],
            SEND.heading: [_send(lane, state) for lane in shown],
            "Rate": [number(lane.rate, mark) for lane in shown],
            "Cost": [money(lane.cost, currency, mark).removesuffix(f" {currency}") for lane in shown],
            "Held": ["held" if lane.hold else "" for lane in shown],
            HOLD_REASON: [lane.hold.reason if lane.hold else "" for lane in shown],
        },
        dtype="string",
    )


def _send(lane: Lane, state: Desk) -> str:
    return show_field(SEND, lane.quantity, state.style)


def _take_edits(state: Desk, shown: list[Lane], base: pd.DataFrame, edited: pd.DataFrame) -> None:
    """Put up what differs from the plan as one change."""
    changes: list[Change] = []
    refused: list[Finding] = []
    for position in range(len(base)):
        before, after = base.iloc[position], edited.iloc[position]
        if after.equals(before):
            continue
        change, finding = _change(state, shown[position], before, after)
        if finding is not None:
            refused.append(finding)
        elif change is not None:
            changes.append(change)
    for finding in refused:
        st.error(f"{plain(finding.message)} {plain(finding.mend)}")
    if not changes or refused:
        return
    change = changes[0] if len(changes) == 1 else Together(tuple(changes))
    if change != state.proposal:
        state.propose(change)
        st.rerun()


def _change(
    state: Desk, lane: Lane, before: pd.Series, after: pd.Series
) -> tuple[Change | None, Finding | None]:
    """What an edited row asks for: a hold, another reason, or the hold lifted."""
    text = "" if pd.isna(after[SEND.heading]) else str(after[SEND.heading])
    reason = "" if pd.isna(after[HOLD_REASON]) else str(after[HOLD_REASON]).strip()
    if not text.strip():
        return (Lift(lane.key) if lane.hold else None), None
    quantity, finding = read_field(SEND, text, state.style)
    if quantity is None:
        return None, finding
    if lane.hold and quantity == lane.hold.quantity and reason == lane.hold.reason:
        return None, None
    if not lane.hold and quantity == lane.quantity and not reason:
        return None, None
    return SetHold(lane.key, quantity, reason), None
