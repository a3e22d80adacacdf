"""Compiles what the reasons compute with, so that the first question is answered at once."""

from decimal import Decimal

from engine.figures import Customer, Depot, Order, RateRow
from engine.planning.planner import plan_week
from engine.reasons.curve import curve
from engine.reasons.options import nearest_to_paying
from engine.reasons.pairs import pairs
from engine.reasons.values import values
from engine.week import Week


def prepare() -> None:
    """Ask a very small week everything once; some seconds at the very first start, none afterwards."""
    ten, two = Decimal(10), Decimal(2)
    names = ("A", "B")
    week = Week.of(
        tuple(Depot(name, ten) for name in names),
        tuple(Customer(name, (Order(ten),)) for name in names),
        tuple(RateRow(i, j, two if i == j else ten, at_most=two) for i in names for j in names),
    )
    plan = plan_week(week)
    values(plan, holds=True)
    nearest_to_paying(plan)
    pairs(plan)
    curve(plan, "A", Decimal(0), two * ten, "customer")
