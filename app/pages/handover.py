"""Hand over: read the notes, then download the workbook for finance and the loading lists for depots."""

from collections.abc import Callable
from io import BytesIO

import streamlit as st

import engine
from app.parts.findings_panel import findings_panel
from app.parts.issue import issue_panel
from app.parts.nothing_yet import nothing_yet
from app.parts.words import counted, plain
from app.preparing import prepared
from app.session import desk
from engine.report.loading import write_loading_zip
from engine.report.notes import notes_of
from engine.report.plan_csv import write_plan_csv
from engine.report.text import safe_file_name

WORKBOOK = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"


def written(write: Callable[[engine.Plan, BytesIO], None], plan: engine.Plan) -> Callable[[], bytes]:
    """The file, made when it is asked for."""

    def make() -> bytes:
        held = BytesIO()
        write(plan, held)
        return held.getvalue()

    return make


state = desk()
st.title("Hand over")
if state.message:
    kind, text = state.message
    (st.error if kind == "error" else st.success)(plain(text))
    state.message = None
if state.week.is_empty:
    nothing_yet(state, "There is no plan to hand over yet.")
else:
    with prepared():
        plan = state.planned()
    if plan is None:
        st.error("This week cannot be planned as it stands, so there is nothing to hand over.")
        findings_panel(state.stopped, key="stopped")
    else:
        plan = engine.with_findings(plan, state.read)
        name = safe_file_name(plan.week.rules.week)
        left, right = st.columns([2, 3], gap="large")
        with left:
            st.header("Files", anchor=False)
            st.download_button(
                "Plan as a workbook", written(engine.write_workbook, plan), f"plan_{name}.xlsx", WORKBOOK,
                type="primary", on_click="ignore", width="stretch",
                help="The plan from every side, costs, values, the proof, the notes and the figures as used",
            )  # fmt: skip
            st.download_button(
                "Loading lists, without money", written(write_loading_zip, plan), f"loading_{name}.zip",
                "application/zip", on_click="ignore", width="stretch",
                help=f"One workbook for each of {counted(len(plan.week.depots), 'depot')}: no rate, no cost",
            )  # fmt: skip
            st.download_button(
                "Plan as CSV", written(write_plan_csv, plan), f"plan_{name}.csv", "text/csv",
                on_click="ignore", width="stretch",
            )  # fmt: skip
            issue_panel(state, plan)
        with right:
            st.header("Notes that go with it", anchor=False)
            for title, pairs in notes_of(plan):
                st.markdown(f"**{plain(title)}**")
                lines = [
                    f"*{plain(label)}*: {plain(words)}" if label else plain(words) for label, words in pairs
                ]
                st.markdown("\n".join(f"- {line}" for line in lines))
