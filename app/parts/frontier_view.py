"""Cost against emissions: the exact frontier by the desk's own factor, and what a point of it would move."""

import time
from decimal import Decimal
from functools import partial
from io import BytesIO

import streamlit as st

from app.parts.flow_map import Focus, MapFlow, MapPoint, flow_map
from app.parts.frontier_chart import frontier_chart
from app.parts.reasons_asked import asked
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import counted, money, number, plain
from app.session import Desk
from engine.columns import Column, Kind
from engine.compare.frontier import (
    NOT_DIVISIBLE,
    TONNES,
    Emissions,
    Frontier,
    NoTradeOff,
    Point,
    frontier,
    sent_at,
)
from engine.compare.stress_ground import is_no_network
from engine.exact import total_of
from engine.intake.fields import read_field
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.report.trade_off_sheet import trade_off_sheet
from engine.report.workbook import header_of, write_workbook

LONGEST = 20.0
"""Seconds that the page searches; what is found by then is shown, and said to be so."""

XLSX = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"
_FACTOR = Column("Emission factor", "factor", Kind.PRICE, "")
_WEIGHT = Column("Weight", "weight", Kind.QUANTITY, "")

Lane = tuple[str, str]


def frontier_view(state: Desk, plan: Plan) -> None:
    """The factor and its source; then the frontier as chart and table, and one point of it."""
    unit = plan.week.rules.unit
    if is_no_network(plan):
        st.info(NOT_DIVISIBLE)
        return
    st.caption(
        "Everybody gets what the plan gives them; only who sends it, and by whom, changes. "
        "Nothing here changes the week."
    )
    with st.container(horizontal=True, vertical_alignment="bottom"):
        factor = st.text_input("Emission factor, kg CO2e per tonne-km", key="frontier-factor", width=290)
        source = st.text_input("Where the factor is from", key="frontier-source", width=420)
        weight = (
            "" if unit in TONNES else st.text_input(f"Tonnes per {unit}", key="frontier-weight", width=160)
        )
    if not factor.strip() or not source.strip():
        st.info(
            "Type the factor that your desk answers for and where it is from: there is no default, and both "
            "are printed with every figure. The kilometres are those of the column Km on Figures."
        )
        return
    try:
        emissions = _emissions(state, factor, source, weight)
        found = asked(plan, ("frontier", emissions), lambda: _found(plan, emissions))
    except NoTradeOff as missing:
        st.error(plain(str(missing)))
        return
    _shown(state, plan, found)


def _emissions(state: Desk, factor: str, source: str, weight: str) -> Emissions:
    """What was typed.

    Raises NoTradeOff where it cannot be read, with a sentence.
    """
    read = []
    for column, text in ((_FACTOR, factor), (_WEIGHT, weight)):
        value, finding = read_field(column, text, state.style) if text.strip() else (None, None)
        if finding is not None:
            raise NoTradeOff(finding.message)
        read.append(value)
    return Emissions(read[0] if isinstance(read[0], Decimal) else Decimal(0), source.strip(), read[1])


def _found(plan: Plan, emissions: Emissions) -> Frontier:
    ends = time.monotonic() + LONGEST
    return frontier(plan, emissions, stop=lambda: time.monotonic() > ends)


def _shown(state: Desk, plan: Plan, found: Frontier) -> None:
    rules, mark, minor = plan.week.rules, state.decimal_mark, minor_places(plan.week.rules.currency)
    last = found.points[-1]
    if len(found.points) == 1:
        st.markdown("The cheapest plan is also the one that emits least: there is nothing to trade off.")
    else:
        percent = found.less_percent(last) or Decimal(0)
        st.markdown(
            f"At most **{number(found.less(last), mark, 1)} kg CO2e** less "
            f"({number(percent, mark, 2)} %), for "
            f"**{plain(money(found.dearer(last), rules.currency, mark))}** more; the first kilogram costs "
            f"{plain(_per_kg(found.points[1], rules.currency, mark))}, the last "
            f"{plain(_per_kg(last, rules.currency, mark))}."
        )
    headings = [
        Heading("Breakpoint", places=0),
        Heading(f"Freight and charges, {rules.currency}", "Exact, before amounts are rounded", minor),
        Heading(f"Freight, {rules.currency}", places=minor),
        Heading("Emissions, kg CO2e", places=1),
        Heading(f"Dearer by, {rules.currency}", places=minor),
        Heading("Less by, kg CO2e", places=1),
        Heading(f"Each kg less costs, {rules.currency}", "From the breakpoint before, rounded", 4),
    ]
    rows: list[list[Cell]] = [
        [
            Decimal(n), point.cost, point.freight, point.emissions, found.dearer(point), found.less(point),
            None if point.per_kg is None else Decimal(repr(float(point.per_kg))),
        ]
        for n, point in enumerate(found.points, 1)
    ]  # fmt: skip
    chart = st.container()
    row = reasons_table(headings, rows, f"frontier-table-{id(found)}", mark, most_height=320)
    with chart:
        frontier_chart(found, row, mark)
    for sentence in about(found, mark):
        st.caption(plain(sentence))
    if row is not None:
        _point(state, plan, found, row)
    elif len(found.points) > 1:
        st.caption("Pick a breakpoint to see which lanes it would change.")

    def workbook() -> bytes:
        file = BytesIO()
        write_workbook(plan, file, more=[trade_off_sheet(found, header_of(plan))])
        return file.getvalue()

    name = "".join(c for c in rules.week if c.isalnum() or c in " -_")[:60].strip() or "Week"
    st.download_button(
        "Workbook with sheet Trade-off", workbook, f"{name} trade-off.xlsx", XLSX, key="frontier-book",
        on_click="ignore",
    )  # fmt: skip


def about(found: Frontier, mark: str) -> list[str]:
    """What stands beside every figure: the factor, its source, and what is left out."""
    said = [
        f"{counted(len(found.points), 'breakpoint')}, each a plan of its own, proved; between two of them "
        "their plans can be mixed in any proportion. "
        f"Factor: {number(found.emissions.factor, mark)} kg CO2e per tonne-kilometre "
        f"({found.emissions.source})."
    ]
    if not found.complete:
        said.append(
            f"The search was ended after {LONGEST:g} seconds: there are more breakpoints between those shown."
        )
    if found.left_out:
        said.append(
            f"{counted(found.left_out, 'open rate row has', 'open rate rows have')} no Km and no part in it."
        )
    if found.plan.week.gone:
        said.append("What has gone is in neither figure: nothing can change it any more.")
    return said


def _per_kg(point: Point, currency: str, mark: str) -> str:
    each = Decimal(0) if point.per_kg is None else Decimal(repr(float(point.per_kg)))
    return f"{number(each, mark, 4)} {currency}"


def _point(state: Desk, plan: Plan, found: Frontier, row: int) -> None:
    """The lanes that a breakpoint would change, on the map and as a table."""
    unit, mark = plan.week.rules.unit, state.decimal_mark
    then, now = _by_lane(found, found.points[row]), _by_lane(found, found.today)
    changes = {
        lane: (now.get(lane, Decimal(0)), then.get(lane, Decimal(0)))
        for lane in dict.fromkeys([*now, *then])
        if now.get(lane) != then.get(lane)
    }
    st.markdown(f"#### Breakpoint {row + 1}: {counted(len(changes), 'lane')} would change")
    if not changes:
        return
    shown = partial(number, mark=mark)
    points = [
        MapPoint("depot", d.name, d.latitude, d.longitude, d.available) for d in plan.week.depots.values()
    ]
    points += [
        MapPoint("customer", c.name, c.latitude, c.longitude, c.ordered) for c in plan.week.customers.values()
    ]
    if any(point.place for point in points):
        lines = [
            MapFlow(*lane, quantity, f"today {shown(changes[lane][0])}" if lane in changes else "")
            for lane, quantity in then.items()
        ]
        more = frozenset(lane for lane, (before, after) in changes.items() if after > before)
        focus = Focus(lanes=more or frozenset({("", "")}))
        flow_map(points, lines, unit, key="frontier-map", focus=focus, number=shown, height=400)
        st.caption("Strong lines carry more than today, faint ones the same or less.")
    rows: list[list[Cell]] = [
        [*lane, before, after, total_of((after, -before))] for lane, (before, after) in changes.items()
    ]
    headings = [
        Heading("Depot"), Heading("Customer"), Heading(f"Today, {unit}"), Heading(f"Then, {unit}"),
        Heading(f"Change, {unit}"),
    ]  # fmt: skip
    reasons_table(headings, rows, f"frontier-lanes-{row}", mark, pick=False, most_height=320)


def _by_lane(found: Frontier, point: Point) -> dict[Lane, Decimal]:
    sums: dict[Lane, list[Decimal]] = {}
    for key, quantity in sent_at(found, point).items():
        sums.setdefault((key.depot, key.customer), []).append(quantity)
    return {lane: total_of(quantities) for lane, quantities in sums.items()}
