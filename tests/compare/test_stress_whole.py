"""Stress of a week with whole loads: cases by hand, what is proved beside what was found, refusals."""

import json
from decimal import Decimal
from io import BytesIO
from threading import Event

import openpyxl
import pytest

import engine
import sample_data
from engine.changes import Alter, SetHold, Together
from engine.compare.frontier import Emissions, NoTradeOff, frontier
from engine.compare.stress import Stressed, stressed
from engine.compare.stress_cases import Case, all_by, change_of, depots_lost, drawn, lanes_lost
from engine.compare.stress_draws import Draws, spread_of
from engine.compare.stress_whole import NotDrawn, dearest_lanes_lost, whole_today
from engine.figures import RateKey
from engine.planning.load_plan import Improving
from engine.planning.planner import plan_week
from engine.report.stress_json import stress_as_json
from engine.report.stress_sheet import stress_sheet
from tests.compare.test_whole_loads import week

D = Decimal
CASES = [
    Case("depot lost", depot="Quarry"),
    Case("depot lost", depot="Upland"),
    Case("lane lost", depot="Quarry", customer="Elm"),
    *all_by("orders", [D(10)]),
    *all_by("rates", [D(10)]),
]


def by_hand(found: Stressed) -> dict[str, tuple[Decimal, Decimal, Decimal, Decimal]]:
    return {
        one.case.words: (found.more_short(one), found.dearer(one), one.opening_charge, one.gap)
        for one in found.outcomes
    }


def test_cases_by_hand() -> None:
    """25 t: a load of 10 from Quarry at 100 and two of Upland at 120, which is 30 to open: 370."""
    plan = plan_week(week())
    found = stressed(plan, CASES)
    assert (found.today.total, found.today.opening_charge) == (370, 30)
    assert by_hand(found) == {
        "Quarry lost": (0, 20, 30, 0),  # three loads of Upland, 360, and 30
        "Upland lost": (15, -270, 0, 0),  # one load of Quarry, 100
        "Quarry to Elm lost": (0, 20, 30, 0),
        "orders up 10 %": (0, 0, 30, 0),  # 27.5 t still go in three loads
        "rates up 10 %": (0, 34, 30, 0),  # a tenth of 340; opening is no rate
    }
    assert [one.case.words for one in found.ranked()][:2] == ["Upland lost", "rates up 10 %"]
    assert all(found.surely_dearer(one) == found.dearer(one) for one in found.outcomes)
    for one in found.outcomes:  # a fresh plan of the changed week says the same
        fresh = plan_week(plan.week.apply(change_of(plan.week, one.case)))
        assert (one.total, one.freight) == (fresh.total_cost, fresh.freight_cost)
        assert one.plan is not None
        assert one.plan.week == fresh.week


def test_what_was_found_lies_above_what_is_proved_and_closing_lanes_lowers_nothing() -> None:
    week7 = engine.read_week(sample_data.path("loads_week.xlsx")).week
    plan = plan_week(week7, time_limit=0)
    cases = [*depots_lost(plan)[:1], *dearest_lanes_lost(plan, 1)]
    found = stressed(plan, cases, seconds=0)
    for one in found.outcomes:
        assert one.at_least is not None
        assert one.at_least <= one.total
        assert found.surely_dearer(one) <= found.dearer(one) + found.today.gap
    lane = found.outcomes[1]
    assert lane.only_closes
    assert found.more_short(lane) or lane.may_serve_better or found.surely_dearer(lane) >= 0


def test_a_hold_on_a_lost_lane_was_a_promise_so_that_nothing_is_claimed() -> None:
    held = week().apply(Together((SetHold(RateKey("Quarry", "Elm"), D(10), "agreed"),)))
    found = stressed(plan_week(held), [Case("lane lost", depot="Quarry", customer="Elm")])
    assert not found.outcomes[0].only_closes
    assert stressed(plan_week(week()), CASES[2:3]).outcomes[0].only_closes


def test_the_dearest_lanes_are_those_of_most_freight() -> None:
    plan = plan_week(week())
    assert [case.depot for case in dearest_lanes_lost(plan)] == ["Upland", "Quarry"]
    assert len(dearest_lanes_lost(plan, 1)) == 1
    assert set(dearest_lanes_lost(plan)) == set(lanes_lost(plan))


def test_drawn_weeks_and_the_trade_off_are_refused_with_a_way_out() -> None:
    plan = plan_week(week())
    with pytest.raises(NotDrawn, match="ask for no drawn weeks"):
        stressed(plan, drawn(Draws(1, spread_of("even -10 0"), None, None), 3))
    with pytest.raises(NoTradeOff, match="copy of the week"):
        frontier(plan, Emissions(D(1), "us"))


def test_a_stop_keeps_the_cases_that_are_done_and_a_case_that_cannot_be_planned_says_why() -> None:
    plan = plan_week(week())
    done: list[int] = []
    found = stressed(plan, CASES, progress=lambda n, _: done.append(n), stop=lambda: len(done) > 2)
    assert (found.stopped, [one.case for one in found.outcomes]) == (True, CASES[:2])
    nowhere = stressed(plan, [Case("lane lost", depot="Quarry", customer="Nobody"), CASES[0]])
    assert len(nowhere.outcomes) == 2
    assert whole_today(plan).total == plan.total_cost


def test_the_sheet_and_the_json_say_what_is_proved() -> None:
    plan = plan_week(week())
    found = stressed(plan, CASES, seconds=2)
    read = json.loads(json.dumps(stress_as_json(found)))
    assert read["seconds_a_case"] == 2
    worst = read["cases"][0]
    assert (worst["case"], worst["lower_bound"], worst["gap"]) == ("Upland lost", "100", "0")
    held = BytesIO()
    engine.write_workbook(plan, held, more=[stress_sheet(found, "A")])
    rows = list(openpyxl.load_workbook(held, data_only=True)["Stress"].iter_rows(values_only=True))
    head = next(row for row in rows if row[0] == "Case")
    assert head[8:10] == ("At least dearer by", "Charge for opening")
    assert next(row for row in rows if row[0] == "Rates up 10 %")[2:10:6] == (34, 34)
    assert any("searched for 2 s" in str(row[0]) for row in rows)


def test_a_search_starts_from_an_earlier_plan_although_rows_have_gone() -> None:
    week7 = engine.read_week(sample_data.path("loads_week.xlsx")).week
    first, better = plan_week(week7, time_limit=0), Event()

    def improved(news: Improving) -> None:
        if news.short == 0 and news.cost < first.total_cost:
            better.set()

    plan = plan_week(week7, improved=improved, should_stop=better, time_limit=None)
    used = {one.key for one in plan.shipments}
    idle = next(
        key for number in week7.rates.ids_in_order.tolist() if (key := week7.rates.key_of(number)) not in used
    )
    closed = week7.apply(Alter("rate", idle, "closed", True))
    assert plan_week(closed, near=plan, time_limit=0).total_cost <= plan.total_cost < first.total_cost
    assert plan_week(closed, time_limit=0).total_cost > plan.total_cost
