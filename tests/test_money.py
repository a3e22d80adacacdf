"""Minor units of currencies and rounding."""

import json
from decimal import Decimal
from fractions import Fraction
from math import floor
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.money import is_known, minor_places, per_unit, round_half_up

PUBLISHED = json.loads((Path(__file__).parent / "published" / "minor_units.json").read_text())


@pytest.mark.parametrize(("code", "places"), sorted(PUBLISHED["places"].items()))
def test_minor_places_are_those_of_iso_4217(code: str, places: int) -> None:
    assert minor_places(code) == places
    assert is_known(code)


def test_a_code_may_be_typed_in_any_way() -> None:
    assert minor_places(" jpy ") == 0
    assert minor_places("Kwd") == 3


def test_an_unknown_code_counts_as_hundredths_and_says_that_it_is_a_guess() -> None:
    assert minor_places("QQQ") == 2
    assert not is_known("QQQ")


@pytest.mark.parametrize(
    ("exact", "places", "rounded"),
    [
        ("2.345", 2, "2.35"),
        ("2.3449999999999999999999999999999999", 2, "2.34"),
        ("2.5", 0, "3"),
        ("3.5", 0, "4"),  # halves to even would also say 4; 2.5 above would not
        ("-2.345", 2, "-2.35"),
        ("0.0005", 3, "0.001"),
        ("1E+3", 2, "1000.00"),
        ("-0.004", 2, "0"),
        ("123456789012345678901234567890.125", 2, "123456789012345678901234567890.13"),
    ],
)
def test_halves_go_away_from_zero(exact: str, places: int, rounded: str) -> None:
    assert round_half_up(Decimal(exact), places) == Decimal(rounded)


@given(st.decimals(allow_nan=False, allow_infinity=False, places=7), st.integers(0, 5))
def test_rounding_agrees_with_fractions(exact: Decimal, places: int) -> None:
    scaled = abs(Fraction(exact)) * 10**places
    expected = floor(scaled + Fraction(1, 2)) * (1 if exact >= 0 else -1)
    assert Fraction(round_half_up(exact, places)) == Fraction(expected, 10**places)


def test_what_is_no_number_is_refused() -> None:
    with pytest.raises(ValueError, match="no amount of money"):
        round_half_up(Decimal("NaN"), 2)


@given(
    st.decimals(-(10**9), 10**9, places=2),
    st.decimals("0.01", 10**6, places=2),
    st.integers(0, 6),
)
def test_money_by_unit_is_rounded_once_and_not_twice(money: Decimal, quantity: Decimal, places: int) -> None:
    found = per_unit(money, quantity, places)
    assert found is not None
    exact = Fraction(money) / Fraction(quantity)
    assert abs(Fraction(found)) == Fraction(floor(abs(exact) * 10**places + Fraction(1, 2)), 10**places)
    assert found * money >= 0
    assert per_unit(money, Decimal(0), places) is None
