"""A week as a transportation problem in integers.

What is missing comes from a stand-in depot, what stays goes to a stand-in customer; both are always
there, joined by a free row, so that balanced and unbalanced weeks are one problem (Dantzig 1963, ch. 15).
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from engine.exact import BLANK, LARGEST, DecimalColumn, TooLarge, to_integer
from engine.figures import ANY_SINGLE_DEPOT, PRIORITIES, Customer, Depot, Rules
from engine.load_sizes import load_sizes
from engine.network import Problem
from engine.network.problem import UNLIMITED
from engine.planning.aims import MUST_MOVE, Weights, weights
from engine.planning.gone import left, remaining, superseded
from engine.planning.spread import places_of_loads, spread_over_loads
from engine.rates import RateTable
from engine.week import Week

Integers = npt.NDArray[np.int64]
NO_RATE = -1
EVEN_SHARE = "even share"


class AimPrices(NamedTuple):
    """What an aim was solved with, where it is not a weight.

    rows: where each unit counts one against it
    depot, customer: (depots + 1,) and (customers + 1,) prices in units of the aim, stand-ins last
    """

    aim: str
    rows: Integers
    depot: Integers
    customer: Integers


class Decided(NamedTuple):
    """What the aims decided, one after the other, see `engine.planning.aim_by_aim`.

    at_least, at_most: (rows,) limits as the week states them; the problem's own hold what the aims decided
    prices: the highest aim first
    """

    at_least: Integers
    at_most: Integers
    prices: tuple[AimPrices, ...]


@dataclass(frozen=True, eq=False)
class Model:
    """The problem, and what each of its rows stands for.

    Customer j's rows are its rate rows in sheet order and, last, the row from the stand-in depot (what
    goes short). The stand-in customer's rows are each depot's free stay, then the stays of what must
    move (for depots that have any), then the row that joins the stand-ins.

    rate_row: (rows,) position in `week.rates.flat`, NO_RATE for the stand-in rows
    money:    (rows,) what a unit costs in money alone; `problem.cost` has the aims' weights on top
    must_row: (depots,) the row of what must move, NO_RATE where nothing must
    quantity_places, money_places: decimal places of the integers
    counted:  aims and the rows where each unit counts one against them, the highest first
    apart:    whether the weights do not fit, so that the problem's costs are money alone
    decided:  what came out then, once the aims are solved
    """

    problem: Problem
    depots: tuple[str, ...]
    customers: tuple[str, ...]
    rate_row: Integers
    money: Integers
    must_row: Integers
    weights: Weights
    quantity_places: int
    money_places: int
    counted: tuple[tuple[str, Integers], ...] = ()
    apart: bool = False
    decided: Decided | None = None

    @property
    def stated_limits(self) -> tuple[Integers, Integers]:
        """(rows,) least and most of each row by the week's figures and shares, whatever the aims decided."""
        if self.decided is not None:
            return self.decided.at_least, self.decided.at_most
        return limits_of(self)

    @property
    def short_rows(self) -> Integers:
        """(customers,) the row of what goes short."""
        return self.problem.start[1:-1] - 1

    @property
    def stay_rows(self) -> Integers:
        """(depots,) the row of what a depot may keep."""
        first = int(self.problem.start[-2])
        return np.arange(first, first + len(self.depots), dtype=np.int64)

    @property
    def stand_in(self) -> int:
        """Index of the stand-in depot."""
        return len(self.depots)

    @property
    def joining_row(self) -> int:
        """The free row from the stand-in depot to the stand-in customer."""
        return self.problem.rows - 1


def model_of(week: Week) -> Model:
    """The week's problem in integers.

    Raises:
        TooLarge: a figure, or what it adds up to, does not fit the exact integers.
    """
    depots, customers = tuple(week.depots.values()), tuple(week.customers.values())
    flat = week.rates.flat
    quantity_places = _quantity_places(week, flat)
    rate, charges, money_places = _money(week, flat)
    gone = left(week)
    available = _integers((remaining(d.available, gone.depot.get(d.name)) for d in depots), quantity_places)
    must_move = _integers((remaining(d.must_move, gone.depot.get(d.name)) for d in depots), quantity_places)
    ordered = _integers((remaining(c.ordered, gone.customer.get(c.name)) for c in customers), quantity_places)
    unsent_charge, short_charge = charges[: len(depots)], charges[len(depots) :]

    live, customer_of_row, depot_of_row = _live_rows(week, flat)
    lower, upper = _limits(week, flat, quantity_places)
    must = np.flatnonzero(must_move > 0)
    largest = max((int(np.abs(part).max(initial=0)) for part in (rate[live], charges)), default=0)
    short_aim = [None if c.may_decline else priority_of(c) for c in customers]
    try:
        aims = weights(largest, len(depots), {aim for aim in short_aim if aim}, must_move=len(must) > 0)
        apart = False
    except TooLarge:
        aims, apart = weights(largest, len(depots), (), must_move=False), True

    rows = len(live) + len(customers) + len(depots) + len(must) + 1
    counts = np.bincount(customer_of_row, minlength=len(customers)) + 1
    start = np.zeros(len(customers) + 2, dtype=np.int64)
    np.cumsum(counts, out=start[1:-1])
    start[-1] = rows
    rate_at = np.arange(len(live), dtype=np.int64) + customer_of_row  # one short row per earlier customer
    short_at = start[1:-1] - 1
    stay_at = start[-2] + np.arange(len(depots))
    must_at = start[-2] + len(depots) + np.arange(len(must))

    depot = np.full(rows, len(depots), dtype=np.int64)
    money = np.zeros(rows, dtype=np.int64)
    weight = np.zeros(rows, dtype=np.int64)
    at_least = np.zeros(rows, dtype=np.int64)
    at_most = np.full(rows, UNLIMITED, dtype=np.int64)
    rate_row = np.full(rows, NO_RATE, dtype=np.int64)
    depot[rate_at], money[rate_at], rate_row[rate_at] = depot_of_row, rate[live], live
    at_least[rate_at], at_most[rate_at] = lower[live], upper[live]
    money[short_at] = short_charge
    depot[stay_at], money[stay_at] = np.arange(len(depots)), unsent_charge
    at_most[stay_at] = available - must_move
    depot[must_at], money[must_at], at_most[must_at] = must, unsent_charge[must], must_move[must]
    counted = [(aim, short_at[np.array([one == aim for one in short_aim], dtype=bool)]) for aim in PRIORITIES]
    counted = [(aim, at) for aim, at in (*counted, (MUST_MOVE, must_at)) if len(at)]
    if not apart:
        for aim, at in counted:
            weight[at] = aims[aim]

    must_row = np.full(len(depots), NO_RATE, dtype=np.int64)
    must_row[must] = must_at
    problem = Problem(
        supply=np.append(available, _total(ordered)),
        demand=np.append(ordered, _total(available)),
        start=start,
        depot=depot,
        cost=money + weight,
        at_least=at_least,
        at_most=at_most,
    )
    return Model(
        problem,
        tuple(week.depots),
        tuple(week.customers),
        rate_row,
        money,
        must_row,
        aims,
        quantity_places,
        money_places,
        counted=tuple(counted),
        apart=apart,
    )


def limits_of(model: Model) -> tuple[Integers, Integers]:
    """(rows,) least and most that each row of the problem carries."""
    problem = model.problem
    lower = np.zeros(problem.rows, np.int64) if problem.at_least is None else problem.at_least
    upper = np.full(problem.rows, UNLIMITED) if problem.at_most is None else problem.at_most
    return lower, upper


def priority_of(customer: Customer) -> str:
    """Who is served first; a blank priority counts as the last."""
    return customer.priority or PRIORITIES[-1]


def charge_if_short(customer: Customer, rules: Rules) -> Decimal:
    """Per unit: the customer's own charge, else the week's, else 0."""
    own = customer.charge_if_short
    return own if own is not None else rules.charge_if_short or Decimal(0)


STEPS = {"t": Decimal("0.01")}
"""What shares are rounded down to where the desk gives no step; one whole unit for any other unit."""


def step_of(rules: Rules) -> Decimal:
    """What even shares are rounded down to."""
    return rules.step or STEPS.get(rules.unit, Decimal(1))


def charge_if_unsent(depot: Depot) -> Decimal:
    """Per unit kept; blank is 0."""
    return depot.charge_if_unsent or Decimal(0)


def rates_with_surcharge(flat: RateTable, rules: Rules) -> DecimalColumn:
    """Each row's rate with its own surcharge or the week's, exactly: a rate is never rounded."""
    own = flat.decimals.get("surcharge", DecimalColumn.blank(len(flat)))
    week = DecimalColumn.of([rules.fuel_surcharge or Decimal(0)])
    if not (own.values != BLANK).any() and not week.values[0]:
        return flat.rate
    places = max(own.places, week.places)
    percent = own.rescaled(places)
    percent = np.where(percent == BLANK, week.rescaled(places)[0], percent)
    factor = percent + 100 * 10**places
    largest = int(np.abs(flat.rate.values).max(initial=0)) * int(np.abs(factor).max(initial=0))
    if largest > LARGEST:
        raise TooLarge(
            "A rate with its surcharge has too many digits to be kept exactly: use fewer decimals."
        )
    return _trimmed(DecimalColumn(flat.rate.values * factor, flat.rate.places + places + 2))


def _trimmed(column: DecimalColumn) -> DecimalColumn:
    """The same decimals without places that hold only zeros."""
    values, places = column.values, column.places
    while places and not (values % 10).any():
        values, places = values // 10, places - 1
    return DecimalColumn(values, places)


def _integers(values: Iterable[Decimal | None], places: int) -> Integers:
    return np.array([to_integer(value or Decimal(0), places) for value in values], dtype=np.int64)


def _total(values: Integers) -> int:
    return int(sum(values.tolist()))


def _quantity_places(week: Week, flat: RateTable) -> int:
    """Decimal places that every quantity of the week fits in."""
    quantities = [q for d in week.depots.values() for q in (d.available, d.must_move)]
    quantities += [c.ordered for c in week.customers.values()]
    quantities += [hold.quantity for hold in week.holds.values()]
    quantities += [gone.quantity for gone in week.gone.values()]
    if week.rules.when_short == EVEN_SHARE:
        quantities.append(step_of(week.rules))
    limits = [flat.decimals[name].places for name in ("at_least", "at_most") if name in flat.decimals]
    return max(DecimalColumn.of(quantities).places, *limits, places_of_loads(week))


def _money(week: Week, flat: RateTable) -> tuple[Integers, Integers, int]:
    """Rates with surcharge, charges (depots, then customers), and their common places."""
    rate = spread_over_loads(flat, rates_with_surcharge(flat, week.rules), load_sizes(week))
    charges = DecimalColumn.of(
        [charge_if_unsent(d) for d in week.depots.values()]
        + [charge_if_short(c, week.rules) for c in week.customers.values()]
    )
    places = max(rate.places, charges.places)
    return rate.rescaled(places), charges.rescaled(places), places


def _live_rows(week: Week, flat: RateTable) -> tuple[Integers, Integers, Integers]:
    """Rate rows whose depot and customer are in the week, customer by customer, sheet order within.

    Returns positions in `flat`, and each one's customer and depot index.
    """
    customer = _indices(flat.customer_names, week.customers)[flat.customer]
    depot = _indices(flat.depot_names, week.depots)[flat.depot]
    live = np.flatnonzero((customer >= 0) & (depot >= 0))
    live = live[np.argsort(customer[live], kind="stable")]
    return live, customer[live], depot[live]


def _indices(names: tuple[str, ...], records: Mapping[str, object]) -> Integers:
    """Where each name stands among the records, -1 where it does not."""
    place = {name: index for index, name in enumerate(records)}
    return np.array([place.get(name, -1) for name in names], dtype=np.int64)


def _limits(week: Week, flat: RateTable, places: int) -> tuple[Integers, Integers]:
    """Least and most still to go on each row of `flat`: limits and holds, less what has gone on it."""
    blank = DecimalColumn.blank(len(flat))
    lower = flat.decimals.get("at_least", blank).rescaled(places)
    upper = flat.decimals.get("at_most", blank).rescaled(places)
    lower = np.where(lower == BLANK, 0, lower)
    upper = np.where(upper == BLANK, UNLIMITED, upper)
    upper[flat.closed] = 0
    for row in _rows_barred_by_one_depot(week, flat):
        upper[row] = 0
    replaced = superseded(flat)
    upper[replaced] = 0
    lower[replaced] = 0
    if not week.holds and not week.gone:
        return lower, upper
    positions = {int(number): position for position, number in enumerate(week.rates.ids_in_order)}
    for key, hold in week.holds.items():
        number = week.rates.find(key)
        if number is not None:
            lower[positions[number]] = upper[positions[number]] = to_integer(hold.quantity, places)
    for lane, quantity in left(week).row.items():
        used = to_integer(quantity, places)
        for one in week.rates.ids(*lane):
            if one in positions and not replaced[row := positions[one]]:
                lower[row] = max(0, lower[row] - used)
                upper[row] = upper[row] if upper[row] == UNLIMITED else max(0, upper[row] - used)
                break
    return lower, upper


def _rows_barred_by_one_depot(week: Week, flat: RateTable) -> list[int]:
    """Rows of customers whom one named depot serves, from the others."""
    named = {
        c.name: c.one_depot for c in week.customers.values() if c.one_depot not in (None, ANY_SINGLE_DEPOT)
    }
    codes = {code: named[name] for code, name in enumerate(flat.customer_names) if name in named}
    rows = np.flatnonzero(np.isin(flat.customer, list(codes))) if codes else ()
    return [int(row) for row in rows if flat.depot_names[flat.depot[row]] != codes[int(flat.customer[row])]]
