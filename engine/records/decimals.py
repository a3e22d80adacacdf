"""Frozen figures as rows and back: a decimal is an integer column and a column with its scale."""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import fields
from decimal import Decimal
from functools import cache
from typing import Any, get_args, get_type_hints

from engine.exact import LARGEST, MOST_PLACES, TooLarge, canonical, places_needed, to_decimal, to_integer

Row = dict[str, Any]


def as_row(values: Mapping[str, Any], decimals: Iterable[str]) -> Row:
    """The row for these values; those named in `decimals` become an integer and its scale.

    Raises:
        TooLarge: a decimal whose digits the integer column cannot hold.
    """
    row: Row = dict(values)
    for name in decimals:
        row[name], row[f"{name}_scale"] = _split(name, values[name])
    return row


def from_row(row: Mapping[Any, Any], names: Iterable[str], decimals: Sequence[str]) -> dict[str, Any]:
    """The values of these names in a row, decimals put together again."""
    return {name: decimal_in(row, name) if name in decimals else row[name] for name in names}


def decimal_in(row: Mapping[Any, Any], name: str) -> Decimal | None:
    """The decimal that a row holds under a name, None where it is blank."""
    return None if row[name] is None else to_decimal(row[name], row[f"{name}_scale"])


def row_of(record: Any, without: Iterable[str] = ()) -> Row:
    """The row for a frozen value, all fields but some."""
    left_out = set(without)
    kind: Any = type(record)
    values = {name: getattr(record, name) for name in field_names(kind) if name not in left_out}
    return as_row(values, [name for name in decimal_fields(kind) if name not in left_out])


def columns_of(kind: Any, without: Sequence[str] = ()) -> list[str]:
    """The columns that the fields of a kind of value fill, all but some, in the order of `cells_of`."""
    decimals = decimal_fields(kind)
    found = []
    for name in field_names(kind):
        if name not in without:
            found += [name, f"{name}_scale"] if name in decimals else [name]
    return found


def cells_of(kind: Any, records: Iterable[Any], without: Sequence[str] = ()) -> Iterator[list[Any]]:
    """The cells of `columns_of` for many values of one kind; quicker than a `row_of` each.

    Raises:
        TooLarge: a decimal whose digits the integer column cannot hold.
    """
    decimals = decimal_fields(kind)
    plan = [(name, name in decimals) for name in field_names(kind) if name not in without]
    for record in records:
        cells: list[Any] = []
        for name, is_decimal in plan:
            value = getattr(record, name)
            if not is_decimal:
                cells.append(value)
            elif value is None:
                cells += (None, None)
            else:
                cells += _split(name, value)
        yield cells


def values_in(row: Mapping[Any, Any], kind: type, without: Iterable[str] = ()) -> dict[str, Any]:
    """The fields of a kind of value that a row holds, all but some."""
    left_out = set(without)
    names = [name for name in field_names(kind) if name not in left_out]
    return from_row(row, names, decimal_fields(kind))


@cache
def field_names(kind: Any) -> tuple[str, ...]:
    """The fields of a kind of frozen value."""
    return tuple(field.name for field in fields(kind))


@cache
def decimal_fields(kind: Any) -> tuple[str, ...]:
    """Those of its fields that are decimals, blank or not."""
    hints = get_type_hints(kind)
    return tuple(
        name for name in field_names(kind) if hints[name] is Decimal or Decimal in get_args(hints[name])
    )


def _split(name: str, decimal: Decimal | None) -> tuple[int | None, int | None]:
    if decimal is None:
        return None, None
    if decimal.as_tuple().exponent == 0 and -LARGEST <= decimal <= LARGEST:  # a whole number, as most are
        return int(decimal), 0
    scale = places_needed(decimal)
    if scale > MOST_PLACES:
        raise TooLarge(
            f"{canonical(decimal)} ({name.replace('_', ' ')}) has more than {MOST_PLACES} decimal "
            f"places, which cannot be kept exactly: round it where it comes from."
        )
    return to_integer(decimal, scale), scale
