"""The reader of numbers: what people type, and what it must never be taken for."""

from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.exact import canonical
from engine.findings import Severity
from engine.intake.numbers import (
    ErrorCell,
    FormulaCell,
    NumberStyle,
    PercentCell,
    both_readings,
    mark_told_by,
    read_number,
)

POINT, COMMA = NumberStyle("."), NumberStyle(",")

UNDERSTOOD = [
    ("120 t", POINT, "quantity", "120"),
    ("120 tonnes", POINT, "quantity", "120"),
    ("(45)", POINT, "quantity", "-45"),
    ("-45", POINT, "money", "-45"),
    ("45-", POINT, "money", "-45"),
    ("− 45", POINT, "money", "-45"),
    ("(€45.50)", POINT, "money", "-45.5"),
    ("€ 1,234.50", POINT, "money", "1234.5"),
    ("1.234,50 €", COMMA, "money", "1234.5"),
    ("EUR 12/t", POINT, "money", "12"),
    ("12.5 EUR per t", POINT, "money", "12.5"),
    ("1 234", POINT, "quantity", "1234"),
    ("1\u00a0234,5", COMMA, "quantity", "1234.5"),
    ("1\u202f234\u202f567", COMMA, "quantity", "1234567"),
    ("1'234.5", POINT, "quantity", "1234.5"),
    ("1’234’567", COMMA, "quantity", "1234567"),
    ("12,34,567.5", POINT, "money", "1234567.5"),
    ("1,234", POINT, "quantity", "1234"),
    ("1,234", COMMA, "quantity", "1.234"),
    ("12%", POINT, "percent", "12"),
    (".5", POINT, "quantity", "0.5"),
    ("+5", POINT, "quantity", "5"),
    ("'007", POINT, "quantity", "7"),
    ("٣٤", POINT, "quantity", "34"),
    (120.0, POINT, "quantity", "120"),
    (0.1, POINT, "quantity", "0.1"),
    (7, POINT, "quantity", "7"),
    (PercentCell(0.125), POINT, "percent", "12.5"),
    ("120 km", POINT, "distance", "120"),
]


@pytest.mark.parametrize(("raw", "style", "expected", "number"), UNDERSTOOD)
def test_understood(raw, style, expected, number):
    value, finding = read_number(raw, style, expected)
    assert finding is None
    assert canonical(value) == number


REFUSED = [
    ("forty", POINT, "quantity", "not a number"),
    ("12 or 13", POINT, "quantity", "not a number"),
    ("25 - 30", POINT, "quantity", "not a number"),
    ("2 x 25", POINT, "quantity", "not a number"),
    ("12..5", POINT, "quantity", "not a number"),
    ("1,23,4", POINT, "quantity", "not a number"),
    ("--5", POINT, "quantity", "not a number"),
    ("(45", POINT, "quantity", "not a number"),
    ("2026-12-01", POINT, "quantity", "date for number"),
    ("1/2", POINT, "quantity", "not a number"),
    ("08:30", POINT, "quantity", "date for number"),
    ("1.5E+06", POINT, "quantity", "shortened number"),
    ("1,5", POINT, "quantity", "decimal mark"),
    ("1.5", COMMA, "quantity", "decimal mark"),
    ("0.1234567890123456789", POINT, "quantity", "too many digits"),
    ("1" * 25, POINT, "quantity", "too many digits"),
    ("NaN", POINT, "quantity", "not a number"),
    ("inf", POINT, "quantity", "not a number"),
    (float("nan"), POINT, "quantity", "not a number"),
    (float("inf"), POINT, "quantity", "not a number"),
    (True, POINT, "quantity", "not a number"),
    (1e30, POINT, "quantity", "too many digits"),
    ("5 tons", POINT, "quantity", "unclear unit"),
    ("5 pallets", POINT, "quantity", "weight per pallet"),
    ("$5", POINT, "money", "other currency"),
    ("€5", POINT, "quantity", "money for number"),
    ("12%", POINT, "quantity", "not a number"),
    (PercentCell(0.125), POINT, "quantity", "percent for number"),
    (ErrorCell("#N/A"), POINT, "quantity", "error cell"),
    (FormulaCell("=A1*2"), POINT, "quantity", "formula without value"),
]


@pytest.mark.parametrize(("raw", "style", "expected", "rule"), REFUSED)
def test_refused(raw, style, expected, rule):
    value, finding = read_number(raw, style, expected)
    assert value is None
    assert finding.severity is Severity.STOPS
    assert finding.rule == rule
    assert finding.message.endswith(".")
    assert finding.mend


def test_blank_is_nothing():
    for raw in (None, "", "  ", "\u00a0"):
        assert read_number(raw, POINT) == (None, None)


def test_other_units_are_converted_exactly_and_said():
    value, finding = read_number("500 kg", POINT, "quantity")
    assert value == Decimal("0.5")
    assert finding.severity is Severity.NOTE
    # 1 lb = 0.45359237 kg exactly (international yard and pound agreement, 1959)
    assert read_number("1000 lb", NumberStyle(unit="kg"), "quantity")[0] == Decimal("453.59237")
    assert read_number("0.02 EUR/kg", POINT, "money")[0] == Decimal(20)


def test_arithmetic_noise_of_a_sheet_is_read_as_shown_and_said():
    value, finding = read_number(0.1 + 0.2, POINT, "quantity")
    assert value == Decimal("0.3")
    assert finding.severity is Severity.NOTE


def test_what_one_cell_tells_of_the_mark():
    told = {
        "1.234": "?",
        "1,234": "?",
        "1.5": ".",
        "1,5": ",",
        "0.123": ".",
        "1,234.5": ".",
        "1.234.567": ",",
        "12": "",
        "1 234": "",
        "abc": "",
        "12.50": ".",
        "1234.567": ".",
    }
    assert {text: mark_told_by(text) for text in told} == told
    assert both_readings("1.234") == ("1.234", "1234")


numbers = st.decimals(
    min_value=Decimal(-(10**9)), max_value=Decimal(10**9), allow_nan=False, allow_infinity=False, places=4
)


def typed(number, mark, group, wrap):
    whole, _, fraction = canonical(abs(number)).partition(".")
    if group:
        whole = f"{int(whole):,}".replace(",", group)
    text = whole + (mark + fraction if fraction else "")
    return f"({text})" if wrap and number < 0 else ("-" if number < 0 else "") + text


@settings(max_examples=200, deadline=None)
@given(
    numbers,
    st.sampled_from(
        [(".", ","), (".", "'"), (",", "."), (",", " "), (",", "\u00a0"), (".", ""), (",", "\u202f")]
    ),
    st.booleans(),
    st.sampled_from(["", " t", " tonnes"]),
)
def test_what_is_typed_is_read(number, marks, wrap, unit):
    mark, group = marks
    text = typed(number, mark, group, wrap) + unit
    value, finding = read_number(text, NumberStyle(mark), "quantity")
    assert finding is None
    assert value == number


@settings(max_examples=200, deadline=None)
@given(st.floats(allow_nan=False, allow_infinity=False, min_value=-1e14, max_value=1e14))
def test_a_workbook_number_is_the_shortest_decimal_up_to_fifteen_digits(number):
    value, _ = read_number(number, POINT)
    exact = Decimal(repr(number))
    assert value == (exact if len(exact.as_tuple().digits) <= 15 else Decimal(f"{exact:.15g}"))
