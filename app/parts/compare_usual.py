"""The usual plan beside the plan: what is saved, per unit and lane by lane, and what differs in service."""

import streamlit as st

from app.parts.compare_asked import usual_of
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import money, number, plain
from app.session import Desk
from engine.compare.service import Saving
from engine.compare.usual import Rule, UsualPlan
from engine.money import minor_places
from engine.planning.plan import Plan


def usual_view(state: Desk, plan: Plan) -> None:
    """The saving against the usual plan of this desk."""
    found = usual_of(state, plan, Rule.CHEAPEST)
    saving_line(state, plan, *found)
    lanes_table(state, plan, found[1])


def saving_line(state: Desk, plan: Plan, usual: UsualPlan, found: Saving) -> None:
    """The saving in one sentence, and what the service differs by."""
    rules, mark = plan.week.rules, state.decimal_mark
    word = "saves" if found.freight >= 0 else "costs more by"
    each = (
        ""
        if found.per_unit is None
        else f", {number(abs(found.per_unit), mark)} {rules.currency} per {plain(rules.unit)}"
    )
    st.markdown(
        f"Against **{usual.rule.words}** the plan {word} "
        f"**{money(abs(found.freight), rules.currency, mark)}** of freight{each}"
        + (", at equal service." if found.equal else ", the service made equal.")
    )
    for sentence in (*found.differs, *usual.remarks):
        st.caption(plain(sentence))


def lanes_table(state: Desk, plan: Plan, found: Saving) -> None:
    """Every lane of either plan; the savings add up to the whole."""
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    minor = minor_places(currency)
    headings = [
        Heading("Depot"),
        Heading("Customer"),
        Heading(f"Usual, {unit}"),
        Heading(f"Plan, {unit}"),
        Heading(f"Usual, {currency}", places=minor),
        Heading(f"Plan, {currency}", places=minor),
        Heading(f"Saving, {currency}", places=minor),
    ]
    rows: list[list[Cell]] = [
        [
            one.depot, one.customer, one.usual, one.planned, one.usual_payable, one.planned_payable,
            one.saving,
        ]
        for one in found.lanes
    ]  # fmt: skip
    reasons_table(headings, rows, f"usual-lanes-{state.generation}", state.decimal_mark, pick=False)
