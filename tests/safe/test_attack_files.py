"""Hostile names in what is handed over: no formula, no path; and what is read back is the week."""

import csv
import io
import json
import re
import zipfile

import openpyxl
import pytest

import engine
from engine.report.loading import write_loading_zip
from engine.report.plan_csv import write_plan_csv
from tests.safe.attack import DEPOTS, NAMES, attack_week

STARTS = ("=", "+", "-", "@", "\t", "\r")


@pytest.fixture(scope="module")
def plan() -> engine.Plan:
    return engine.plan_week(attack_week().week)


def test_every_name_is_read_as_written_or_cleaned_of_what_nobody_sees(plan: engine.Plan) -> None:
    week = plan.week
    assert set(DEPOTS) == set(week.depots)
    cleaned = {name for name in NAMES if not name.isprintable()}
    assert len(cleaned) == 4
    assert set(NAMES) - cleaned <= {*week.depots, *week.customers}
    assert all(name.isprintable() for name in week.customers)


def test_ten_thousand_letters_are_no_name() -> None:
    rows = f"Customer,Ordered\n{'long' * 2500},4\nAster,5\n"
    reading = engine.read_week([("customers.csv", rows.encode())])
    assert list(reading.week.customers) == ["Aster"]
    (finding,) = [one for one in reading.findings if "at most 200" in one.message]
    assert len(finding.message) < 200
    with pytest.raises(engine.Unreadable):
        engine.read_week([("customers.csv", b"Customer,Ordered\nNU\0L,4\n")])


def test_the_workbook_takes_no_name_for_a_formula(plan: engine.Plan) -> None:
    held = io.BytesIO()
    engine.write_workbook(plan, held)
    book = openpyxl.load_workbook(io.BytesIO(held.getvalue()))
    every = [(sheet.title, cell) for sheet in book for row in sheet.iter_rows() for cell in row]
    formulas = [str(cell.value) for _, cell in every if cell.data_type == "f"]
    assert formulas  # the proof lives
    assert not [text for text in formulas if re.search("HYPERLINK|cmd|elsewhere|SUM\\(A1\\)$|^=1", text)]
    assert not [cell for _, cell in every if cell.hyperlink]
    texts = {cell.value for _, cell in every if cell.data_type in ("s", "inlineStr")}
    assert set(DEPOTS) <= texts
    with zipfile.ZipFile(io.BytesIO(held.getvalue())) as archive:
        names = archive.namelist()
        assert not [name for name in names if re.search("external|vba|macro|connections", name, re.I)]
    again = engine.read_week([("plan.xlsx", held.getvalue())]).week
    assert (again.depots, again.customers) == (plan.week.depots, plan.week.customers)


def test_loading_lists_lie_where_they_should(plan: engine.Plan) -> None:
    held = io.BytesIO()
    write_loading_zip(plan, held)
    with zipfile.ZipFile(held) as archive:
        names = archive.namelist()
        assert len(names) == len({name.casefold() for name in names}) == len(plan.week.depots)
        assert all(re.fullmatch(r"[A-Za-z0-9_-]+\.xlsx", name) for name in names)
        for name in names:
            book = openpyxl.load_workbook(io.BytesIO(archive.read(name)))
            cells = [
                cell for sheet in book for row in sheet.iter_rows() for cell in row if cell.value is not None
            ]
            sums = [str(cell.value) for cell in cells if cell.data_type == "f"]
            plain = r"=[A-Z.]*\(?(\d+,)?[A-Z]+\d+(:[A-Z]+\d+)?\)?"
            assert all(re.fullmatch(plain, one) for one in sums), sums
            heads = " ".join(str(cell.value) for cell in cells if cell.data_type == "s").casefold()
            assert not re.search(r"\b(rate|cost|payable|freight|price|eur)\b", _without_names(heads))


def _without_names(text: str) -> str:
    for name in sorted(NAMES, key=len, reverse=True):
        text = text.replace(name.casefold(), "")
    return text


def test_a_csv_file_holds_no_formula(plan: engine.Plan) -> None:
    held = io.BytesIO()
    write_plan_csv(plan, held)
    text = held.getvalue().decode("utf-8-sig")
    rows = list(csv.reader(io.StringIO(text), delimiter=";" if text.splitlines()[0].count(";") > 2 else ","))
    for row in rows:
        for cell in row:
            assert not cell.lstrip(" \u00a0").startswith(STARTS) or re.fullmatch(r"-?[\d.,]+", cell), cell


def test_json_is_the_names_themselves(plan: engine.Plan) -> None:
    said = json.loads(json.dumps(engine.plan_as_json(plan)))
    assert {row["depot"] for row in said["shipments"]} <= set(DEPOTS)
    assert {row["customer"] for row in said["short"]} <= set(plan.week.customers)
