"""The figures of a week as frozen values: depots, customers, orders, rate rows, rules and holds.

Quantities are in the week's unit, money in the week's currency, both as exact decimals. `None` is a
blank cell: blank is not zero, and what a blank stands for is said beside each field.
"""

from dataclasses import dataclass
from datetime import date
from decimal import Decimal
from functools import cached_property
from typing import Literal, NamedTuple

from engine.exact import total_of

PRIORITIES = ("A", "B", "C")
"""Who is served first when goods run short; a blank priority counts as the last of them."""

WHEN_SHORT = ("charge", "priority", "even share")
USUAL_DAYS = 5
"""Loading days of a week where the desk says nothing: Monday to Friday (common practice)."""

ANY_SINGLE_DEPOT = "yes"
"""What *One depot* holds when any single depot will do; otherwise it holds that depot's name."""

Basis = Literal["unit", "load"]


@dataclass(frozen=True, slots=True)
class Depot:
    """A place that goods are sent from.

    `must_move` is the part of `available` that should leave this week (blank: none).
    `charge_if_unsent` is per unit kept: a cost when positive, a credit when negative (blank: 0).
    `loads_a_day` is how many vehicles it can load in a day (blank: any number); `opening_charge` is due once
    if anything is sent this week (blank: none).
    """

    name: str
    available: Decimal
    must_move: Decimal | None = None
    charge_if_unsent: Decimal | None = None
    loads_a_day: Decimal | None = None
    latitude: Decimal | None = None
    longitude: Decimal | None = None
    opening_charge: Decimal | None = None


@dataclass(frozen=True, slots=True)
class Haulier:
    """Somebody who carries goods, where there is anything to say of it.

    `at_most` is what it carries in the whole week over all its lanes (blank: no limit); `load_size` is what
    one of its vehicles carries, where a rate row says nothing else.
    """

    name: str
    at_most: Decimal | None = None
    load_size: Decimal | None = None


@dataclass(frozen=True, slots=True)
class Order:
    """One order row of a customer: a quantity, and its number and delivery day where they are known."""

    quantity: Decimal
    number: str | None = None
    day: str | None = None


@dataclass(frozen=True)
class Customer:
    """Somebody who ordered goods; what is ordered is the sum of the order rows.

    `charge_if_short` is per unit not delivered (blank: the week's default). `one_depot` is
    `ANY_SINGLE_DEPOT`, or the name of the only depot that may serve. A customer who `may_decline` is
    served only where serving costs less than the charge if short.
    """

    name: str
    orders: tuple[Order, ...]
    charge_if_short: Decimal | None = None
    priority: str | None = None
    one_depot: str | None = None
    may_decline: bool = False
    smallest_drop: Decimal | None = None
    latitude: Decimal | None = None
    longitude: Decimal | None = None

    @cached_property
    def ordered(self) -> Decimal:
        """The whole week's order, in the week's unit."""
        return total_of(order.quantity for order in self.orders)


class RateKey(NamedTuple):
    """What names a rate row in a week: its lane, its haulier, and a count among rows alike in those."""

    depot: str
    customer: str
    haulier: str | None = None
    number: int = 1


@dataclass(frozen=True, slots=True)
class RateRow:
    """What one haulier charges on a lane, before surcharge.

    Blank `at_least` is 0, blank `at_most` is no limit; blank `load_size` takes the haulier's, else the
    week's, and blank `surcharge` (in percent) the week's. `trip_minimum` is what a load costs at least,
    `charge_per_use` is due once in the week if the row is used.
    """

    depot: str
    customer: str
    rate: Decimal
    per: Basis = "unit"
    haulier: str | None = None
    at_least: Decimal | None = None
    at_most: Decimal | None = None
    closed: bool = False
    load_size: Decimal | None = None
    trip_minimum: Decimal | None = None
    charge_per_use: Decimal | None = None
    surcharge: Decimal | None = None
    valid_from: date | None = None
    km: Decimal | None = None


@dataclass(frozen=True, slots=True)
class Gone:
    """A quantity that has left: a fact. `name` tells it from others, a load number for instance.

    `rate` is what is payable per unit, surcharge included, by the rate that was valid on `day`. No plan
    moves or reprices it.
    """

    name: str
    depot: str
    customer: str
    quantity: Decimal
    rate: Decimal
    haulier: str | None = None
    day: date | None = None


@dataclass(frozen=True, slots=True)
class Rules:
    """The desk's settings for the week; `fuel_surcharge` is in percent, blank charges are 0."""

    week: str = "Week"
    unit: str = "t"
    currency: str = "EUR"
    fuel_surcharge: Decimal | None = None
    load_size: Decimal | None = None
    when_short: str = "charge"
    charge_if_short: Decimal | None = None
    step: Decimal | None = None
    days: Decimal | None = None

    @property
    def loading_days(self) -> Decimal:
        """How many days of the week vehicles are loaded on."""
        return Decimal(USUAL_DAYS) if self.days is None else self.days


@dataclass(frozen=True, slots=True)
class Hold:
    """A quantity that a dispatcher fixed on a rate row, with the reason."""

    quantity: Decimal
    reason: str = ""
