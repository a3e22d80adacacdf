"""A week: its figures as uploaded plus the changes made since. Frozen values, pure functions, no I/O."""

from collections.abc import Mapping
from dataclasses import dataclass, field, fields, replace
from decimal import Decimal
from types import MappingProxyType
from typing import Any

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together, What
from engine.figures import Customer, Depot, Gone, Haulier, Hold, Order, RateKey, RateRow, Rules
from engine.rates import Rates

FIELDS = {
    "depot": frozenset(f.name for f in fields(Depot)),
    "customer": frozenset(f.name for f in fields(Customer)) | {"ordered"},
    "rate": frozenset(f.name for f in fields(RateRow)) - {"depot", "customer", "haulier"},
    "rule": frozenset(f.name for f in fields(Rules)),
    "haulier": frozenset(f.name for f in fields(Haulier)) - {"name"},
}

_TABLE = {"depot": "depots", "customer": "customers", "gone": "gone", "haulier": "hauliers"}


class Refused(ValueError):
    """A change that does not fit the week it was made to; the message says why, as a sentence."""


def _named(records: tuple[Any, ...]) -> Mapping[str, Any]:
    return MappingProxyType({record.name: record for record in records})


@dataclass(frozen=True, eq=False)
class Week:
    """One planning period. Depots and customers stand in sheet order, by name.

    A rate row may name a depot or customer that is not in the week: it waits until that one is.
    """

    depots: Mapping[str, Depot] = field(default_factory=dict)
    customers: Mapping[str, Customer] = field(default_factory=dict)
    rates: Rates = field(default_factory=Rates)
    rules: Rules = field(default_factory=Rules)
    holds: Mapping[RateKey, Hold] = field(default_factory=dict)
    gone: Mapping[str, Gone] = field(default_factory=dict)
    hauliers: Mapping[str, Haulier] = field(default_factory=dict)

    @classmethod
    def of(
        cls,
        depots: tuple[Depot, ...],
        customers: tuple[Customer, ...],
        rates: Rates | tuple[RateRow, ...],
        rules: Rules | None = None,
        holds: Mapping[RateKey, Hold] | None = None,
        gone: tuple[Gone, ...] = (),
        hauliers: tuple[Haulier, ...] = (),
    ) -> "Week":
        """A week of these figures; names must be distinct."""
        for what, records in (
            ("depot", depots),
            ("customer", customers),
            ("gone quantity", gone),
            ("haulier", hauliers),
        ):
            names = [record.name for record in records]
            twice = next((name for name in names if names.count(name) > 1), None) if _repeats(names) else None
            if twice is not None:
                raise Refused(f"The {what} '{twice}' is there twice.")
        table = rates if isinstance(rates, Rates) else Rates.of(rates)
        return cls(
            _named(depots),
            _named(customers),
            table,
            rules or Rules(),
            MappingProxyType(holds or {}),
            _named(gone),
            _named(hauliers),
        )

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Week):
            return NotImplemented
        return (
            list(self.depots.values()) == list(other.depots.values())
            and list(self.customers.values()) == list(other.customers.values())
            and self.rules == other.rules
            and self.holds == other.holds
            and list(self.gone.values()) == list(other.gone.values())
            and list(self.hauliers.values()) == list(other.hauliers.values())
            and self.rates == other.rates
        )

    @property
    def is_empty(self) -> bool:
        return not self.depots and not self.customers and not len(self.rates)

    def apply(self, change: Change) -> "Week":
        """The week after a change.

        Raises:
            Refused: the change names what is not there, or adds what is; the week is as it was.
        """
        match change:
            case Add(record=RateRow() as row, place=place):
                return replace(self, rates=_with_row(self.rates, row, place))
            case Add(record=Depot() | Customer() | Gone() | Haulier() as record, place=place):
                what = _what(record)
                return self._with(what, _inserted(what, self._of(what), record, place))
            case Remove(what="rate", key=RateKey() as key):
                if key in self.holds:
                    raise Refused(f"{describe(key)} is held: lift the hold before taking the row out.")
                return replace(self, rates=self.rates.without_row(_row_id(self.rates, key)))
            case Remove(what=what, key=str(name)):
                self._record(what, name)
                return self._with(what, {n: r for n, r in self._of(what).items() if n != name})
            case Alter():
                return self._altered(change)
            case SetHold(key=key, quantity=quantity, reason=reason):
                _row_id(self.rates, key)
                return self._holding({**self.holds, key: Hold(quantity, reason)})
            case Lift(key=key):
                if key not in self.holds:
                    raise Refused(f"{describe(key)} is not held: there is nothing to lift.")
                return self._holding({k: hold for k, hold in self.holds.items() if k != key})
            case Together(changes=changes):
                week = self
                for one in changes:
                    week = week.apply(one)
                return week
        raise Refused(f"This is no change that a week knows: {change!r}.")

    def inverse(self, change: Change) -> Change:
        """The change that brings this week back once `change` has been applied to it."""
        match change:
            case Add(record=RateRow() as row, place=place):
                rates = _with_row(self.rates, row, place)
                return Remove("rate", rates.key_of(rates.end - 1 if place is None else place))
            case Add(record=Depot() | Customer() | Gone() | Haulier() as record):
                return Remove(_what(record), record.name)
            case Remove(what="rate", key=RateKey() as key):
                return Add(self._rate_row(key), place=_row_id(self.rates, key))
            case Remove(what=what, key=str(name)):
                return Add(self._record(what, name), place=list(self._of(what)).index(name))
            case Alter(what="rate", key=RateKey() as key, field=name):
                return Alter("rate", key, name, getattr(self._rate_row(key), name))
            case Alter(what="rule", field=name):
                return Alter("rule", "", name, getattr(self.rules, name))
            case Alter(what=what, key=str(key), field="name", value=new):
                return Alter(what, new, "name", key)
            case Alter(what="customer", key=str(key), field="ordered"):
                return Alter("customer", key, "orders", self._record("customer", key).orders)
            case Alter(what=what, key=str(key), field=name):
                return Alter(what, key, name, getattr(self._record(what, key), name))
            case SetHold(key=key) | Lift(key=key):
                hold = self.holds.get(key)
                return Lift(key) if hold is None else SetHold(key, hold.quantity, hold.reason)
            case Together(changes=changes, note=note):
                back: list[Change] = []
                week = self
                for one in changes:
                    back.insert(0, week.inverse(one))
                    week = week.apply(one)
                return Together(tuple(back), note)
        raise Refused(f"This is no change that a week knows: {change!r}.")

    def _of(self, what: str) -> Mapping[str, Any]:
        return getattr(self, _TABLE[what])  # type: ignore[no-any-return]

    def _with(self, what: str, records: Mapping[str, Any]) -> "Week":
        table: dict[str, Any] = {_TABLE[what]: MappingProxyType(records)}
        return replace(self, **table)

    def _holding(self, holds: dict[RateKey, Hold]) -> "Week":
        return replace(self, holds=MappingProxyType(holds))

    def _record(self, what: str, name: str) -> Any:
        try:
            return self._of(what)[name]
        except KeyError:
            raise Refused(f"There is no {_in_words(what)} '{name}' in the week.") from None

    def _rate_row(self, key: RateKey) -> RateRow:
        row = self.rates.row(_row_id(self.rates, key))
        if row is None:
            raise Refused(f"There is no rate row for {describe(key)}.")
        return row

    def _altered(self, change: Alter) -> "Week":
        what, key, name, value = change.what, change.key, change.field, change.value
        if name not in FIELDS.get(what, ()):
            raise Refused(f"A {what} has no figure called '{name}' that can be altered.")
        if what == "rule":
            return replace(self, rules=replace(self.rules, **{name: value}))
        if isinstance(key, RateKey):
            row = replace(self._rate_row(key), **{name: value})
            return replace(self, rates=self.rates.with_row(_row_id(self.rates, key), row))
        record = self._record(what, key)
        if name == "name":
            return self._renamed(what, key, value)
        new = reordered(record, value) if name == "ordered" else replace(record, **{name: value})
        return self._with(what, {**self._of(what), key: new})

    def _renamed(self, what: str, old: str, new: str) -> "Week":
        if new == old:
            return self
        if new in self._of(what):
            raise Refused(f"There is a {what} '{new}' already: two of one name cannot be told apart.")
        if self.rates.name_used(what, new, instead_of=old):
            raise Refused(f"Rate rows name a {what} '{new}' already: rename or take out those rows first.")
        renamed = {
            (new if name == old else name): (replace(record, name=new) if name == old else record)
            for name, record in self._of(what).items()
        }
        holds = {_key_renamed(key, what, old, new): hold for key, hold in self.holds.items()}
        gone = {name: _gone_renamed(record, what, old, new) for name, record in self.gone.items()}
        week = replace(
            self._with(what, renamed), rates=self.rates.renamed(what, old, new), gone=MappingProxyType(gone)
        )._holding(holds)
        if what == "depot":
            tied = [c for c in self.customers.values() if c.one_depot == old]
            for customer in tied:
                week = week._altered(Alter("customer", customer.name, "one_depot", new))
        return week


def reordered(customer: Customer, ordered: Decimal) -> Customer:
    """The customer with another total order.

    A rise goes to the last order row; a fall is taken from the last row backwards, so that numbers and
    days of the earlier rows stay.
    """
    orders = list(customer.orders) or [Order(Decimal(0))]
    difference = ordered - customer.ordered
    if difference >= 0:
        orders[-1] = replace(orders[-1], quantity=orders[-1].quantity + difference)
        return replace(customer, orders=tuple(orders))
    for position in reversed(range(len(orders))):
        taken = max(difference, -orders[position].quantity)
        orders[position] = replace(orders[position], quantity=orders[position].quantity + taken)
        difference -= taken
    return replace(customer, orders=tuple(orders))


def describe(key: RateKey) -> str:
    """A rate row's name for a sentence."""
    haulier = f" by {key.haulier}" if key.haulier else ""
    count = f" (row {key.number} of its kind)" if key.number > 1 else ""
    return f"{key.depot} to {key.customer}{haulier}{count}"


def _what(record: Depot | Customer | Gone | Haulier) -> What:
    if isinstance(record, Depot):
        return "depot"
    if isinstance(record, Haulier):
        return "haulier"
    return "customer" if isinstance(record, Customer) else "gone"


def _in_words(what: str) -> str:
    return "gone quantity" if what == "gone" else what


def _key_renamed(key: RateKey, what: str, old: str, new: str) -> RateKey:
    if getattr(key, what) != old:
        return key
    return key._replace(depot=new) if what == "depot" else key._replace(customer=new)


def _gone_renamed(gone: Gone, what: str, old: str, new: str) -> Gone:
    if getattr(gone, what) != old:
        return gone
    return replace(gone, depot=new) if what == "depot" else replace(gone, customer=new)


def _repeats(names: list[str]) -> bool:
    return len(set(names)) < len(names)


def _row_id(rates: Rates, key: RateKey) -> int:
    number = rates.find(key)
    if number is None:
        raise Refused(f"There is no rate row for {describe(key)}.")
    return number


def _with_row(rates: Rates, row: RateRow, place: int | None) -> Rates:
    if place is None:
        return rates.with_row(rates.end, row)
    if place not in rates.removed:
        raise Refused(f"No rate row was taken out at place {place}: there is nothing to put back.")
    return rates.with_row(place, row)


def _inserted(what: str, records: Mapping[str, Any], record: Any, place: int | None) -> dict[str, Any]:
    if record.name in records:
        raise Refused(f"There is a {_in_words(what)} '{record.name}' already.")
    items = list(records.items())
    items.insert(len(items) if place is None else place, (record.name, record))
    return dict(items)
