"""What a change touches: whether two changes can stand side by side, or the later one undoes the earlier.

Two changes touch each other when both give a value to the same figure of the same record, or one takes
out, puts in or renames what the other names. Changes that do not touch each other can be made in either
order with the same result.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import NamedTuple

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together
from engine.figures import ANY_SINGLE_DEPOT, Customer, Depot, Gone, Haulier, RateKey, RateRow

Named = tuple[str, str]
"""'depot' or 'customer', and its name."""

Subject = tuple[str, str | tuple[str, str, str | None]]
"""What a figure belongs to: a depot, customer, haulier or gone quantity by name, a rate row by its lane."""

NEXT_ROW = 0
"""The number that a rate row which is yet to be added goes by."""

MEANING = ("unit", "currency")
"""Rules that give every figure of the week another meaning."""


class Figure(NamedTuple):
    """A figure of a subject: the row's number among its like and the field; None is any."""

    number: int | None
    field: str | None

    def meets(self, other: "Figure") -> bool:
        return (self.number == other.number or None in (self.number, other.number)) and (
            self.field == other.field or None in (self.field, other.field)
        )


@dataclass(frozen=True, slots=True)
class Touched:
    """What a change names.

    figures: the figures it gives a value to, by subject
    names: depots and customers that it speaks of
    unsettled: depots and customers that it puts in, takes out or renames
    everything: it gives all figures another meaning
    """

    figures: dict[Subject, frozenset[Figure]]
    names: frozenset[Named]
    unsettled: frozenset[Named]
    everything: bool

    def meets(self, other: "Touched") -> bool:
        """Whether the two changes touch each other."""
        if self.everything or other.everything:
            return True
        if self.unsettled & other.names or other.unsettled & self.names:
            return True
        return any(
            one.meets(two)
            for subject in self.figures.keys() & other.figures.keys()
            for one in self.figures[subject]
            for two in other.figures[subject]
        )


def touched(change: Change) -> Touched:
    """What a change touches, all of its parts together."""
    figures: dict[Subject, set[Figure]] = {}
    names: set[Named] = set()
    unsettled: set[Named] = set()
    everything = False
    for one in _parts(change):
        for subject, figure in _figures(one):
            figures.setdefault(subject, set()).add(figure)
        names.update(_names(one))
        unsettled.update(_unsettled(one))
        everything |= isinstance(one, Alter) and one.what == "rule" and one.field in MEANING
    frozen = {subject: frozenset(found) for subject, found in figures.items()}
    return Touched(frozen, frozenset(names), frozenset(unsettled), everything)


def touch_each_other(first: Change, second: Change) -> bool:
    """Whether two changes give a value to the same figure, or one unsettles what the other names."""
    return touched(first).meets(touched(second))


def _parts(change: Change) -> Iterator[Change]:
    if isinstance(change, Together):
        for one in change.changes:
            yield from _parts(one)
    else:
        yield change


def _figures(change: Change) -> Iterator[tuple[Subject, Figure]]:
    match change:
        case Add(record=RateRow() as row, place=place):
            subject: Subject = ("rate", (row.depot, row.customer, row.haulier))
            yield subject, Figure(NEXT_ROW if place is None else None, None)
        case Add(record=Depot() as depot):
            yield ("depot", depot.name), Figure(1, None)
        case Add(record=Customer() as customer):
            yield ("customer", customer.name), Figure(1, None)
        case Add(record=Gone() as gone):
            yield ("gone", gone.name), Figure(1, None)
        case Add(record=Haulier() as haulier):
            yield ("haulier", haulier.name), Figure(1, None)
        case Remove(key=RateKey() as key):
            yield ("rate", key[:3]), Figure(key.number, None)
        case Remove(what=what, key=str(name)):
            yield (what, name), Figure(1, None)
        case Alter(key=RateKey() as key, field=field):
            yield ("rate", key[:3]), Figure(key.number, field)
        case Alter(what=what, key=str(name), field=field):
            yield (what, name), Figure(1, "orders" if field == "ordered" else field)
        case SetHold(key=key) | Lift(key=key):
            yield ("rate", key[:3]), Figure(key.number, "hold")


def _names(change: Change) -> Iterator[Named]:
    match change:
        case Add(record=RateRow() | Gone() as row):
            yield from (("depot", row.depot), ("customer", row.customer))
        case Add(record=Depot() as depot):
            yield "depot", depot.name
        case Add(record=Customer() as customer):
            yield "customer", customer.name
            yield from _tied_to(customer.one_depot)
        case Remove(key=RateKey() as key) | Alter(key=RateKey() as key) | SetHold(key=key) | Lift(key=key):
            yield from (("depot", key.depot), ("customer", key.customer))
        case Remove(what=what, key=str(name)):
            yield what, name
        case Alter(what=what, key=str(name), field=field, value=value) if what != "rule":
            yield what, name
            if field == "name":
                yield what, value
            if field == "one_depot":
                yield from _tied_to(value)


def _unsettled(change: Change) -> Iterator[Named]:
    match change:
        case Add(record=Depot() as depot):
            yield "depot", depot.name
        case Add(record=Customer() as customer):
            yield "customer", customer.name
        case Remove(what="depot" | "customer" as what, key=str(name)):
            yield what, name
        case Alter(what=what, key=str(name), field="name", value=value):
            yield from ((what, name), (what, value))


def _tied_to(one_depot: str | None) -> Iterator[Named]:
    if one_depot and one_depot != ANY_SINGLE_DEPOT:
        yield "depot", one_depot
