"""What is typed in a grid and cannot be read outlives every fresh start of the grid."""

from decimal import Decimal

from hypothesis import given, settings
from hypothesis import strategies as some

from app.drafts import Draft, edit, renamed, start, unread_in
from engine.changes import Change, Together
from engine.figures import Customer, Depot, Order, RateRow
from engine.intake.frames import GRID_COLUMNS, TABLES, style_of
from engine.rates import Rates
from engine.week import Refused, Week

DEPOTS = [Depot("Northgate", Decimal(120)), Depot("Quarry", Decimal(80))]
CUSTOMERS = [Customer("Aster", (Order(Decimal(60)),)), Customer("Birch", (Order(Decimal(40)),))]
RATES = [
    RateRow("Northgate", "Aster", Decimal("12.5"), haulier="Ore"),
    RateRow("Northgate", "Aster", Decimal("12.5"), haulier="Ore"),
    RateRow("Quarry", "Birch", Decimal(11)),
]
WEEK = Week.of(DEPOTS, CUSTOMERS, Rates.of(RATES))
STYLE = style_of(WEEK)
JUNK = "ask Tom"


def begun(table: str, week: Week = WEEK) -> Draft:
    draft = Draft()
    start(draft, week, table, STYLE)
    return draft


def typed(draft: Draft, week: Week, table: str, row: int, heading: str, text: str) -> Week:
    return week.apply(Together(tuple(changed(draft, week, table, row, heading, text))))


def changed(draft: Draft, week: Week, table: str, row: int, heading: str, text: str) -> list[Change]:
    frame = draft.draft.copy()
    if row == len(frame):
        frame.loc[row] = [""] * len(frame.columns)
    frame.loc[row, heading] = text
    return edit(draft, frame, week, table, STYLE)


def afresh(draft: Draft, week: Week, table: str) -> None:
    draft.unread = unread_in(draft, week, table)
    assert start(draft, week, table, STYLE) == []


def test_text_in_an_existing_rate_row_stays_and_is_mended_in_place() -> None:
    draft = begun("rates")
    week = typed(draft, WEEK, "rates", 1, "Rate", JUNK)
    assert week is WEEK or week.rates.flat.rate.get(1) == Decimal("12.5")
    afresh(draft, week, "rates")
    assert draft.draft.loc[1, "Rate"] == JUNK
    assert draft.draft.loc[0, "Rate"] == "12.5"
    assert [problem.row for problem in draft.problems] == [1]
    week = typed(draft, week, "rates", 1, "Rate", "13")
    assert [row.rate for row in week.rates] == [Decimal("12.5"), Decimal(13), Decimal(11)]
    assert not draft.problems
    assert unread_in(draft, week, "rates") == ()


def test_a_name_that_was_cleared_and_typed_again_makes_no_second_row() -> None:
    for table, heading, name in (("rates", "Depot", "Quarry"), ("depots", "Depot", "Quarry")):
        row = 2 if table == "rates" else 1
        draft = begun(table)
        week = typed(draft, WEEK, table, row, heading, "")
        assert len(draft.problems) == 1
        afresh(draft, week, table)
        assert draft.draft.loc[row, heading] == ""
        assert len(draft.problems) == 1
        week = typed(draft, week, table, row, heading, name)
        assert week.depots == WEEK.depots
        assert list(week.rates) == list(WEEK.rates)
        week = typed(draft, WEEK, table, row, heading, "Mill")
        assert len(week.rates) == 3
        assert len(week.depots) == 2


def test_a_new_row_beside_one_of_the_same_lane_stays_whole() -> None:
    draft = begun("rates")
    week = WEEK
    for heading, text in (("Depot", "Quarry"), ("Customer", "Birch"), ("At most", "20"), ("Rate", JUNK)):
        week = typed(draft, week, "rates", 3, heading, text)
    afresh(draft, week, "rates")
    assert list(draft.draft.loc[3, ["Depot", "Customer", "Rate", "At most"]]) == [
        "Quarry",
        "Birch",
        JUNK,
        "20",
    ]
    week = typed(draft, week, "rates", 3, "Rate", "9,5")
    assert len(draft.problems) == 1  # a decimal comma on a desk that types points
    week = typed(draft, week, "rates", 3, "Rate", "9.5")
    assert len(week.rates) == 4
    assert list(week.rates)[3].at_most == 20


def test_a_rule_that_cannot_be_read_stays() -> None:
    draft = begun("rules")
    row = list(draft.draft["Rule"]).index("Load size")
    week = typed(draft, WEEK, "rules", row, "Value", "big")
    afresh(draft, week, "rules")
    assert draft.draft.loc[row, "Value"] == "big"
    assert len(draft.problems) == 1


def test_texts_of_a_row_that_has_gone_stay_in_a_row_of_their_own() -> None:
    draft = begun("depots")
    week = typed(draft, WEEK, "depots", 1, "Available", JUNK)
    afresh(draft, week.apply(Together(tuple(_without_quarry(week)))), "depots")
    assert list(draft.draft.iloc[-1][["Depot", "Available"]]) == ["Quarry", JUNK]


def _without_quarry(week: Week):  # type: ignore[no-untyped-def]
    from engine.changes import Remove

    return [Remove("depot", "Quarry")]


CELLS = some.tuples(
    some.sampled_from(TABLES[:3]),
    some.integers(0, 3),
    some.integers(0, 20),
    some.sampled_from([JUNK, "12,5 (?)", "7", "", "Mill", "120 t", "#REF!", "-3", "1.234.5"]),
)


@settings(deadline=None, max_examples=25)
@given(some.lists(some.one_of(CELLS, some.none()), max_size=6))
def test_whatever_is_typed_is_in_the_week_or_on_screen(steps: list[tuple[str, int, int, str] | None]) -> None:
    """Texts that stop stand on screen after every fresh start; what does not stop is in the week."""
    week = WEEK
    names = set(WEEK.depots), set(WEEK.customers)
    drafts = {table: begun(table) for table in TABLES[:3]}
    for step in steps:
        if step is None:
            for table, draft in drafts.items():
                before = _stopping(draft)
                afresh(draft, week, table)
                assert _stopping(draft) == before
            continue
        table, row, column, text = step
        draft = drafts[table]
        headings = [c.heading for c in GRID_COLUMNS[table]]
        heading = headings[column % len(headings)]
        row = min(row, len(draft.draft))
        before = len(week.rates)
        earlier = {other: unread_in(drafts[other], week, other) for other in drafts}
        changes = changed(draft, week, table, row, heading, text)
        try:
            week = week.apply(Together(tuple(changes)))
        except Refused:  # the page says so and starts all grids afresh
            for other in drafts:
                afresh(drafts[other], week, other)
            continue
        assert abs(len(week.rates) - before) <= (table == "rates")
        if (named := set(week.depots), set(week.customers)) != names:
            names = named
            for other in drafts:  # as the page does
                if other != table:
                    drafts[other].unread = renamed(earlier[other], changes)
                    assert start(drafts[other], week, other, STYLE) == []
    for table, draft in drafts.items():
        assert edit(draft, draft.draft, week, table, STYLE) == []


def _stopping(draft: Draft) -> list[str]:
    return sorted(
        str(draft.draft.loc[problem.row, problem.column]) for problem in draft.problems if problem.stops
    )
