"""Sheet *Compare*: the plan beside the usual one, lane by lane, with live sums and a chart."""

from collections.abc import Sequence
from decimal import Decimal
from typing import Any

from engine.columns import SEND
from engine.compare.service import Saving
from engine.compare.usual import UsualPlan
from engine.exact import total_of
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.report.look import DEEP, Style, number_format, places_of
from engine.report.native_charts import ranked_bars
from engine.report.sheet import Formula, Row, Sheet, Value

_WIDTHS = (24, 26, 15, 15, 17, 17, 17, 34)
_MOST_BARS = 12
_HEADINGS = ("Depot", "Customer", "Usual", SEND.heading, "Usual, payable", "Payable", "Saving", "Lane")
"""With the heading of a plan's quantities, by which the sheet is never read as rates."""


def compare_sheet(plan: Plan, usual: UsualPlan, found: Saving, header: str) -> Sheet:
    """The saving against a usual plan at equal service, and every lane of either."""
    rules = plan.week.rules
    minor = minor_places(rules.currency)
    quiet = [Style("quiet")]
    service = (
        "Both plans deliver the same to everybody."
        if found.equal
        else "The two serve differently; the plan beside the usual one here is the cheapest of its service."
    )
    paid = Style("plain", number_format(minor), "right")
    big = Style("headline", number_format(minor))
    rows = [
        Row([f"{rules.week} against {usual.rule.words}"], [Style("title")], height=26),
        Row(
            [f"Money in {rules.currency}, quantities in {rules.unit}. Freight payable, at equal service."],
            quiet,
        ),
        Row([service], quiet),
        *(Row([sentence], quiet) for sentence in (*found.differs, *usual.remarks)),
        Row([]),
        Row(
            ["Saving in freight", None, None, None, found.freight],
            [Style("headline"), *[Style()] * 3, big],
            height=30,
        ),
    ]
    if found.per_unit is not None:
        each = Style("plain", number_format(4), "right")
        rows.append(
            Row(
                [f"per {rules.unit} delivered", None, None, None, found.per_unit],
                [Style(), *[Style()] * 3, each],
            )
        )
    if found.charges:
        rows.append(
            Row(
                ["Charges, apart", None, None, None, found.charges],
                [*[Style()] * 4, paid],
            )
        )
    rows += [Row([]), *_lanes(found, len(rows) + 2, paid)]
    first = len(rows) - len(found.lanes)

    def finish(sheet: Any) -> None:
        bars = min(len(found.lanes), _MOST_BARS)
        if bars:
            where = (8, first, first + bars - 1)
            title = f"Saving by lane, {rules.currency} (the {bars} largest)"
            sheet.add_chart(ranked_bars(sheet, title, where, 7, "#,##0"), "J3")

    return Sheet("Compare", _WIDTHS, rows, len(rows), header=header, tab=DEEP, finish=finish)


def _lanes(found: Saving, head: int, paid: Style) -> Sequence[Row]:
    """Headings in sheet row `head`, a row a lane, and the sums."""
    right = Style("heading", align="right", wrap=True)
    quantity = number_format(places_of(q for one in found.lanes for q in (one.usual, one.planned)))
    much = Style("plain", quantity, "right")
    styles = [Style(), Style(), much, much, paid, paid, paid, Style("quiet")]
    rows = [Row(_HEADINGS, [Style("heading"), Style("heading"), *[right] * 5, Style("heading")], height=30)]
    for number, one in enumerate(found.lanes, head + 1):
        saved = Formula(f"E{number}-F{number}", one.saving)
        rows.append(
            Row(
                [
                    one.depot,
                    one.customer,
                    one.usual,
                    one.planned,
                    one.usual_payable,
                    one.planned_payable,
                    saved,
                    f"{one.depot} to {one.customer}",
                ],
                styles,
            )
        )
    last = head + len(found.lanes)
    sums: list[Value] = ["Total", None]
    for letter, part in zip(
        "CDEFG", ("usual", "planned", "usual_payable", "planned_payable", "saving"), strict=True
    ):
        amount = total_of(getattr(one, part) for one in found.lanes)
        sums.append(Formula(f"SUM({letter}{head + 1}:{letter}{last})", amount) if found.lanes else Decimal(0))
    rows.append(Row(sums, [style._replace(kind="total") for style in styles]))
    return rows
