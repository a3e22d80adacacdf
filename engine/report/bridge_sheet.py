"""Sheet *Bridge*: from one plan's cost to another's, step by step, with live sums and a chart."""

from decimal import Decimal
from math import floor
from typing import Any

from engine.compare.bridge import Bridge, Step
from engine.compare.bridge_words import sentences
from engine.exact import total_of
from engine.money import minor_places
from engine.report.look import DEEP, Style, number_format, places_of
from engine.report.native_charts import floating_bars
from engine.report.sheet import Formula, Row, Sheet, Value

_WIDTHS = (44, 16, 17, 16, 15, 60, 17, 15, 15)
_HEADINGS = (
    "Step",
    "Freight",
    "Freight then",
    "Charges",
    "Short",
    "What it is",
    "Below the bar",
    "Rises",
    "Falls",
)


def bridge_sheet(bridge: Bridge, header: str) -> Sheet:
    """The sheet. Each step's running freight and the sums are formulas over the steps."""
    rows = _above(bridge)
    first = len(rows) + 1  # the sheet row of the first plan; the steps stand below it
    rows += _steps(bridge, first)
    last = len(rows)
    rows += _below(bridge)

    def finish(sheet: Any) -> None:
        title = f"Freight payable, {bridge.currency} (the axis does not start at 0)"
        chart = floating_bars(sheet, title, (1, first, last), (7, 8, 9), _axis_from(bridge))
        sheet.add_chart(chart, f"A{len(rows) + 2}")

    return Sheet("Bridge", _WIDTHS, rows, len(rows), header=header, tab=DEEP, finish=finish)


def _above(bridge: Bridge) -> list[Row]:
    quiet = [Style("quiet")]
    how = (
        "Averages over all orders in which the effects could have come (Shapley 1953)."
        if bridge.averaged
        else "Each step changes these figures on top of the steps above it, and the week is planned anew."
    )
    right = Style("heading", align="right", wrap=True)
    styles = [Style("heading"), right, right, right, right, Style("heading"), right, right, right]
    return [
        Row([f"From {bridge.first} to {bridge.second}"], [Style("title")], height=26),
        *(Row([sentence], [Style()]) for sentence in sentences(bridge)),
        Row([f"Money in {bridge.currency}, quantities in {bridge.unit}. Freight is what is payable."], quiet),
        Row([how], quiet),
        Row(
            ["Charges (short, unsent, opening) stand apart. Cents by largest remainder: they add up."],
            quiet,
        ),
        Row([]),
        Row(_HEADINGS, styles, height=30),
    ]


def _steps(bridge: Bridge, head: int) -> list[Row]:
    """The first plan in sheet row `head`, the steps, and the second plan with the sums."""
    minor = minor_places(bridge.currency)
    paid = Style("plain", number_format(minor), "right")
    short = Style("plain", number_format(places_of(step.short for step in bridge.steps)), "right")
    faint = paid._replace(kind="quiet")
    styles = [Style(), paid, paid, paid, short, Style(wrap=True), faint, faint, faint]
    total = [style._replace(kind="total") for style in styles[:6]] + styles[6:]
    first: list[Value] = [
        bridge.first, None, bridge.first_freight, bridge.first_charges, bridge.first_short, None,
        Decimal(0), bridge.first_freight, Decimal(0),
    ]  # fmt: skip
    rows = [Row(first, total)]
    at = bridge.first_freight
    for number, step in enumerate(bridge.steps, head + 1):
        to = total_of((at, step.freight))
        rows.append(Row(_cells(step, number, to, min(at, to)), styles))
        at = to
    last = head + len(bridge.steps)
    second: list[Value] = [
        bridge.second,
        Formula(f"SUM(B{head + 1}:B{last})", bridge.freight) if bridge.steps else bridge.freight,
        Formula(f"C{head}+B{last + 1}", bridge.second_freight),
        Formula(f"SUM(D{head}:D{last})", bridge.second_charges),
        Formula(f"SUM(E{head}:E{last})", bridge.second_short),
        None,
        Decimal(0),
        bridge.second_freight,
        Decimal(0),
    ]
    return [*rows, Row(second, total)]


def _axis_from(bridge: Bridge) -> float:
    """Where the axis of the chart begins, so that the steps are wide enough to be seen."""
    stands = [bridge.first_freight]
    for step in bridge.steps:
        stands.append(total_of((stands[-1], step.freight)))
    low, high = float(min(stands)), float(max(stands))
    room = (high - low) / 4 or abs(high) / 10
    return floor((low - room) / 100) * 100 if high - low > 1000 else low - room


def _cells(step: Step, number: int, to: Decimal, below: Decimal) -> list[Value]:
    return [
        step.name,
        step.freight,
        Formula(f"C{number - 1}+B{number}", to),
        step.charges,
        step.short,
        step.about,
        Formula(f"MIN(C{number - 1},C{number})", below),
        Formula(f"MAX(B{number},0)", max(step.freight, Decimal(0))),
        Formula(f"MAX(-B{number},0)", max(-step.freight, Decimal(0))),
    ]


def _below(bridge: Bridge) -> list[Row]:
    if not bridge.remarks:
        return []
    said = [Row([sentence], [Style("quiet")]) for sentence in bridge.remarks]
    return [Row([]), Row(["What had to give way in the mixed weeks"], [Style("strong")]), *said]
