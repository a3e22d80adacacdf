"""A random week, written in a random layout, format and locale, reads back as the same week."""

from hypothesis import HealthCheck, event, given, settings

from engine.findings import Severity
from engine.intake.reading import read_week
from tests.intake.layouts import written


@settings(
    max_examples=80, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large]
)
@given(written())
def test_the_same_week_comes_back(case):
    week, sources, mark = case
    reading = read_week(sources, decimal_mark=mark)
    event(sources[0][0].rpartition(".")[2])
    assert [f for f in reading.findings if f.severity is Severity.STOPS] == []
    assert list(reading.week.depots.values()) == list(week.depots.values())
    assert list(reading.week.customers.values()) == list(week.customers.values())
    assert sorted(map(repr, reading.week.rates)) == sorted(map(repr, week.rates))
    assert reading.week.rules == week.rules
    assert reading.rows_read == reading.rows_used + reading.rows_named
