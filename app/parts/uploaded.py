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
from engine.intake.refusal import ending_of
from engine.intake.surroundings import repaired_copy, surroundings_of
from engine.records import NotSaved
from engine.week import Refused, Week

KEY = "uploaded"
FEW = 4
"""So many possible answers are buttons; more are a list to choose from."""

AROUND = 2
MENDABLE = frozenset({".xlsx", ".xlsm", ".csv", ".tsv", ".txt", ".tab"})
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
    found = [f for f in by_gravity(kept.findings) if f.cell or f.options or f.rule == WEIGHT]
    pressing = any(finding.severity is not Severity.NOTE for finding in found)
    if found:
        with st.expander(f"The uploaded files, cell by cell ({len(found)})", expanded=pressing):
            place = st.selectbox(
                "Finding",
                range(len(found)),
                key=f"looked-at-{state.generation}",
                format_func=lambda number: _label(found[number], number, len(found)),
            )
            _one(state, kept, found[place or 0], f"{state.generation}-{place}")
    copies = [(name, data) for name, data in kept.files if name in kept.mended]
    for name, data in copies:
        st.download_button(
            f"Repaired copy of {plain(name)}", data, f"repaired_{name}", on_click="ignore", key=f"copy-{name}"
        )


def _label(finding: Finding, number: int, count: int) -> str:
    where = " ".join(part for part in (finding.sheet, finding.cell) if part) or finding.rule
    return f"{number + 1} of {count} · {finding.severity.word}: {where}: {finding.message[:60]}"


def _one(state: Desk, kept: Uploaded, finding: Finding, key: str) -> None:
    st.markdown(f"{plain(finding.message)} *{plain(finding.mend)}*")
    text = _cells(kept, finding)
    before = answers()
    if finding.options and finding.subject:
        answer = _answer(finding, key)
        if answer is not None:
            _learn(state, kept, before, before.with_answer(finding, answer))
    elif finding.rule == WEIGHT:
        _weight(state, kept, finding, before)
    if finding.severity is Severity.CHECK and st.button(
        "Accept it as it is", key="accept-finding", help="It goes to the plan's notes and is not asked again."
    ):
        _learn(state, kept, before, before.with_accepted(finding))
    if text is None:
        return
    if ending_of(finding.file) not in MENDABLE:
        st.caption("Files of this kind are mended in their own program, or in the grid beside this.")
        return
    with st.form(f"mend-{key}", border=False), st.container(horizontal=True, vertical_alignment="bottom"):
        typed = st.text_input(f"{finding.cell} should say", value=text, key=f"mend-text-{key}", width=220)
        if st.form_submit_button("Mend the cell", key="mend-go") and typed.strip() != text:
            _mend(state, kept, finding, typed.strip())


def _answer(finding: Finding, key: str) -> str | None:
    """The answer that was picked: one click where the options are few."""
    if len(finding.options) <= FEW:
        st.caption("The answer is remembered for the weeks to come.")
        with st.container(horizontal=True):
            clicked = [
                st.button(plain(option), key=f"answer-{key}-{number}", type="primary")
                for number, option in enumerate(finding.options)
            ]
        return next((o for o, click in zip(finding.options, clicked, strict=True) if click), None)
    with st.container(horizontal=True, vertical_alignment="bottom"):
        chosen = st.selectbox("Answer", finding.options, index=None, key=f"answer-{key}", width=220)
        return chosen if st.button("Answer", disabled=chosen is None, key="answer-go") else None


def _weight(state: Desk, kept: Uploaded, finding: Finding, before: Answers) -> None:
    with st.form("weight", border=False), st.container(horizontal=True, vertical_alignment="bottom"):
        typed = st.text_input("A pallet weighs", placeholder="0.8 t", key="weight-text", width=220)
        if st.form_submit_button("Answer", key="weight-go") and typed.strip():
            try:
                known = before.with_answer(finding, typed.strip())
            except ValueError as refused:
                st.error(plain(str(refused)))
                return
            _learn(state, kept, before, known)


def _cells(kept: Uploaded, finding: Finding) -> str | None:
    """Show the cell among its neighbours; its text, None where the finding is on no cell of the files."""
    try:
        piece = surroundings_of(kept.files, finding, around=AROUND)
    except engine.Unreadable:
        return None
    if piece is None:
        return None
    table = pd.DataFrame(
        [list(row) for row in piece.rows], columns=list(piece.letters), index=list(piece.numbers)
    )
    marked = pd.DataFrame("", columns=table.columns, index=table.index)
    marked.iloc[piece.row, piece.column] = "background-color: rgba(214, 138, 0, 0.35); font-weight: bold"
    st.dataframe(table.style.apply(lambda _: marked, axis=None), key="surroundings")
    return piece.rows[piece.row][piece.column]


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
