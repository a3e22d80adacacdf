"""The invented trade in a week of whole loads: Packhorse by the load, Oxcart with a trip minimum.

The same stores and lanes as in the small week, with stock for all orders. What a vehicle carries, what a
load costs beside a tonne, and what is due once are invented; their shape follows common practice.
"""

from decimal import ROUND_HALF_UP, Decimal

from tests.sample_trade import Figures, Row, small_week

BY_THE_LOAD = "Packhorse"
WITH_MINIMUM = "Oxcart"
LOAD, SMALL_LOAD = Decimal(27), Decimal(18)
ORDINARY = Decimal("26")
"""A rate per load is about what so many tonnes would cost: a full load is a little cheaper than that."""


def loads_week() -> Figures:
    """Six depots, 48 stores, whole loads, stock enough."""
    week = small_week(before=True)
    for row in week.depots:
        row["Charge if unsent"] = row["Must move"] = None
        row["Loads a day"] = {"Northgate": 7, "Quarry": 9, "Upland": 5}.get(row["Depot"])
        if row["Depot"] == "Upland":
            row["Opening charge"] = Decimal(650)
    _mark_stores(week.customers)
    for row in week.rates:
        row["At least"] = None
        if row["Customer"] == "Cole":
            row["At most"] = None
    for number, row in enumerate(row for row in week.rates if row["Haulier"] == BY_THE_LOAD):
        row["Per"] = "load"
        row["Rate"] = (row["Rate"] * ORDINARY).quantize(Decimal(5), ROUND_HALF_UP)
        if number % 9 == 4:
            row["Load size"] = Decimal(24)
    for row in week.rates:
        if row["Haulier"] == WITH_MINIMUM:
            row["Trip minimum"] = Decimal(150)
    for number, row in enumerate(row for row in week.rates if row["Haulier"] == "Drayman"):
        if number % 17 == 6:
            row["Charge per use"] = Decimal(40)
    week.rules[0]["Value"] = "Week 7, whole loads"
    week.rules.extend([{"Rule": "Load size", "Value": LOAD}, {"Rule": "Days", "Value": 5}])
    return week


HAULIERS: list[Row] = [
    {"Haulier": WITH_MINIMUM, "At most": Decimal(700), "Load size": SMALL_LOAD},
    {"Haulier": BY_THE_LOAD, "At most": Decimal(1900), "Load size": None},
]


def _mark_stores(customers: list[Row]) -> None:
    """Some stores take from a single depot, some no small drops; all are of one priority but a few."""
    first: dict[str, Row] = {}
    for row in customers:
        first.setdefault(row["Customer"], row)
    for number, row in enumerate(first.values()):
        row["Priority"] = "A" if number % 8 == 2 else None
        row["Charge if short"] = None
        if number % 6 == 1:
            row["One depot"] = "yes"
        elif number % 7 == 3:
            row["Smallest drop"] = Decimal(10)
