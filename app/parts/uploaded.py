"""The uploaded files: questions answered, cells looked at and mended, findings accepted."""

from dataclasses import dataclass, field

import pandas as pd
import streamlit as st

import engine
from app.access import answers, learn
from app.drafts import opened
from app.parts.words import plain
from app.session import Desk
from engine.findings import Finding, Severity, by_gravity
from engine.intake.answers import Answers
from engine.intake.frames import TABLES
from engine.intake.pallets import WEIGHT
from engine.intake.surroundings import repaired_copy, surroundings_of
from engine.records import NotSaved
from engine.week import Refused, Week

KEY = "uploaded"
File = tuple[str, bytes]


@dataclass
class Uploaded:
    """The files as they are now, mends included, and the week that they say."""

    files: list[File]
    week: Week
    findings: tuple[Finding, ...] = ()
    mended: set[str] = field(default_factory=set)
    product: str | None = None


def keep(files: list[File], reading: engine.Reading, product: str | None = None) -> None:
    """Remember the files that the week on screen was read from, and of which product it is."""
    st.session_state[KEY] = Uploaded(files, reading.week, reading.findings, product=product)


def uploaded_panel(state: Desk) -> None:
    """One finding of the upload at a time: the cell in its surroundings, and what can be done about it."""
    kept: Uploaded | None = st.session_state.get(KEY)
    if kept is None:
        return
    open_findings = [f for f in by_gravity(kept.findings) if f.cell or f.options]
    with st.expander(f"In the uploaded files ({len(open_findings)})"):
        if not open_findings:
            st.caption("Nothing is left to look at.")
        else:
            place = st.selectbox(
                "Finding", range(len(open_findings)), key=f"looked-at-{state.generation}",
                format_func=lambda number: _label(open_findings[number]),
            )  # fmt: skip
            _one(state, kept, open_findings[place or 0])
        for name, data in kept.files:
            if name in kept.mended:
                st.download_button(
                    f"Repaired copy of {name}",
                    data,
                    f"repaired_{name}",
                    on_click="ignore",
                    key=f"copy-{name}",
                )


def _label(finding: Finding) -> str:
    return f"{finding.severity.word}: {finding.place}: {finding.message[:70]}"


def _one(state: Desk, kept: Uploaded, finding: Finding) -> None:
    st.markdown(f"{plain(finding.message)} *{plain(finding.mend)}*")
    _cells(kept, finding)
    before = answers()
    if finding.options and finding.subject:
        answer = st.radio("Answer", finding.options, index=None, horizontal=True, key="answer")
        if st.button("Answer, and remember it", disabled=answer is None, key="answer-go") and answer:
            _learn(state, kept, before, before.with_answer(finding, answer))
    if finding.rule == WEIGHT:
        text = st.text_input("A pallet weighs", placeholder="0.8 t", key="weight")
        if st.button("Answer, and remember it", disabled=not text.strip(), key="weight-go"):
            try:
                _learn(state, kept, before, before.with_answer(finding, text.strip()))
            except ValueError as refused:
                st.error(plain(str(refused)))
    if finding.severity is Severity.CHECK and st.button("Accept it as it is", key="accept-finding"):
        _learn(state, kept, before, before.with_accepted(finding))
    if finding.cell and finding.sheet:
        text = st.text_input("What the cell should say", key="mend-text")
        if st.button("Mend the cell", disabled=not text.strip(), key="mend-go"):
            _mend(state, kept, finding, text.strip())


def _cells(kept: Uploaded, finding: Finding) -> None:
    """The cell among its neighbours."""
    try:
        piece = surroundings_of(kept.files, finding)
    except engine.Unreadable:
        return
    if piece is None:
        return
    marked = [list(row) for row in piece.rows]
    marked[piece.row][piece.column] = f"▶ {marked[piece.row][piece.column]}"
    table = pd.DataFrame(marked, columns=list(piece.letters), index=list(piece.numbers))
    st.dataframe(table, key="surroundings")


def _learn(state: Desk, kept: Uploaded, before: Answers, now: Answers) -> None:
    try:
        learn(now, before)
    except (NotSaved, Refused) as failure:
        st.error(plain(str(failure)))
        return
    _read_again(state, kept, now)


def _mend(state: Desk, kept: Uploaded, finding: Finding, text: str) -> None:
    files = []
    for name, data in kept.files:
        if name == finding.file:
            try:
                data = repaired_copy((name, data), {(finding.sheet, finding.cell): text})
            except engine.Unreadable as refused:
                st.error(plain(refused.finding.message))
                return
            kept.mended.add(name)
        files.append((name, data))
    kept.files = files
    _read_again(state, kept, answers())


def _read_again(state: Desk, kept: Uploaded, known: Answers) -> None:
    """What the files say now otherwise than before becomes one change to the week; the rest stays."""
    try:
        reading = engine.read_week(kept.files, answers=known, product=kept.product)
        part = engine.read_part(
            kept.files, kept.week, answers=known, decimal_mark=state.decimal_mark, product=kept.product
        )
    except engine.Unreadable as refused:
        st.error(plain(refused.finding.message))
        return
    if not part.is_empty and not state.commit(part.change, why="mended or answered in the upload"):
        return
    kept.week, kept.findings = reading.week, reading.findings
    state.pallet = reading.style.pallet
    state.read = reading.lasting
    state.drafts = {table: opened(state.week, table, reading.unused, state.style) for table in TABLES}
    state.start_afresh()
    st.rerun()
