"""`hithe stress` as a person runs it: statuses, tables, JSON, a workbook that reads back as the same week."""

import json
import signal
from pathlib import Path

import pytest
from click.testing import CliRunner
from openpyxl import load_workbook

import engine
from app.command import main
from app.stress_command import _stopping
from engine.compare import stress_run
from engine.compare.stress_cases import Case
from engine.compare.stress_ground import Ground
from engine.compare.stress_solve import Outcome
from tests.compare.test_whole_loads import week as small_loads

SMALL = "sample_data/small_week.xlsx"
HEADINGS = "Depot,Available\n", "Customer,Ordered\n", "Depot,Customer,Rate,Haulier\n"


def run(*arguments: str) -> tuple[int, str, str]:
    result = CliRunner().invoke(main, ["stress", *arguments])
    return result.exit_code, result.stdout, result.stderr


@pytest.fixture
def plenty(tmp_path: Path) -> list[str]:
    """A week in which any one of two depots has enough for everybody."""
    rows = "North,10\nSouth,10\n", "Ash,4\n", "North,Ash,2,Oxcart\nSouth,Ash,5,Oxcart\n"
    files = []
    for name, heading, body in zip(("depots", "customers", "rates"), HEADINGS, rows, strict=True):
        file = tmp_path / f"{name}.csv"
        file.write_text(heading + body)
        files.append(str(file))
    return files


def test_nobody_short_in_any_case_is_0_somebody_is_3(plenty: list[str]) -> None:
    status, out, _ = run(*plenty, "--lose", "depots", "--rates", "10")
    assert status == 0
    assert [" ".join(line.split()) for line in out.splitlines() if line] == [
        "Week: 8 EUR freight and charges today, 0 t short",
        "more short dearer by",
        "North lost 0 12",
        "rates up 10 % 0 0.8",
        "South lost 0 0",
        "One lane carries nothing: losing it changes nothing.",
    ]
    status, out, _ = run(*plenty, "--lose", "hauliers")
    assert status == 3
    assert "Oxcart lost 4 -8 Ash 4" in " ".join(out.split())


def test_json_and_the_workbook(tmp_path: Path) -> None:
    book = tmp_path / "plan.xlsx"
    status, out, err = run(
        SMALL, "--lose", "depots", "--draw", "40", "--seed", "9", "--orders-stray", "triangular -20 0 30",
        "--json", "-", "--out", str(book), "--emission-factor", "0.062", "--source", "our fuel book",
    )  # fmt: skip
    assert status == 3
    said = json.loads(out)
    assert (said["asked"], said["done"], said["seed"], len(said["drawn"])) == (46, 46, 9, 40)
    assert {one["depot"] for one in said["cases"]} == set(engine.read_week(SMALL).week.depots)
    plan = engine.plan_week(engine.read_week(SMALL).week)
    assert said["today"]["total_cost"] == engine.plan_as_json(plan)["total_cost"]
    assert f"Wrote {book}" in err
    sheet = load_workbook(book)["Stress"]
    assert len(sheet._charts) == 3
    assert "Quarry lost" in {cell.value for cell in sheet["A"]}
    traded = load_workbook(book)["Trade-off"]
    assert len(traded._charts) == 1
    said_there = [cell.value for cell in traded["A"] if isinstance(cell.value, str)]
    assert any("0.062" in text and "our fuel book" in text for text in said_there)
    assert engine.read_week(book).week == engine.read_week(SMALL).week


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (["--draw", "5"], "need to stray"),
        (["--orders", "-200"], "no change in percent"),
        (["--draw", "5", "--orders-stray", "odd 1 2"], "does not say how a figure strays"),
        (["--emission-factor", "0.06"], "give --source"),
        (["--emission-factor", "none", "--source", "us"], "no number above 0"),
        (["--workers", "2", "--cluster", "tcp://127.0.0.1:9"], "not both"),
    ],
)
def test_what_makes_no_sense_is_refused_with_2(options: list[str], said: str) -> None:
    status, out, err = run(SMALL, *options)
    assert (status, out) == (2, "")
    assert said in " ".join(err.split())


def test_the_trade_off_is_told_with_its_source() -> None:
    status, out, _ = run(
        SMALL, "--lose", "nothing", "--emission-factor", "0.062", "--source", "our fuel book"
    )
    assert status == 3
    assert "0.062 kg CO2e per tonne-kilometre (our fuel book)" in out


def test_figures_that_cannot_be_used_are_2(tmp_path: Path) -> None:
    bad = tmp_path / "week.csv"
    bad.write_text("Depot,Available\nNorth,many\n")
    status, out, _ = run(str(bad))
    assert (status, out) == (2, "")


def test_the_first_ctrl_c_asks_for_a_stop_and_the_second_ends() -> None:
    before = signal.signal(signal.SIGINT, signal.default_int_handler)  # a run in the background has none
    try:
        with _stopping() as stop:
            assert not stop.is_set()
            signal.raise_signal(signal.SIGINT)
            assert stop.is_set()
            with pytest.raises(KeyboardInterrupt):
                signal.raise_signal(signal.SIGINT)
    finally:
        signal.signal(signal.SIGINT, before)


def test_a_stopped_run_keeps_what_is_done_and_answers_130(
    plenty: list[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    solve, solved = stress_run.outcome_of, []

    def third_time(ground: Ground, case: Case) -> Outcome:
        solved.append(case)
        if len(solved) == 3:
            signal.raise_signal(signal.SIGINT)
        return solve(ground, case)

    monkeypatch.setattr(stress_run, "outcome_of", third_time)
    options = ["--lose", "depots", "--draw", "50", "--rates-stray", "even 0 5", "--json", "-"]
    status, out, err = run(*plenty, *options)
    assert status == 130
    assert json.loads(out)["done"] == 3
    assert "Stopped: 3 of 52 cases are done." in err


def test_a_week_with_whole_loads_has_what_is_proved_beside_what_was_found(tmp_path: Path) -> None:
    file = tmp_path / "loads.xlsx"
    engine.write_workbook(engine.plan_week(small_loads()), file)
    code, out, err = run(str(file), "--lose", "depots", "--json", "-", "--workers", "2", "--time-limit", "2")
    assert code == 3, err
    read = json.loads(out)
    assert read["seconds_a_case"] == 2
    by_name = {one["case"]: one for one in read["cases"]}
    assert by_name["Quarry lost"]["total_cost"] == by_name["Quarry lost"]["lower_bound"] == "390"
    assert "on this machine" in err
    _, out, _ = run(str(file), "--lose", "nothing", "--rates", "10")
    assert "At least: proved" in out
    code, _, err = run(str(file), "--draw", "5", "--rates-stray", "even 0 5")
    assert code == 2
    assert "ask for no drawn weeks" in err
