"""What went before, brought onto this week's rate rows: by shares of each order, or as it was sent."""

from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction

import numpy as np

from engine.compare.cents import apportioned
from engine.figures import RateKey
from engine.intake.earlier import Quantities
from engine.planning.gone import left, remaining
from engine.planning.model import Model
from engine.week import Week


@dataclass(frozen=True, slots=True)
class Wish:
    """A quantity in grains, and the model's rows that may carry it, the one it went on first."""

    grains: int
    rows: tuple[int, ...]


def as_sent(week: Week, model: Model, sent: Quantities) -> tuple[list[Wish], Fraction]:
    """The quantities of a plan as wishes in its order, and how much of it has no lane this week.

    What has gone by now on a row is taken off, and what is finer than this week's grain is cut.
    """
    wishes, lost = [], Fraction(0)
    gone, finder = left(week).row, _Finder.of(week, model)
    for key, quantity in sent.items():
        still = remaining(quantity, gone.get(key[:3]) if key.number == 1 else None)
        rows = finder.rows(key)
        if rows:
            wishes.append(Wish(int(Fraction(still) * 10**model.quantity_places), tuple(rows)))
        else:
            lost += Fraction(still)
    return wishes, lost


def in_shares(week: Week, model: Model, sent: Quantities) -> tuple[list[Wish], Fraction]:
    """Each customer's order, shared out over rate rows as its deliveries were last week.

    Parts are cut to grains by largest remainder. Customers who got nothing last week have no shares.
    """
    by_customer: dict[str, list[tuple[RateKey, Decimal]]] = {}
    for key, quantity in sent.items():
        if quantity > 0 and key.customer in week.customers:
            by_customer.setdefault(key.customer, []).append((key, quantity))
    wanted: dict[RateKey, Decimal] = {}
    for name, went in by_customer.items():
        ordered, total = week.customers[name].ordered, sum((Fraction(q) for _, q in went), Fraction(0))
        parts = [Fraction(ordered) * Fraction(quantity) / total for _, quantity in went]
        grains = apportioned(parts, model.quantity_places, ordered)
        wanted.update({key: part for (key, _), part in zip(went, grains, strict=True)})
    return as_sent(week, model, wanted)


@dataclass(frozen=True, eq=False)
class _Finder:
    """Finds a week's rate rows by the names of an earlier one."""

    week: Week
    model: Model
    depots: Mapping[str, int]
    customers: Mapping[str, int]

    @classmethod
    def of(cls, week: Week, model: Model) -> "_Finder":
        depots, customers = (
            {name: n for n, name in enumerate(names)} for names in (model.depots, model.customers)
        )
        return cls(week, model, depots, customers)

    def rows(self, key: RateKey) -> list[int]:
        """The rows that what went on a rate row may go by now: the same row, else its haulier's, else the
        cheapest of the lane."""
        i, j = self.depots.get(key.depot), self.customers.get(key.customer)
        if i is None or j is None:
            return []
        problem, most = self.model.problem, self.model.problem.at_most
        open_rows = [
            row
            for row in range(int(problem.start[j]), int(problem.start[j + 1]) - 1)  # the last one is short
            if problem.depot[row] == i and (most is None or most[row] > 0)
        ]
        number = self.week.rates.find(key)
        same = -1 if number is None else int(np.searchsorted(self.week.rates.ids_in_order, number))
        flat, at, money = self.week.rates.flat, self.model.rate_row, self.model.money

        def order(row: int) -> tuple[bool, bool, int, int]:
            place = int(at[row])
            return place != same, flat.haulier_of(place) != key.haulier, int(money[row]), row

        return sorted(open_rows, key=order)
