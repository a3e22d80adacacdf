"""Small random weeks with surcharges and lower limits on top, and how a changed one is planned."""

from dataclasses import replace
from decimal import Decimal

from hypothesis import strategies as st

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


def planned(week: Week) -> Plan | None:
    """The week's plan, None where it cannot be planned."""
    try:
        return plan_week(week)
    except NotPlannable:
        return None
