"""The plan's workbook with what was compared: sheets Compare, Bridge and Weeks, their charts native."""

from io import BytesIO

import streamlit as st

import engine
from app.access import totals
from app.session import Desk
from engine.compare.bridge import Bridge
from engine.compare.service import Saving
from engine.compare.usual import UsualPlan
from engine.planning.plan import Plan
from engine.report.bridge_sheet import bridge_sheet
from engine.report.compare_sheet import compare_sheet
from engine.report.sheet import Sheet
from engine.report.text import safe_file_name
from engine.report.weeks_sheet import weeks_sheet
from engine.report.workbook import header_of

WORKBOOK = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"


def compared_file(
    state: Desk, plan: Plan, usual: tuple[UsualPlan, Saving] | None, change: Bridge | None
) -> None:
    """The button; the file is made when it is asked for, from what the page has worked out already."""
    rules = plan.week.rules
    weeks = [one for one in totals() if (one.week.unit, one.week.currency) == (rules.unit, rules.currency)]
    found = engine.with_findings(plan, state.read)

    def make() -> bytes:
        header, held = header_of(found), BytesIO()
        sheets: list[Sheet] = []
        if usual is not None:
            sheets.append(compare_sheet(found, *usual, header))
        if change is not None:
            sheets.append(bridge_sheet(change, header))
        if weeks:
            sheets.append(weeks_sheet(weeks, header))
        engine.write_workbook(found, held, more=sheets)
        return held.getvalue()

    st.download_button(
        "The plan as a workbook, with these comparisons", make,
        f"compared_{safe_file_name(rules.week)}.xlsx", WORKBOOK, on_click="ignore", key="compared-file",
        help="The sheets Compare, Bridge and Weeks beside the plan's own, with charts of their own",
    )  # fmt: skip
