"""What differs between a week as uploaded and as it is now, figure by figure."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, fields
from typing import Any

from engine.figures import RateKey, RateRow
from engine.rates import Rates
from engine.week import Week


@dataclass(frozen=True, slots=True)
class Altered:
    """One figure that differs; None for `before` or `after` is a blank, or a record that is not there.

    what: 'depot', 'customer', 'rate', 'haulier', 'rule', 'hold' or 'gone'; field: empty for a whole record
    """

    what: str
    key: str | RateKey
    field: str
    before: Any
    after: Any


def altered(before: Week, after: Week) -> tuple[Altered, ...]:
    """Every figure in which the second week differs from the first, which it came from by changes.

    Records are told by name: one that was renamed is one taken out and one put in.
    """
    return (
        *_records("depot", before.depots, after.depots),
        *_records("customer", before.customers, after.customers),
        *_rates(before.rates, after.rates),
        *_records("haulier", before.hauliers, after.hauliers),
        *_fields("rule", "", before.rules, after.rules),
        *_whole("hold", before.holds, after.holds),
        *_whole("gone", before.gone, after.gone),
    )


def _records(what: str, before: Mapping[str, Any], after: Mapping[str, Any]) -> Iterator[Altered]:
    for name, record in before.items():
        if name not in after:
            yield Altered(what, name, "", record, None)
        elif record is not after[name]:
            yield from _fields(what, name, record, after[name])
    for name, record in after.items():
        if name not in before:
            yield Altered(what, name, "", None, record)


def _rates(before: Rates, after: Rates) -> Iterator[Altered]:
    """Rows by id, which a row keeps for as long as the week lives; untouched ones are not looked at."""
    if before.table is after.table:
        touched = {*before.overlay, *before.removed, *after.overlay, *after.removed}
    else:
        touched = set(range(max(before.end, after.end)))
    for number in sorted(touched):
        old = before.row(number) if number < before.end else None
        new = after.row(number) if number < after.end else None
        if old == new:
            continue
        if old is None or new is None or _lane(old) != _lane(new):
            key = after.key_of(number) if new is not None else before.key_of(number)
            yield Altered("rate", key, "", old, new)
        else:
            yield from _fields("rate", after.key_of(number), old, new)


def _lane(row: RateRow) -> tuple[str, str, str | None]:
    return row.depot, row.customer, row.haulier


def _fields(what: str, key: str | RateKey, before: Any, after: Any) -> Iterator[Altered]:
    for field in fields(before):
        old, new = getattr(before, field.name), getattr(after, field.name)
        if old != new:
            yield Altered(what, key, field.name, old, new)


def _whole(what: str, before: Mapping[Any, Any], after: Mapping[Any, Any]) -> Iterator[Altered]:
    for key in dict.fromkeys([*before, *after]):
        old, new = before.get(key), after.get(key)
        if old != new:
            yield Altered(what, key, "", old, new)
