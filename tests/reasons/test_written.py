"""The reasons as they are written: JSON with `--values full`, and the workbook's sheet Values."""

import json
from decimal import Decimal
from pathlib import Path

import openpyxl
from click.testing import CliRunner

import engine
import sample_data
from app.command import main
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.planning.planner import plan_week
from engine.reasons import nearest_to_paying
from engine.week import Week

D = Decimal
SMALL = str(sample_data.path(sample_data.SMALL_WEEK))


def surcharged() -> Week:
    """Quarry 10 at 4 and Northgate 20 at 7 for Elm's 10, both with 25 % on top."""
    return Week.of(
        (Depot("Quarry", D(10)), Depot("Northgate", D(20))),
        (Customer("Elm", (Order(D(10)),)),),
        (RateRow("Quarry", "Elm", D(4)), RateRow("Northgate", "Elm", D(7))),
        Rules(fuel_surcharge=D(25)),
    )


def test_thresholds_in_json_are_before_surcharge_and_holds_are_quantities() -> None:
    """Quarry stays up to 7, Northgate's own rate; Northgate pays below 4; one more holds for its 20."""
    written = engine.plan_as_json(plan_week(surcharged()), full=True)
    assert written["rates"] == [
        {
            "depot": "Quarry", "customer": "Elm", "haulier": None, "rate": "4",
            "stays_from": None, "stays_to": "7", "pays_below": None,
        },
        {
            "depot": "Northgate", "customer": "Elm", "haulier": None, "rate": "7",
            "stays_from": "4", "stays_to": None, "pays_below": "4",
        },
    ]  # fmt: skip
    (elm,) = written["customer_values"]
    assert (elm["one_more"], elm["one_more_holds_for"]) == ("8.75", "20")
    assert (elm["one_less"], elm["one_less_holds_for"]) == ("-5", "10")


def test_the_option_of_the_command_line() -> None:
    brief, full = (
        json.loads(CliRunner().invoke(main, ["plan", SMALL, "--json", "-", *more]).stdout)
        for more in ([], ["--values", "full"])
    )
    assert "rates" not in brief
    rates = engine.read_week(SMALL).week.rates
    assert len(full["rates"]) == len(rates)
    assert all(value["one_more_holds_for"] is None for value in brief["customer_values"])
    assert any(value["one_more_holds_for"] for value in full["customer_values"])
    assert {k: v for k, v in full.items() if k not in ("rates", "depot_values", "customer_values")} == {
        k: v for k, v in brief.items() if k not in ("depot_values", "customer_values")
    }


def test_sheet_values_has_both_sides_and_thresholds(tmp_path: Path) -> None:
    plan = plan_week(surcharged())
    engine.write_workbook(plan, tmp_path / "plan.xlsx")
    sheet = openpyxl.load_workbook(tmp_path / "plan.xlsx")["Values"]
    rows = [[cell.value for cell in row] for row in sheet.iter_rows()]
    elm = next(row for row in rows if row[:2] == ["customer", "Elm"])
    assert elm[2:8] == [8.75, 20, None, -5, 10, None]
    heading = next(n for n, row in enumerate(rows) if row[0] == "Depot" and row[5] == "Plan stays from")
    assert rows[heading + 1][:7] == ["Quarry", "Elm", None, 10, 4, None, 7]
    assert rows[heading + 2][:2] == ["Northgate", "Elm"]
    assert rows[heading + 2][7:9] == [4, nearest_to_paying(plan)[0].carries]
