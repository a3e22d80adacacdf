"""What a manager asks first: what the week costs, what was saved, and what changed from last week and why."""

import streamlit as st

from app.parts.compare_asked import Point, change_from, desk_rule, last_week, usual_of
from app.parts.compare_bridge import bridge_shown
from app.parts.compare_file import compared_file
from app.parts.words import money, number, plain
from app.session import Desk
from engine.compare.bridge import Bridge
from engine.compare.mixed import NotComparable
from engine.compare.service import Saving
from engine.compare.usual import NoRule, Rule, UsualPlan
from engine.exact import TooLarge
from engine.money import per_unit
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable
from engine.planning.totals import totals
from engine.records import Missing, NotSaved


def summary_view(state: Desk, plan: Plan) -> None:
    """Three figures, then the reasons for the change from last week."""
    rule = desk_rule(state, plan)
    usual, no_usual = _usual(state, plan, rule)
    point = last_week(state)
    change, no_change = _change(state, plan, point)
    week, saved, since = st.columns(3, gap="medium")
    with week:
        _this_week(state, plan)
    with saved:
        _saved(state, plan, rule, usual, no_usual)
    with since:
        _since(state, plan, change, no_change)
    if change is not None:
        st.header(f"What changed from {plain(change.first)}, and what that costs", anchor=False)
        bridge_shown(state, change, "summary")
    compared_file(state, plan, usual, change)


def _this_week(state: Desk, plan: Plan) -> None:
    rules, sums, mark = plan.week.rules, totals(plan), state.decimal_mark
    st.metric(f"{_label(rules.week)}: freight payable", money(plan.freight_payable, rules.currency, mark))
    each = ""
    by_unit = per_unit(plan.freight_payable, sums.delivered, 2)
    if by_unit is not None:
        each = f", {number(by_unit, mark, 2)} {plain(rules.currency)} per {plain(rules.unit)}"
    st.caption(f"{number(sums.delivered, mark)} {plain(rules.unit)} delivered{each}.")
    short = (
        f"{number(sums.short, mark)} {plain(rules.unit)} of {number(sums.ordered, mark)} ordered go short."
    )
    st.caption(short if plan.short else "Every order is met.")


def _saved(state: Desk, plan: Plan, rule: Rule, usual: tuple[UsualPlan, Saving] | None, why: str) -> None:
    rules, mark = plan.week.rules, state.decimal_mark
    if usual is None:
        st.metric("Saving against the usual plan", "–")
        st.caption(plain(why))
        return
    found = usual[1]
    st.metric(f"Saving against {_label(rule.words)}", money(found.freight, rules.currency, mark))
    each = ""
    if found.per_unit is not None:
        each = f"{number(found.per_unit, mark, 2)} {plain(rules.currency)} per {plain(rules.unit)}, "
    if found.equal:
        st.caption(f"{each}at equal service: both deliver the same to everybody.")
        return
    st.caption(
        f"{each}at equal service: the usual plan beside the cheapest one that delivers what it delivers. "
        + plain(" ".join(found.differs))
    )


def _since(state: Desk, plan: Plan, change: Bridge | None, why: str) -> None:
    rules, mark = plan.week.rules, state.decimal_mark
    if change is None:
        st.metric("Change from last week", "–")
        st.caption(plain(why))
        return
    sign = "+" if change.freight > 0 else ""
    st.metric(f"Change from {_label(change.first)}", sign + money(change.freight, rules.currency, mark))
    before = money(change.first_freight, rules.currency, mark)
    said = f"Freight was {before}."
    if change.short:
        word = "more" if change.short > 0 else "less"
        said += f" {number(abs(change.short), mark)} {plain(rules.unit)} {word} go short."
    st.caption(said)


def _usual(state: Desk, plan: Plan, rule: Rule) -> tuple[tuple[UsualPlan, Saving] | None, str]:
    try:
        return usual_of(state, plan, rule), ""
    except (NoRule, NotPlannable, TooLarge) as failure:
        return None, str(failure)


def _change(state: Desk, plan: Plan, point: Point | None) -> tuple[Bridge | None, str]:
    if point is None:
        return None, "No earlier week of this unit and currency is in the records."
    try:
        return change_from(state, plan, point), ""
    except NotPlannable:
        return None, f"{point.name} cannot be planned as it stands."
    except (NotComparable, TooLarge, Missing, NotSaved) as failure:
        return None, str(failure)


def _label(name: str) -> str:
    """A name in the label of a figure, where Markdown is read as well."""
    return plain(name if len(name) <= 40 else name[:39] + "…")
