"""Changes as text: everything comes back exactly, and what is not understood is refused in words."""

from datetime import date
from decimal import Decimal
from typing import get_args

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together
from engine.figures import Customer, Depot, Gone, Order, RateKey, RateRow
from engine.records.encode import KINDS, NotUnderstood, change_as_text, change_from_text

texts = st.text(max_size=12)
decimals = st.decimals(allow_nan=False, allow_infinity=False, min_value=-(10**20), max_value=10**20)
blank = st.none()
days = st.dates()
keys = st.builds(RateKey, texts, texts, texts | blank, st.integers(1, 9))
orders = st.builds(Order, decimals, texts | blank, texts | blank)
records = st.one_of(
    st.builds(Depot, texts, decimals, decimals | blank, decimals | blank),
    st.builds(
        Customer,
        texts,
        st.lists(orders, max_size=3).map(tuple),
        decimals | blank,
        st.sampled_from(["A", "B", "C", None]),
        texts | blank,
        st.booleans(),
    ),
    st.builds(
        RateRow,
        texts,
        texts,
        decimals,
        st.sampled_from(["unit", "load"]),
        texts | blank,
        closed=st.booleans(),
        valid_from=days | blank,
        km=decimals | blank,
    ),
    st.builds(Gone, texts, texts, texts, decimals, decimals, texts | blank, days | blank),
)
values = st.one_of(blank, st.booleans(), texts, decimals, days, st.lists(orders, max_size=3).map(tuple))
whats = st.sampled_from(["depot", "customer", "rate", "rule", "gone"])
single = st.one_of(
    st.builds(Add, records, st.integers(0, 10**9) | blank),
    st.builds(Remove, whats, texts | keys),
    st.builds(Alter, whats, texts | keys, texts, values),
    st.builds(SetHold, keys, decimals, texts),
    st.builds(Lift, keys),
)
changes: st.SearchStrategy[Change] = st.recursive(
    single, lambda inner: st.builds(Together, st.lists(inner, max_size=4).map(tuple), texts), max_leaves=8
)


@settings(max_examples=500, deadline=None)
@given(changes)
def test_a_change_comes_back_as_it_was(change: Change) -> None:
    text = change_as_text(change)
    again = change_from_text(text)
    assert again == change
    assert change_as_text(again) == text
    assert text.isascii()
    assert "\n" not in text


def test_every_kind_of_change_can_be_stored() -> None:
    assert set(KINDS.values()) == set(get_args(Change))


def test_decimals_are_exact_text_and_dates_are_iso() -> None:
    key = RateKey("North", "Aster")
    text = change_as_text(SetHold(key, Decimal("0.1000000000000000000000001"), "so"))
    assert '"decimal":"0.1000000000000000000000001"' in text
    assert '"date":"2031-02-03"' in change_as_text(Alter("rate", key, "valid_from", date(2031, 2, 3)))
    assert '"decimal":"1500"' in change_as_text(Alter("depot", "North", "available", Decimal("1.5E+3")))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("nonsense", "damaged.*not JSON"),
        ("[]", "has no kind"),
        ('{"kind":"teleport"}', "'teleport', which this version of Hithe does not know"),
        ('{"kind":"lift"}', "a lift with no 'key'"),
        ('{"kind":"lift","key":{"rate_key":["a","b"]},"speed":1}', "'speed', which a lift does not have"),
        ('{"kind":"lift","key":{"rate_key":["a"]}}', "is no rate_key"),
        ('{"kind":"alter","what":"depot","key":"a","field":"b","value":{"decimal":"x"}}', "is no decimal"),
        (
            '{"kind":"alter","what":"depot","key":"a","field":"b","value":{"moon":1}}',
            "'moon', which this version",
        ),
        ('{"kind":"alter","what":"depot","key":"a","field":"b","value":1.5}', "is no value"),
        ('{"kind":"add","record":{"depot":[]}}', "is no depot"),
    ],
)
def test_what_is_not_understood_is_refused_in_words(text: str, words: str) -> None:
    with pytest.raises(NotUnderstood, match=words):
        change_from_text(text)


@pytest.mark.parametrize("value", [1.5, object(), Decimal("NaN"), {"a": 1}])
def test_what_cannot_be_stored_is_refused(value: object) -> None:
    with pytest.raises(NotUnderstood):
        change_as_text(Alter("depot", "North", "available", value))
