"""Sheet *Trade-off*: every breakpoint of cost against emissions, with the factor and where it is from."""

from typing import Any

from engine.compare.frontier import Frontier
from engine.exact import canonical
from engine.money import minor_places
from engine.report.look import DEEP, Style, number_format
from engine.report.native_charts import JOINED_HEIGHT, chart_rows, joined_points
from engine.report.sheet import Row, Sheet

_WIDTHS = (14, 18, 18, 18, 18, 16, 18, 18)


def trade_off_sheet(found: Frontier, header: str) -> Sheet:
    """The sheet, with the frontier as a chart beside the table."""
    rules = found.plan.week.rules
    quiet, strong = [Style("quiet")], [Style("strong")]
    factor = canonical(found.emissions.factor)
    weight = found.emissions.tonnes_per_unit
    said = [f"Emission factor: {factor} kg CO2e per tonne-kilometre. Source: {found.emissions.source}"]
    if weight is not None:
        said.append(f"One {rules.unit} weighs {canonical(weight)} t.")
    about = [
        f"Money in {rules.currency}, exact and before rounding. Everybody gets what the plan gives them.",
        "Each breakpoint is a plan of its own, proved; between two of them their plans can be mixed.",
    ]
    if found.left_out:
        about.append(f"Open rate rows without Km, which have no part in it: {found.left_out}.")
    if found.plan.week.gone:
        about.append("What has gone is in neither figure.")
    rows = [
        Row([f"Cost against emissions, {rules.week}"], [Style("title")], height=26),
        *(Row([sentence], strong) for sentence in said),
        *(Row([sentence], quiet) for sentence in about),
        *([] if found.complete else [Row(["The search was stopped: breakpoints are missing."], strong)]),
        Row([]),
    ]
    chart_at = len(rows) + 1
    rows += [*([Row([])] * chart_rows(JOINED_HEIGHT)), _headings(rules.currency)]
    first = len(rows) + 1
    money = Style(number=number_format(minor_places(rules.currency)), align="right")
    kilograms, each = Style(number="#,##0.0", align="right"), Style(number="#,##0.0000", align="right")
    styles = [Style(number="0"), kilograms, money, money, kilograms, money, kilograms, each]
    for n, point in enumerate(found.points, 1):
        per_kg = None if point.per_kg is None else float(f"{float(point.per_kg):.12g}")
        rows.append(
            Row(
                [
                    n, point.emissions, point.cost, point.freight, point.tonne_km,
                    found.dearer(point), found.less(point), per_kg,
                ],
                styles,
            )
        )  # fmt: skip
    last = len(rows)

    def finish(sheet: Any) -> None:
        across, up = (2, "Emissions, kg CO2e"), (3, f"Freight and charges, {rules.currency}")
        sheet.add_chart(
            joined_points(sheet, "Cost against emissions", (first, last), across, up), f"A{chart_at}"
        )

    return Sheet("Trade-off", _WIDTHS, rows, len(rows), header=header, tab=DEEP, finish=finish)


def _headings(currency: str) -> Row:
    names = (
        "Breakpoint", "Emissions, kg CO2e", f"Freight and charges, {currency}", f"Freight, {currency}",
        "Quantity times km", f"Dearer by, {currency}", "Less by, kg CO2e", f"Each kg less costs, {currency}",
    )  # fmt: skip
    return Row(names, [Style("heading", align="right" if n else "left", wrap=True) for n in range(8)], 30)
