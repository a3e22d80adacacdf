"""Sheet *Proof*: live formulas that add the plan up again and look for a rate row that could improve it.

The formulas point at *Plan* and at the figures as used, so that an edit anywhere shows here at once.
Every formula carries today's result; a reader that does not calculate sees the same sheet.
"""

from collections.abc import Sequence
from itertools import chain
from typing import Any

from openpyxl.formatting.rule import Rule
from openpyxl.styles import Font, PatternFill
from openpyxl.styles.differential import DifferentialStyle

from engine.planning.plan import Plan
from engine.report.lines import Line
from engine.report.look import DEEP, WARN, WARN_INK, Style, number_format
from engine.report.proof_checks import NUMBER_OF_CHECKS, Check, checks_of
from engine.report.proof_figures import ProofFigures, proof_figures
from engine.report.proof_layout import Layout, layout_of
from engine.report.proof_tables import customer_rows, depot_rows, gone_rows, rate_rows
from engine.report.sheet import Formula, Row, Sheet, Value

PROVED = "No lane can improve this plan"
BROKEN = "Warning: these figures no longer prove the plan, see the checks marked NO"
NOT_PROVED = "Not proved to be the cheapest plan: Notes say how far it may be above the least cost"

VERDICT = "B3"
_WIDTHS = (8, 20, 20, 16, 14, 12, 12, 14, 14, 12, 12, 8, 16, 14, 14, 10, 10, 10)
_FIRST_CHECK = 7

_HOW_TO_READ = (
    "Each depot and each customer has a price. A rate row could improve the plan only if its rate were below "
    "depot "
    "price plus customer price and it had room to take more.",
    "A used row costs just these two prices, unless a limit or a hold keeps it. Columns 'before cost' count "
    "the aims "
    "that come before money: who is served, what must move.",
)


def proof_sheet(
    plan: Plan, lines: Sequence[Line], plan_letters: dict[str, str], costs: dict[str, str], header: str
) -> Sheet:
    """Sheet *Proof*.

    plan_letters: the letter of each column of *Plan*, by its heading.
    costs: cells of *Costs*, by what they hold.
    """
    figures = proof_figures(plan)
    layout = layout_of(plan, figures, lines, plan_letters, first=_FIRST_CHECK + NUMBER_OF_CHECKS + 1)
    checks = checks_of(plan, figures, layout, costs)
    rows = chain(
        _top(plan, layout, figures, checks),
        _check_rows(checks),
        [Row([])],
        depot_rows(plan, figures, layout),
        customer_rows(plan, figures, layout),
        gone_rows(plan, layout),
        rate_rows(plan, figures, layout),
    )
    return Sheet(
        "Proof",
        _WIDTHS,
        rows,
        length=layout.rates[0] - 1 + len(layout.listed),
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
        else "Only used rate rows are below; all "
        f"{len(figures.rows):,} were checked, in whole numbers, when the plan was made."
    )
    links = (
        "The figures below point at Plan, Depots, Customers, Rates and Rules: edit those and look here."
        if layout.linked
        else "Some figures have more digits than a spreadsheet keeps: those below are copies, edit them here."
    )
    quiet, right = [Style("quiet")], Style("heading", align="right")
    return [
        Row([f"Proof of the plan for {rules.week}"], [Style("title")], height=26),
        Row([f"Money in {rules.currency}, quantities in {rules.unit}. {listed} {links}"], quiet),
        Row([None, verdict, *[None] * 6], [Style(), *[Style("good")] * 7], height=22),
        *(Row([sentence], quiet) for sentence in _HOW_TO_READ),
        Row(
            [None, "Check", None, None, "Here", "Should be", "Difference", "In order"],
            [Style(), *[Style("heading")] * 3, *[right] * 4],
        ),
    ]


def _check_rows(checks: Sequence[Check]) -> list[Row]:
    rows = []
    for r, check in enumerate(checks, _FIRST_CHECK):
        number = Style("plain", number_format(check.places, always=2), "right")
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
    last = _FIRST_CHECK + NUMBER_OF_CHECKS - 1
    for where, test in (
        ("B3:H3", f'$B$3<>"{PROVED}"'),
        (f"B{_FIRST_CHECK}:H{last}", f'$H{_FIRST_CHECK}<>"yes"'),
        *(
            (f"L{table[0]}:L{table[1]}", f"L{table[0]}<>0")
            for table in (layout.depots, layout.customers, layout.rates)
            if table[1] >= table[0]
        ),
    ):
        sheet.conditional_formatting.add(where, _rule(test))


def _rule(test: str) -> Rule:
    font, fill = Font(color=WARN_INK, bold=True), PatternFill(bgColor=WARN)
    return Rule(type="expression", formula=[test], dxf=DifferentialStyle(font=font, fill=fill))
