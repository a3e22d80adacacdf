"""The command line: what it prints and writes, and its exit status."""

import json
import subprocess
import sys
from decimal import Decimal
from pathlib import Path

import openpyxl
import pytest
from click.testing import CliRunner, Result

import engine
import sample_data
from app.command import main
from tests.browser.conftest import environment
from tests.intake.sheets import workbook

SMALL = str(sample_data.path(sample_data.SMALL_WEEK))
MESSY = str(sample_data.path(sample_data.MESSY_WEEK))
LARGE = str(sample_data.path(sample_data.LARGE_WEEK))


def hithe(*arguments: str) -> Result:
    return CliRunner().invoke(main, list(arguments))


def test_a_plan_as_json_on_stdout_and_nothing_else_there() -> None:
    result = hithe("plan", SMALL, "--json", "-")
    assert result.exit_code == 3
    plan = json.loads(result.stdout)
    assert set(plan) == {
        "week", "unit", "currency", "status", "freight_cost", "unsent_cost", "short_cost", "total_cost",
        "freight_payable", "shipments", "short", "unsent", "depot_values", "customer_values", "proof",
        "findings",
    }  # fmt: skip
    assert plan["status"] == "short"
    assert set(plan["shipments"][0]) == {
        "depot", "customer", "haulier", "quantity", "loads", "rate", "cost", "payable"
    }  # fmt: skip
    assert set(plan["depot_values"][0]) == {
        "depot", "price", "one_more", "one_more_short", "one_more_holds_for", "one_less", "one_less_short",
        "one_less_holds_for",
    }  # fmt: skip
    assert plan["proof"] == {
        "exact": True, "lower_bound": plan["total_cost"], "gap": "0", "rounding": plan["proof"]["rounding"],
    }  # fmt: skip
    cost = sum(Decimal(s["quantity"]) * Decimal(s["rate"]) for s in plan["shipments"])
    assert cost == Decimal(plan["freight_cost"])
    charges = Decimal(plan["short_cost"]) + Decimal(plan["unsent_cost"])
    assert cost + charges == Decimal(plan["total_cost"])


def test_all_orders_met_is_status_0_and_the_workbook_reads_back(tmp_path: Path) -> None:
    out = tmp_path / "plan.xlsx"
    result = hithe("plan", LARGE, "--out", str(out))
    assert result.exit_code == 0
    assert engine.read_week(out).week == engine.read_week(LARGE).week


def test_separate_tables_are_one_week() -> None:
    files = [str(sample_data.path(name)) for name in sample_data.SMALL_WEEK_CSV]
    one = json.loads(hithe("plan", SMALL, "--json", "-").stdout)
    several = json.loads(hithe("plan", *files, "--json", "-").stdout)
    assert several["total_cost"] == one["total_cost"]
    assert several["shipments"] == one["shipments"]


def test_figures_that_cannot_be_used_are_status_2_and_nothing_is_written(tmp_path: Path) -> None:
    out, as_json = tmp_path / "plan.xlsx", tmp_path / "plan.json"
    result = hithe("plan", MESSY, "--out", str(out), "--json", str(as_json))
    assert result.exit_code == 2
    assert not out.exists()
    assert not as_json.exists()
    assert result.stdout == ""
    found = engine.read_week(MESSY).findings
    assert all(finding.message in result.stderr for finding in found)
    assert "Stock B5" in result.stderr


def test_a_contradiction_is_status_2_and_named(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "Depots"
    for row in (["Depot", "Available"], ["Quarry", 5], ["Harbour", 50]):
        sheet.append(row)
    customers, rates = book.create_sheet("Customers"), book.create_sheet("Rates")
    for row in (["Customer", "Ordered"], ["Elm", 20]):
        customers.append(row)
    for row in (
        ["Depot", "Customer", "Rate", "At least"],
        ["Quarry", "Elm", 3, 8],
        ["Harbour", "Elm", 4, None],
    ):
        rates.append(row)
    week = tmp_path / "week.xlsx"
    book.save(week)
    for command in ("plan", "check"):
        result = hithe(command, str(week))
        assert result.exit_code == 2
        assert "Quarry has 5 t available, but 8 t are forced: Quarry to Elm (at least 8 t)" in result.stderr


def test_check_tells_the_findings_and_what_was_read() -> None:
    result = hithe("check", SMALL)
    assert result.exit_code == 0
    assert "6 depots, 48 customers" in result.stdout
    assert "Cole ordered 49.5" in result.stderr
    faulty = hithe("check", MESSY)
    assert faulty.exit_code == 2
    assert "12 customers" in faulty.stdout  # what was understood is said of a faulty week as well


def test_what_is_no_spreadsheet_is_refused_in_a_sentence(tmp_path: Path) -> None:
    fake = tmp_path / "week.xlsx"
    fake.write_bytes(b"not a workbook")
    result = hithe("plan", str(fake))
    assert result.exit_code == 2
    assert "week.xlsx" in result.stderr
    assert "Traceback" not in result.output


def test_a_blank_workbook_asks_for_figures(tmp_path: Path) -> None:
    out = tmp_path / "blank.xlsx"
    assert hithe("blank", str(out)).exit_code == 0
    assert {"Depots", "Customers", "Rates", "Rules"} <= set(openpyxl.load_workbook(out).sheetnames)
    result = hithe("check", str(out))
    assert result.exit_code == 2
    assert "There are no depots." in result.stderr


def test_a_blank_workbook_never_replaces_a_file(tmp_path: Path) -> None:
    out = tmp_path / "week.xlsx"
    out.write_bytes(b"a week of work")
    result = hithe("blank", str(out))
    assert result.exit_code == 2
    assert "is there already" in result.stderr
    assert out.read_bytes() == b"a week of work"


def test_a_file_that_is_not_there_is_named_in_a_plain_sentence() -> None:
    result = hithe("plan", "no_such_week.xlsx")
    assert result.exit_code == 2
    assert "no_such_week.xlsx" in result.stderr
    assert "Error" not in result.output


def test_near_takes_an_earlier_plan(tmp_path: Path) -> None:
    out = tmp_path / "plan.xlsx"
    hithe("plan", SMALL, "--out", str(out))
    first = json.loads(hithe("plan", SMALL, "--json", "-").stdout)
    again = json.loads(hithe("plan", SMALL, "--near", str(out), "--json", "-").stdout)
    assert again["shipments"] == first["shipments"]
    result = hithe("plan", SMALL, "--near", SMALL)
    assert result.exit_code == 2
    assert "There is no plan in this file" in result.stderr


@pytest.mark.parametrize("command", ["plan", "check", "blank", "desk"])
def test_every_command_explains_itself(command: str) -> None:
    result = hithe(command, "--help")
    assert result.exit_code == 0
    assert command in (Path(__file__).parents[2] / "README.md").read_text(encoding="utf-8")


def test_it_runs_from_another_folder(tmp_path: Path) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "app.command", "check", SMALL],
        cwd=tmp_path, env=environment(), capture_output=True, text=True, check=False,
    )  # fmt: skip
    assert done.returncode == 0
    assert done.stdout.startswith("6 depots")


def test_records_that_cannot_be_opened_are_said_before_the_desk_opens(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_text("no database " * 200)
    ended = CliRunner().invoke(main, ["desk", "--no-browser", "--records", str(tmp_path / "notes.txt")])
    assert ended.exit_code == 2
    assert "damaged or is no records file" in ended.stderr
    ended = CliRunner().invoke(main, ["desk", "--no-browser", "--records", "mysql://a@b/c"])
    assert ended.exit_code == 2
    assert "postgresql://USER@HOST/DATABASE" in ended.stderr


def test_the_product_is_named_where_there_are_several(tmp_path: Path) -> None:
    from tests.intake.test_answers import PRODUCTS

    file = tmp_path / "week.xlsx"
    file.write_bytes(workbook(PRODUCTS)[1])
    asked = hithe("check", str(file))
    assert asked.exit_code == 2
    assert "--product 'Lime'" in asked.stderr
    named = hithe("check", str(file), "--product", "ash")
    assert named.exit_code == 0
    assert "8 t ordered, 20 t available" in named.stdout
    wrong = hithe("plan", str(file), "--product", "Sand")
    assert wrong.exit_code == 2
    assert "the figures are of Lime, Ash" in wrong.stderr
