"""The figures: open spreadsheets or the sample week, mend what was found, edit by hand."""

from io import BytesIO

import streamlit as st

import engine
from app.access import answers
from app.parts.figures_grid import figures_grid, rules_grid
from app.parts.findings_panel import findings_panel
from app.parts.products import File, keep_others, product_choice
from app.parts.proposal import proposal
from app.parts.raise_rates import raise_rates
from app.parts.sample import open_sample
from app.parts.uploaded import keep, uploaded_panel
from app.parts.welcome import welcome
from app.parts.words import counted, plain
from app.session import Desk, desk, read_files
from engine.intake.answers import Answers

TYPES = ["xlsx", "xlsm", "xls", "xlsb", "ods", "csv", "tsv", "txt"]
WHOLE = {"depots", "customers", "rates"}
SHOWN = 12
WORKBOOK = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"


def blank_workbook() -> bytes:
    written = BytesIO()
    engine.write_blank(written)
    return written.getvalue()


def opening(state: Desk) -> None:
    """Upload, sample and blank workbook; what is read is shown before it replaces a week."""
    files = st.file_uploader(
        "Spreadsheets of the week: one workbook, or a file each for depots, customers and rates",
        type=TYPES,
        accept_multiple_files=True,
        key=f"upload-{state.uploads}",
    )
    with st.container(horizontal=True):
        if st.button("Open the sample week"):
            open_sample(state)
            st.rerun()
        st.download_button(
            "Blank workbook",
            blank_workbook,
            "hithe_week.xlsx",
            WORKBOOK,
            on_click="ignore",
            help="The headings that are read, each with a line on what it means, and no figures",
        )
    if not files:
        return
    uploaded = [(file.name, file.getvalue()) for file in files]
    known = answers()
    reading, findings = read_files(uploaded, known)
    if reading is None:
        st.error(f"{plain(findings[0].message)} {plain(findings[0].mend)}")
        return
    product = None
    if len(reading.products) > 1:
        product = product_choice(state, reading.products)
        reading, findings = read_files(uploaded, known, product)
        if reading is None:
            st.error(f"{plain(findings[0].message)} {plain(findings[0].mend)}")
            return
    elif state.week.is_empty and not reading.week.is_empty:
        keep(uploaded, reading)
        state.open(reading)
        st.rerun()
    st.markdown(f"**Read:** {plain(reading.summary)}")
    if reading.week.is_empty:
        findings_panel(findings, key="upload")
        return
    if not state.week.is_empty:
        _part_of_a_week(state, uploaded, known, product)
    _whole_week(state, uploaded, known, reading, product)
    findings_panel(findings, key="upload")


def _whole_week(
    state: Desk, uploaded: list[File], known: Answers, reading: engine.Reading, product: str | None
) -> None:
    """The buttons that put what was read on the desk, in place of a week that may be there."""
    if not state.week.is_empty and not reading.tables.issuperset(WHOLE):
        return
    one = "Put these figures in place of the week on screen"
    if state.week.is_empty:
        one = f"Open the week of {product}"
    with st.container(horizontal=True):
        clicked = st.button(plain(one), type="primary" if state.week.is_empty else "secondary")
        both = product is not None and st.button("Open it, and keep the others as weeks of their own")
    if clicked or both:
        if both and product is not None and not keep_others(state, uploaded, product, known):
            st.rerun()
        said = state.message
        keep(uploaded, reading, product)
        state.open(reading)
        state.message = said
        st.rerun()


def _part_of_a_week(state: Desk, uploaded: list[File], known: Answers, product: str | None) -> None:
    """What an upload says otherwise than the week on screen, to be put up as one change."""
    part = engine.read_part(
        uploaded, state.week, answers=known, decimal_mark=state.decimal_mark, product=product
    )
    if part.is_empty:
        st.markdown("These files say the same as the week on screen.")
        return
    st.markdown(f"**{counted(len(part.differences), 'difference')} from the week on screen:**")
    lines = [f"- {plain(sentence)}" for sentence in part.differences[:SHOWN]]
    if len(part.differences) > SHOWN:
        lines.append(f"- and {len(part.differences) - SHOWN:,} more")
    st.markdown("\n".join(lines))
    st.caption("As one change, holds and gone goods stay. The price is shown before it is made.")
    if st.button("Put these differences up as one change", type="primary"):
        state.uploads += 1
        state.propose(part.change)
        st.rerun()


state = desk()
st.title("Figures")
with st.container():  # always there: what stands before the tabs must not move them, or the first opens again
    if state.message:
        kind, text = state.message
        (st.error if kind == "error" else st.success)(plain(text))
        state.message = None
if state.week.is_empty:
    welcome(state)
    st.header("Your own week", anchor=False)
    opening(state)
else:
    with st.expander("Open other figures"):
        opening(state)
    with st.container(key="put-up"):
        proposal(state)
    grids, remarks = st.columns([13, 7], gap="medium")
    with grids:
        depots, customers, rates, hauliers, rules = st.tabs(
            ["Depots", "Customers", "Rates", "Hauliers", "Rules"]
        )
        with depots:
            figures_grid(state, "depots")
        with customers:
            figures_grid(state, "customers")
        with rates:
            figures_grid(state, "rates")
        with hauliers:
            raise_rates(state)
            st.caption("Below, only hauliers with a limit over all their lanes, or a load size of their own.")
            figures_grid(state, "hauliers")
        with rules:
            rules_grid(state)
    with remarks:
        uploaded_panel(state)
        findings_panel(state.all_findings(), key="figures", known=answers())
