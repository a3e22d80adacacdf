"""A curve: what the week and the next unit cost while one stock or one order runs over a range."""

from decimal import Decimal

import streamlit as st

from app.parts.charts import steps, straight
from app.parts.reasons_asked import asked
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import plain
from app.session import Desk
from engine.columns import SEND
from engine.intake.fields import read_field, show_field
from engine.planning.plan import Plan
from engine.reasons import Curve, CurvePoint, curve
from engine.reasons.curve import usual_range
from engine.reasons.ends import What


def curve_view(state: Desk, plan: Plan) -> None:
    """Whose figure, from where to where; then the chart and its table."""
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    with st.container(horizontal=True, vertical_alignment="bottom"):
        what = st.segmented_control(
            "Of what", ["depot", "customer"], default="depot", required=True, key="curve-what",
            format_func={"depot": "A depot's stock", "customer": "A customer's order"}.__getitem__,
            label_visibility="collapsed",
        ) or "depot"  # fmt: skip
        names = list(plan.week.depots if what == "depot" else plan.week.customers)
        name = st.selectbox("Whose", names, key=f"curve-name-{what}", width=300)
        if name is None:
            return
        today = plan.week.depots[name].available if what == "depot" else plan.week.customers[name].ordered
        ends = usual_range(today)
        texts = [
            st.text_input(
                label,
                show_field(SEND, end, state.style) or "0",
                key=f"curve-{label}-{what}-{name}",
                width=130,
            )
            for label, end in zip(("From", "To"), ends, strict=True)
        ]
    read = [read_field(SEND, text, state.style) for text in texts]
    low, high = (value for value, _ in read)
    if low is None or high is None or low > high:
        said = [plain(finding.message) for _, finding in read if finding]
        st.error(" ".join(said) or "Type two quantities, the smaller first.")
        return
    kind: What = "depot" if what == "depot" else "customer"
    found = asked(plan, ("curve", what, name, low, high), lambda: curve(plan, name, low, high, kind))
    _shown(state, found, unit, currency)


def _shown(state: Desk, found: Curve, unit: str, currency: str) -> None:
    if found.withheld:
        st.info(plain(f"{found.withheld} So there is no curve this week."))
        return
    if found.ends_early:
        st.info(plain(found.ends_early))
    if len(found.points) < 2:
        st.info("There is only one figure to show in this range.")
    across = f"{'Available' if found.what == 'depot' else 'Ordered'}, {unit}"
    figures = [point.figure for point in found.points]
    left, right = st.columns(2, gap="medium")
    if len(found.points) > 1:
        with left:
            st.markdown("**What the next unit costs**")
            steps(
                figures,
                [point.next_unit for point in found.points],
                found.today,
                across,
                f"{currency} per {unit}",
            )
        with right:
            st.markdown("**What the whole week costs**")
            straight(figures, _series(found.points), found.today, across, currency)
    st.caption("Every corner is exact; between two corners each unit costs the same.")
    headings = [
        Heading(across),
        Heading(f"Next unit, {currency}", "What one more costs from here, charges included", money=True),
        Heading(f"Total, {currency}", places=2),
        Heading(f"Freight, {currency}", places=2),
        Heading(f"Charge for short, {currency}", places=2),
        Heading(f"Charge for unsent, {currency}", places=2),
        Heading(f"Short, {unit}"),
    ]
    rows: list[list[Cell]] = [
        [p.figure, p.next_unit, p.total_cost, p.freight_cost, p.short_cost, p.unsent_cost, p.short]
        for p in found.points
    ]
    reasons_table(headings, rows, f"curve-table-{state.generation}", state.decimal_mark, pick=False)


def _series(points: tuple[CurvePoint, ...]) -> dict[str, list[Decimal]]:
    """Total and, where charges set them apart, freight."""
    total, freight = [p.total_cost for p in points], [p.freight_cost for p in points]
    return {"Freight": total} if total == freight else {"Total": total, "Freight": freight}
