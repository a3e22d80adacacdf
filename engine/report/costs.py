"""Sheet *Costs*: the headline, how it adds up, who is paid what, and what is short or unsent."""

from collections import defaultdict
from collections.abc import Sequence
from decimal import Decimal
from typing import Any, NamedTuple

from openpyxl.chart import BarChart, Reference
from openpyxl.chart.label import DataLabelList
from openpyxl.chart.shapes import GraphicalProperties

from engine.exact import canonical
from engine.money import minor_places
from engine.planning.load_plan import cost_of_wholeness
from engine.planning.plan import Plan
from engine.report.lines import NO_HAULIER, Line, quantity_format, total
from engine.report.look import DEEP, Style, number_format, places_of
from engine.report.sheet import Row, Sheet, Value
from engine.report.text import cell_text

PAYABLE, NOTIONAL = "payable", "notional"
COUNT = "#,##0"
_WIDTHS = (40, 17, 17, 17, 17, 17)
_MOST_BARS = 8


class Formats(NamedTuple):
    """Number formats: what is paid, exact money, quantities."""

    paid: str
    exact: str
    quantity: str


def costs_sheet(plan: Plan, lines: Sequence[Line], header: str) -> tuple[Sheet, dict[str, str]]:
    """Sheet *Costs*, and the cells in which 'payable', 'rounding', 'short', 'unsent' and 'total' stand."""
    formats = _formats(plan)
    rows = _headline(plan, formats)
    cells = {
        what: f"Costs!$B${1 + next(r for r, row in enumerate(rows) if row.values and row.values[0] == label)}"
        for what, label in _CELLS.items()
    }
    hauliers = _by_haulier(lines, formats)
    first, last = len(rows) + 3, len(rows) + len(hauliers) - 2
    rows += hauliers
    rows += _by_depot(plan, lines, formats)
    rows += _openings(plan, formats)
    rows += _short(plan, formats)
    rows += _unsent(plan, formats)

    def finish(sheet: Any) -> None:
        if lines:
            sheet.add_chart(_chart(sheet, plan, first, min(last, first + _MOST_BARS - 1)), "E3")

    return Sheet("Costs", _WIDTHS, rows, len(rows), header=header, tab=DEEP, finish=finish), cells


def service_in_words(plan: Plan) -> str:
    """Whether all orders are met, as a sentence."""
    if not plan.short:
        return "Every order is met."
    missing = canonical(total(one.quantity for one in plan.short))
    many = len(plan.short)
    who = f"{plan.short[0].customer} goes" if many == 1 else f"{many} customers go"
    return f"{who} short, by {missing} {plan.week.rules.unit} in all."


_HEADLINE, _ROUNDING = "Freight payable", "Rounding, once per shipment"
_SHORT, _UNSENT = "Charges for what is short", "Charges for what is unsent"
_TOTAL = "Made least: exact freight and charges"
_CELLS = {
    "payable": _HEADLINE, "rounding": _ROUNDING, "short": _SHORT, "unsent": _UNSENT, "total": _TOTAL,
}  # fmt: skip


def _formats(plan: Plan) -> Formats:
    minor = minor_places(plan.week.rules.currency)
    exact = [plan.freight_cost, plan.total_cost, plan.short_cost, plan.unsent_cost, plan.proof.rounding]
    exact += [plan.opening_cost, plan.proof.lower_bound] if plan.whole else []
    return Formats(
        number_format(minor), number_format(max(places_of(exact), minor), always=minor), quantity_format(plan)
    )


def _line(values: Sequence[Value], numbers: Sequence[str | None], kind: str = "plain") -> Row:
    """A row of figures; where a number format is None it is text, to the right from the second column on."""
    styles = [
        Style(kind, number or "General", align=None if place == 0 else "right")
        for place, number in enumerate([*numbers, *[None] * (len(values) - len(numbers))])
    ]
    return Row(values, styles)


def _headings(*names: str) -> Row:
    return Row(
        names,
        [Style("heading", align="right" if place else "left", wrap=True) for place in range(len(names))],
        30,
    )


def _headline(plan: Plan, formats: Formats) -> list[Row]:
    rules, exact = plan.week.rules, (None, formats.exact, None)
    return [
        Row([f"Costs of {rules.week}"], [Style("title")], height=26),
        Row(
            [f"Money in {rules.currency}, quantities in {rules.unit}. {service_in_words(plan)}"],
            [Style("quiet")],
        ),
        Row([]),
        _line([_HEADLINE, plan.freight_payable], [None, formats.paid], "headline")._replace(height=30),
        Row([]),
        _headings("How it adds up", rules.currency, "Kind"),
        _line(["Freight, exact", plan.freight_cost, None], exact),
        _line([_ROUNDING, plan.proof.rounding, None], exact),
        _line(["Freight, to be invoiced", plan.freight_payable, PAYABLE], exact, "total"),
        *(
            [
                _line(
                    ["of it for what has gone", total(s.payable for s in plan.shipments if s.gone), PAYABLE],
                    exact,
                )
            ]
            if plan.week.gone
            else []
        ),
        *(
            [_line(["Charges for opening depots", plan.opening_cost, PAYABLE], exact)]
            if plan.openings
            else []
        ),
        _line([_SHORT, plan.short_cost, NOTIONAL], exact),
        _line([_UNSENT, plan.unsent_cost, NOTIONAL], exact),
        _line([_TOTAL, plan.total_cost, None], exact, "total"),
        *_of_whole_loads(plan, exact),
        Row(
            ["Notional: it steers the plan and stands on no invoice, unless the desk knows better."],
            [Style("quiet")],
        ),
        Row([]),
    ]


def _of_whole_loads(plan: Plan, exact: Sequence[str | None]) -> list[Row]:
    """What must be paid at least, and what whole vehicles cost beside a plan with parts of vehicles."""
    cost = cost_of_wholeness(plan)
    if plan.whole is None or cost is None:
        return []
    return [
        _line(["No plan costs less than", plan.proof.lower_bound, None], exact),
        _line(["This plan is above that by", plan.proof.gap, None], exact),
        _line(["Cost of wholeness, beside parts of vehicles", cost, None], exact),
    ]


def _openings(plan: Plan, formats: Formats) -> list[Row]:
    if not plan.openings:
        return []
    numbers = (None, formats.exact)
    return [
        _part("Opened depots", 3),
        _headings("Depot", "Opening charge", "Kind"),
        *(_line([one.depot, one.charge, PAYABLE], numbers) for one in plan.openings),
        _line(["Total", plan.opening_cost, PAYABLE], numbers, "total"),
        Row([]),
    ]


def _by_haulier(lines: Sequence[Line], formats: Formats) -> list[Row]:
    """A row per haulier, the dearest first, between two rows above (name, headings) and two below."""
    theirs: dict[str | None, list[Line]] = defaultdict(list)
    for line in lines:
        theirs[line.shipment.haulier].append(line)
    sums = [(name or NO_HAULIER, *_sums(of)) for name, of in theirs.items()]
    sums.sort(key=lambda one: (-one[1], one[0]))
    numbers = (None, formats.paid, formats.quantity, COUNT)
    return [
        _part("Freight payable by haulier", 4),
        _headings("Haulier", "Payable", "Send", "Shipments"),
        *(_line(one, numbers) for one in sums),
        _line(("Total", *_sums(lines)), numbers, "total"),
        Row([]),
    ]


def _by_depot(plan: Plan, lines: Sequence[Line], formats: Formats) -> list[Row]:
    kept = {one.depot: one.quantity for one in plan.unsent}
    theirs: dict[str, list[Line]] = defaultdict(list)
    for line in lines:
        theirs[line.shipment.depot].append(line)
    numbers = (None, formats.paid, formats.quantity, COUNT, formats.quantity, formats.quantity)
    could_send = total(depot.available for depot in plan.week.depots.values())
    return [
        _part("Freight payable by depot", 6),
        _headings("Depot", "Payable", "Send", "Shipments", "Could send", "Unsent"),
        *(
            _line([name, *_sums(theirs.get(name, ())), depot.available, kept.get(name, Decimal(0))], numbers)
            for name, depot in plan.week.depots.items()
        ),
        _line(["Total", *_sums(lines), could_send, total(kept.values())], numbers, "total"),
        Row([]),
    ]


def _sums(lines: Sequence[Line]) -> tuple[Decimal, Decimal, int]:
    """Payable, sent, and how many shipments."""
    payable = total(line.shipment.payable for line in lines)
    return payable, total(line.shipment.quantity for line in lines), len(lines)


def _short(plan: Plan, formats: Formats) -> list[Row]:
    if not plan.short:
        return []
    charge = number_format(places_of(one.charge for one in plan.short), always=2)
    numbers = (None, formats.quantity, charge, formats.exact)
    quantity = total(one.quantity for one in plan.short)
    return [
        _part("What is short", 5),
        _headings("Customer", "Short", "Charge per unit", "Charge", "Kind"),
        *(
            _line([one.customer, one.quantity, one.charge, one.cost, NOTIONAL], numbers, "short")
            for one in plan.short
        ),
        _line(["Total", quantity, None, plan.short_cost, NOTIONAL], numbers, "total"),
        Row([]),
    ]


def _unsent(plan: Plan, formats: Formats) -> list[Row]:
    if not plan.unsent:
        return []
    charge = number_format(places_of(one.charge for one in plan.unsent), always=2)
    numbers = (None, formats.quantity, charge, formats.exact, None, formats.quantity)
    quantity, must = total(one.quantity for one in plan.unsent), total(one.must_move for one in plan.unsent)
    return [
        _part("What is unsent", 6),
        _headings("Depot", "Unsent", "Charge per unit", "Charge", "Kind", "Should have moved"),
        *(
            _line(
                [one.depot, one.quantity, one.charge, one.cost, NOTIONAL, one.must_move or None],
                numbers,
                "short" if one.must_move else "plain",
            )
            for one in plan.unsent
        ),
        _line(["Total", quantity, None, plan.unsent_cost, NOTIONAL, must or None], numbers, "total"),
    ]


def _part(name: str, columns: int) -> Row:
    return Row([name, *[None] * (columns - 1)], [Style("part")] * columns)


def _chart(sheet: Any, plan: Plan, first: int, last: int) -> BarChart:
    """Freight payable by haulier, the dearest on top."""
    chart = BarChart()
    chart.type = "bar"
    chart.title = f"Freight payable by haulier, {cell_text(plan.week.rules.currency)}"
    chart.legend = None
    chart.add_data(Reference(sheet, min_col=2, min_row=first, max_row=last))
    chart.set_categories(Reference(sheet, min_col=1, min_row=first, max_row=last))
    chart.series[0].graphicalProperties = GraphicalProperties(solidFill=DEEP)
    chart.dataLabels = DataLabelList(showVal=True, showSerName=False, showCatName=False, showLegendKey=False)
    chart.dataLabels.numFmt = COUNT
    chart.x_axis.scaling.orientation = "maxMin"
    chart.x_axis.delete, chart.y_axis.delete = False, True
    chart.y_axis.majorGridlines = None
    chart.gapWidth = 60
    chart.width, chart.height = 13, 6
    return chart
