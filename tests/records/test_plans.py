"""Issued plans on disk, and the totals of the latest plan of each week."""

from concurrent.futures import ThreadPoolExecutor
from datetime import date

import pytest

import engine
import sample_data
from engine.changes import Add, SetHold
from engine.exact import total_of
from engine.figures import Gone
from engine.planning.differences import difference
from engine.planning.plan import Plan
from engine.records import (
    Missing,
    Records,
    archive_week,
    create_week,
    find_plan,
    issue_plan,
    list_plans,
    note_totals,
    totals_by_week,
)
from tests.records.making import D, read, renamed


@pytest.fixture(scope="module")
def plan() -> Plan:
    return engine.plan_week(engine.read_week(sample_data.path(sample_data.SMALL_WEEK)).week)


def test_an_issued_plan_is_found_again_as_it_was(records: Records, plan: Plan) -> None:
    week = create_week(records, read(plan.week)).listed
    issue_plan(records, week.id, plan, version=0, who="Ann", note="Monday's plan")
    found = find_plan(records, week.id)
    assert (found.number, found.version, found.who, found.note) == (1, 0, "Ann", "Monday's plan")
    assert found.shipments == plan.shipments
    assert (found.short, found.unsent) == (plan.short, plan.unsent)
    for name in ("freight_payable", "freight_cost", "short_cost", "unsent_cost", "total_cost"):
        assert getattr(found, name) == getattr(plan, name), name
    assert found.lower_bound == plan.proof.lower_bound
    assert total_of(one.payable for one in found.shipments) == D("59566.18")  # as the sample's page shows it
    assert total_of(found.quantities.values()) == total_of(one.quantity for one in plan.shipments)


def test_a_plan_with_whole_loads_is_found_again_as_it_was(records: Records) -> None:
    week = engine.read_week(sample_data.path(sample_data.LOADS_WEEK)).week
    plan = engine.plan_week(week, time_limit=0)
    stored = create_week(records, read(week)).listed
    issue_plan(records, stored.id, plan, version=0)
    found = find_plan(records, stored.id)
    assert found.shipments == plan.shipments
    assert {one.per for one in found.shipments} == {"unit", "load"}
    assert all(one.loads and one.load_size for one in found.shipments)
    for name in ("freight_payable", "total_cost", "opening_cost"):
        assert getattr(found, name) == getattr(plan, name), name
    assert difference(found, plan).rows == ()


def test_plans_are_numbered_and_never_altered(records: Records, plan: Plan) -> None:
    week = create_week(records, read(plan.week)).listed
    first = issue_plan(records, week.id, plan, 0)
    held = plan.week.apply(SetHold(plan.shipments[0].key, D(0), "silo"))
    second = issue_plan(records, week.id, engine.plan_week(held), 1, "Ben")
    assert [number for number, _, _, _ in list_plans(records, week.id)] == [1, 2]
    assert find_plan(records, week.id, 1) == first
    assert find_plan(records, week.id) == second
    assert second.shipments != first.shipments
    with pytest.raises(Missing, match="No plan number 3"):
        find_plan(records, week.id, 3)
    with pytest.raises(Missing, match="no such week"):
        issue_plan(records, "nonsense", plan, 0)


def test_two_who_issue_at_once_get_two_numbers(records: Records, plan: Plan) -> None:
    week = create_week(records, read(plan.week)).listed
    with ThreadPoolExecutor(4) as pool:
        issued = list(pool.map(lambda who: issue_plan(records, week.id, plan, 0, who), "ABCDEFGH"))
    assert sorted(one.number for one in issued) == list(range(1, 9))


def test_totals_are_those_of_the_latest_version(records: Records, plan: Plan) -> None:
    six = create_week(records, read(renamed(plan.week, "Week 6"))).listed
    seven = create_week(records, read(renamed(plan.week, "Week 7"))).listed
    create_week(records, read(renamed(plan.week, "Week 8")))
    held = engine.plan_week(plan.week.apply(SetHold(plan.shipments[0].key, D(0), "silo")))
    note_totals(records, six.id, 1, held)
    note_totals(records, six.id, 0, plan)
    note_totals(records, seven.id, 0, plan)
    first, second = totals_by_week(records)
    assert [first.week.name, second.week.name] == ["Week 6", "Week 7"]
    assert first.freight_payable == held.freight_payable
    assert second.freight_payable == plan.freight_payable
    assert second.short == total_of(one.quantity for one in plan.short)
    assert second.delivered + second.short == second.ordered
    note_totals(records, six.id, 2, plan)
    assert totals_by_week(records)[0].freight_payable == plan.freight_payable
    archive_week(records, six.id)
    assert [one.week.name for one in totals_by_week(records)] == ["Week 7"]


def test_gone_goods_are_part_of_an_issued_plan(records: Records, plan: Plan) -> None:
    first = plan.shipments[0]
    left = Gone("L1", first.depot, first.customer, D(1), D("3.25"), first.haulier, date(2031, 2, 4))
    with_gone = engine.plan_week(plan.week.apply(Add(left)))
    week = create_week(records, read(with_gone.week)).listed
    issued = issue_plan(records, week.id, with_gone, 0)
    assert issued.shipments == with_gone.shipments
    assert [one.quantity for one in issued.shipments if one.gone == "L1"] == [1]
    assert total_of(issued.quantities.values()) == total_of(one.quantity for one in with_gone.shipments)
