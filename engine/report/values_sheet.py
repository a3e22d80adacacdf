"""Sheet *Values*: the prices that the proof gives a unit at each depot and customer."""

from collections.abc import Iterator

from engine.planning.plan import Plan
from engine.report.look import Style, number_format, places_of
from engine.report.sheet import Row, Sheet

_ABOUT = (
    "What one unit is worth, in {currency} per {unit}: a rate starts to pay below depot price plus customer "
    "price. "
    "Prices belong to this plan as it is; where a figure is changed by much, plan again."
)


def values_sheet(plan: Plan, header: str) -> Sheet:
    """Sheet *Values*: depots first, then customers, in sheet order."""
    return Sheet(
        "Values",
        (12, 34, 18),
        _rows(plan),
        length=3 + len(plan.depot_prices) + len(plan.customer_prices),
        frozen="A4",
        repeated="3:3",
        landscape=False,
        header=header,
    )


def _rows(plan: Plan) -> Iterator[Row]:
    rules = plan.week.rules
    yield Row([_ABOUT.format(currency=rules.currency, unit=rules.unit)], [Style("quiet")])
    yield Row([])
    yield Row(
        ["Where", "Name", "Price per unit"],
        [Style("heading"), Style("heading"), Style("heading", align="right")],
    )
    prices = (*plan.depot_prices, *plan.customer_prices)
    styles = [
        Style("quiet"),
        Style(),
        Style("plain", number_format(places_of(p.price for p in prices)), "right"),
    ]
    for where, listed in (("depot", plan.depot_prices), ("customer", plan.customer_prices)):
        for price in listed:
            yield Row([where, price.name, price.price], styles)
