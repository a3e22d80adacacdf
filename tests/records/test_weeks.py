"""Weeks on disk: what is stored comes back, rate tables are stored once, lists are searched."""

from decimal import Decimal

import pytest
from sqlalchemy import func, select, text

import engine
import sample_data
from engine.changes import Add, Alter, Remove, SetHold
from engine.figures import Customer, Depot, Gone, Order, RateKey, RateRow, Rules
from engine.findings import Finding, Severity
from engine.history import History
from engine.intake.answers import Answers
from engine.intake.build_lists import Unused
from engine.intake.numbers import NumberStyle
from engine.planning.plan import Shipment, Short, Unsent
from engine.rates import Rates
from engine.records import (
    Missing,
    Records,
    archive_week,
    copy_week,
    create_week,
    list_weeks,
    load_answers,
    open_records,
    open_week,
    restore_as_new,
    save,
    save_answers,
    save_remarks,
)
from engine.records.decimals import field_names
from engine.records.schema import (
    customers,
    depots,
    gone,
    holds,
    rate_changes,
    rate_rows,
    rate_tables,
    shipments,
    short,
    unsent,
    weeks,
)
from engine.week import Week
from tests.records.making import D, read, renamed, small_week


def counted(records: Records, table: object) -> int:
    with records.read() as connection:
        return int(connection.execute(select(func.count()).select_from(table)).scalar_one())  # type: ignore[arg-type]


def afresh(records: Records, week_id: str) -> Week:
    """The week as another process reads it."""
    other = open_records(records.engine.url.render_as_string(hide_password=False))
    try:
        return open_week(other, week_id).history.week
    finally:
        other.close()


def test_every_field_has_its_column() -> None:
    tables = {Depot: depots, Customer: customers, RateRow: rate_changes, Gone: gone, Rules: weeks}
    tables |= {Shipment: shipments, Short: short, Unsent: unsent}
    apart = {(Customer, "orders"), (Rules, "week"), (Shipment, "key"), (Shipment, "cost")}
    for kind, table in tables.items():
        for name in field_names(kind):
            assert (kind, name) in apart or name in table.c, f"{kind.__name__}.{name} would be lost"


def test_a_week_comes_back_as_it_was(records: Records) -> None:
    made = create_week(records, read(small_week()))
    again = afresh(records, made.listed.id)
    assert again == small_week()
    assert again.rates.table.haulier_names == small_week().rates.table.haulier_names


@pytest.mark.parametrize("name", [sample_data.SMALL_WEEK, sample_data.MESSY_WEEK, sample_data.LARGE_WEEK])
def test_sample_weeks_come_back_with_what_was_said_of_them(records: Records, name: str) -> None:
    reading = engine.read_week(sample_data.path(name))
    made = create_week(records, reading)
    other = open_records(records.engine.url.render_as_string(hide_password=False))
    again = open_week(other, made.listed.id)
    other.close()
    assert again.history.uploaded == reading.week
    assert again.findings == reading.lasting
    assert again.unused == reading.unused
    assert again.decimal_mark == reading.style.decimal_mark


def test_an_empty_week_and_a_week_without_rates_can_be_stored(records: Records) -> None:
    for week in (Week(), Week.of((Depot("A", D(1)),), (), ())):
        assert afresh(records, create_week(records, read(week)).listed.id) == week


def test_a_rate_table_is_stored_once(records: Records) -> None:
    week = small_week()
    first = create_week(records, read(week))
    rows = counted(records, rate_rows)
    assert rows == 5
    again = Rates.of(list(week.rates))
    second = create_week(records, read(renamed(Week.of((), (), again), "Week 7")))
    assert counted(records, rate_rows) == rows
    assert counted(records, rate_tables) == 1
    other = [*list(week.rates)[:-1], RateRow("Nowhere", "Birch", D("1.01"))]
    third = create_week(records, read(Week.of((), (), tuple(other))))
    assert counted(records, rate_rows) == 2 * rows
    assert [len(afresh(records, one.listed.id).rates) for one in (first, second, third)] == [5, 5, 5]


def test_changes_come_back_and_holds_in_force_stand_in_their_table(records: Records) -> None:
    made = create_week(records, read(small_week()))
    key = RateKey("Quarry", "Birch")
    history = made.history.after(SetHold(key, D("7.25"), "rang"), "Ann", "silo is full")
    history = history.after(Alter("customer", "Aster", "ordered", D(40)), "Ben")
    history = history.undo("Ann", by="Ann")
    history = history.after(SetHold(key, D(8), "rang again"), "Ann")
    save(records, made.listed.id, history, saved=0)
    other = open_records(records.engine.url.render_as_string(hide_password=False))
    opened = open_week(other, made.listed.id)
    other.close()
    assert opened.history.week == history.week
    assert opened.history.entries == history.entries
    assert opened.listed.version == 4
    with records.read() as connection:
        query = select(holds.c.customer, holds.c.quantity, holds.c.quantity_scale).order_by(holds.c.position)
        now = connection.execute(query.where(holds.c.when_read == "now")).all()
        uploaded = connection.execute(query.where(holds.c.when_read == "uploaded")).all()
    assert [tuple(row) for row in uploaded] == [("Aster", 55, 1)]
    assert [tuple(row) for row in now] == [("Aster", 55, 1), ("Birch", 8, 0)]


def test_last_week_is_copied_with_its_altered_rates_and_without_its_holds(records: Records) -> None:
    wide = Week.of(
        (Depot("A", D(9)),), (Customer("B", ()),), tuple(RateRow("A", "B", D(n)) for n in range(40))
    )
    made = create_week(records, read(wide))
    history = made.history
    for change in (
        Alter("rate", RateKey("A", "B", None, 3), "rate", D("2.75")),
        Remove("rate", RateKey("A", "B", None, 5)),
        Add(RateRow("A", "B", D(77), haulier="Teal")),
        SetHold(RateKey("A", "B"), D(1)),
        Add(Gone("G", "A", "B", D(1), D(1))),
    ):
        history = history.after(change)
    save(records, made.listed.id, history, saved=0)
    copied = copy_week(records, made.listed.id, "Week 8")
    again = afresh(records, copied.listed.id)
    assert list(again.rates) == list(history.week.rates)
    assert again.rules.week == "Week 8"
    assert not again.holds
    assert not again.gone
    assert counted(records, rate_tables) == 1
    assert again.rates.find(RateKey("A", "B", None, 5)) is None
    for number in range(1, 9):
        change = Alter("rate", RateKey("A", "B", None, 10 + number), "rate", D(0))
        copied.history.week.apply(change)
    many = copied.history
    for number in range(10, 20):
        many = many.after(Alter("rate", RateKey("A", "B", None, number), "rate", D(5)))
    save(records, copied.listed.id, many, saved=0)
    third = afresh(records, copy_week(records, copied.listed.id, "Week 9").listed.id)
    assert list(third.rates) == list(many.week.rates)
    assert not third.rates.overlay
    assert counted(records, rate_tables) == 2


def test_an_older_version_becomes_a_new_week_or_one_grouped_change(records: Records) -> None:
    made = create_week(records, read(small_week()))
    history = made.history.after(SetHold(RateKey("Quarry", "Birch"), D(3)))
    history = history.after(Remove("customer", "Aster")).after(Alter("depot", "Quarry", "name", "Pit"))
    save(records, made.listed.id, history, saved=0)
    old = restore_as_new(records, made.listed.id, 1, "Week 6 again")
    assert afresh(records, old.listed.id) == renamed(history.at(1), "Week 6 again")
    back = history.back_to(1, "Ann")
    assert back.week == history.at(1)
    assert len(back.entries) == 4
    assert back.undo().week == history.week
    with pytest.raises(Missing, match="never had 9 changes"):
        restore_as_new(records, made.listed.id, 9, "no")


def test_weeks_are_listed_searched_and_archived(records: Records) -> None:
    six = create_week(records, read(renamed(small_week(), "Week 6"))).listed
    seven = create_week(records, read(renamed(Week.of((Depot("100%_Silo", D(1)),), (), ()), "Week 7"))).listed
    elsewhere = create_week(records, read(Week()), desk="south").listed
    assert [week.id for week in list_weeks(records)] == [seven.id, six.id]
    assert [week.id for week in list_weeks(records, desk="south")] == [elsewhere.id]
    for words, found in {
        "week": [seven, six],
        "WEEK 6": [six],
        "quarry": [six],
        "öKNA week": [six],
        "ök 7": [],
        "100%_": [seven],
        "%": [seven],
        "_": [seven],
        "'; drop table weeks": [],
    }.items():
        assert [week.id for week in list_weeks(records, words)] == [week.id for week in found], words
    archive_week(records, six.id)
    assert [week.id for week in list_weeks(records)] == [seven.id]
    assert [week.id for week in list_weeks(records, archived=True)] == [six.id]
    assert afresh(records, six.id) == small_week()
    archive_week(records, six.id, archived=False)
    assert len(list_weeks(records)) == 2
    with pytest.raises(Missing):
        archive_week(records, "nonsense")


def test_a_reader_cannot_change_and_does_not_learn_the_week_s_own_id(records: Records) -> None:
    made = create_week(records, read(small_week()))
    opened = open_week(records, made.listed.read_id)
    assert not opened.may_change
    assert opened.history.week == small_week()
    assert open_week(records, made.listed.id).may_change
    with pytest.raises(Missing):
        save(records, made.listed.read_id, made.history.after(Remove("depot", "Quarry")), saved=0)
    with pytest.raises(Missing, match="no such week"):
        open_week(records, "nonsense")


def test_ids_cannot_be_guessed(records: Records) -> None:
    listed = [create_week(records, read(Week())).listed for _ in range(20)]
    ids = {week.id for week in listed} | {week.read_id for week in listed}
    assert len(ids) == 40
    assert all(len(one) >= 20 for one in ids)


def test_texts_that_nobody_could_read_are_kept_until_they_are_mended(records: Records) -> None:
    texts = (
        Unused("rates", {"rate": "?"}, RateKey("A", "B", None, 2)),
        Unused("depots", {"name": "Mill", "available": "12 (?)"}),
        Unused("customers", {"ordered": "x"}, "Aster"),
    )
    said = (Finding(Severity.CHECK, "which name", "Is it?", subject="Astre", options=("yes", "no"), rows=2),)
    style = NumberStyle(",", "t", "EUR")
    made = create_week(records, read(small_week(), unused=texts, lasting=said, style=style))
    opened = open_week(records, made.listed.id)
    assert opened.unused == texts
    assert opened.findings == said
    assert opened.decimal_mark == ","
    save_remarks(records, made.listed.id, texts[1:], ())
    opened = open_week(records, made.listed.id)
    assert opened.unused == texts[1:]
    assert opened.findings == ()


def test_answers_are_remembered_for_each_desk(records: Records) -> None:
    asked = Finding(Severity.CHECK, "unknown name", "Astre?", subject="Astre", options=("Aster", "none"))
    huge = Finding(Severity.CHECK, "huge", "That is a lot.", subject="Aster")
    mine = Answers().with_answer(asked, "Aster")
    save_answers(records, mine)
    hers = Answers().with_accepted(huge)
    save_answers(records, hers)
    save_answers(records, Answers().with_answer(asked, "none"), desk="south")
    both = load_answers(records)
    assert both.to("unknown name", "ASTRE") == "Aster"
    assert both.accepted == hers.accepted
    assert load_answers(records, "south").to("unknown name", "astre") == "none"
    save_answers(records, both.with_answer(asked, "none"), both)
    save_answers(records, Answers(), hers)
    assert load_answers(records) == Answers().with_answer(asked, "none")


def test_other_tools_can_read_the_rates(records: Records) -> None:
    made = create_week(records, read(small_week()))
    history = made.history.after(Alter("rate", RateKey("Quarry", "Birch"), "rate", D("3.5")))
    save(records, made.listed.id, history, saved=0)
    copied = copy_week(records, made.listed.id, "Week 7")
    query = text(
        "SELECT depot, customer, haulier, per, rate, rate_scale, at_most, at_most_scale "
        "FROM rates_as_uploaded WHERE week_id = :week ORDER BY row_id"
    )
    with records.read() as connection:
        first = connection.execute(query, {"week": made.listed.id}).all()
        second = connection.execute(query, {"week": copied.listed.id}).all()
    rates = [Decimal(row.rate).scaleb(-row.rate_scale) for row in first]
    assert rates == [row.rate for row in small_week().rates]
    assert [(row.depot, row.customer, row.haulier, row.per) for row in first] == [
        (row.depot, row.customer, row.haulier, row.per) for row in small_week().rates
    ]
    assert Decimal(first[1].at_most).scaleb(-first[1].at_most_scale) == 10
    assert first[0].at_most is None
    assert Decimal(second[3].rate).scaleb(-second[3].rate_scale) == D("3.5")


def test_history_of_a_week_without_changes_is_the_week(records: Records) -> None:
    made = create_week(records, read(small_week()))
    assert save(records, made.listed.id, made.history, saved=0).history is made.history
    assert open_week(records, made.listed.id).history.entries == History.of(small_week()).entries


def test_names_with_every_kind_of_character_come_back_from_large_weeks(records: Records) -> None:
    odd = [
        "tab\there",
        "line\nbreak",
        "back\\slash",
        "\\N",
        "quote'\"",
        "=1+1",
        "%s ? :x",
        "Ünïcode €",
        " ",
        "\r",
    ]
    names = [f"{odd[n % len(odd)]} {n}" for n in range(120)]
    week = Week.of(
        tuple(Depot(name, D(n)) for n, name in enumerate(names)),
        tuple(Customer(name, (Order(D(n), name, name),), one_depot=name) for n, name in enumerate(names)),
        tuple(RateRow(name, name, D(n), haulier=name) for n, name in enumerate(names)),
    )
    assert afresh(records, create_week(records, read(week)).listed.id) == week
