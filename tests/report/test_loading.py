"""Loading lists: no money, nothing of other depots, safe names, fit to print."""

import re
import zipfile
from io import BytesIO
from pathlib import Path

import openpyxl
import pytest

from engine.planning.plan import Plan
from engine.report.loading import loading_file_names, write_loading_list, write_loading_zip
from tests.report.weeks import HARM


def listed(plan: Plan, depot: str) -> openpyxl.Workbook:
    held = BytesIO()
    write_loading_list(plan, depot, held)
    return openpyxl.load_workbook(held, data_only=True)


def test_a_list_says_what_to_load_for_whom(busy: Plan) -> None:
    sheet = listed(busy, "Northgate")["Loading list"]
    rows = list(sheet.iter_rows(min_row=4, values_only=True))
    assert rows[0] == ("Customer", "Haulier", "Send", "Unit", "Days", "Order numbers", "Part of order")
    sent = {(s.customer, s.haulier, float(s.quantity)) for s in busy.shipments if s.depot == "Northgate"}
    end = next(place for place, row in enumerate(rows) if row[0] == "Total")
    assert {row[:3] for row in rows[1:end]} == sent
    assert rows[end][2] == sum(quantity for *_, quantity in sent)
    assert next(row for row in rows if row[0] == "Alder")[4:6] == ("Mon, Wed", "A-1, A-2")


def test_a_list_has_no_money_and_nothing_of_other_depots(busy: Plan) -> None:
    held = BytesIO()
    write_loading_list(busy, "Millrace", held)
    with zipfile.ZipFile(held) as archive:
        text = " ".join(archive.read(name).decode() for name in archive.namelist())
    mine = {s.customer for s in busy.shipments if s.depot == "Millrace"}
    others = {*busy.week.depots, *busy.week.customers} - {"Millrace"} - mine
    assert mine
    assert not [name for name in others if name in text]
    assert "EUR" not in text
    assert not re.search(r"(?i)rate|cost|payable|price|charge", text.replace("operate", ""))
    shown = {float(v) for v in re.findall(r"<v>([^<]*)</v>", text)}
    money = {float(x) for s in busy.shipments if s.depot == "Millrace" for x in (s.rate, s.cost, s.payable)}
    assert not shown & money


def test_a_depot_with_nothing_to_load_gets_a_list_that_says_so(busy: Plan) -> None:
    cells = [row[0] for row in listed(busy, "Idle")["Loading list"].iter_rows(values_only=True)]
    assert "Nothing to load this week." in cells


def test_every_list_carries_the_cautions(busy: Plan) -> None:
    cells = " ".join(
        str(row[0]) for row in listed(busy, "Quarry")["Loading list"].iter_rows(values_only=True)
    )
    assert "does not check axle or gross weights, drivers' hours, dangerous goods" in cells


def test_a_list_is_set_up_for_print(busy: Plan) -> None:
    sheet = listed(busy, "Northgate")["Loading list"]
    assert sheet.page_setup.orientation == "landscape"
    assert (sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight) == (1, 0)
    assert sheet.sheet_properties.pageSetUpPr.fitToPage
    assert sheet.print_title_rows == "$4:$4"
    assert "Northgate" in sheet.oddHeader.left.text


def test_an_unknown_depot_is_refused(busy: Plan) -> None:
    with pytest.raises(KeyError, match="no depot 'Nowhere'"):
        write_loading_list(busy, "Nowhere", BytesIO())


def test_file_names_are_plain_and_no_two_alike() -> None:
    names = loading_file_names([*HARM, "ash", "Ash", "ASH", "ash-2"])
    assert len({name.casefold() for name in names.values()}) == len(names)
    assert all(re.fullmatch(r"[A-Za-z0-9][A-Za-z0-9_-]*\.xlsx", name) for name in names.values())


def test_the_zip_has_a_list_per_depot_and_the_same_bytes_every_time(busy: Plan, tmp_path: Path) -> None:
    write_loading_zip(busy, tmp_path / "lists.zip")
    held = BytesIO()
    write_loading_zip(busy, held)
    assert (tmp_path / "lists.zip").read_bytes() == held.getvalue()
    with zipfile.ZipFile(held) as archive:
        assert archive.namelist() == ["Northgate.xlsx", "Quarry.xlsx", "Millrace.xlsx", "Idle.xlsx"]
        single = BytesIO()
        write_loading_list(busy, "Quarry", single)
        assert archive.read("Quarry.xlsx") == single.getvalue()
