"""Weeks, readings and changes for the tests of the records."""

import random
from collections.abc import Callable, Sequence
from dataclasses import replace
from datetime import date
from decimal import Decimal
from typing import Any

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together
from engine.figures import Customer, Depot, Gone, Haulier, Hold, Order, RateKey, RateRow, Rules
from engine.intake.reading import Reading
from engine.intake.remarks import Counts
from engine.rates import Rates
from engine.week import Week

D = Decimal
TEAL = RateKey("Northgate", "Aster", "Teal")


def small_week() -> Week:
    """A week with something in every field and every table."""
    return Week.of(
        (
            Depot("Northgate", D("50.5"), latitude=D("-61.25"), longitude=D("12.125")),
            Depot(
                "Quarry",
                D(30),
                must_move=D(5),
                charge_if_unsent=D("-0.75"),
                loads_a_day=D(4),
                opening_charge=D(35),
            ),
        ),
        (
            Customer("Aster", (Order(D(20), "A-1", "Mon"), Order(D("15.125"), "A-2", "Wed")), priority="A"),
            Customer("Birch", (Order(D(25)),), D("7.5"), one_depot="Quarry", smallest_drop=D(2)),
            Customer("Ökna", (), may_decline=True, latitude=D("-60"), longitude=D("13")),
        ),
        (
            RateRow("Northgate", "Aster", D("4.10"), haulier="Vole", surcharge=D("2.5"), km=D("31.5")),
            RateRow("Northgate", "Aster", D("4.4001"), haulier="Teal", at_most=D(10), at_least=D("0.5")),
            RateRow("Quarry", "Aster", D("-5.00"), per="load", load_size=D(24), trip_minimum=D(80)),
            RateRow("Quarry", "Birch", D("3.25"), closed=True, valid_from=date(2031, 2, 3)),
            RateRow("Nowhere", "Birch", D("1.00"), charge_per_use=D("12.34")),
        ),
        Rules("Week 6", "t", "EUR", D("3.5"), D(24), "priority", D("9.99"), D("0.01"), D(4)),
        {TEAL: Hold(D("5.5"), "promised")},
        (Gone("L1", "Quarry", "Birch", D("2.5"), D("3.25"), "Vole", date(2031, 2, 4)),),
        (Haulier("Vole", D("99.5")), Haulier("Teal", load_size=D("22.5"))),
    )


def read(week: Week, **more: Any) -> Reading:
    """A reading of this week, as if it had stood in a spreadsheet."""
    return Reading(week, (), Counts(0, 0, 0), "", **more)


def wide_week(depots: int, customers: int, seed: int = 1) -> Week:
    """A week with a rate on every lane."""
    chance = random.Random(seed)
    names = [f"Depot {i}" for i in range(depots)]
    wanted = [f"Customer {j}" for j in range(customers)]
    rows = [RateRow(i, j, D(chance.randrange(100, 9999)).scaleb(-2)) for j in wanted for i in names]
    each = D(customers * 20 // depots + 1)
    return Week.of(
        tuple(Depot(name, each) for name in names),
        tuple(Customer(name, (Order(D(chance.randrange(1, 20)), f"O-{name}"),)) for name in wanted),
        Rates.of(rows),
    )


Pick = Callable[[Sequence[Any]], Any]


def a_change(week: Week, pick: Pick, step: int) -> Change:
    """One change that fits the week; `pick` chooses from a sequence."""
    amount = D(pick(range(100)))
    keys = [week.rates.key_of(int(number)) for number in week.rates.ids_in_order]
    options: list[Change] = [
        Add(Depot(f"Depot {step}", amount), pick([None, 0])),
        Add(Customer(f"Customer {step}", (Order(amount),))),
        Add(RateRow("Quarry", pick(["Aster", "Elm"]), amount, haulier="Vole")),
        Add(Haulier(f"Haulier {step}", amount), pick([None, 0])),
        Add(Gone(f"G{step}", "Quarry", "Birch", amount, D("1.5"))),
        Alter("rule", "", "fuel_surcharge", amount),
        Alter("rule", "", "when_short", pick(["charge", "priority"])),
    ]
    for name in week.depots:
        options += [Remove("depot", name), Alter("depot", name, "available", amount)]
        options += [Alter("depot", name, "must_move", None), Alter("depot", name, "name", f"{name} {step}")]
    for name in week.customers:
        options += [Remove("customer", name), Alter("customer", name, "ordered", amount)]
        options += [Alter("customer", name, "priority", pick(["A", "B", None]))]
    for key in keys:
        options += [Alter("rate", key, "rate", amount), SetHold(key, amount, f"why {step}")]
        options.append(Lift(key) if key in week.holds else Remove("rate", key))
    options += [Remove("gone", name) for name in week.gone]
    for name in week.hauliers:
        options += [Remove("haulier", name), Alter("haulier", name, "at_most", amount)]
        options += [Alter("haulier", name, "load_size", pick([None, amount]))]
    chosen: Change = pick(options)
    if pick([False, False, False, True]):
        return Together((chosen, Alter("rule", "", "step", amount)), "a paste")
    return chosen


def in_any_order(week: Week) -> tuple[Any, ...]:
    """What a week says, whatever the order in which its records were put in."""
    rows = sorted(repr(row) for row in week.rates)
    named = (dict(each) for each in (week.depots, week.customers, week.holds, week.gone, week.hauliers))
    return (*named, rows, week.rules)


def renamed(week: Week, name: str) -> Week:
    return replace(week, rules=replace(week.rules, week=name))
