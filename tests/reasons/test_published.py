"""Published problems: values of a unit, pairs and ranges of rates as independent solvers found them.

Sources stand beside each example in tests/published/marginals.json.
"""

import json
from decimal import Decimal
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from engine.changes import Alter, Together
from engine.figures import Customer, Depot, Order, RateKey, RateRow
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.reasons import rate_intervals, values
from engine.reasons.ground import ground_of, money_of
from engine.reasons.kernels import more_at_both_ends
from engine.reasons.sides import more_ordered
from engine.week import Week

EXAMPLES: list[dict[str, Any]] = json.loads(
    (Path(__file__).parents[1] / "published" / "marginals.json").read_text(encoding="utf-8")
)["examples"]


def amount(number: float | None) -> Decimal | None:
    return None if number is None else Decimal(str(number))


def figure(number: float) -> Decimal:
    return Decimal(str(number))


def week_of(example: dict[str, Any]) -> Week:
    lower, upper, unmet = (example.get(name) for name in ("lower", "capacity", "unmet_cost"))
    return Week.of(
        tuple(Depot(f"O{i}", figure(q)) for i, q in enumerate(example["supply"])),
        tuple(
            Customer(
                f"D{j}", (Order(figure(q)),), charge_if_short=None if unmet is None else figure(unmet[j])
            )
            for j, q in enumerate(example["demand"])
        ),
        tuple(
            RateRow(
                f"O{i}",
                f"D{j}",
                figure(rate),
                at_least=amount(lower[i][j]) if lower else None,
                at_most=amount(upper[i][j]) if upper else None,
            )
            for i, line in enumerate(example["cost"])
            for j, rate in enumerate(line)
            if rate is not None
        ),
    )


def plan_of(example: dict[str, Any]) -> Plan:
    plan = plan_week(week_of(example))
    assert plan.total_cost == figure(example["optimum_without_offset"])
    return plan


def named(condition: str) -> list[Any]:
    return [pytest.param(e, id=e["id"]) for e in EXAMPLES if condition in e]


@pytest.mark.parametrize("example", named("rate_range"))
def test_ranges_of_rates(example: dict[str, Any]) -> None:
    """Every used lane's interval, and where every unused lane would begin to pay."""
    plan = plan_of(example)
    found = {one.key: one for one in rate_intervals(plan)}
    assert len(found) == sum(rate is not None for line in example["cost"] for rate in line)
    for i, line in enumerate(example["rate_range"]):
        for j, ends in enumerate(line):
            if ends is None:
                continue
            one = found[RateKey(f"O{i}", f"D{j}")]
            assert (one.stays_from, one.stays_to) == (amount(ends[0]), amount(ends[1])), one.key
            if one.quantity == 0:
                assert one.pays_below == amount(ends[0])


@pytest.mark.parametrize("example", named("origin_plus"))
def test_one_more_and_one_less(example: dict[str, Any]) -> None:
    found = values(plan_of(example))
    for some, name in ((found.depots, "origin"), (found.customers, "destination")):
        for value, plus, minus in zip(some, example[f"{name}_plus"], example[f"{name}_minus"], strict=True):
            assert value.one_more == amount(plus), value.name
            assert (None if value.one_less is None else -value.one_less) == amount(minus), value.name


@pytest.mark.parametrize("example", named("pair_plus"))
def test_one_more_at_both_ends(example: dict[str, Any]) -> None:
    plan = plan_of(example)
    ground, model = ground_of(plan), plan.model
    both = np.empty((len(model.customers), ground.problem.depots), dtype=np.int64)
    more_at_both_ends(ground.rows, ground.closure.cost, 0, both)
    apart = more_ordered(ground, False).cost[:, None] + ground.problem.cost[model.stay_rows]
    money, pure = money_of(model.weights, np.minimum(both[:, :-1], apart))
    places = Decimal(1).scaleb(-model.money_places)
    for i, line in enumerate(example["pair_plus"]):
        for j, expected in enumerate(line):
            if expected is not None:
                assert pure[j, i]
                assert int(money[j, i]) * places == amount(expected), (i, j)


@pytest.mark.parametrize("example", named("pair_minus"))
def test_one_less_at_both_ends(example: dict[str, Any]) -> None:
    """Nobody is told pairs of one less; planning the smaller week must cost what the source says."""
    plan = plan_of(example)
    model = plan.model
    for i, line in enumerate(example["pair_minus"]):
        for j, expected in enumerate(line):
            depot, customer = plan.week.depots[model.depots[i]], plan.week.customers[model.customers[j]]
            if expected is None or not depot.available or not customer.ordered:
                continue
            smaller = plan.week.apply(
                Together(
                    (
                        Alter("depot", depot.name, "available", depot.available - 1),
                        Alter("customer", customer.name, "ordered", customer.ordered - 1),
                    )
                )
            )
            assert plan_week(smaller).total_cost == plan.total_cost - (amount(expected) or 0), (i, j)


@pytest.mark.parametrize("example", named("published_ranging"))
def test_ranges_as_they_were_printed(example: dict[str, Any]) -> None:
    found = {one.key: one for one in rate_intervals(plan_of(example))}
    for printed in example["published_ranging"]:
        one = found[RateKey(f"O{printed['origin'] - 1}", f"D{printed['destination'] - 1}")]
        assert (one.stays_from, one.stays_to) == (amount(printed["low"]), amount(printed["high"]))


def test_all_examples_can_be_planned() -> None:
    assert len(EXAMPLES) == 68
    for example in EXAMPLES:
        try:
            plan_week(week_of(example))
        except NotPlannable as stopped:
            pytest.fail(f"{example['id']}: {stopped}")
