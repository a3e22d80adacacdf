"""Decimals to integers and back: exact or refused, never rounded."""

from __future__ import annotations

from decimal import Decimal

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.exact import (
    BLANK,
    LARGEST,
    DecimalColumn,
    TooLarge,
    canonical,
    places_needed,
    to_decimal,
    to_integer,
    total,
)

decimals = st.decimals(allow_nan=False, allow_infinity=False, places=6, min_value=-(10**9), max_value=10**9)


@pytest.mark.parametrize(
    ("text", "written"),
    [("1.50", "1.5"), ("-0.00", "0"), ("1E+3", "1000"), ("+7", "7"), ("0E-9", "0"), ("1E-7", "0.0000001")],
)
def test_canonical_text(text: str, written: str) -> None:
    assert canonical(Decimal(text)) == written


@given(decimals)
def test_there_and_back(decimal: Decimal) -> None:
    assert to_decimal(to_integer(decimal, 6), 6) == decimal
    needed = places_needed(decimal)
    assert to_decimal(to_integer(decimal, needed), needed) == decimal
    assert Decimal(canonical(decimal)) == decimal
    if needed:
        with pytest.raises(ValueError, match="decimal places"):
            to_integer(decimal, needed - 1)


@given(st.lists(st.none() | decimals, max_size=20))
def test_a_column_keeps_every_digit_and_every_blank(cells: list[Decimal | None]) -> None:
    column = DecimalColumn.of(cells)
    assert column.decimals() == cells
    assert [column.get(row) for row in range(len(cells))] == cells
    wider = DecimalColumn(column.rescaled(column.places + 2), column.places + 2)
    assert wider.decimals() == cells
    assert wider.rescaled(column.places).tolist() == column.values.tolist()


def test_what_does_not_fit_is_refused_with_a_sentence() -> None:
    for text in ("NaN", "Infinity", "-Infinity"):
        with pytest.raises(ValueError, match="not a number"):
            to_integer(Decimal(text), 2)
        with pytest.raises(ValueError, match="not a number"):
            DecimalColumn.of([Decimal(text)])
    for text in ("1E+30", "1E+999999", "92233720368547758.08"):
        with pytest.raises(TooLarge, match="too large"):
            to_integer(Decimal(text), 2)
        with pytest.raises(TooLarge, match="too large"):
            DecimalColumn.of([Decimal(text)], places=2)
    with pytest.raises(TooLarge, match="too large"):
        DecimalColumn.of([Decimal(LARGEST)]).rescaled(1)
    with pytest.raises(ValueError, match="only 1 are kept"):
        DecimalColumn.of([Decimal("1.25")]).rescaled(1)
    with pytest.raises(TooLarge):
        DecimalColumn.of([Decimal(BLANK)])


def test_a_total_does_not_wrap() -> None:
    assert total(np.full(5, LARGEST)) == 5 * LARGEST
    assert total(np.array([BLANK, -1])) == BLANK - 1
