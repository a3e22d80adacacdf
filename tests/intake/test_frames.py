"""Frames of text for grids, edited frames as changes, and the blank workbook."""

import io
from decimal import Decimal

import openpyxl
import pandas as pd
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Add, Alter, Remove, Together
from engine.figures import RateKey, RateRow
from engine.findings import Severity
from engine.intake.blank import write_blank
from engine.intake.check import check_week
from engine.intake.frames import TABLES, changes_between, draft_of, frame_of, style_of
from engine.intake.reading import read_week
from tests.intake.sheets import DEPOTS, RATES, RULES, plain, workbook

CUSTOMERS = [
    ["Customer", "Ordered", "Charge if short", "Priority", "Order number", "Day"],
    ["Aster", 50.5, 4, "A", "1001", "Mon"],
    ["Birch", 40, None, None, None, None],
    ["Aster", 10, None, None, "1002", "Tue"],
]
WEEK = read_week(workbook(plain(Customers=CUSTOMERS))).week


def edited(table, edit, style=None, week=WEEK):
    before = frame_of(week, table, style)
    after = before.copy()
    after = edit(after) if edit(after) is not None else after
    return changes_between(week, table, before, after, style)


def after_all(changes, week=WEEK):
    return week.apply(Together(tuple(changes)))


def test_frames_are_text_under_our_headings():
    frame = frame_of(WEEK, "customers")
    assert list(frame["Ordered"]) == ["60.5", "40"]
    assert "Order number" not in frame
    assert all(isinstance(cell, str) for table in TABLES for cell in frame_of(WEEK, table).to_numpy().ravel())
    assert list(frame_of(WEEK, "customers", style_of(WEEK, ","))["Ordered"]) == ["60,5", "40"]


def test_nothing_edited_is_no_change():
    for table in TABLES:
        for mark in ".,":
            assert edited(table, lambda frame: frame, style_of(WEEK, mark)) == ([], [])


def test_a_cell():
    def edit(frame):
        frame.loc[0, "Available"] = "1,250.5 t"

    assert edited("depots", edit) == ([Alter("depot", "Northgate", "available", Decimal("1250.5"))], [])


def test_an_unreadable_cell_is_reported_and_other_edits_of_the_row_are_kept():
    def edit(frame):
        frame.loc[1, "Available"] = "eighty"
        frame.loc[1, "Must move"] = "5"

    changes, problems = edited("depots", edit)
    assert changes == [Alter("depot", "Quarry", "must_move", Decimal(5))]
    ((problem,),) = [problems]
    assert (problem.table, problem.row, problem.column) == ("depots", 1, "Available")
    assert (problem.finding.rule, problem.finding.read, problem.stops) == ("not a number", "eighty", True)


def test_a_needed_cell_cleared_a_name_taken_and_a_name_changed():
    def edit(frame):
        frame.loc[0, "Available"] = None

    changes, problems = edited("depots", edit)
    assert (changes, [p.finding.rule for p in problems]) == ([], ["figure missing"])

    def twice(frame):
        frame.loc[0, "Depot"] = "quarry"

    changes, problems = edited("depots", twice)
    assert (changes, [p.finding.rule for p in problems]) == ([], ["same name twice"])

    def renamed(frame):
        frame.loc[0, "Depot"] = "Old Mill"

    changes, problems = edited("depots", renamed)
    assert list(after_all(changes).depots) == ["Old Mill", "Quarry"]
    assert problems == []


def test_rows_added_and_removed():
    def edit(frame):
        frame = frame.drop(index=0)
        frame.loc[7] = ["Cole", "12,000"] + [None] * (len(frame.columns) - 2)
        frame.loc[8] = [None] * len(frame.columns)
        return frame

    changes, problems = edited("customers", edit)
    assert isinstance(changes[0], Remove)
    assert problems == []
    assert {name: c.ordered for name, c in after_all(changes).customers.items()} == {
        "Birch": 40,
        "Cole": 12000,
    }


def test_a_new_row_waits_until_it_reads():
    def edit(frame):
        frame.loc[4] = ["northgate", "Birch"] + [None] * (len(frame.columns) - 2)

    changes, problems = edited("rates", edit)
    assert changes == []
    assert [(p.row, p.column) for p in problems] == [(4, "Rate")]


def test_rates_altered_renamed_and_spelled_as_known():
    def edit(frame):
        frame.loc[0, "Rate"] = "14.25"
        frame.loc[1, "Haulier"] = "Ore & Sons"
        frame.loc[4] = ["QUARRY", "aster", "7"] + [None] * (len(frame.columns) - 3)

    changes, problems = edited("rates", edit)
    assert problems == []
    assert Alter("rate", RateKey("Northgate", "Aster"), "rate", Decimal("14.25")) in changes
    assert Add(RateRow("Quarry", "Aster", Decimal(7))) in changes
    assert [row.haulier for row in after_all(changes).rates] == [None, None, None, "Ore & Sons", None]


def test_rows_of_one_lane_are_told_apart():
    week = read_week(workbook(plain(Rates=[*RATES, ["Northgate", "Aster", 20]]))).week

    def edit(frame):
        frame.loc[4, "Rate"] = "21"

    changes, _ = edited("rates", edit, week=week)
    assert changes == [Alter("rate", RateKey("Northgate", "Aster", None, 2), "rate", Decimal(21))]


def test_rules():
    def edit(frame):
        frame.loc[frame["Rule"] == "Fuel surcharge %", "Value"] = "7,5 %"
        frame.loc[frame["Rule"] == "When short", "Value"] = "by lot"

    changes, problems = edited("rules", edit, style_of(WEEK, ","))
    assert changes == [Alter("rule", "", "fuel_surcharge", Decimal("7.5"))]
    assert [(p.column, p.finding.rule) for p in problems] == [("Value", "rule")]


def test_what_a_sheet_held_and_nobody_could_read_is_in_the_draft_until_mended():
    source = workbook(
        plain(Depots=[[*DEPOTS[0], "Must move"], *DEPOTS[1:], ["Mill", "lots", None], ["Pit", 5, "few"]])
    )
    reading = read_week(source)
    before = frame_of(reading.week, "depots")
    draft = draft_of(reading.week, "depots", reading.unused)
    assert list(draft["Depot"]) == ["Northgate", "Quarry", "Pit", "Mill"]
    assert draft.loc[3, "Available"] == "lots"
    assert draft.loc[2, "Must move"] == "few"
    changes, problems = changes_between(reading.week, "depots", before, draft)
    assert changes == []
    assert [(p.row, p.column, p.finding.read) for p in problems] == [
        (2, "Must move", "few"),
        (3, "Available", "lots"),
    ]
    mended = draft.copy()
    mended.loc[3, "Available"], mended.loc[2, "Must move"] = "30", ""
    changes, problems = changes_between(reading.week, "depots", before, mended)
    assert problems == []
    assert after_all(changes, reading.week).depots["Mill"].available == 30


texts = st.sampled_from(
    ["", "12", "1,234.5", "-3", "yes", "load", "2026-01-31", "A", "closed", "x y", "#N/A", "5 t"]
)


@settings(max_examples=150, deadline=None)
@given(st.data(), st.sampled_from(TABLES))
def test_whatever_is_typed_every_cell_is_understood_reported_or_as_before(data, table):
    before = frame_of(WEEK, table)
    after = before.copy()
    for _ in range(data.draw(st.integers(1, 4))):
        row = data.draw(st.integers(0, len(after)))
        column = data.draw(st.sampled_from(list(after.columns)))
        if row == len(after):
            after.loc[row] = [""] * len(after.columns)
        after.loc[row, column] = data.draw(texts)
    changes, problems = changes_between(WEEK, table, before, after)
    week = after_all(changes)
    shown = frame_of(week, table)
    again, still = changes_between(week, table, after, after)
    assert again == []
    assert [(p.row, p.column) for p in still] == [(p.row, p.column) for p in problems]
    unread = {(p.row, p.column) for p in problems if p.stops}
    if table in ("depots", "customers") and not unread and len(shown) == len(after):
        back, _ = changes_between(week, table, shown, shown)
        assert back == []


def test_the_blank_workbook_reads_back_as_an_empty_week():
    stream = io.BytesIO()
    write_blank(stream)
    reading = read_week(("blank.xlsx", stream.getvalue()))
    assert reading.week.is_empty
    assert {f.rule for f in reading.findings} == {"no depots", "no customers", "no rates"}
    assert all(
        f.severity is Severity.STOPS and f.mend == "Fill in the rows below its headings."
        for f in reading.findings
    )
    book = openpyxl.load_workbook(io.BytesIO(stream.getvalue()))
    assert book.sheetnames == ["Depots", "Customers", "Rates", "Hauliers", "Rules"]
    assert all(cell.comment for sheet in book for cell in sheet[1])
    assert book["Rates"].freeze_panes == "C2"
    assert book.vba_archive is None


def test_a_filled_blank_workbook_is_a_week(tmp_path):
    path = tmp_path / "blank.xlsx"
    write_blank(path)
    book = openpyxl.load_workbook(path)
    for title, rows in (
        ("Depots", DEPOTS),
        ("Customers", [["Customer", "Ordered"], ["Aster", 60]]),
        ("Rates", RATES),
    ):
        for row, cells in enumerate(rows[1:], start=2):
            for column, cell in enumerate(cells, start=1):
                book[title].cell(row, column, cell)
    book["Rules"]["B2"] = RULES[1][1]
    book.save(path)
    reading = read_week(path)
    assert (len(reading.week.depots), len(reading.week.rates), reading.week.rules.week) == (2, 4, "Week 49")


def test_a_week_is_checked_without_any_sheet():
    week = WEEK.apply(Alter("rate", RateKey("Northgate", "Aster"), "per", "load"))
    assert [(f.rule, f.sheet, f.cell) for f in check_week(week)] == [
        ("load size missing", "Rates", ""),
    ]
    assert check_week(WEEK) == ()
    assert pd.DataFrame(frame_of(WEEK, "rules")).shape == (9, 2)
