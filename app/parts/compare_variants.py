"""Variants side by side: what each would come to, lane by lane what it does otherwise, and making one."""

from decimal import Decimal
from io import BytesIO

import streamlit as st

import engine
from app.parts.change_words import words_of
from app.parts.compare_asked import kept, variants_of
from app.parts.compare_file import WORKBOOK
from app.parts.reasons_table import Cell, Heading, reasons_table
from app.parts.words import counted, money, plain, quantity
from app.session import Desk
from engine.compare.variants import Measured, Measures, Variant, measured, side_by_side
from engine.exact import total_of
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.records import NotSaved, remove_variant
from engine.report.text import safe_file_name
from engine.report.variants_sheet import variants_sheet
from engine.report.workbook import header_of

SHOWN = 12


def variants_view(state: Desk, plan: Plan) -> None:
    """The week as it stands and its variants, a row each; the picked one lane by lane."""
    if state.kept is None:
        st.info("The week is not in the records, so it has no variants yet.")
        return
    variants = variants_of(state)
    if not variants:
        st.info(
            "No variant yet. Change a figure on Figures, or hold, limit or close a lane on Plan: before the "
            "change is made you can keep it here as a variant, with a name, and compare any number of them."
        )
        return
    found = kept(state, plan, ("variants", variants), lambda: side_by_side(plan, variants))
    picked = _table(state, plan, found)
    _workbook(state, plan, found)
    if any(one.difference is not None and one.difference.short for one in found):
        st.caption("Where less is delivered, freight falls: read it with what goes short.")
    if picked is None:
        st.caption("Pick a row to see what it changes, lane by lane.")
    else:
        _one(state, plan, found[picked])


def _table(state: Desk, plan: Plan, found: tuple[Measured, ...]) -> int | None:
    """The table; which variant is picked."""
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    minor, base = minor_places(currency), measured(plan)
    headings = [
        Heading("Variant"),
        Heading(f"Freight, {currency}", places=minor),
        Heading(f"Against the week, {currency}", places=minor),
        Heading(f"per {unit}", places=4),
        Heading(f"Charges, {currency}", "For short, unsent and opening; they stand apart", minor),
        Heading(f"Short, {unit}"),
        Heading(f"Left, {unit}", "What depots keep"),
        Heading("Lanes"),
        Heading("Loads"),
        Heading(f"{unit}-km", "Quantity times kilometres", 0),
        Heading("Changes", "How many changes it makes to the week"),
        Heading("Rates moved", "On how many rate rows another quantity goes"),
    ]
    rows: list[list[Cell]] = [["The week as it stands", *_cells(base, base), Decimal(0), Decimal(0)]]
    for one in found:
        changes = Decimal(len(one.variant.changes))
        if one.measures is None or one.difference is None:
            blank: list[Cell] = [None] * 9
            rows.append([f"{one.variant.name} (cannot be planned)", *blank, changes, None])
        else:
            moved = Decimal(len(one.difference.rows))
            rows.append([one.variant.name, *_cells(one.measures, base), changes, moved])
    picked = reasons_table(headings, rows, f"variants-{state.generation}", state.decimal_mark)
    return None if not picked else picked - 1


def _workbook(state: Desk, plan: Plan, found: tuple[Measured, ...]) -> None:
    """The plan's workbook with the sheet Variants, made when it is asked for."""
    sound = engine.with_findings(plan, state.read)

    def make() -> bytes:
        header, held = header_of(sound), BytesIO()
        engine.write_workbook(sound, held, more=[variants_sheet(plan, found, words_of, header)])
        return held.getvalue()

    st.download_button(
        "Workbook with sheet Variants", make, f"variants_{safe_file_name(plan.week.rules.week)}.xlsx",
        WORKBOOK, on_click="ignore", key="variants-book",
    )  # fmt: skip


def _cells(one: Measures, base: Measures) -> list[Cell]:
    loads = None if one.loads is None else Decimal(one.loads)
    more = total_of((one.freight, -base.freight))
    return [
        one.freight, more, one.per_unit, one.charges, one.short, one.left, Decimal(one.lanes), loads,
        one.unit_km,
    ]  # fmt: skip


def _one(state: Desk, plan: Plan, one: Measured) -> None:
    """What a variant changes, where it leads, and what can be done with it."""
    st.header(plain(one.variant.name), anchor=False)
    lines = [f"- {plain(words_of(change))}" for change in one.variant.changes[:SHOWN]]
    if len(one.variant.changes) > SHOWN:
        lines.append(f"- and {len(one.variant.changes) - SHOWN} more")
    st.markdown("\n".join(lines))
    for finding in one.findings:
        st.error(plain(f"{finding.message} {finding.mend}"))
    _buttons(state, one.variant)
    if one.difference is None:
        return
    by, rules = one.difference, plan.week.rules
    if not by.rows:
        st.caption("Nothing moves.")
        return
    word = "dearer" if by.freight_payable > 0 else "cheaper"
    cost = money(abs(by.freight_payable), rules.currency, state.decimal_mark)
    said = f"Freight **{cost} {word}**"
    if by.short:
        much = quantity(abs(by.short), rules.unit, state.decimal_mark)
        said += f", with **{plain(much)} {'more' if by.short > 0 else 'less'} short**"
    st.markdown(f"{said}; another quantity on {counted(len(by.rows), 'rate row')}.")
    headings = [
        Heading("Depot"),
        Heading("Customer"),
        Heading("Haulier"),
        Heading(f"The week, {rules.unit}"),
        Heading(f"Variant, {rules.unit}"),
        Heading(f"More, {rules.unit}"),
    ]
    rows: list[list[Cell]] = [
        [row.key.depot, row.key.customer, row.key.haulier or "", row.before, row.after, row.more]
        for row in by.rows
    ]
    reasons_table(headings, rows, f"variant-lanes-{state.generation}", state.decimal_mark, pick=False)
    st.markdown(f"**To ring:** {plain(', '.join(by.to_ring[:30]))}")


def _buttons(state: Desk, variant: Variant) -> None:
    if state.kept is None or not state.kept.may_change:
        return
    with st.container(horizontal=True):
        if st.button("Put it up as a change", type="primary", key="variant-promote",
                     help="Its price is shown before it is made; one undo takes it back"):  # fmt: skip
            state.propose(variant.as_one)
            st.switch_page("pages/plan.py")
        if st.button("Take it out", key="variant-remove"):
            try:
                remove_variant(state.kept.records, state.kept.week_id, variant.name)
            except NotSaved as failure:
                state.message = ("error", str(failure))
            st.rerun()
