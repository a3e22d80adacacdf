"""Small random weeks with surcharges and lower limits on top, and how a changed one is planned."""

from dataclasses import replace
from decimal import Decimal

from hypothesis import strategies as st

from engine.changes import Add
from engine.figures import Gone
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.rates import Rates
from engine.week import Week
from tests.planning.weeks import weeks

D = Decimal


@st.composite
def weeks_with_limits(draw: st.DrawFn) -> Week:
    """A small week where some rows carry at least something and rates bear surcharges."""
    week = draw(weeks())
    surcharge = st.sampled_from([None, None, D(25), D(-20)])
    rows = [
        replace(
            row,
            at_least=draw(st.sampled_from([None, None, None, None, D(1), D(2)])),
            surcharge=draw(surcharge),
        )
        for row in week.rates
    ]
    rows = [replace(row, at_least=None) if row.closed or row.at_most in (0, 1) else row for row in rows]
    return replace(week, rates=Rates.of(rows), rules=replace(week.rules, fuel_surcharge=draw(surcharge)))


@st.composite
def weeks_with_gone(draw: st.DrawFn) -> Week:
    """The same where something has gone already, now and then more than was ordered or available."""
    week = draw(weeks_with_limits())
    for number, row in enumerate(list(week.rates)):
        if draw(st.sampled_from([False, False, True])):
            quantity = D(draw(st.integers(1, 2)))
            gone = Gone(f"G{number}", row.depot, row.customer, quantity, D(3), row.haulier)
            week = week.apply(Add(gone))
    return week


def gone_from(week: Week, what: str, name: str) -> Decimal:
    """What has gone from a depot or to a customer."""
    return sum((gone.quantity for gone in week.gone.values() if getattr(gone, what) == name), D(0))


def planned(week: Week) -> Plan | None:
    """The week's plan, None where it cannot be planned."""
    try:
        return plan_week(week)
    except NotPlannable:
        return None
