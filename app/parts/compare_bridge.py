"""A bridge on screen: the paragraph, the waterfall, its table; and any two plans to choose."""

import streamlit as st

from app.access import issued_of, listed, plans_of
from app.parts.compare_asked import Point, between
from app.parts.compare_charts import waterfall
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import money, plain, quantity
from app.session import Desk
from engine.compare.bridge import Bridge
from engine.compare.bridge_words import paragraph
from engine.compare.mixed import NotComparable, is_event
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable
from engine.records import Listed

MOST_REMARKS, MOST_WEEKS = 8, 30


def bridge_shown(state: Desk, found: Bridge, key: str) -> None:
    """The paragraph, the waterfall beside its table, and what had to give way."""
    mark = state.decimal_mark
    said = paragraph(
        found,
        lambda value: money(value, found.currency, mark),
        lambda value: quantity(value, found.unit, mark),
    )
    st.markdown(plain(said))
    if not found.steps:
        return
    chart, table = st.columns([11, 9], gap="medium")
    with chart:
        waterfall(found, mark)
    with table:
        minor = minor_places(found.currency)
        headings = [
            Heading("Step"),
            Heading(f"Freight, {found.currency}", places=minor),
            *([] if found.averaged else [Heading(f"then, {found.currency}", "Where freight stands", minor)]),
            Heading(f"Charges, {found.currency}", "For short, unsent and opening: they stand apart", minor),
            Heading(f"Short, {found.unit}"),
        ]
        rows: list[list[Cell]] = [
            [
                step.name, step.freight, *([] if step.after is None else [step.after]), step.charges,
                step.short,
            ]
            for step in found.steps
        ]  # fmt: skip
        total: list[Cell] = ["Together", found.freight, found.charges, found.short]
        if not found.averaged:
            total.insert(2, found.second_freight)
        reasons_table(headings, [*rows, total], f"bridge-{key}", mark, pick=False)
        how = (
            "Averages over all orders (Shapley 1953)"
            if found.averaged
            else "The steps in this order, each planned anew as a whole week"
        )
        st.caption(f"{how}; cents by largest remainder, so that they add up.")
        meanings = "; ".join(f"{step.name}: {step.about}" for step in found.steps if not is_event(step.key))
        st.caption(plain(meanings))
    for sentence in found.remarks[:MOST_REMARKS]:
        st.caption(plain(sentence))
    if len(found.remarks) > MOST_REMARKS:
        st.caption(f"and {len(found.remarks) - MOST_REMARKS} more remarks of this kind.")


def bridge_view(state: Desk, plan: Plan) -> None:
    """Any two plans of the records: weeks as they stand, and plans as they were issued."""
    points = points_of(state)
    if len(points) < 2:
        st.info("There is only one plan in the records: a second week, or an issued plan, can be compared.")
        return
    names = list(points)
    here = [name for name in names if state.kept is not None and points[name].week.id == state.kept.week_id]
    second = names.index(here[0]) if here else 0
    first = next((n for n in range(len(names)) if n != second and names[n] not in here), int(second == 0))
    with st.container(horizontal=True, vertical_alignment="bottom"):
        from_name = st.selectbox("From", names, index=first, key="bridge-first", width=340)
        to_name = st.selectbox("To", names, index=second, key="bridge-second", width=340)
        average = st.toggle(
            "Average over all orders", key="bridge-average",
            help="What each reason comes to does not depend on its place in the order then; it takes a plan "
            "for every mixture of the two weeks",
        )  # fmt: skip
    if from_name is None or to_name is None:
        return
    try:
        with st.spinner("Planning each step …", show_time=True):
            found = between(points[from_name], points[to_name], average)
    except NotComparable as failure:
        st.error(plain(str(failure)))
        return
    except NotPlannable as failure:
        st.error(plain(f"One of the two cannot be planned as it stands. {failure}"))
        return
    bridge_shown(state, found, "chosen")


def points_of(state: Desk) -> dict[str, Point]:
    """The plans that can be compared, by what they are called: the latest weeks first."""
    found: dict[str, Point] = {}
    for week in listed("", False, MOST_WEEKS):
        called = week.name if week.name not in found else f"{week.name} ({week.created:%d %b %Y %H:%M:%S})"
        found[called] = Point(week, week.name, week.version)
        for number, issued, who, note in plans_of(week):
            about = ", ".join(part for part in (f"{issued:%a %d %b %H:%M}", who, note) if part)
            label = f"{called}, plan {number} ({about})"
            found[label] = Point(week, f"{week.name}, plan {number}", _version(week.id, number, week), number)
    return found


@st.cache_data(show_spinner=False, max_entries=500)
def _version(week_id: str, number: int, _week: Listed) -> int:
    """Of an issued plan, which never changes."""
    return issued_of(_week, number).version
