"""Sheet *Proof*: live formulas that add the plan up again and look for a rate row that could improve it.

The formulas point at *Plan* and at the figures as used, so that an edit anywhere shows here at once.
Every formula carries today's result; a reader that does not calculate sees the same sheet.
"""

from collections.abc import Sequence
from decimal import Decimal
from typing import Any, NamedTuple

from openpyxl.formatting.rule import FormulaRule
from openpyxl.styles import Font, PatternFill

from engine.planning.plan import Plan
from engine.report.lines import Line, total
from engine.report.look import DEEP, WARN, WARN_INK, Style, number_format
from engine.report.proof_figures import ProofFigures, lower_bound, proof_figures
from engine.report.proof_layout import Layout, layout_of
from engine.report.proof_tables import customer_rows, depot_rows, rate_rows
from engine.report.sheet import Formula, Row, Sheet, Value

PROVED = "No lane can improve this plan"
BROKEN = "Warning: these figures no longer prove the plan, see the checks marked NO"
NOT_PROVED = "Not proved to be the cheapest plan: Notes say how far it may be above the least cost"

VERDICT = "B3"
_WIDTHS = (8, 20, 20, 16, 14, 12, 12, 14, 14, 12, 12, 8, 16, 14, 14, 10, 10)
_FIRST_CHECK = 7
_CHECKS = 11


class Check(NamedTuple):
    """A line of checks: two formulas that should agree, and what they come to today.

    places: decimal places in which they should agree
    """

    about: str
    here: str
    should: str
    is_here: Decimal | int
    is_should: Decimal | int
    places: int

    @property
    def difference(self) -> Decimal:
        return Decimal(self.is_here) - Decimal(self.is_should)


def proof_sheet(plan: Plan, lines: Sequence[Line], plan_letters: dict[str, str], costs: dict[str, str], header: str) -> Sheet:
    """Sheet *Proof*.

    plan_letters: the letter of each column of *Plan*, by its heading.
    costs: cells of *Costs*, by what they hold.
    """
    figures = proof_figures(plan)
    layout = layout_of(plan, figures, lines, plan_letters, first=_FIRST_CHECK + _CHECKS + 1)
    tables = [
        *depot_rows(plan, figures, layout),
        *customer_rows(plan, figures, layout),
        *rate_rows(plan, figures, layout),
    ]
    checks = _checks(plan, figures, layout, tables, costs)
    rows = [*_top(plan, layout, figures, checks), *_check_rows(checks), Row([]), *tables]
    return Sheet(
        "Proof",
        _WIDTHS,
        rows,
        length=len(rows),
        frozen="A4",
        header=header,
        tab=DEEP,
        finish=lambda sheet: _mark(sheet, layout),
    )


def _top(plan: Plan, layout: Layout, figures: ProofFigures, checks: Sequence[Check]) -> list[Row]:
    verdict: Value = NOT_PROVED
    if plan.proof.exact:
        last = _FIRST_CHECK + len(checks) - 1
        test = f'COUNTIF(H{_FIRST_CHECK}:H{last},"yes")={len(checks)}'
        good = all(check.difference == 0 for check in checks)
        verdict = Formula(f'IF({test},"{PROVED}","{BROKEN}")', PROVED if good else BROKEN)
    rules = plan.week.rules
    listed = (
        "Every rate row is below."
        if layout.every_row
        else f"Only used rate rows are below; all {len(figures.rows):,} were checked, in whole numbers, when the plan "
        "was made."
    )
    links = (
        "The figures below point at Plan, Depots, Customers, Rates and Rules: edit those and look here."
        if layout.linked
        else "Some figures have more digits than a spreadsheet number: those below are copies, edit them here."
    )
    quiet = [Style("quiet")]
    right = Style("heading", align="right")
    return [
        Row([f"Proof of the plan for {rules.week}"], [Style("title")]),
        Row([f"Money in {rules.currency}, quantities in {rules.unit}. {listed} {links}"], quiet),
        Row([None, verdict, *[None] * 6], [Style(), *[Style("good")] * 7], height=22),
        Row(
            [
                "Each depot and each customer has a price. A rate row can improve the plan only if its rate is below customer "
                "price plus depot price and it has room;"
            ],
            quiet,
        ),
        Row(
            [
                "a used row must cost just these prices, unless a limit or a hold keeps it. Units that count before cost "
                "(who is served, what must move) decide first."
            ],
            quiet,
        ),
        Row([None, "Check", None, None, "Here", "Should be", "Difference", "In order"], [
            Style(), *[Style("heading")] * 3, right, right, right, right,
        ]),
    ]  # fmt: skip


def _checks(
    plan: Plan, figures: ProofFigures, layout: Layout, tables: Sequence[Row], costs: dict[str, str]
) -> list[Check]:
    """Every check; today's figures come from the flow on one side and from the plan on the other."""
    model, flow, places = plan.model, plan.flow, layout.places
    codes = [row.values[11].result for row in tables if len(row.values) > 11 and isinstance(row.values[11], Formula)]
    d, c, r = layout.depots, layout.customers, layout.rates
    with_stand_in = ((d[0], d[1] + 1), (c[0], c[1] + 1))
    check_rates = layout.range("L", r)
    rate_codes = codes[len(model.depots) + 1 + len(model.customers) :]
    other_codes = codes[: len(model.depots) + 1 + len(model.customers)]
    exact = total(shipment.cost for shipment in plan.shipments)
    payable = total(shipment.payable for shipment in plan.shipments)
    sent = total(shipment.quantity for shipment in plan.shipments)
    forced_cost = "+".join(
        [f"SUMPRODUCT({layout.range('C', table)},{layout.range('H', table)})" for table in with_stand_in]
        + [f"SUM({layout.range('O', table)})" for table in (d, r)]
    )
    charges = "+".join(f"SUMPRODUCT({layout.range('E', table)},{layout.range('I', table)})" for table in (d, c))
    on_plan = {heading: f"SUM({layout.on_plan(heading)})" for heading in ("Send", "Cost", "Payable")}
    here = {column: f"SUM({layout.range(column, r)})" for column in "EMN"}
    flow_sent, flow_cost = _sent_and_cost(plan, figures)
    return [
        Check("Depots whose quantities do not add up", _count(layout.range("G", d), '"<>0"'), "0", 0, 0, 0),
        Check("Customers whose quantities do not add up", _count(layout.range("G", c), '"<>0"'), "0", 0, 0, 0),
        Check("Rate rows outside their limits", _count(check_rates, "2"), "0", rate_codes.count(2), 0, 0),
        Check("Rate rows that could improve the plan", _count(check_rates, "1"), "0", rate_codes.count(1), 0, 0),
        Check(
            "Short or unsent quantities that could improve it",
            f"SUM({layout.range('L', with_stand_in[0])})+SUM({layout.range('L', c)})",
            "0",
            sum(int(code) for code in other_codes),
            0,
            0,
        ),
        Check("Quantity sent: rate rows, and Plan", here["E"], on_plan["Send"], flow_sent, sent, places.quantity),
        Check("Exact freight: rate rows, and Plan", here["M"], on_plan["Cost"], flow_cost, exact, places.total),
        Check(
            "Exact freight and charges: added up, and forced by prices",
            f"{here['M']}+{charges}",
            forced_cost,
            total((flow_cost, plan.short_cost, plan.unsent_cost)),
            lower_bound(plan, figures),
            places.total,
        ),
        Check("Freight payable: each row rounded, and Plan", here["N"], on_plan["Payable"], payable, plan.freight_payable, places.payable),
        Check("Freight payable: Plan, and Costs", on_plan["Payable"], costs["payable"], payable, plan.freight_payable, places.payable),
        Check(
            "Rounding: payable less exact, and Costs",
            f"{here['N']}-{here['M']}",
            costs["rounding"],
            payable - flow_cost,
            plan.proof.rounding,
            places.total,
        ),
    ]  # fmt: skip


def _sent_and_cost(plan: Plan, figures: ProofFigures) -> tuple[Decimal, Decimal]:
    """What goes on rate rows and what it costs, from the flow and the model, not from the plan's shipments."""
    from engine.exact import to_decimal

    model = plan.model
    used = figures.rows[plan.flow.quantity[figures.rows] > 0]
    quantities, money = plan.flow.quantity[used].tolist(), model.money[used].tolist()
    cost = sum(quantity * rate for quantity, rate in zip(quantities, money, strict=True))
    return (
        to_decimal(sum(quantities), model.quantity_places),
        to_decimal(cost, model.quantity_places + model.money_places),
    )


def _count(where: str, what: str) -> str:
    return f"COUNTIF({where},{what})"


def _check_rows(checks: Sequence[Check]) -> list[Row]:
    rows = []
    for r, check in enumerate(checks, _FIRST_CHECK):
        number = Style("plain", number_format(check.places), "right")
        rows.append(
            Row(
                [
                    None,
                    check.about,
                    None,
                    None,
                    Formula(check.here, check.is_here),
                    0 if check.should == "0" else Formula(check.should, check.is_should),
                    Formula(f"ROUND(E{r}-F{r},{check.places})", check.difference),
                    Formula(f'IF(G{r}=0,"yes","NO")', "yes" if check.difference == 0 else "NO"),
                ],
                [Style(), Style(), Style(), Style(), number, number, number, Style(align="right")],
            )
        )
    return rows


def _mark(sheet: Any, layout: Layout) -> None:
    """What stands out once a figure is edited."""
    fill, font = PatternFill(bgColor=WARN), Font(color=WARN_INK, bold=True)
    last = _FIRST_CHECK + _CHECKS - 1
    for where, test in (
        ("B3:H3", f'$B$3<>"{PROVED}"'),
        (f"B{_FIRST_CHECK}:H{last}", f'$H{_FIRST_CHECK}<>"yes"'),
        *((f"L{table[0]}:L{table[1]}", f"L{table[0]}<>0") for table in (layout.depots, layout.customers, layout.rates) if table[1] >= table[0]),
    ):
        sheet.conditional_formatting.add(where, FormulaRule(formula=[test], fill=fill, font=font))
