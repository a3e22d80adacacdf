"""The changes a desk can make to a week, as frozen values; `engine.week` says what each does."""

from dataclasses import dataclass
from typing import Any, Literal

from engine.figures import Customer, Depot, Gone, Haulier, RateKey, RateRow

What = Literal["depot", "customer", "rate", "rule", "gone", "haulier"]
Key = str | RateKey


@dataclass(frozen=True, slots=True)
class Add:
    """Put in a depot, a customer, a rate row, a haulier, or a quantity that has gone.

    `place` is the position among its like, or the id of a rate row that was taken
    out before and comes back; None puts it last.
    """

    record: Depot | Customer | RateRow | Haulier | Gone
    place: int | None = None


@dataclass(frozen=True, slots=True)
class Remove:
    """Take out a depot, a customer, a rate row, a haulier, or a quantity that was said to have gone."""

    what: What
    key: Key


@dataclass(frozen=True, slots=True)
class Alter:
    """Give one field another value; for a rule, `key` is the empty string.

    The field `name` of a depot or customer renames it everywhere. What has gone is altered whole: take it
    out and put it in again. The lane and haulier of a rate row
    are what names it: to alter those, remove the row and add another; likewise the name of a haulier.
    """

    what: What
    key: Key
    field: str
    value: Any


@dataclass(frozen=True, slots=True)
class SetHold:
    """Fix the quantity on a rate row, with a reason; an earlier hold on it is replaced."""

    key: RateKey
    quantity: Any
    reason: str = ""


@dataclass(frozen=True, slots=True)
class Lift:
    """Take a hold away."""

    key: RateKey


@dataclass(frozen=True, slots=True)
class Together:
    """Several changes that are one act: a paste, or the undoing of one."""

    changes: tuple["Change", ...]
    note: str = ""


Change = Add | Remove | Alter | SetHold | Lift | Together
