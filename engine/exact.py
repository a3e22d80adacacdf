"""Decimals to integers and back: the only door between what people type and what is computed with.

Quantities and rates become int64 integers once, at a common number of decimal places, and return
to decimals once. Nothing is ever rounded here: a value that does not fit is refused.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from decimal import Context, Decimal, Inexact, InvalidOperation, Overflow
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

Integers = NDArray[np.int64]

BLANK = int(np.iinfo(np.int64).min)
"""Stands for an empty cell in a column of integers."""

LARGEST = int(np.iinfo(np.int64).max)
"""The largest integer a column can hold; -LARGEST is the smallest, since BLANK is taken."""

MOST_PLACES = 18
"""More decimal places than this cannot be told apart from noise, and leave no digit before the point."""

_CONTEXT = Context(prec=80, traps=[Inexact, InvalidOperation, Overflow])
_LOW = (1 << 32) - 1


class TooLarge(ValueError):
    """A number, or a result that it leads to, does not fit the exact integers computed with."""


def places_needed(decimal: Decimal) -> int:
    """How many decimal places `decimal` needs, trailing zeros not counted (1.50 needs 1, 200 needs 0)."""
    _, digits, exponent = decimal.as_tuple()
    if not isinstance(exponent, int):
        raise ValueError(_not_a_number(decimal))
    if exponent >= 0:
        return 0
    for digit in reversed(digits):
        if digit != 0:
            return max(0, -exponent)
        exponent += 1
    return 0


def to_integer(decimal: Decimal, places: int) -> int:
    """`decimal` times ten to the power `places`, exactly; 12.5 at 2 places is 1250.

    Raises ValueError if that is not a whole number or not a number, TooLarge if int64 cannot hold it.
    """
    if not decimal.is_finite():
        raise ValueError(_not_a_number(decimal))
    if decimal and decimal.adjusted() + places > 19:
        raise TooLarge(_too_large(decimal, places))
    needed = places_needed(decimal)
    if needed > places:
        raise ValueError(
            f"{canonical(decimal)} has {needed} decimal places, only {places} are kept here: "
            f"give it with at most {places} places, or let the whole column keep {needed}."
        )
    integer = (
        int(_CONTEXT.scaleb(decimal, places))
        if needed or decimal.as_tuple().exponent
        else (int(decimal) * 10**places)
    )
    if abs(integer) > LARGEST:
        raise TooLarge(_too_large(decimal, places))
    return integer


def to_decimal(integer: int, places: int) -> Decimal:
    """The decimal that `integer` stands for at `places` decimal places; 1250 at 2 places is 12.5."""
    integer = int(integer)
    while places > 0 and integer % 10 == 0:
        integer //= 10
        places -= 1
    return _CONTEXT.scaleb(Decimal(integer), -places) if places else Decimal(integer)


def canonical(decimal: Decimal) -> str:
    """`decimal` as text with no exponent, no trailing zeros, no plus sign, and "0" for zero."""
    if not decimal.is_finite():
        raise ValueError(_not_a_number(decimal))
    text = format(decimal, "f")
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text


def total_of(decimals: Iterable[Decimal]) -> Decimal:
    """The exact sum of some decimals; the usual decimal context would round it silently."""
    summed = Decimal(0)
    for decimal in decimals:
        summed = _CONTEXT.add(summed, decimal)
    return summed


def total(values: NDArray[Any]) -> int:
    """The sum of an int64 array as a Python int: high and low words apart, so that nothing wraps.

    Safe for up to 2**31 values.
    """
    return (int((values >> 32).sum(dtype=np.int64)) << 32) + int((values & _LOW).sum(dtype=np.int64))


class DecimalColumn(NamedTuple):
    """Many decimals at one number of places, as int64; an empty cell is BLANK.

    values: int64, one per row: the decimal times ten to the power `places`, or BLANK
    places: decimal places of the whole column
    """

    values: Integers
    places: int

    @classmethod
    def of(cls, decimals: Iterable[Decimal | None], places: int | None = None) -> DecimalColumn:
        """A column of `decimals`, None for empty cells, at `places` or at the fewest that keep all digits.

        Raises ValueError for NaN, infinity or digits beyond `places`; TooLarge if int64 cannot hold one.
        """
        cells = list(decimals)
        needed = _places_of_all(cells)
        if places is None:
            places = needed
        elif needed > places:
            worst = max((cell for cell in cells if cell is not None), key=places_needed)
            to_integer(worst, places)
        if places > MOST_PLACES:
            worst = max((cell for cell in cells if cell is not None), key=places_needed)
            raise TooLarge(
                f"{worst} has more than {MOST_PLACES} decimal places, which cannot be kept exactly: "
                f"round it where it comes from."
            )
        try:
            integers = [BLANK if cell is None else int(_CONTEXT.scaleb(cell, places)) for cell in cells]
            values = np.array(integers, dtype=np.int64)
        except (OverflowError, Inexact, InvalidOperation, Overflow):
            for cell in cells:
                if cell is not None:
                    to_integer(cell, places)
            raise
        if len(values) and np.count_nonzero(values == BLANK) != sum(cell is None for cell in cells):
            raise TooLarge(_too_large(to_decimal(BLANK, places), places))
        return cls(values, places)

    @classmethod
    def blank(cls, rows: int) -> DecimalColumn:
        """A column of `rows` empty cells."""
        return cls(np.full(rows, BLANK, dtype=np.int64), 0)

    def taken(self, rows: Integers) -> DecimalColumn:
        """The column's cells at these positions, in that order."""
        return DecimalColumn(self.values[rows], self.places)

    def joined(self, other: DecimalColumn) -> DecimalColumn:
        """This column with another below it, at the larger number of places."""
        places = max(self.places, other.places)
        return DecimalColumn(np.concatenate([self.rescaled(places), other.rescaled(places)]), places)

    def get(self, row: int) -> Decimal | None:
        """The decimal in `row`, None for an empty cell."""
        integer = int(self.values[row])
        return None if integer == BLANK else to_decimal(integer, self.places)

    def decimals(self) -> list[Decimal | None]:
        """All rows as decimals, None for empty cells."""
        return [None if v == BLANK else to_decimal(v, self.places) for v in self.values.tolist()]

    def rescaled(self, places: int) -> Integers:
        """The column's integers at another number of `places`; empty cells stay BLANK.

        Raises TooLarge if an integer would not fit, ValueError if digits would be lost.
        """
        blank = self.values == BLANK
        if places >= self.places:
            factor = 10 ** (places - self.places)
            known = np.where(blank, 0, self.values)
            worst = int(np.abs(known).max(initial=0))
            if worst * factor > LARGEST:
                row = int(np.abs(known).argmax())
                raise TooLarge(_too_large(to_decimal(int(known[row]), self.places), places))
            return np.where(blank, BLANK, known * np.int64(factor))
        factor = 10 ** (self.places - places)
        lost = (self.values % factor != 0) & ~blank
        if lost.any():
            to_integer(to_decimal(int(self.values[lost.argmax()]), self.places), places)
        return np.where(blank, BLANK, self.values // np.int64(factor))


def _places_of_all(cells: Sequence[Decimal | None]) -> int:
    """The fewest places that keep every digit of every cell."""
    places = 0
    for cell in cells:
        if cell is None:
            continue
        exponent = cell.as_tuple().exponent
        if not isinstance(exponent, int):
            raise ValueError(_not_a_number(cell))
        if -exponent > places:
            places = max(places, places_needed(cell))
    return places


def _not_a_number(decimal: Decimal) -> str:
    return f"{decimal} is not a number that can be computed with: type an ordinary number."


def _too_large(decimal: Decimal, places: int) -> str:
    kept = f"with {places} decimal places kept, " if places else ""
    return (
        f"{decimal} is too large: {kept}numbers up to {canonical(to_decimal(LARGEST, places))} "
        f"can be computed with exactly. Use a larger unit or fewer decimal places."
    )
