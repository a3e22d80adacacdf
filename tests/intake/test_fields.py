"""One cell of one column: what it means, and the text that means it again."""

from datetime import date, datetime
from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.columns import CUSTOMER_COLUMNS, DEPOT_COLUMNS, RATE_COLUMNS, Kind
from engine.findings import Severity
from engine.intake.fields import read_field, show_field
from engine.intake.numbers import NumberStyle

STYLE = NumberStyle()
COLUMNS = {c.field: c for c in (*DEPOT_COLUMNS, *CUSTOMER_COLUMNS, *RATE_COLUMNS)}

READ = [
    ("available", "120,000", Decimal(120000)),
    ("closed", "yes", True),
    ("closed", "closed", True),
    ("closed", "", False),
    ("closed", "no", False),
    ("may_decline", "TRUE", True),
    ("may_decline", True, True),
    ("priority", "b", "B"),
    ("one_depot", "Yes", "yes"),
    ("one_depot", "Northgate", "Northgate"),
    ("one_depot", "no", None),
    ("per", "", "unit"),
    ("per", "per load", "load"),
    ("per", "t", "unit"),
    ("valid_from", "2026-03-31", date(2026, 3, 31)),
    ("valid_from", "31.3.2026", date(2026, 3, 31)),
    ("valid_from", datetime(2026, 3, 31, 5), date(2026, 3, 31)),
    ("valid_from", "31 Mar 2026", date(2026, 3, 31)),
    ("latitude", "57.123", Decimal("57.123")),
    ("latitude", "57,123", Decimal("57.123")),
    ("longitude", -170, Decimal(-170)),
    ("name", 12.0, "12"),
    ("name", " Nor\u200bth  gate ", "North gate"),
    ("number", 1001.0, "1001"),
    ("day", datetime(2026, 3, 31), "2026-03-31"),
    ("surcharge", "4.5 %", Decimal("4.5")),
    ("charge_if_unsent", "-3", Decimal(-3)),
]


@pytest.mark.parametrize(("field", "raw", "value"), READ)
def test_read(field, raw, value):
    assert read_field(COLUMNS[field], raw, STYLE) == (value, None)


REFUSED = [
    ("available", "-3", "negative"),
    ("available", "-", "not a number"),
    ("at_most", -28.0, "negative"),
    ("closed", "maybe", "not yes or no"),
    ("priority", "D", "not a priority"),
    ("per", "kg", "other unit"),
    ("per", "dozen", "not a basis"),
    ("valid_from", "03/04/2026", "not a date"),
    ("valid_from", 46000.0, "not a date"),
    ("latitude", 91.0, "out of range"),
    ("longitude", "181", "out of range"),
    ("loads_a_day", "2.5", "not whole"),
    ("name", "x" * 201, "long name"),
    ("surcharge", "-100", "percent"),
]


@pytest.mark.parametrize(("field", "raw", "rule"), REFUSED)
def test_refused(field, raw, rule):
    _, finding = read_field(COLUMNS[field], raw, STYLE)
    assert finding.rule == rule
    assert finding.severity is Severity.STOPS


def test_asked():
    assert read_field(COLUMNS["at_most"], "-", STYLE)[1].rule == "read as blank"
    value, finding = read_field(COLUMNS["surcharge"], 0.12, STYLE)
    assert (value, finding.rule, finding.severity) == (Decimal("0.12"), "small percent", Severity.CHECK)


decimals = st.decimals(min_value=0, max_value=89, places=6, allow_nan=False).filter(
    lambda d: d == 0 or d >= 1
)
names = (
    st.text(min_size=1, max_size=30)
    .map(lambda text: read_field(COLUMNS["name"], text, STYLE)[0])
    .filter(bool)
)
values = {
    Kind.NAME: names,
    Kind.TEXT: names,
    Kind.YES: st.booleans(),
    Kind.PRIORITY: st.sampled_from([None, "A", "B", "C"]),
    Kind.ONE_DEPOT: st.sampled_from([None, "yes", "Northgate"]),
    Kind.BASIS: st.sampled_from(["unit", "load"]),
    Kind.DATE: st.none() | st.dates(min_value=date(1000, 1, 1)),
    Kind.COUNT: st.none() | st.integers(0, 99).map(Decimal),
}


@settings(max_examples=300, deadline=None)
@given(st.data(), st.sampled_from(list(COLUMNS.values())), st.sampled_from(".,"))
def test_shown_text_reads_back(data, column, mark):
    value = data.draw(values.get(column.kind, st.none() | decimals))
    style = NumberStyle(mark)
    assert read_field(column, show_field(column, value, style), style) == (value, None)
