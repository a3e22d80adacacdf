"""The rate rows of a plan as a grid: a quantity typed into it is put up as a hold, a limit as a new limit."""

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal
from typing import Literal

import pandas as pd
import streamlit as st
from streamlit.elements.lib.column_types import ColumnConfig

from app.parts.words import counted, money, number, plain, quantity
from app.session import Desk
from engine.changes import Alter, Change, Lift, SetHold, Together
from engine.columns import RATE_COLUMNS, SEND
from engine.exact import places_needed
from engine.findings import Finding
from engine.intake.fields import read_field, show_field
from engine.planning.fills import fill_of
from engine.planning.holds import all_lifted, held_as_planned
from engine.planning.lanes import Lane, lanes
from engine.planning.plan import Plan

EVERY = "All"
REASON = "Hold reason"
MOST_ROWS, MOST_PLACES = 2_000, 5
SHORT_FIGURE = 9
"""So many characters fit a small column."""
LIMITS = tuple(column for column in RATE_COLUMNS if column.field in ("at_least", "at_most", "closed"))


@dataclass(frozen=True, slots=True)
class _View:
    """Which rows are shown, in whose order, and whether with their limits."""

    by: str
    name: str | None
    unused: bool
    limits: bool


def shipments_grid(state: Desk, plan: Plan, by: str) -> None:
    """The rows by depot or by customer, with filters; what is typed is put up as one change."""
    view = _view(state, by)
    shown = _shown(plan, view)
    if view.name is not None:
        st.caption(_about(state, plan, view.by, view.name))
    if state.week.gone:
        st.caption(f"What is still to go; {counted(len(state.week.gone), 'load')} that left stand on *Gone*.")
    if len(shown) > MOST_ROWS:
        st.caption(f"The first {MOST_ROWS:,} of {len(shown):,} rows; choose a {by} to see all of its rows.")
        shown = shown[:MOST_ROWS]
    base = _frame(state, plan, shown, view)
    typed = (SEND.heading, REASON, *(column.heading for column in LIMITS))
    edited = st.data_editor(
        base,
        key=f"shipments-{state.generation}-{by}-{view.name}-{view.unused}-{view.limits}",
        hide_index=True,
        height=520,
        disabled=True if state.only_reads else [name for name in base.columns if name not in typed],
        column_config=_config(plan, base),
        alt="Shipments of the plan: depot, customer, haulier, quantity, rate and cost",
    )
    if state.only_reads:
        return
    _take_edits(state, shown, base, edited)
    _hold_many(state, shown, view)


def _about(state: Desk, plan: Plan, by: str, name: str) -> str:
    """What a depot has and keeps, or what a customer ordered and does not get."""
    mark, unit = state.decimal_mark, plan.week.rules.unit
    if by == "depot":
        kept = next((one.quantity for one in plan.unsent if one.depot == name), Decimal(0))
        has = quantity(plan.week.depots[name].available, unit, mark)
        return f"Available {has}, unsent {number(kept, mark)}."
    short = next((one.quantity for one in plan.short if one.customer == name), Decimal(0))
    return f"Ordered {quantity(plan.week.customers[name].ordered, unit, mark)}, short {number(short, mark)}."


def _view(state: Desk, by: str) -> _View:
    names = list(state.week.depots if by == "depot" else state.week.customers)
    left, middle, right = st.columns([3, 2, 2], vertical_alignment="bottom")
    name = left.selectbox(f"Show {by}", [EVERY, *names], key=f"shown-{by}")
    one = None if name == EVERY or name not in names else name
    unused = middle.toggle(
        "Unused rates", disabled=one is None, key=f"unused-{by}",
        help="Choose one depot or customer to see the rates that carry nothing as well",
    )  # fmt: skip
    limits = right.toggle("Limits", key=f"limits-{by}", help="Show and set At least, At most and Closed")
    return _View(by, one, bool(unused and one is not None), bool(limits))


def _shown(plan: Plan, view: _View) -> list[Lane]:
    """Grouped by depot or customer; the order of the sheets in both."""
    found = lanes(
        plan,
        depot=view.name if view.by == "depot" else None,
        customer=view.name if view.by == "customer" else None,
        unused=view.unused,
    )
    names = plan.week.depots if view.by == "depot" else plan.week.customers
    place = {name: number for number, name in enumerate(names)}
    return sorted(found, key=lambda lane: place[getattr(lane.key, view.by)])


def _wide_enough(texts: Iterable[str]) -> Literal["small"] | int:
    """A figure that does not fit loses its first digits, and would be read as another."""
    longest = max((len(text) for text in texts), default=0)
    return "small" if longest <= SHORT_FIGURE else 24 + 8 * longest


def _config(plan: Plan, frame: pd.DataFrame) -> dict[str, ColumnConfig]:
    text, rules = st.column_config.TextColumn, plan.week.rules
    width = {name: _wide_enough(frame[name]) for name in (SEND.heading, "Rate", "Cost")}
    return {
        SEND.heading: text(
            f"{SEND.heading}, {rules.unit}", alignment="right", width=width[SEND.heading],
            help="Type a quantity to hold it; empty the cell to lift the hold",
        ),
        "Loads": text("Loads", width=130, help="Full vehicles, and how full the last one is"),
        "Per": text("Per", width=50, help="What the rate is charged by"),
        "Rate": text(
            f"Rate, {rules.currency}", alignment="right", width=width["Rate"],
            help="Per unit, or per load where Per says so; with the surcharge",
        ),
        "Cost": text(f"Cost, {rules.currency}", alignment="right", width=width["Cost"]),
        "Held": text("Held", width="small"),
        REASON: text(REASON, help="Why the quantity is held"),
        **{c.heading: text(c.heading, help=c.about, alignment="right", width="small") for c in LIMITS},
    }  # fmt: skip


def _frame(state: Desk, plan: Plan, shown: list[Lane], view: _View) -> pd.DataFrame:
    mark, currency = state.decimal_mark, plan.week.rules.currency
    columns = {
        "Depot": [lane.key.depot for lane in shown],
        "Customer": [lane.key.customer for lane in shown],
    }
    if view.by == "customer":
        columns = dict(reversed(columns.items()))
    columns |= {
        "Haulier": [lane.key.haulier or "" for lane in shown],
        SEND.heading: [show_field(SEND, lane.quantity, state.style) for lane in shown],
    }
    if any(lane.load_size for lane in shown):
        columns["Loads"] = [_fill(lane) for lane in shown]
    places = max((places_needed(lane.rate) for lane in shown), default=0)
    same = places if places <= MOST_PLACES else None  # decimals under each other, where they fit
    columns["Rate"] = [number(lane.rate, mark, same) for lane in shown]
    if any(lane.per == "load" for lane in shown):
        columns["Per"] = ["load" if lane.per == "load" else plan.week.rules.unit for lane in shown]
    columns |= {
        "Cost": [money(lane.cost, currency, mark).removesuffix(f" {currency}") for lane in shown],
    }
    if view.limits:
        columns |= {c.heading: [_limit(state, lane, c.field) for lane in shown] for c in LIMITS}
    columns |= {
        "Held": ["held" if lane.hold else "" for lane in shown],
        REASON: [lane.hold.reason if lane.hold else "" for lane in shown],
    }
    return pd.DataFrame(columns, dtype="string")


def _fill(lane: Lane) -> str:
    fill = fill_of(lane.quantity, lane.load_size) if lane.quantity else None
    return "" if fill is None else fill.words()


def _limit(state: Desk, lane: Lane, field: str) -> str:
    column = next(column for column in LIMITS if column.field == field)
    return show_field(column, getattr(lane, field), state.style)


def _take_edits(state: Desk, shown: list[Lane], base: pd.DataFrame, edited: pd.DataFrame) -> None:
    """Put up what differs from the plan as one change; the page draws what is put up after the grid."""
    changes: list[Change] = []
    refused: list[Finding] = []
    differing = (base.fillna("") != edited.fillna("")).any(axis=1)
    for position in differing.to_numpy().nonzero()[0].tolist():
        more, findings = _changes(state, shown[position], _texts(edited, position))
        changes.extend(more)
        refused.extend(findings)
    for finding in refused:
        st.error(f"{plain(finding.message)} {plain(finding.mend)}")
    if not changes or refused:
        return
    change = changes[0] if len(changes) == 1 else Together(tuple(changes))
    if change != state.proposal:
        state.propose(change)
        if state.proposal is None:  # made at once, so that all above is of yesterday
            st.rerun()


def _texts(edited: pd.DataFrame, position: int) -> dict[str, str]:
    """A row of the grid by heading, blank cells as empty text."""
    return {str(name): "" if pd.isna(cell) else str(cell) for name, cell in edited.iloc[position].items()}


def _changes(state: Desk, lane: Lane, row: dict[str, str]) -> tuple[list[Change], list[Finding]]:
    """What an edited row asks for: a hold, another reason, the hold lifted, other limits."""
    changes: list[Change] = []
    findings: list[Finding] = []
    text, reason = row[SEND.heading].strip(), row[REASON].strip()
    if not text:
        changes += [Lift(lane.key)] if lane.hold else []
    else:
        quantity, finding = read_field(SEND, text, state.style)
        findings += [finding] if quantity is None and finding else []
        if quantity is not None and _is_new(lane, quantity, reason):
            changes.append(SetHold(lane.key, quantity, reason))
    for column in LIMITS:
        if column.heading not in row:
            continue
        value, finding = read_field(column, row[column.heading], state.style)
        if finding is not None and value is None:
            findings.append(finding)
        elif value != getattr(lane, column.field):
            changes.append(Alter("rate", lane.key, column.field, value))
    return changes, findings


def _is_new(lane: Lane, quantity: object, reason: str) -> bool:
    if lane.hold is not None:
        return (quantity, reason) != (lane.hold.quantity, lane.hold.reason)
    return quantity != lane.quantity or bool(reason)


def _hold_many(state: Desk, shown: list[Lane], view: _View) -> None:
    """Hold or lift all that is shown as one act."""
    with st.container(horizontal=True):
        whole = f"all of {view.name}" if view.name else "everything shown"
        hold = held_as_planned(lane for lane in shown if lane.quantity)
        if st.button(f"Hold {plain(whole)}", disabled=hold is None, key=f"hold-many-{view.by}") and hold:
            state.propose(hold)
            st.rerun()
        lift = all_lifted(lane.key for lane in shown if lane.hold)
        if st.button(f"Lift {plain(whole)}", disabled=lift is None, key=f"lift-many-{view.by}") and lift:
            state.propose(lift)
            st.rerun()
