"""One case of a stress run looked at: who is hit, which lanes change, on the map and as a table."""

from decimal import Decimal
from functools import partial

import streamlit as st

from app.parts.flow_map import Focus, MapFlow, MapPoint, flow_map
from app.parts.reasons_asked import asked
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import number, plain
from app.session import Desk, try_plan
from engine.compare.stress_cases import Case, change_of
from engine.compare.stress_solve import Outcome
from engine.exact import total_of
from engine.findings import Finding
from engine.planning.plan import Plan
from engine.planning.totals import flows

Lane = tuple[str, str]


def case_view(state: Desk, plan: Plan, one: Outcome) -> None:
    """The plan of the week as the case leaves it, beside today's."""
    case, found = one.case, one.plan
    stopped: tuple[Finding, ...] = ()
    if found is None:
        with st.spinner("Planning this case …", show_time=True):
            found, stopped = asked(
                plan, ("case", case), lambda: try_plan(plan.week.apply(change_of(plan.week, case)), near=plan)
            )
    st.markdown(f"#### {plain(_title(case))}")
    if found is None:
        for finding in stopped:
            st.error(plain(finding.message))
        return
    changes = lane_changes(plan, found)
    _map(plan, found, case, changes, state.decimal_mark)
    left, right = st.columns(2, gap="medium")
    with left:
        _who_is_hit(state, plan, found)
    with right:
        _lanes(state, plan, changes)


def lane_changes(plan: Plan, other: Plan) -> dict[Lane, tuple[Decimal, Decimal]]:
    """Lanes on which another plan sends another quantity: today's and the other's."""
    sums = [{(one.depot, one.customer): one.quantity for one in flows(those)} for those in (plan, other)]
    lanes = dict.fromkeys([*sums[0], *sums[1]])
    pairs = {lane: (sums[0].get(lane, Decimal(0)), sums[1].get(lane, Decimal(0))) for lane in lanes}
    return {lane: pair for lane, pair in pairs.items() if pair[0] != pair[1]}


def _title(case: Case) -> str:
    return case.words[:1].upper() + case.words[1:]


def _map(
    plan: Plan, found: Plan, case: Case, changes: dict[Lane, tuple[Decimal, Decimal]], mark: str
) -> None:
    short = {one.customer: one.quantity for one in found.short}
    shown = partial(number, mark=mark)
    points = [
        MapPoint("depot", d.name, d.latitude, d.longitude, d.available,
                 note="lost" if d.name == case.depot and not case.customer else "")
        for d in plan.week.depots.values()
    ]  # fmt: skip
    points += [
        MapPoint("customer", c.name, c.latitude, c.longitude, c.ordered, short.get(c.name, Decimal(0)))
        for c in found.week.customers.values()
    ]
    if not any(point.place for point in points):
        st.info("No map: no depot or customer has coordinates.")
        return
    lines = [
        MapFlow(one.depot, one.customer, one.quantity, _beside(changes.get((one.depot, one.customer)), shown))
        for one in flows(found)
    ]
    more = frozenset(lane for lane, (before, after) in changes.items() if after > before)
    focus = Focus(lanes=more or frozenset({("", "")}))
    flow_map(points, lines, plan.week.rules.unit, key="stress-map", focus=focus, number=shown, height=420)
    st.caption("Strong lines carry more than today, faint ones the same or less. Ringed customers go short.")


def _beside(pair: tuple[Decimal, Decimal] | None, shown: "partial[str]") -> str:
    return "" if pair is None else f"today {shown(pair[0])}"


def _who_is_hit(state: Desk, plan: Plan, found: Plan) -> None:
    unit = plan.week.rules.unit
    today = {one.customer: one.quantity for one in plan.short}
    then = {one.customer: one.quantity for one in found.short}
    rows: list[list[Cell]] = [
        [
            name,
            today.get(name),
            then.get(name),
            total_of((then.get(name, Decimal(0)), -today.get(name, Decimal(0)))),
        ]
        for name in dict.fromkeys([*then, *today])
    ]
    rows.sort(key=lambda row: -row[3] if isinstance(row[3], Decimal) else Decimal(0))
    st.markdown("**Who goes short**")
    if not rows:
        st.markdown("Nobody goes short.")
        return
    headings = [
        Heading("Customer"),
        Heading(f"Today, {unit}"),
        Heading(f"Then, {unit}"),
        Heading(f"More, {unit}"),
    ]
    reasons_table(headings, rows, "stress-hit", state.decimal_mark, pick=False, most_height=320)


def _lanes(state: Desk, plan: Plan, changes: dict[Lane, tuple[Decimal, Decimal]]) -> None:
    unit = plan.week.rules.unit
    rows: list[list[Cell]] = [
        [depot, customer, before, after, total_of((after, -before))]
        for (depot, customer), (before, after) in changes.items()
    ]
    rows.sort(key=lambda row: -abs(row[4]) if isinstance(row[4], Decimal) else Decimal(0))
    st.markdown("**Lanes that change**")
    headings = [
        Heading("Depot"), Heading("Customer"), Heading(f"Today, {unit}"), Heading(f"Then, {unit}"),
        Heading(f"Change, {unit}"),
    ]  # fmt: skip
    reasons_table(headings, rows, "stress-lanes", state.decimal_mark, pick=False, most_height=320)
