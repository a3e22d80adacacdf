"""Mixed weeks: some figures of a first week, the others of a second, then some of the second's events.

The entities are those of both weeks. A depot or customer that one of them does not have is there with
nothing available or ordered, and borrows its other figures.
"""

from collections.abc import Collection, Mapping
from dataclasses import dataclass, fields, replace
from decimal import Decimal
from fractions import Fraction
from functools import cached_property
from types import MappingProxyType
from typing import Any

from engine.changes import Change
from engine.compare.cents import apportioned
from engine.compare.effects import (
    GONE,
    GONE_BEFORE,
    HOLDS,
    LIMITS,
    MIX,
    RATES,
    STATED_ORDER,
    STOCK,
    SURCHARGE,
    VOLUME,
    of_customer,
    of_depot,
    of_rate,
    of_rule,
)
from engine.compare.union import NONE, Rows, rows_of
from engine.exact import places_needed, total_of
from engine.figures import Customer, Depot, Gone, Hold, Order, RateKey
from engine.planning.gone import superseded
from engine.rates import Rates
from engine.week import Refused, Week

EVENT = "event "
"""What the key of an event begins with."""

_KNOWN = {"depots", "customers", "rates", "rules", "holds", "gone"}


class NotComparable(ValueError):
    """Two weeks that cannot be held against each other; the message says why and what to do."""


@dataclass(frozen=True, slots=True)
class Event:
    """Something that happened in the second week: a change with a name of its own."""

    name: str
    change: Change


@dataclass(frozen=True, eq=False)
class Mixture:
    """Two weeks to be mixed: `second` is the one before its events."""

    first: Week
    second: Week
    events: tuple[Event, ...] = ()

    @classmethod
    def of(cls, first: Week, second: Week, events: tuple[Event, ...] = ()) -> "Mixture":
        """The mixture of two weeks in one unit and currency.

        Raises:
            NotComparable: their units or currencies differ.
        """
        for what, one, two in (
            ("unit", first.rules.unit, second.rules.unit),
            ("currency", first.rules.currency, second.rules.currency),
        ):
            if one != two:
                raise NotComparable(
                    f"One is in {one}, the other in {two}: only weeks of one {what} can be compared. "
                    f"Bring the figures to one {what} first."
                )
        return cls(first, second, events)

    @cached_property
    def rows(self) -> Rows:
        return rows_of(self.first.rates, self.second.rates)

    @cached_property
    def effects(self) -> tuple[str, ...]:
        """The effects in which the weeks differ at all, in the stated order; events by their number."""
        found = [effect for effect in STATED_ORDER if effect in self._differing]
        return (*found, *(event_key(n) for n in range(len(self.events))))

    def week(self, from_second: Collection[str]) -> tuple[Week, tuple[str, ...]]:
        """The week with the figures of these effects from the second, and what could not be done in it."""
        chosen = frozenset(from_second)
        week = self._figures(chosen)
        remarks = []
        for number, event in enumerate(self.events):
            if event_key(number) not in chosen:
                continue
            try:
                week = week.apply(event.change)
            except Refused as refused:
                remarks.append(f"'{event.name}' changes nothing here: {refused}")
        return week, tuple(remarks)

    def _figures(self, chosen: frozenset[str]) -> Week:
        others = {
            f.name: getattr(self.second if LIMITS in chosen else self.first, f.name)
            for f in fields(Week)
            if f.name not in _KNOWN
        }
        rates = self.rows.mixed(chosen)
        return replace(
            self.second,
            depots=MappingProxyType(self._depots(chosen)),
            customers=MappingProxyType(self._customers(chosen)),
            rates=rates,
            rules=_mixed(self.first.rules, self.second.rules, of_rule, chosen, own=("week",)),
            holds=self.second.holds if HOLDS in chosen else self._holds_of_first(rates),
            gone=MappingProxyType(self._gone(chosen)),
            **others,
        )

    def _depots(self, chosen: frozenset[str]) -> dict[str, Depot]:
        found = {}
        for name in dict.fromkeys([*self.second.depots, *self.first.depots]):
            one, two = self.first.depots.get(name), self.second.depots.get(name)
            depot = _either(one, two, of_depot, chosen)
            if (two if STOCK in chosen else one) is None:
                depot = replace(depot, available=Decimal(0), must_move=None)
            found[name] = depot
        return found

    def _customers(self, chosen: frozenset[str]) -> dict[str, Customer]:
        orders = self._orders(VOLUME in chosen, MIX in chosen)
        found = {}
        for name in dict.fromkeys([*self.second.customers, *self.first.customers]):
            customer = _either(
                self.first.customers.get(name), self.second.customers.get(name), of_customer, chosen
            )
            found[name] = replace(customer, orders=orders.get(name, ()))
        return found

    def _orders(self, volume: bool, mix: bool) -> Mapping[str, tuple[Order, ...]]:
        key = (volume, mix) if self._volume_apart else (mix, mix)
        return self._scaled[key]

    @cached_property
    def _volume_apart(self) -> bool:
        """Whether both weeks have orders, so that one can be brought to the total of the other."""
        return all(_total(week) > 0 for week in (self.first, self.second))

    @cached_property
    def _scaled(self) -> Mapping[tuple[bool, bool], Mapping[str, tuple[Order, ...]]]:
        """Orders by whose total and whose mix: of the first (False) or the second week."""
        weeks = {False: self.first, True: self.second}
        plain = {which: {n: c.orders for n, c in week.customers.items()} for which, week in weeks.items()}
        scaled: dict[tuple[bool, bool], Mapping[str, tuple[Order, ...]]] = {
            (which, which): plain[which] for which in weeks
        }
        if self._volume_apart:
            for which, week in weeks.items():
                scaled[not which, which] = _brought_to(week, _total(weeks[not which]))
        return scaled

    def _holds_of_first(self, rates: Rates) -> Mapping[RateKey, Hold]:
        """The first week's holds under the names that their rows have in a mixed week."""
        if not self.first.holds:
            return {}
        place = {int(number): n for n, number in enumerate(self.first.rates.ids_in_order)}
        found = {}
        for key, hold in self.first.holds.items():
            number = self.first.rates.find(key)
            row = None if number is None else self.rows.of_first(place[number])
            if row is not None:
                found[rates.key_of(row)] = hold
        return MappingProxyType(found)

    def _gone(self, chosen: frozenset[str]) -> dict[str, Gone]:
        first, second = self.first.gone, self.second.gone
        both = {name for name, gone in second.items() if first.get(name) == gone}
        found = {name: gone for name, gone in second.items() if name in both or GONE in chosen}
        if GONE_BEFORE not in chosen:
            for name, gone in first.items():
                if name not in both:
                    new = name if name not in second else f"{self.first.rules.week}: {name}"
                    found[new] = replace(gone, name=new)
        return found

    @cached_property
    def _differing(self) -> frozenset[str]:
        """The effects in which any figure differs."""
        first, second = self.first, self.second
        found = set()
        for name in dict.fromkeys([*first.depots, *second.depots]):
            one, two = first.depots.get(name), second.depots.get(name)
            if one is None or two is None:
                found.add(STOCK)
            elif one != two:
                found |= _fields_apart(one, two, of_depot, ("name", "latitude", "longitude"))
        for name in dict.fromkeys([*first.customers, *second.customers]):
            buyer, other = first.customers.get(name), second.customers.get(name)
            if buyer is not None and other is not None and buyer is not other:
                passed = ("name", "latitude", "longitude", "orders")
                found |= _fields_apart(buyer, other, of_customer, passed)
        found |= self._orders_apart()
        found |= _fields_apart(first.rules, second.rules, of_rule, ("week",))
        found |= self._rates_apart()
        if any(
            getattr(first, f.name) != getattr(second, f.name) for f in fields(Week) if f.name not in _KNOWN
        ):
            found.add(LIMITS)
        if dict(first.holds) != dict(second.holds):
            found.add(HOLDS)
        if any(second.gone.get(name) != gone for name, gone in first.gone.items()):
            found.add(GONE_BEFORE)
        if any(first.gone.get(name) != gone for name, gone in second.gone.items()):
            found.add(GONE)
        return frozenset(found)

    def _orders_apart(self) -> set[str]:
        ordered = [
            {name: c.ordered for name, c in week.customers.items() if c.ordered}
            for week in (self.first, self.second)
        ]
        if ordered[0] == ordered[1]:
            return set()
        if not self._volume_apart:
            return {MIX}
        scaled = {n: total_of(o.quantity for o in of) for n, of in self._scaled[True, False].items()}
        same_mix = {name: much for name, much in scaled.items() if much} == ordered[1]
        same_volume = _total(self.first) == _total(self.second)
        return ({VOLUME} if not same_volume else set()) | ({MIX} if not same_mix else set())

    def _rates_apart(self) -> set[str]:
        rows = self.rows
        found = set()
        every = frozenset((RATES, SURCHARGE, LIMITS))
        one, two = rows.mixed(frozenset()).table, rows.mixed(every).table
        live = ~rows.taken_out & ~superseded(two)
        if (live & ((rows.first == NONE) != (rows.second == NONE))).any():
            found.add(LIMITS)
        both = (rows.first != NONE) & (rows.second != NONE)
        for effect, name in ((RATES, "per_load"), (LIMITS, "closed")):
            if (getattr(one, name) != getattr(two, name))[both].any():
                found.add(effect)
        if (one.rate.values != two.rate.values)[both].any():
            found.add(RATES)
        for name, column in one.decimals.items():
            if name != "km" and (column.values != two.decimals[name].values)[both].any():
                found.add(of_rate(name))
        return found


def event_key(number: int) -> str:
    """What an event goes by among the effects."""
    return f"{EVENT}{number + 1}"


def is_event(key: str) -> bool:
    """Whether what goes by this key is an event and no effect of figures."""
    return key.startswith(EVENT)


def _either(one: Any, two: Any, effect_of: Any, chosen: frozenset[str]) -> Any:
    """A record with each figure from the week that its effect takes; borrowed where one week has none."""
    if one is None or two is None:
        return two if one is None else one
    return two if one is two else _mixed(one, two, effect_of, chosen)


def _mixed(one: Any, two: Any, effect_of: Any, chosen: frozenset[str], own: tuple[str, ...] = ()) -> Any:
    """The second record with the figures of effects that are not chosen from the first."""
    back = {
        f.name: getattr(one, f.name)
        for f in fields(two)
        if f.name not in own and f.name != "orders" and effect_of(f.name) not in chosen
    }
    return replace(two, **back)


def _fields_apart(one: Any, two: Any, effect_of: Any, passed: tuple[str, ...]) -> set[str]:
    return {
        effect_of(f.name)
        for f in fields(two)
        if f.name not in passed and getattr(one, f.name) != getattr(two, f.name)
    }


def _total(week: Week) -> Decimal:
    return total_of(customer.ordered for customer in week.customers.values())


def _brought_to(week: Week, total: Decimal) -> Mapping[str, tuple[Order, ...]]:
    """Every order times one factor, cut to grains by largest remainder: they add up to the total."""
    ordered = {name: customer.ordered for name, customer in week.customers.items()}
    factor = Fraction(total) / Fraction(_total(week))
    places = max(places_needed(quantity) for quantity in (total, *ordered.values()))
    parts = apportioned([Fraction(quantity) * factor for quantity in ordered.values()], places, total)
    return {name: (Order(part),) for name, part in zip(ordered, parts, strict=True)}
