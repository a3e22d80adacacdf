"""`hithe plan` with whole loads: progress on stderr, a time limit, and Ctrl-C that keeps the best plan."""

import json
import os
import signal
import subprocess
import sys
from decimal import Decimal
from pathlib import Path

import pytest
from click.testing import CliRunner

import sample_data
from app.command import main

LOADS = str(sample_data.path(sample_data.LOADS_WEEK))
PROGRAM = [sys.executable, "-m", "app.command"]
PATIENCE = 120
ROOT = Path(__file__).parents[2]


def test_a_time_limit_ends_the_search_with_a_valid_plan() -> None:
    result = CliRunner().invoke(main, ["plan", LOADS, "--time-limit", "1", "--json", "-"])
    assert result.exit_code in (0, 3)
    plan = json.loads(result.stdout)
    assert plan["whole_loads"]["ended"] in ("time limit", "proved")
    assert Decimal(plan["proof"]["lower_bound"]) + Decimal(plan["proof"]["gap"]) == Decimal(
        plan["total_cost"]
    )
    assert plan["values_withheld"]
    assert plan["depot_values"] == []
    by_load = [one for one in plan["shipments"] if one["per"] == "load"]
    assert by_load
    for one in by_load:
        full, rest = divmod(Decimal(one["quantity"]), Decimal(one["load_size"]))
        assert one["loads"] == full + bool(rest)
    assert "best so far" in result.stderr


@pytest.mark.parametrize("limit", ["-1", "soon"])
def test_a_time_limit_that_is_none_is_refused(limit: str) -> None:
    assert CliRunner().invoke(main, ["plan", LOADS, "--time-limit", limit]).exit_code == 2


def test_ctrl_c_keeps_the_best_plan_and_exits_as_usual(tmp_path: Path) -> None:
    out = tmp_path / "plan.json"
    command = [*PROGRAM, "plan", LOADS, "--time-limit", "3600", "--json", str(out)]
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    with subprocess.Popen(
        command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, env=environment
    ) as process:
        assert process.stderr is not None
        first = process.stderr.readline()  # the search has a plan
        process.send_signal(signal.SIGINT)
        _, rest = process.communicate(timeout=PATIENCE)
    assert "best so far" in first
    assert "the best plan so far is kept" in rest
    assert process.returncode in (0, 3)
    plan = json.loads(out.read_text(encoding="utf-8"))
    assert plan["whole_loads"]["ended"] == "stopped"
    assert process.returncode == (0 if plan["status"] == "met" else 3)
    assert Decimal(plan["proof"]["lower_bound"]) <= Decimal(plan["total_cost"])
