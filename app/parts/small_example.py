"""The example of *How it works*: two depots, three customers, planned by the engine like any other week."""

from dataclasses import dataclass
from decimal import Decimal
from functools import cache

import engine
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.planning.plan import Plan
from engine.reasons import values
from engine.week import Week

RATES = {
    ("Weir", "Ash"): 8,
    ("Weir", "Elm"): 12,
    ("Weir", "Oak"): 10,
    ("Lock", "Ash"): 9,
    ("Lock", "Elm"): 7,
    ("Lock", "Oak"): 14,
}
STOCK = {"Weir": 70, "Lock": 50}
ORDERS = {"Ash": 40, "Elm": 30, "Oak": 45}

BY_HAND = (("Lock", "Elm", 30), ("Weir", "Ash", 40), ("Weir", "Oak", 30), ("Lock", "Oak", 15))
"""What comes of taking the cheapest lane first, then the next, as far as stock and orders go."""


@dataclass(frozen=True, slots=True)
class Example:
    """The plan, what taking the cheapest lane first would cost, and what one more tonne costs."""

    plan: Plan
    by_hand: Decimal
    one_more_for_oak: Decimal
    one_more_at_weir: Decimal


@cache
def small_example() -> Example:
    week = Week.of(
        tuple(Depot(name, Decimal(stock)) for name, stock in STOCK.items()),
        tuple(Customer(name, (Order(Decimal(ordered)),)) for name, ordered in ORDERS.items()),
        tuple(RateRow(*lane, rate=Decimal(rate)) for lane, rate in RATES.items()),
        Rules(week="Example"),
    )
    plan = engine.plan_week(week)
    found = values(plan)
    more = {one.name: one.one_more or Decimal(0) for one in (*found.depots, *found.customers)}
    by_hand = sum((Decimal(q * RATES[depot, customer]) for depot, customer, q in BY_HAND), Decimal(0))
    return Example(plan, by_hand, more["Oak"], more["Weir"])
