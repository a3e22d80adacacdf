"""Among plans of equal cost, the one nearest an earlier plan: as few quantities as possible move."""

from decimal import Decimal

import numpy as np

from engine.exact import places_needed, to_integer, total_of
from engine.figures import RateKey
from engine.intake.earlier import Quantities
from engine.network import Flow
from engine.network.ties import nearest
from engine.planning.gone import left, remaining
from engine.planning.model import NO_RATE, Integers, Model
from engine.planning.plan import Plan
from engine.week import Week


def nearest_flow(week: Week, model: Model, flow: Flow, near: Plan | Quantities | None) -> Flow:
    """The flow of the same cost whose quantities differ least from those of an earlier plan.

    Without an earlier plan: one without needless splits between lanes of equal cost.
    """
    if near is None:
        return nearest(flow)
    return nearest(flow, earlier_quantities(week, model, sent_by(near)))


def sent_by(near: Plan | Quantities) -> Quantities:
    """What an earlier plan sends on each rate row in the whole week, what had gone included."""
    if not isinstance(near, Plan):
        return near
    sums: dict[RateKey, list[Decimal]] = {}
    for one in near.shipments:
        sums.setdefault(one.key, []).append(one.quantity)
    return {key: total_of(quantities) for key, quantities in sums.items()}


def earlier_quantities(week: Week, model: Model, sent: Quantities) -> Integers:
    """(rows,) the earlier plan's quantities on the rows of a model, in its grains, rounded down to them.

    What has gone on a row by now is no longer a choice and taken off. What is short and unsent follows
    from the quantities sent and today's figures.
    """
    problem, rates, gone = model.problem, week.rates, left(week).row
    quantities = np.zeros(problem.rows, dtype=np.int64)
    position = {int(number): place for place, number in enumerate(rates.ids_in_order)} if sent else {}
    row_of = np.full(len(rates.flat), -1, dtype=np.int64)
    rows = np.flatnonzero(model.rate_row != NO_RATE)
    row_of[model.rate_row[rows]] = rows
    for key, quantity in sent.items():
        number = rates.find(key)
        if number is not None and row_of[position[number]] >= 0:
            still = remaining(quantity, gone.get(key[:3]) if key.number == 1 else None)
            quantities[row_of[position[number]]] = _grains(still, model.quantity_places)
    to_customer = np.add.reduceat(quantities, problem.start[:-2]) if model.customers else quantities[:0]
    from_depot = np.zeros(problem.depots, dtype=np.int64)
    np.add.at(from_depot, problem.depot[rows], quantities[rows])
    short = np.maximum(problem.demand[:-1] - to_customer, 0)
    unsent = np.maximum(problem.supply[:-1] - from_depot[:-1], 0)
    stays = model.stay_rows
    limits = problem.at_most[stays] if problem.at_most is not None else unsent
    quantities[model.short_rows] = short
    quantities[stays] = np.minimum(unsent, limits)
    must = model.must_row >= 0
    quantities[model.must_row[must]] = (unsent - np.minimum(unsent, limits))[must]
    quantities[model.joining_row] = max(0, int(problem.supply[-1]) - int(short.sum()))
    return quantities


def _grains(quantity: Decimal, places: int) -> int:
    """Whole grains of a quantity that may be finer than today's figures."""
    needed = places_needed(quantity)
    if needed <= places:
        return to_integer(quantity, places)
    finer: int = 10 ** (needed - places)
    return to_integer(quantity, needed) // finer
