"""Sheet *Weeks*: what the weeks in the records added up to, the earliest first, with charts over time."""

from collections.abc import Sequence
from typing import Any

from engine.money import minor_places, per_unit
from engine.records.totals import WeekTotals
from engine.report.look import DEEP, Style, number_format, places_of
from engine.report.native_charts import line_over_rows
from engine.report.sheet import Row, Sheet

_WIDTHS = (30, 14, 17, 14, 15, 15, 15, 15)
_HEADINGS = ("Week", "Opened", "Freight payable", "Per unit", "Ordered", "Delivered", "Short", "Unsent")
_FIRST = 5


def weeks_sheet(found: Sequence[WeekTotals], header: str) -> Sheet:
    """The sheet, for weeks of one unit and currency."""
    unit, currency = (found[0].week.unit, found[0].week.currency) if found else ("", "")
    minor = minor_places(currency)
    parts = [q for one in found for q in (one.ordered, one.delivered, one.short, one.unsent)]
    much = Style("plain", number_format(places_of(parts)), "right")
    styles = [
        Style(), Style("plain", "yyyy-mm-dd", "right"), Style("plain", number_format(minor), "right"),
        Style("plain", number_format(4), "right"), much, much, much, much,
    ]  # fmt: skip
    right = Style("heading", align="right", wrap=True)
    rows = [
        Row(["Weeks over time"], [Style("title")], height=26),
        Row(
            [f"Money in {currency}, quantities in {unit}; each week as it was planned last."],
            [Style("quiet")],
        ),
        Row([]),
        Row(_HEADINGS, [Style("heading"), *[right] * 7], height=30),
    ]
    for one in found:
        day = one.week.created.date()
        rows.append(
            Row(
                [
                    one.week.name,
                    day,
                    one.freight_payable,
                    per_unit(one.freight_payable, one.delivered),
                    one.ordered,
                    one.delivered,
                    one.short,
                    one.unsent,
                ],
                styles,
            )
        )

    def finish(sheet: Any) -> None:
        if found:
            where = (1, _FIRST, _FIRST + len(found) - 1)
            for column, title, number, cell in (
                (3, f"Freight payable, {currency}", "#,##0", "J2"),
                (4, f"Freight per unit, {currency} per {unit}", "#,##0.00", "J18"),
                (7, f"Short, {unit}", "#,##0.##", "J34"),
            ):
                sheet.add_chart(line_over_rows(sheet, title, where, column, number), cell)

    return Sheet("Weeks", _WIDTHS, rows, len(rows), header=header, tab=DEEP, finish=finish)
