"""A plan as one workbook: the plan from every side, its costs and proof, notes, and the figures as used."""

from collections.abc import Sequence
from datetime import datetime

from engine.planning.plan import Plan
from engine.report.book import Target, write_book
from engine.report.costs import costs_sheet
from engine.report.figures_sheets import figures_sheets
from engine.report.groupings import by_customer_sheet, by_depot_sheet, by_haulier_sheet
from engine.report.lines import lines_of
from engine.report.notes import notes_sheet
from engine.report.plan_sheet import plan_columns, plan_letters, plan_sheet
from engine.report.proof_layout import MOST_ROWS_LISTED
from engine.report.proof_loads import load_proof_sheet
from engine.report.proof_sheet import proof_sheet
from engine.report.sheet import Sheet
from engine.report.values_sheet import values_sheet


def write_workbook(
    plan: Plan, target: Target, made: datetime | None = None, more: Sequence[Sheet] = ()
) -> None:
    """Write a plan as an Office Open XML workbook; the same plan and time give the same bytes.

    Args:
        plan: what to write.
        target: a path, or a file open for writing bytes. A path gets the whole workbook or none.
        made: the time that *Notes* and the file's properties state; None leaves it out.
        more: further sheets, put before *Notes*: what the plan was compared with, for instance.

    Raises:
        OSError: the file cannot be written; what stood at the path is still there.
    """
    sheets = workbook_sheets(plan, made, more)
    write_book(sheets, target, title=f"Plan for {plan.week.rules.week}", made=made)


def workbook_sheets(plan: Plan, made: datetime | None = None, more: Sequence[Sheet] = ()) -> list[Sheet]:
    """The sheets of the workbook, in order."""
    lines, header = lines_of(plan), header_of(plan)
    costs, cells = costs_sheet(plan, lines, header)
    proof = proof_sheet if plan.whole is None else load_proof_sheet
    return [
        plan_sheet(plan, lines, header),
        by_depot_sheet(plan, lines, header),
        by_customer_sheet(plan, lines, header),
        by_haulier_sheet(plan, lines, header),
        costs,
        values_sheet(plan, header),
        proof(plan, lines, plan_letters(plan_columns(plan)), cells, header),
        *more,
        notes_sheet(plan, header, made, _remarks(plan)),
        *figures_sheets(plan.week, header),
    ]


def header_of(plan: Plan) -> str:
    """What stands on top of every printed page."""
    return f"{plan.week.rules.week} ({plan.week.rules.unit}, {plan.week.rules.currency})"


def _remarks(plan: Plan) -> tuple[str, ...]:
    if len(plan.week.rates) <= MOST_ROWS_LISTED:
        return ()
    return (
        f"Proof lists only the rate rows that are used, since there are more than {MOST_ROWS_LISTED:,}. All "
        "of them "
        "were checked in whole numbers before this file was written.",
    )
