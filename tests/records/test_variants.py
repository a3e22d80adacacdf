"""Variants, the plan as it was sent, and the week before: kept beside a week, on both databases."""

from decimal import Decimal

import pytest

from engine.changes import Alter, SetHold
from engine.figures import RateKey
from engine.records import (
    Missing,
    Records,
    archive_week,
    create_week,
    list_variants,
    load_sent,
    remove_variant,
    save_sent,
    save_variant,
    week_before,
)
from tests.records.making import TEAL, read, small_week

D = Decimal


def test_variants_are_kept_in_order_and_replaced_by_name(records: Records) -> None:
    week_id = create_week(records, read(small_week())).listed.id
    first = (Alter("depot", "Quarry", "available", D("12.5")), SetHold(TEAL, D(3), "asked"))
    save_variant(records, week_id, "Quarry out", first, "Ann")
    save_variant(records, week_id, "dear fuel", (Alter("rule", "", "fuel_surcharge", D(9)),))
    assert list_variants(records, week_id)[0] == ("Quarry out", first, "Ann")
    save_variant(records, week_id, "Quarry out", first[:1], "Ben")
    assert [(name, len(changes), who) for name, changes, who in list_variants(records, week_id)] == [
        ("Quarry out", 1, "Ben"),
        ("dear fuel", 1, ""),
    ]
    remove_variant(records, week_id, "Quarry out")
    assert [name for name, _, _ in list_variants(records, week_id)] == ["dear fuel"]
    with pytest.raises(Missing):
        save_variant(records, "nowhere", "x", first)


def test_the_plan_as_it_was_sent_comes_back_as_it_was(records: Records) -> None:
    week_id = create_week(records, read(small_week())).listed.id
    assert load_sent(records, week_id) == {}
    went = {TEAL: D("5.125"), RateKey("Quarry", "Ökna"): D(0), RateKey("Quarry", "Birch", None, 2): D(3)}
    save_sent(records, week_id, went)
    assert list(load_sent(records, week_id).items()) == list(went.items())
    save_sent(records, week_id, {})
    assert load_sent(records, week_id) == {}


def test_the_week_before_is_the_last_one_alike_that_is_not_archived(records: Records) -> None:
    first, second, third = (create_week(records, read(small_week())).listed for _ in range(3))
    assert week_before(records, first.id) is None
    before = week_before(records, third.id)
    assert before is not None
    assert before.id == second.id
    archive_week(records, second.id)
    before = week_before(records, third.id)
    assert before is not None
    assert before.id == first.id
    assert week_before(records, "nowhere") is None
