"""Plans to report, and their workbooks."""

from pathlib import Path

import pytest

from engine.planning.plan import Plan
from engine.planning.planner import plan_week
from engine.report.workbook import write_workbook
from tests.report.weeks import busy_week, harmful_week, met_week


@pytest.fixture(scope="session")
def busy() -> Plan:
    return plan_week(busy_week())


@pytest.fixture(scope="session")
def met() -> Plan:
    return plan_week(met_week())


@pytest.fixture(scope="session")
def harmful() -> Plan:
    return plan_week(harmful_week())


@pytest.fixture(scope="session")
def busy_file(busy: Plan, tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("busy") / "plan.xlsx"
    write_workbook(busy, path)
    return path


@pytest.fixture(scope="session")
def harmful_file(harmful: Plan, tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("harmful") / "plan.xlsx"
    write_workbook(harmful, path)
    return path
