"""Sheet *Variants*: the week and its variants side by side, what each changes, where it sends otherwise."""

from collections.abc import Callable, Sequence
from typing import Any

from engine.changes import Change
from engine.columns import SEND
from engine.compare.variants import Measured, Measures, measured
from engine.exact import total_of
from engine.money import PER_UNIT_PLACES, minor_places
from engine.planning.plan import Plan
from engine.report.look import DEEP, Style, number_format, places_of
from engine.report.native_charts import bars_height, chart_rows, ranked_bars
from engine.report.sheet import Formula, Row, Sheet, Value

_WIDTHS = (34, 20, 22, 18, 15, 15, 15, 12, 12, 15, 12, 15)
_MOST_BARS = 15
_LANES = ("Variant", "Depot", "Customer", "Haulier", "The week", SEND.heading, "More")
"""With the heading of a plan's quantities, by which the sheet is never read as rates."""


def variants_sheet(
    plan: Plan, found: Sequence[Measured], words: Callable[[Change], str], header: str
) -> Sheet:
    """The sheet.

    plan: of the week as it stands; found: its variants; words: what a change is called
    """
    rules = plan.week.rules
    quiet = [Style("quiet")]
    rows = [
        Row([f"Variants of {rules.week}"], [Style("title")], height=26),
        Row([f"Money in {rules.currency}, quantities in {rules.unit}. Freight is what is payable."], quiet),
        Row(["Each variant is planned as a whole week; the plan in this workbook has none of them."], quiet),
        Row(["Where less is delivered, freight falls: read it with what goes short."], quiet),
        Row([]),
    ]
    bars = min(len(found), _MOST_BARS) if any(one.measures for one in found) else 0
    chart_at = len(rows) + 1
    rows += [Row([])] * chart_rows(bars_height(bars)) if bars else []
    base = len(rows) + 2
    rows += _side_by_side(plan, found, base)
    rows += _changes(found, words)
    rows += _lanes(found, len(rows) + 4)

    def finish(sheet: Any) -> None:
        if bars:
            where = (1, base + 1, base + bars)
            title = f"Freight against the week, {rules.currency}"
            sheet.add_chart(ranked_bars(sheet, title, where, 3, "#,##0"), f"A{chart_at}")

    return Sheet("Variants", _WIDTHS, rows, len(rows), header=header, tab=DEEP, finish=finish)


def _side_by_side(plan: Plan, found: Sequence[Measured], base: int) -> list[Row]:
    """Headings, the week in sheet row `base`, and a row for each variant."""
    rules = plan.week.rules
    names = (
        "Variant", "Freight payable", "Against the week", f"Per {rules.unit}", "Charges", "Short", "Left",
        "Lanes", "Loads", f"{rules.unit}-km", "Changes", "Rates moved",
    )  # fmt: skip
    week = measured(plan)
    of_all = [week, *(one.measures for one in found if one.measures is not None)]
    money = Style(number=number_format(minor_places(rules.currency)), align="right")
    much = Style(number=number_format(places_of(q for one in of_all for q in (one.short, one.left))))
    much, count = much._replace(align="right"), Style(number="#,##0", align="right")
    each = Style(number=number_format(PER_UNIT_PLACES), align="right")
    styles = [Style(), money, money, each, money, much, much, count, count, count, count, count]
    rows = [
        Row(names, [Style("heading", align="right" if n else "left", wrap=True) for n in range(12)], 30),
        Row(
            ["The week as it stands", week.freight, None, *_cells(week), 0, 0],
            [style._replace(kind="total") for style in styles],
        ),
    ]
    for number, one in enumerate(found, base + 1):
        changes = len(one.variant.changes)
        if one.measures is None or one.difference is None:
            why = " ".join(finding.message for finding in one.findings)
            rows.append(Row([one.variant.name, f"Cannot be planned. {why}"], [Style(), Style("quiet")]))
            continue
        more = total_of((one.measures.freight, -week.freight))
        against = Formula(f"B{number}-B${base}", more)
        moved = len(one.difference.rows)
        cells = [one.variant.name, one.measures.freight, against, *_cells(one.measures), changes, moved]
        rows.append(Row(cells, styles))
    return rows


def _cells(one: Measures) -> list[Value]:
    return [one.per_unit, one.charges, one.short, one.left, one.lanes, one.loads, one.unit_km]


def _changes(found: Sequence[Measured], words: Callable[[Change], str]) -> list[Row]:
    """What each variant changes, a row a change."""
    rows = [Row([]), Row(["What each variant changes"], [Style("part")])]
    for one in found:
        rows += [Row([one.variant.name, words(change)]) for change in one.variant.changes]
    return rows


def _lanes(found: Sequence[Measured], first: int) -> list[Row]:
    """Each rate row that carries another quantity in a variant; the first of them in sheet row `first`."""
    moved = [(one.variant.name, row) for one in found if one.difference for row in one.difference.rows]
    if not moved:
        return []
    places = places_of(quantity for _, row in moved for quantity in (row.before, row.after))
    much = Style(number=number_format(places), align="right")
    styles = [*[Style()] * 4, much, much, much]
    rows = [
        Row([]),
        Row(["Rate rows on which another quantity goes"], [Style("part")]),
        Row(_LANES, [Style("heading", align="right" if n > 3 else "left") for n in range(7)]),
    ]
    for number, (name, row) in enumerate(moved, first):
        key, more = row.key, Formula(f"F{number}-E{number}", row.more)
        rows.append(Row([name, key.depot, key.customer, key.haulier, row.before, row.after, more], styles))
    return rows
