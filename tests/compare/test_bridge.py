"""The bridge: every cent is somewhere, each step can be planned again, averages are those of all orders."""

from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from itertools import permutations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import engine
import sample_data
from engine.changes import Alter, Lift, SetHold, Together
from engine.compare import bridge as bridge_module
from engine.compare.bridge import Bridge, Side, Worth, bridge
from engine.compare.bridge_words import paragraph
from engine.compare.cents import apportioned
from engine.compare.effects import STATED_ORDER
from engine.compare.events import events_of
from engine.compare.mixed import Event, Mixture, NotComparable
from engine.compare.possible import made_possible
from engine.figures import Customer, Depot, Gone, Hold, Order, RateKey, RateRow, Rules
from engine.history import History
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week
from tests.planning.weeks import weeks

D = Decimal


def side(week: Week, name: str = "") -> Side:
    return Side(name or week.rules.week, week, plan_week(week))


def adds_up(found: Bridge) -> None:
    for part in ("freight", "charges", "short"):
        assert sum(getattr(step, part) for step in found.steps) == getattr(found, part)
    assert found.second_freight - found.first_freight == found.freight
    cents = D("0.01")
    assert all(step.freight == step.freight.quantize(cents) for step in found.steps)
    assert all(abs(Fraction(step.freight) - step.exact.freight) < Fraction(1, 100) for step in found.steps)
    if not found.averaged:
        assert [step.after for step in found.steps][-1:] in ([], [found.second_freight])


@st.composite
def two_weeks(draw: st.DrawFn) -> tuple[Week, Week]:
    """Two weeks that can be planned, of names that overlap; odd cents and gone goods are common."""
    found = []
    for number in range(2):
        week = draw(weeks())
        rules = replace(
            week.rules, week=f"Week {number}", fuel_surcharge=draw(st.sampled_from([None, D("7.3")]))
        )
        gone = ()
        if draw(st.booleans()):
            gone = (Gone("L1", "D0", "C0", D(draw(st.integers(1, 3))), D("1.25")),)
        found.append(replace(week, rules=rules, gone={one.name: one for one in gone}))
    return found[0], found[1]


def planned(*some: Week) -> list[Plan] | None:
    try:
        return [plan_week(week) for week in some]
    except NotPlannable:
        return None


@settings(max_examples=60, deadline=None)
@given(two_weeks(), st.permutations(STATED_ORDER))
def test_every_step_adds_up_in_any_order(pair: tuple[Week, Week], order: list[str]) -> None:
    if planned(*pair) is None:
        return
    effects = Mixture.of(*pair).effects
    for wanted in ((), tuple(one for one in order if one in effects)):
        found = bridge(side(pair[0]), side(pair[1]), order=wanted)
        adds_up(found)
        assert not wanted or [key for key in found.order if key in wanted] == list(wanted)


@settings(max_examples=60, deadline=None)
@given(two_weeks())
def test_nothing_chosen_is_the_first_week_and_all_is_the_second(pair: tuple[Week, Week]) -> None:
    plans = planned(*pair)
    if plans is None:
        return
    mixture = Mixture.of(*pair)
    for chosen, plan in zip(((), mixture.effects), plans, strict=True):
        week, said = mixture.week(chosen)
        week, shrunk = made_possible(week)
        assert not said
        assert not shrunk
        again = plan_week(week)
        assert again.total_cost == plan.total_cost
        assert sum(s.quantity for s in again.short) == sum(s.quantity for s in plan.short)


@settings(max_examples=60, deadline=None)
@given(two_weeks(), st.sets(st.sampled_from(STATED_ORDER)))
def test_every_mixture_can_be_planned(pair: tuple[Week, Week], chosen: set[str]) -> None:
    if planned(*pair) is None:
        return
    week, _ = Mixture.of(*pair).week(chosen)
    plan_week(made_possible(week)[0])


@settings(max_examples=15, deadline=None)
@given(two_weeks())
def test_averages_are_those_of_all_orders(pair: tuple[Week, Week]) -> None:
    """Shapley values against the plain average over every order, planned order by order."""
    if planned(*pair) is None:
        return
    effects = Mixture.of(*pair).effects
    if not 2 <= len(effects) <= 4:
        return
    first, second = side(pair[0]), side(pair[1])
    found = bridge(first, second, average=True)
    adds_up(found)
    orders = list(permutations(effects))
    runs = [{step.key: step.exact for step in bridge(first, second, order=one).steps} for one in orders]
    for step in found.steps:
        if step.key in effects:
            for part in Worth._fields:
                mean = sum((getattr(run[step.key], part) for run in runs), Fraction(0)) / len(orders)
                assert getattr(step.exact, part) == mean


def by_hand(
    ordered: int = 10,
    stock: int = 20,
    rate: str = "2",
    dear: str = "5",
    most: str | None = None,
    name: str = "A",
) -> Week:
    """Cheap from Quarry, dear from Upland."""
    return Week.of(
        (Depot("Quarry", D(stock)), Depot("Upland", D(50))),
        (Customer("Elm", (Order(D(ordered)),)),),
        (
            RateRow("Quarry", "Elm", D(rate), at_most=None if most is None else D(most)),
            RateRow("Upland", "Elm", D(dear)),
        ),
        Rules(week=name),
    )


def parts(found: Bridge) -> dict[str, Decimal]:
    return {step.key: step.freight for step in found.steps}


def test_a_bridge_by_hand() -> None:
    first, second = by_hand(), by_hand(ordered=16, stock=12, rate="3", most="9", name="B")
    # 10 x 2 = 20; 16 x 2 = 32; 12 x 2 + 4 x 5 = 44; 12 x 3 + 4 x 5 = 56; 9 x 3 + 7 x 5 = 62
    found = bridge(side(first), side(second))
    assert parts(found) == {"volume": 12, "stock": 12, "rates": 12, "limits": 6}
    assert [step.after for step in found.steps] == [32, 44, 56, 62]
    # rates first: 10 x 3 = 30; then 48, then 12 x 3 + 4 x 5 = 56
    found = bridge(side(first), side(second), order=("rates",))
    assert parts(found) == {"rates": 10, "volume": 18, "stock": 8, "limits": 6}
    with pytest.raises(NotComparable, match="'mix' is no effect"):
        bridge(side(first), side(second), order=("mix",))


def test_mix_is_apart_from_volume_by_hand() -> None:
    def week(near: int, far: int) -> Week:
        return Week.of(
            (Depot("Quarry", D(100)),),
            (Customer("Near", (Order(D(near)),)), Customer("Far", (Order(D(far)),))),
            (RateRow("Quarry", "Near", D(1)), RateRow("Quarry", "Far", D(9))),
        )

    # 10 + 10 costs 100; both half as much again, 15 + 15, costs 150; 5 + 25 costs 230
    assert parts(bridge(side(week(10, 10)), side(week(5, 25)))) == {"volume": 50, "mix": 80}


def test_a_lane_that_one_week_lacks_counts_under_limits_at_the_other_s_rate() -> None:
    first = by_hand()
    second = replace(first, rates=by_hand().rates.without_row(0))
    # the rate is not missed: 10 x 2 = 20 to 10 x 5 = 50, all of it because the lane is not there
    assert parts(bridge(side(first), side(second))) == {"limits": 30}
    assert parts(bridge(side(second), side(first))) == {"limits": -30}


def test_a_depot_or_customer_that_one_week_lacks_has_nothing_there() -> None:
    first = by_hand()
    second = Week.of(
        (*first.depots.values(), Depot("Harbour", D(6))),
        (*first.customers.values(), Customer("Ash", (Order(D(4)),))),
        (*first.rates, RateRow("Harbour", "Elm", D(1)), RateRow("Harbour", "Ash", D(1))),
    )
    found = bridge(side(first), side(second))
    # Elm alone ordering 14: 28; then Ash 4 of it: Elm 10 x 2, Ash has no lane yet; stock changes nothing
    # until the lanes are there: Ash 4 x 1, Elm 2 x 1 + 8 x 2 = 22
    assert parts(found) == {"volume": 8, "mix": -8, "stock": 0, "limits": 2}
    assert [step.short for step in found.steps] == [0, 4, 0, -4]


def test_a_hold_that_a_mixture_cannot_keep_shrinks_and_is_noted() -> None:
    key = RateKey("Upland", "Elm")
    first = replace(by_hand(), holds={key: Hold(D(8), "promised")})
    second = by_hand(ordered=5, name="B")
    found = bridge(side(first), side(second))
    # 8 x 5 + 2 x 2 = 44; five ordered: the hold is cut to 5 x 5 = 25; lifted: 5 x 2 = 10
    assert parts(found) == {"volume": -19, "holds": -15}
    assert found.remarks == ("Volume: Hold on Upland to Elm: 8 t are not possible here, 5 t are kept.",)


def test_rates_replaced_by_a_later_one_correspond() -> None:
    from datetime import date

    first = by_hand()
    row = RateRow("Quarry", "Elm", D("2.5"), valid_from=date(2031, 2, 5))
    second = replace(first, rates=first.rates.with_row(first.rates.end, row))
    assert parts(bridge(side(first), side(second))) == {"rates": 5}
    assert parts(bridge(side(second), side(first))) == {"rates": -5}


def test_named_events_are_steps_of_their_own() -> None:
    uploaded = by_hand(name="B")
    history = History.of(uploaded)
    history = history.after(Alter("depot", "Quarry", "available", D(6)), who="Ann", why="silo is out")
    history = history.after(Alter("customer", "Elm", "ordered", D(12)))
    history = history.after(Alter("rule", "", "fuel_surcharge", D(10)))
    history = history.undo()
    before, events = events_of(history, lambda change: type(change).__name__)
    assert before == uploaded
    assert [event.name for event in events] == ["Alter (silo is out)", "Alter"]
    first = by_hand(rate="1")
    second = Side("B", history.week, plan_week(history.week), before, events)
    found = bridge(side(first), second)
    # 10 x 1 = 10; 10 x 2 = 20; 6 x 2 + 4 x 5 = 32; 6 x 2 + 6 x 5 = 42
    assert parts(found) == {"rates": 10, "event 1": 12, "event 2": 10}
    adds_up(bridge(side(first), second, average=True))
    assert "12 EUR more by Alter (silo is out)" in paragraph(found)


def test_monday_s_and_friday_s_plans_are_bridged_by_their_changes() -> None:
    history = History.of(by_hand())
    history = history.after(Alter("depot", "Quarry", "available", D(6)))
    key = RateKey("Upland", "Elm")
    history = history.after(Together((SetHold(key, D(7)), Lift(key)), "tried"))
    before, events = events_of(history, lambda change: "change", since=1)
    assert before == history.at(1)
    assert [event.name for event in events] == ["change"]
    monday, friday = history.at(1), history.week
    found = bridge(side(monday), Side("Friday", friday, plan_week(friday), before, events))
    assert parts(found) == {"event 1": 0}


def test_a_plan_that_was_not_the_cheapest_says_so() -> None:
    from engine.compare.usual import Rule, usual_plan

    week = Week.of(
        (Depot("Q", D(5)), Depot("U", D(5))),
        (Customer("A", (Order(D(5)),)), Customer("B", (Order(D(5)),))),
        (RateRow("Q", "A", D(1)), RateRow("Q", "B", D(2)), RateRow("U", "A", D(3)), RateRow("U", "B", D(9))),
    )
    usual = usual_plan(week, Rule.CHEAPEST).costs  # 5 x 1 + 5 x 9 = 50 where 5 x 2 + 5 x 3 = 25 will do
    found = bridge(Side("as sent", week, usual), side(week))
    assert parts(found) == {"departs before": -25}
    assert (found.first_freight, found.second_freight) == (50, 25)


def test_units_and_currencies_must_agree() -> None:
    other = replace(by_hand(), rules=Rules(currency="GBP"))
    with pytest.raises(NotComparable, match="One is in EUR, the other in GBP"):
        bridge(side(by_hand()), side(other))


def test_equal_weeks_have_no_steps() -> None:
    found = bridge(side(by_hand()), side(by_hand(name="B")))
    assert found.steps == ()
    assert paragraph(found) == "B costs the same freight as A: 20 EUR."


def test_the_sample_weeks_against_the_plans_of_their_steps() -> None:
    """Each running total is the freight of that step's week, planned again from outside the bridge."""
    before, now = (
        engine.read_week(sample_data.path(name)).week for name in ("week_before.xlsx", sample_data.SMALL_WEEK)
    )
    found = bridge(side(before), side(now))
    adds_up(found)
    mixture, at = Mixture.of(before, now), plan_week(before).freight_cost
    for number, step in enumerate(found.steps[:-1], 1):
        week, _ = mixture.week(found.order[:number])
        planned_again = plan_week(made_possible(week)[0]).freight_cost
        assert step.exact.freight == Fraction(planned_again) - Fraction(at)
        at = planned_again


@given(st.lists(st.fractions(-100, 100, max_denominator=97), min_size=1, max_size=8))
def test_cents_by_largest_remainder(some: list[Fraction]) -> None:
    rest = -sum(some, Fraction(0)) % Fraction(1, 100)
    found = apportioned([*some, rest], 2)
    assert sum(found) == D(str(round(float(sum([*some, rest])), 2)))
    for part, cents in zip([*some, rest], found, strict=True):
        assert abs(Fraction(cents) - part) < Fraction(1, 100)


def test_thirds_by_hand() -> None:
    third = Fraction(10, 3)
    assert apportioned([third] * 3, 2) == [D("3.34"), D("3.33"), D("3.33")]
    assert apportioned([-third] * 3, 2) == [D("-3.33"), D("-3.33"), D("-3.34")]
    with pytest.raises(ValueError, match="cannot say"):
        apportioned([third], 2)


def test_an_event_that_does_not_fit_a_mixture_is_noted() -> None:
    week = by_hand()
    mixture = Mixture.of(week, week, (Event("lost", Alter("depot", "Nowhere", "available", D(0))),))
    _, said = mixture.week({"event 1"})
    assert said == ("'lost' changes nothing here: There is no depot 'Nowhere' in the week.",)


def eventful(events: int, figures: bool = True) -> tuple[Side, Side]:
    """Two weeks of one depot and customer; in the second so many events, after some other figures."""
    first = Week.of(
        (Depot("Quarry", D(90)), Depot("Upland", D(90))),
        (Customer("Elm", (Order(D(40)),)), Customer("Ash", (Order(D(30)),))),
        (
            RateRow("Quarry", "Elm", D(3)),
            RateRow("Quarry", "Ash", D(4)),
            RateRow("Upland", "Elm", D(5)),
            RateRow("Upland", "Ash", D(6)),
        ),
        Rules(week="A"),
    )
    before = first
    if figures:
        before = first.apply(Alter("rule", "", "fuel_surcharge", D(10)))
        before = before.apply(Alter("customer", "Elm", "charge_if_short", D(2)))
    named = tuple(
        Event(f"event {n}", Alter("depot", "Quarry", "available", D(60 - 5 * n))) for n in range(events)
    )
    second = before
    for event in named:
        second = second.apply(event.change)
    return side(first, "A"), Side("B", second, plan_week(second), before, named)


def test_of_too_many_effects_the_events_are_averaged_as_one() -> None:
    """The union's share is its Shapley value among the unions (Owen 1977), worked out from both orders."""
    first, second = eventful(11)
    found = bridge(first, second, average=True)
    assert found.averaged
    assert "the 11 events of the week are one reason together" in paragraph(found)
    steps = {step.key: step.exact.freight for step in found.steps}
    assert set(steps) == {"surcharge", "charges", "events"}
    assert "event 3" in next(step for step in found.steps if step.key == "events").about
    surcharge = Alter("rule", "", "fuel_surcharge", D(10))
    both, neither = second.week, first.week
    events_only = both.apply(Alter("rule", "", "fuel_surcharge", None))
    worth = [
        Fraction(plan_week(w).freight_cost) for w in (neither, neither.apply(surcharge), events_only, both)
    ]
    assert steps["events"] == ((worth[2] - worth[0]) + (worth[3] - worth[1])) / 2
    assert steps["charges"] == 0
    adds_up(found)


def test_where_even_that_is_too_much_the_stated_order_stands_and_says_so(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(bridge_module, "MOST_AVERAGED", 1)
    first, second = eventful(2)
    found, plain = bridge(first, second, average=True), bridge(first, second)
    assert not found.averaged
    assert found.steps == plain.steps
    assert "So this is no average" in paragraph(found)
    assert not plain.note
