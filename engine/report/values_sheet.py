"""Sheet *Values*: what one unit more and one unit less would cost at every depot and customer."""

from collections.abc import Iterator

from engine.planning.plan import Plan
from engine.reasons.values import UnitValue, Values, values
from engine.report.look import Style, number_format, places_of
from engine.report.sheet import Row, Sheet, Value

_HEADINGS = ("Where", "Name", "One more", "goes short by", "One less", "goes short by", "Price in the proof")
_WIDTHS = (12, 30, 15, 15, 15, 15, 15)
_HEADING_ROW = 5

_ABOUT = (
    "What the plan would cost more (or less, where negative) in {currency}, charges included, if one {unit} "
    "more or "
    "less could be sent by a depot or were ordered by a customer, after all that this displaces.",
    "Blank: nothing is there to take away, or there is no way to bring more. Exact at today's figures; by "
    "much more "
    "than a unit, plan again.",
)


def values_sheet(plan: Plan, header: str) -> Sheet:
    """Sheet *Values*: depots first, then customers, in sheet order."""
    found = values(plan)
    return Sheet(
        "Values",
        _WIDTHS,
        _rows(plan, found),
        length=_HEADING_ROW + len(found.depots) + len(found.customers),
        frozen=f"A{_HEADING_ROW + 1}",
        repeated=f"{_HEADING_ROW}:{_HEADING_ROW}",
        landscape=False,
        header=header,
    )


def _rows(plan: Plan, found: Values) -> Iterator[Row]:
    rules, quiet = plan.week.rules, [Style("quiet")]
    yield Row(["What a unit is worth"], [Style("title")], height=26)
    for sentence in _ABOUT:
        yield Row([sentence.format(currency=rules.currency, unit=rules.unit)], quiet)
    yield Row([found.withheld or None], [Style("strong")])
    text, right = Style("heading", wrap=True), Style("heading", align="right", wrap=True)
    yield Row(_HEADINGS, [text, text, *[right] * 5], height=30)
    listed = (*found.depots, *found.customers)
    money = [amount for one in listed for amount in (one.one_more, one.one_less, one.price)]
    amount = Style("plain", number_format(places_of(money), always=2), "right")
    short = Style("plain", "0", "right")
    styles = [Style("quiet"), Style(), amount, short, amount, short, amount]
    for where, values_there in (("depot", found.depots), ("customer", found.customers)):
        for one in values_there:
            yield Row(_cells(where, one), styles)


def _cells(where: str, one: UnitValue) -> list[Value]:
    more_short, less_short = (
        None if change == 0 else change for change in (one.one_more_short, one.one_less_short)
    )
    return [where, one.name, one.one_more, more_short, one.one_less, less_short, one.price]
