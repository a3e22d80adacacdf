"""What sheet *Proof* shows, as arrays: prices, limits, and each row's rate less its prices.

A row's cost less its prices has two parts: units of the aims that come before cost, and money. The
first decides, the second counts where the first is 0; so both together decide like the weights of
`engine.planning.aims` do, with numbers that a spreadsheet can hold.
"""

from decimal import Decimal
from typing import NamedTuple

import numpy as np

from engine.exact import Integers, to_decimal
from engine.money import minor_places
from engine.network.problem import UNLIMITED
from engine.planning.aims import MUST_MOVE
from engine.planning.model import NO_RATE, Model
from engine.planning.plan import Plan
from engine.planning.prices import chain_prices


class Prices(NamedTuple):
    """What a unit is worth at each place, the stand-in last: in money, and in units of the aims.

    money: int64, `model.money_places`
    aims:  int64, one number for all aims: units of each, the highest in the highest place
    """

    money: Integers
    aims: Integers


class ProofFigures(NamedTuple):
    """Everything the sheet needs, in the model's integers.

    depot, customer: prices, the stand-ins last
    rows:            (listed,) rows of the problem that are rate rows, customer by customer
    money, aims:     (rows of the problem,) cost less prices, in money and in aims
    sign:            (rows of the problem,) which way a row speaks: aims first, then money
    short_aim:       (customers,) what a unit short counts for the aims
    must_aim:        what a unit that must move and stays counts for the aims
    payable_places:  decimal places that the currency is paid in
    """

    depot: Prices
    customer: Prices
    rows: Integers
    money: Integers
    aims: Integers
    sign: Integers
    short_aim: Integers
    must_aim: int
    payable_places: int

    @property
    def aims_matter(self) -> bool:
        """Whether any price has a part that comes before money."""
        return bool(self.depot.aims.any() or self.customer.aims.any())


def proof_figures(plan: Plan) -> ProofFigures:
    """The figures of the proof, taken apart into aims and money."""
    model = plan.model
    problem = model.problem
    depot_sums, customer_sums = chain_prices(model, plan.closure)
    depot_units, depot_money = _apart(model, depot_sums)
    customer_units, customer_money = _apart(model, customer_sums)
    cost_units, _ = _apart(model, problem.cost - model.money)
    names = list(model.weights.of)  # the highest aim first
    for one in reversed(model.decided.prices if model.decided else ()):
        names.insert(0, one.aim)
        depot_units.insert(0, one.depot - one.depot[-1])
        customer_units.insert(0, one.customer + one.depot[-1])
        cost_units.insert(0, np.zeros(problem.rows, dtype=np.int64))
        cost_units[0][one.rows] = 1
    left = [
        cost_units[a] - depot_units[a][problem.depot] - customer_units[a][problem.customer]
        for a in range(len(names))
    ]
    base = 1 + 2 * max((int(np.abs(units).max(initial=0)) for units in left), default=0)
    base = max(base, 10)  # tens read more easily
    depot = Prices(depot_money, _joined(depot_units, base, len(depot_money)))
    customer = Prices(customer_money, _joined(customer_units, base, len(customer_money)))
    cost_aims = _joined(cost_units, base, problem.rows)
    money = model.money - depot.money[problem.depot] - customer.money[problem.customer]
    aims = cost_aims - depot.aims[problem.depot] - customer.aims[problem.customer]
    return ProofFigures(
        depot,
        customer,
        rows=np.flatnonzero(model.rate_row != NO_RATE),
        money=money,
        aims=aims,
        sign=np.sign(np.where(aims != 0, aims, money)),
        short_aim=cost_aims[model.short_rows],
        must_aim=base ** (len(names) - 1 - names.index(MUST_MOVE)) if MUST_MOVE in names else 0,
        payable_places=minor_places(plan.week.rules.currency),
    )


def check_codes(plan: Plan, figures: ProofFigures) -> Integers:
    """(rows of the problem,) 0: in order; 1: could improve the plan; 2: outside its limits."""
    quantity, sign = plan.flow.quantity, figures.sign
    least, most = plan.model.stated_limits
    improves = ((sign > 0) & (quantity > least)) | ((sign < 0) & (quantity < most))
    return np.where((quantity < least) | (quantity > most), 2, improves.astype(np.int64))


def left_over(plan: Plan, figures: ProofFigures) -> tuple[Integers, Integers]:
    """What each depot could send less what it sends and keeps; what each customer ordered less what it gets
    and goes short of. Both are 0 in a plan that adds up.
    """
    model, problem, quantity = plan.model, plan.model.problem, plan.flow.quantity
    depots, customers = problem.supply[:-1].copy(), problem.demand[:-1].copy()
    np.subtract.at(depots, problem.depot[figures.rows], quantity[figures.rows])
    np.subtract.at(customers, problem.customer[figures.rows], quantity[figures.rows])
    return depots - kept(plan), customers - quantity[model.short_rows]


def kept(plan: Plan) -> Integers:
    """(depots,) what each depot keeps."""
    return plan.flow.quantity[plan.model.stay_rows] + kept_of_must(plan)


def kept_of_must(plan: Plan) -> Integers:
    """(depots,) what each depot keeps of what must move."""
    must = plan.model.must_row
    return np.where(must == NO_RATE, 0, plan.flow.quantity[must])


def forced(model: Model, figures: ProofFigures) -> Integers:
    """(rows of the problem,) the limit that holds each row, where its sign says that one does; else 0."""
    least, most = model.stated_limits
    at = np.where(figures.sign > 0, least, 0)
    return np.where((figures.sign < 0) & (most != UNLIMITED), most, at)


def lower_bound(plan: Plan, figures: ProofFigures) -> Decimal:
    """The cost that the prices alone force, by the identity of `engine.network.proof` in money alone."""
    model, problem = plan.model, plan.model.problem
    at = forced(model, figures)
    held = np.flatnonzero(at)
    bound = (
        _dot(problem.supply, figures.depot.money)
        + _dot(problem.demand, figures.customer.money)
        + _dot(at[held], figures.money[held])
    )
    return to_decimal(bound, model.quantity_places + model.money_places)


def _apart(model: Model, sums: Integers) -> tuple[list[Integers], Integers]:
    """Sums of weights and money taken apart: units of each aim, the highest first, and money."""
    units = []
    rest = sums.astype(np.int64)
    for weight in model.weights.of.values():
        count = (2 * rest + weight) // (2 * weight)  # to the nearest multiple, as Weights.split does
        units.append(count)
        rest = rest - count * weight
    return units, rest


def _joined(units: list[Integers], base: int, size: int) -> Integers:
    """Units of each aim as the digits of one number."""
    number = np.zeros(size, dtype=np.int64)
    for count in units:
        number = number * base + count
    return number


def _dot(left: Integers, right: Integers) -> int:
    return sum(a * b for a, b in zip(left.tolist(), right.tolist(), strict=True))
