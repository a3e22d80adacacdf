"""The usual plan beside the plan: what is saved, per unit and lane by lane, and what differs in service."""

import streamlit as st

import engine
from app.parts.compare_asked import desk_rule, quantities_at, remember_rule, sent_of, usual_of
from app.parts.compare_bridge import points_of
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import money, number, plain
from app.session import Desk
from engine.compare.service import Saving
from engine.compare.usual import NoRule, Rule, UsualPlan, rules_possible
from engine.intake.earlier import Quantities
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable
from engine.records import save_sent

TYPES = ["xlsx", "xlsm", "xls", "xlsb", "ods", "csv", "tsv", "txt"]


def usual_view(state: Desk, plan: Plan) -> None:
    """How the desk would have planned, and what the plan saves against that."""
    rule = _rule(state, plan)
    sent = _sent(state) if rule is Rule.ACTUAL else None
    if rule is Rule.ACTUAL and sent is None:
        return
    try:
        found = usual_of(state, plan, rule, sent)
    except NoRule as failure:
        st.info(plain(str(failure)))
        return
    except NotPlannable as failure:
        st.error(plain(f"With the service of that plan the week cannot be planned. {failure}"))
        return
    saving_line(state, plan, *found)
    lanes_table(state, plan, found[1])


def _rule(state: Desk, plan: Plan) -> Rule:
    """The rule that is chosen; what somebody chooses who may change the week, the desk remembers."""
    said = desk_rule(state, plan)
    rules = [*rules_possible(plan.week, plan.model), Rule.SHARES, Rule.ACTUAL]
    chosen = st.segmented_control(
        "The usual way", rules, default=said, required=True, key="usual-chosen",
        format_func=lambda rule: rule.words[:1].upper() + rule.words[1:], label_visibility="collapsed",
    ) or said  # fmt: skip
    chooses = state.kept is not None and state.kept.may_change
    if chosen is not said and chosen is not Rule.ACTUAL and chooses:
        remember_rule(chosen)
    return chosen


def _sent(state: Desk) -> Quantities | None:
    """The plan as it was sent: an uploaded list or a plan of the records; kept beside the week."""
    kept = state.kept
    may_change = kept is None or kept.may_change
    now = sent_of(state)
    if not may_change:
        if not now:
            st.info("Nobody has said yet what was really sent.")
        return now or None
    left, right = st.columns(2, gap="medium", vertical_alignment="bottom")
    with left:
        file = st.file_uploader(
            "A plan workbook, or a list of Depot, Customer and Quantity",
            type=TYPES,
            key=f"sent-{state.uploads}",
        )
    with right:
        points = points_of(state)
        name = st.selectbox("Or a plan of the records", list(points), index=None, key="sent-point")
        if (
            st.button("Take this plan as the one that was sent", key="sent-take", disabled=name is None)
            and name
        ):
            return _taken(state, now, quantities_at(points[name]))
    if file is None:
        return now or None
    try:
        return _taken(state, now, engine.read_quantities((file.name, file.getvalue()), state.style))
    except engine.Unreadable as refused:
        st.error(f"{plain(refused.finding.message)} {plain(refused.finding.mend)}")
        return None


def _taken(state: Desk, now: Quantities, sent: Quantities) -> Quantities:
    """Let this be what was sent, on disk too; readers then see the saving against it."""
    if state.kept is not None and dict(now) != dict(sent):
        save_sent(state.kept.records, state.kept.week_id, sent)
        remember_rule(Rule.ACTUAL)
    return sent


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
        + (
            ", at equal service: both deliver the same to everybody."
            if found.equal
            else ", at equal service: beside it stands the cheapest plan that delivers what it delivers."
        )
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
