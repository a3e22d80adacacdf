"""`hithe compare`: weeks and plan workbooks, statuses, JSON, and sheets that add up by themselves."""

import json
from decimal import Decimal
from pathlib import Path

import openpyxl
import pytest
from click.testing import CliRunner

import engine
import sample_data
from app.command import main
from engine.changes import Alter
from engine.records import Opened, create_week, issue_plan, open_records, save

BEFORE, NOW = (str(sample_data.path(name)) for name in ("week_before.xlsx", sample_data.SMALL_WEEK))


def run(*arguments: str) -> tuple[int, str, str]:
    found = CliRunner().invoke(main, ["compare", *arguments])
    return found.exit_code, found.stdout, found.stderr


def test_two_weeks_in_words_and_the_status_of_a_short_week() -> None:
    code, out, _ = run(BEFORE, NOW)
    assert code == 3
    assert out.startswith(
        "Week 6 costs 3318.73 EUR less freight than Week 5: 59566.18 EUR after 62884.91 EUR."
    )
    assert [line.split()[0] for line in out.splitlines() if line.startswith(("Volume", "Stock"))] == [
        "Volume", "Stock",
    ]  # fmt: skip


@pytest.mark.parametrize("more", [[], ["--average"], ["--order", "surcharge,stock"]])
def test_json_adds_up_and_goes_alone_to_stdout(more: list[str]) -> None:
    _, out, _ = run(BEFORE, NOW, "--json", "-", *more)
    read = json.loads(out)
    for money, part in (("freight_payable", "freight"), ("charges", "charges"), ("short", "short")):
        assert sum(Decimal(step[part]) for step in read["steps"]) == Decimal(read[money]["difference"])
    assert read["averaged"] is (more == ["--average"])
    if more[:1] == ["--order"]:
        assert [step["effect"] for step in read["steps"]][:2] == ["surcharge", "stock"]


def test_what_cannot_be_used_is_2(tmp_path: Path) -> None:
    code, out, err = run(BEFORE, NOW, "--order", "holds")
    assert (code, out) == (2, "")
    assert "'holds' is no effect in which these two differ" in err
    nothing = tmp_path / "nothing.csv"
    nothing.write_text("A,B\n1,2\n")
    assert run(BEFORE, str(nothing))[0] == 2
    pounds = tmp_path / "pounds.xlsx"
    book = openpyxl.load_workbook(BEFORE)
    rules = book["Rules"]
    row = next(r for r in rules.iter_rows() if r[0].value == "Currency")
    row[1].value = "GBP"
    book.save(pounds)
    code, _, err = run(BEFORE, str(pounds))
    assert code == 2
    assert "One is in EUR, the other in GBP" in err


def test_a_plan_s_workbook_is_taken_as_it_was_sent(tmp_path: Path) -> None:
    plan = engine.plan_week(engine.read_week(BEFORE).week)
    file = tmp_path / "plan.xlsx"
    engine.write_workbook(plan, file)
    _, out, _ = run(str(file), BEFORE, "--json", "-")
    assert json.loads(out)["steps"] == []
    book = openpyxl.load_workbook(file)
    sheet = book["Plan"]
    send = next(cell.column for cell in sheet[1] if cell.value == "Send")
    taken = Decimal(str(sheet.cell(2, send).value))
    sheet.cell(2, send).value = 0  # what was then sent by the usual rule instead
    book.save(file)
    _, out, _ = run(str(file), BEFORE, "--json", "-")
    read = json.loads(out)
    assert taken
    assert {step["effect"] for step in read["steps"]} <= {"departs before", "rounding"}
    assert Decimal(read["freight_payable"]["second"]) == plan.freight_payable


def test_the_workbook_has_sheets_that_add_up_and_reads_back_as_the_week(tmp_path: Path) -> None:
    out = tmp_path / "out.xlsx"
    assert run(BEFORE, NOW, "--out", str(out))[0] == 3
    book = openpyxl.load_workbook(out)
    bridge, compare = book["Bridge"], book["Compare"]
    assert len(bridge._charts) == len(compare._charts) == 1
    named = {row[0].value: row[0].row for row in bridge.iter_rows() if row[0].value}
    first, last = named["Week 5"], named["Week 6"]
    values = openpyxl.load_workbook(out, data_only=True)["Bridge"]
    total = sum(Decimal(str(values.cell(row, 2).value)) for row in range(first + 1, last))
    assert total == Decimal(str(values.cell(last, 2).value)) == Decimal("-3318.73")
    assert values.cell(last, 3).value == 59566.18
    assert str(bridge.cell(last, 2).value).startswith(f"=SUM(B{first + 1}")
    again = engine.read_week(out)
    assert (
        again.week == engine.read_week(NOW).week
        or again.week.customers == engine.read_week(NOW).week.customers
    )
    assert engine.plan_week(again.week).freight_payable == Decimal("59566.18")
    assert again.week == engine.read_week(NOW).week
    told = [f"{f.sheet}: {f.message}" for f in again.findings if f.sheet in ("Bridge", "Compare")]
    assert not told


def kept_week(place: Path, name: str) -> Opened:
    records = open_records(place)
    found = create_week(records, engine.read_week(sample_data.path(name)))
    records.close()
    return found


def test_weeks_of_the_records_go_by_name_or_id_beside_files(tmp_path: Path) -> None:
    place = tmp_path / "kept.sqlite"
    before, now = (kept_week(place, name) for name in ("week_before.xlsx", sample_data.SMALL_WEEK))
    _, by_files, _ = run(BEFORE, NOW, "--json", "-")
    for first, second in (("week 5", now.listed.id), (before.listed.id, "Week 6"), (BEFORE, "Week 6")):
        code, out, _ = run(first, second, "--json", "-", "--records", str(place))
        assert code == 3
        assert json.loads(out) == json.loads(by_files)


def test_an_issued_plan_and_what_was_done_to_the_week_since(tmp_path: Path) -> None:
    place = tmp_path / "kept.sqlite"
    now = kept_week(place, sample_data.SMALL_WEEK)
    records = open_records(place)
    issue_plan(records, now.listed.id, engine.plan_week(now.history.week), 0, "Ann")
    change = Alter("depot", "Northgate", "available", Decimal(500))
    save(records, now.listed.id, now.history.after(change, "Ann", "silo repaired"), 0)
    records.close()
    code, out, err = run("Week 6#1", "Week 6", "--json", "-", "--records", str(place))
    assert code == 3, err
    read = json.loads(out)
    assert (read["first"], read["second"]) == ("Week 6, plan 1", "Week 6")
    after = engine.plan_week(now.history.week.apply(change))
    assert Decimal(read["freight_payable"]["second"]) == after.freight_payable
    assert any("silo repaired" in step["name"] for step in read["steps"])
    assert "No plan 7 of 'Week 6' was issued" in run("Week 6#7", NOW, "--records", str(place))[2]


def test_a_name_of_several_weeks_and_of_none_is_not_guessed_at(tmp_path: Path) -> None:
    place = tmp_path / "kept.sqlite"
    ids = [kept_week(place, sample_data.SMALL_WEEK).listed.id for _ in range(2)]
    code, out, err = run("Week 6", NOW, "--records", str(place))
    assert (code, out) == (2, "")
    assert "2 weeks are named 'Week 6'" in err
    assert all(one in err for one in ids)
    code, _, err = run("no_file.xlsx", NOW, "--records", str(tmp_path / "none.sqlite"))
    assert code == 2
    assert "there are no records to look it up in" in err
    assert not (tmp_path / "none.sqlite").exists(), "nothing is made by looking"
    code, _, err = run("Week 9", NOW, "--records", str(place))
    assert code == 2
    assert "'Week 9' is no file here, nor a week in the records" in err


def test_two_files_of_one_week_are_told_apart_by_their_names(tmp_path: Path) -> None:
    other = tmp_path / "thursday.xlsx"
    assert CliRunner().invoke(main, ["plan", NOW, "--out", str(other)]).exit_code == 3
    said = CliRunner().invoke(main, ["compare", NOW, str(other)]).stdout
    assert f"Week 6 ({other}) costs the same freight as Week 6 ({NOW}): 59566.18 EUR." in said


def test_a_figure_changed_in_the_workbook_of_a_plan_is_remarked_on(tmp_path: Path) -> None:
    plan, changed = tmp_path / "plan.xlsx", tmp_path / "changed.xlsx"
    CliRunner().invoke(main, ["plan", NOW, "--out", str(plan)])
    assert "does not send what the figures" not in run(NOW, str(plan))[2]
    book = openpyxl.load_workbook(plan)
    assert (book["Depots"]["A2"].value, book["Depots"]["B2"].value) == ("Northgate", 810)
    book["Depots"]["B2"] = 700
    book.save(changed)
    assert "check: changed.xlsx: Plan: The sheet Plan does not send what" in run(NOW, str(changed))[2]
