"""One depot's page: its loading list of the plan issued last, without money and without any other depot."""

from dataclasses import dataclass
from io import BytesIO

import pandas as pd
import streamlit as st

from app.access import records
from app.parts.words import counted, number, plain
from app.rights import claims, house
from engine.exact import total_of
from engine.planning.plan import Shipment
from engine.records import Issued, Missing, NotSaved, find_plan, open_week
from engine.records.depot_links import is_for, week_of_link
from engine.report.groupings import loading_columns
from engine.report.lines import lines_of, still_to_go
from engine.report.loading import write_loading_list
from engine.report.notes import CAUTIONS
from engine.report.text import safe_file_name
from engine.week import Week

DEPOT = "depot"
"""What the address of a depot's page says."""
WORKBOOK = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"
SHOWN = 2_000


@dataclass(frozen=True)
class Loaded:
    """What was issued: the week it was issued for, and what goes."""

    week: Week
    shipments: tuple[Shipment, ...]


def depot_page() -> bool:
    """Whether the address is a depot's; then its page is shown, and nothing of the desk beside it."""
    link = st.query_params.get(DEPOT)
    sign_in = house().sign_in
    if not link or (sign_in is not None and not sign_in.depot_links and not claims()):
        return False
    st.html("<style>[data-testid='stSidebar'] { display: none; }</style>")
    try:
        found = _found(link)
    except (Missing, NotSaved) as failure:
        st.title("Loading list", anchor=False)
        st.warning(plain(str(failure)))
        return True
    week, depot, issued, mark = found
    st.title(f"Loading list: {plain(depot)}", anchor=False)
    st.markdown(f"**{plain(week.rules.week)}**, quantities in {plain(week.rules.unit)}")
    if issued is None:
        st.info("No plan of this week has been issued yet. Look again once the desk says so.")
        return True
    st.caption(f"Plan {issued.number}, issued {issued.issued:%d %b %Y, %H:%M} UTC")
    _list(Loaded(week, issued.shipments), depot, mark)
    for sentence in CAUTIONS:
        st.caption(plain(sentence))
    return True


def _list(loaded: Loaded, depot: str, mark: str) -> None:
    lines = [line for line in still_to_go(lines_of(loaded)) if line.shipment.depot == depot]
    if not lines:
        st.info("Nothing to load this week.")
        return
    columns = loading_columns(loaded)
    send = [number(line.shipment.quantity, mark) for line in lines[:SHOWN]]
    frame = pd.DataFrame(
        {
            column.heading: send
            if column.heading == "Send"
            else [str(column.value(line) or "") for line in lines[:SHOWN]]
            for column in columns
            if column.heading != "Unit"
        }
    )
    right = st.column_config.TextColumn(f"Send, {loaded.week.rules.unit}", alignment="right")
    st.dataframe(
        frame, hide_index=True, column_config={"Send": right}, alt="Loading list",
        height=min(38 + 35 * len(frame), 1200),
    )  # fmt: skip
    sent = number(total_of(line.shipment.quantity for line in lines), mark)
    st.markdown(f"In all: **{sent} {plain(loaded.week.rules.unit)}**, {counted(len(lines), 'line')}")
    if len(lines) > SHOWN:
        st.caption(f"The first {SHOWN:,} of {counted(len(lines), 'line')}; the workbook has all.")
    held = BytesIO()
    write_loading_list(loaded, depot, held)
    st.download_button(
        "Loading list as a workbook", held.getvalue(), f"loading_{safe_file_name(depot)}.xlsx", WORKBOOK,
        type="primary", on_click="ignore",
    )  # fmt: skip


def _found(link: str) -> tuple[Week, str, Issued | None, str]:
    """The week as it was when its latest plan was issued, the depot, that plan, and the decimal mark."""
    week_id = week_of_link(records(), link)
    opened = open_week(records(), week_id)
    try:
        issued = find_plan(records(), week_id)
    except Missing:
        issued = None
    week = opened.history.week if issued is None else opened.history.at(issued.version)
    for depot in week.depots:
        if is_for(link, week_id, depot):
            return week, depot, issued, opened.decimal_mark
    raise Missing("This link leads to no loading list any more. Ask the desk for a new one.")
