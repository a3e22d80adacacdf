"""Sheet *Values*: what one unit more and one unit less would cost, and how far each rate can move."""

from collections.abc import Iterable, Iterator, Sequence
from decimal import Decimal

from engine.planning.plan import Plan
from engine.reasons import (
    NearLane,
    RateInterval,
    UnitValue,
    Values,
    nearest_to_paying,
    rate_intervals,
    values,
)
from engine.reasons.ground import why_withheld
from engine.report.look import Style, number_format, places_of
from engine.report.sheet import Row, Sheet, Value

_HEADINGS = (
    "Where", "Name", "One more", "holds for", "goes short by", "One less", "holds for", "goes short by",
    "Price in the proof",
)  # fmt: skip
_RATE_HEADINGS = (
    "Depot", "Customer", "Haulier", "Send", "Rate", "Plan stays from", "Plan stays to", "Pays below",
    "Would carry",
)  # fmt: skip
_WIDTHS = (24, 30, 16, 15, 15, 15, 15, 15, 15)
_HEADING_ROW = 5

MOST_UNUSED = 200
"""How many unused rates are listed; those nearest to paying."""

_ABOUT = (
    "What the plan would cost more (less, where negative) in {currency}, charges included, if one {unit} "
    "more or less could be sent by a depot or were ordered by a customer, after all that this displaces.",
    "Blank: nothing is there to take away, or no way to bring more. A blank 'holds for' means: without "
    "limit. Beyond it, plan again.",
)
_ABOUT_RATES = (
    "Per unit and before surcharge, one rate moving alone. Between from and to the plan stays as it is "
    "(blank: however low, however high).",
    "An unused rate below 'pays below' brings its lane in, with what it would carry.",
)


def values_sheet(plan: Plan, header: str) -> Sheet:
    """Sheet *Values*: depots, then customers, then rates in use and those nearest to paying."""
    found = values(plan, holds=True)
    if why_withheld(plan):
        rows = [
            Row(["What a unit is worth"], [Style("title")], height=26),
            Row([found.withheld], [Style("quiet")]),
        ]
        return Sheet("Values", _WIDTHS, rows, length=len(rows), header=header)
    used = list(_used(plan))
    near = nearest_to_paying(plan, MOST_UNUSED)
    rows = [*_rows(plan, found), *_rate_rows(plan, found, used, near)]
    return Sheet(
        "Values",
        _WIDTHS,
        rows,
        length=len(rows),
        frozen=f"A{_HEADING_ROW + 1}",
        repeated=f"{_HEADING_ROW}:{_HEADING_ROW}",
        landscape=True,
        header=header,
    )


def _used(plan: Plan) -> Iterator[RateInterval]:
    intervals = rate_intervals(plan)
    return (intervals.at(row) for row in intervals.rows.tolist() if plan.flow.quantity[row] > 0)


def _headings(names: Sequence[str], texts: int) -> Row:
    text, right = Style("heading", wrap=True), Style("heading", align="right", wrap=True)
    return Row(names, [*[text] * texts, *[right] * (len(names) - texts)], height=30)


def _rows(plan: Plan, found: Values) -> Iterator[Row]:
    rules, quiet = plan.week.rules, [Style("quiet")]
    yield Row(["What a unit is worth"], [Style("title")], height=26)
    for sentence in _ABOUT:
        yield Row([sentence.format(currency=rules.currency, unit=rules.unit)], quiet)
    yield Row([found.withheld or None], [Style("strong")])
    yield _headings(_HEADINGS, 2)
    listed = (*found.depots, *found.customers)
    amount = _amounts(amount for one in listed for amount in (one.one_more, one.one_less, one.price))
    holds = _quantities(one.one_more_holds_for for one in listed)
    short = Style("plain", "0", "right")
    styles = [Style("quiet"), Style(), amount, holds, short, amount, holds, short, amount]
    for where, values_there in (("depot", found.depots), ("customer", found.customers)):
        for one in values_there:
            yield Row(_cells(where, one), styles)


def _cells(where: str, one: UnitValue) -> list[Value]:
    more_short, less_short = (
        None if change == 0 else change for change in (one.one_more_short, one.one_less_short)
    )
    return [
        where, one.name, one.one_more, one.one_more_holds_for, more_short, one.one_less,
        one.one_less_holds_for, less_short, one.price,
    ]  # fmt: skip


def _rate_rows(
    plan: Plan, found: Values, used: Sequence[RateInterval], near: Sequence[NearLane]
) -> Iterator[Row]:
    yield Row([])
    yield Row(["How far each rate can move"], [Style("title")], height=26)
    for sentence in _ABOUT_RATES:
        yield Row([sentence], [Style("quiet")])
    unused = sum(1 for row in (plan.model.rate_row >= 0) & (plan.flow.quantity == 0) if row)
    shown = f"Unused rates: the {len(near)} nearest to paying" if near else "No unused rate could pay"
    if found.withheld:
        yield Row(["Given the shares as they are."], [Style("quiet")])
    yield Row([f"Rates in use: all. {shown}, of {unused}."], [Style("quiet")])
    yield _headings(_RATE_HEADINGS, 3)
    intervals = [*used, *(lane.interval for lane in near)]
    amount = _amounts(
        figure for one in intervals for figure in (one.rate, one.stays_from, one.stays_to, one.pays_below)
    )
    quantity = _quantities([*(one.quantity for one in used), *(lane.carries for lane in near)])
    styles = [Style(), Style(), Style(), quantity, amount, amount, amount, amount, quantity]
    for one in used:
        yield Row([*_names(one), one.quantity, one.rate, one.stays_from, one.stays_to], styles)
    for lane in near:
        one = lane.interval
        yield Row([*_names(one), None, one.rate, None, None, one.pays_below, lane.carries], styles)


def _names(one: RateInterval) -> list[Value]:
    return [one.key.depot, one.key.customer, one.key.haulier]


def _amounts(figures: Iterable[Decimal | None]) -> Style:
    return Style("plain", number_format(places_of(list(figures)), always=2), "right")


def _quantities(figures: Iterable[Decimal | None]) -> Style:
    return Style("plain", number_format(places_of(list(figures))), "right")
