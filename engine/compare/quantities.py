"""Quantities on the rows of a model as a costed plan: shipments, what is short and unsent, and the money."""

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from typing import Protocol

import numpy as np

from engine.exact import to_decimal, total_of
from engine.money import minor_places, round_half_up
from engine.planning.accounts import gone_shipments
from engine.planning.differences import Delivered
from engine.planning.load_plan import opened_by_gone, openings_of, shipments_of
from engine.planning.load_week import load_week
from engine.planning.model import NO_RATE, Integers, Model
from engine.planning.plan import Shipment, Short, Unsent
from engine.planning.spread import has_whole_loads
from engine.week import Week


class Priced(Delivered, Protocol):
    """What has quantities and all its costs: a plan, an issued one, a usual one."""

    @property
    def unsent(self) -> tuple[Unsent, ...]: ...
    @property
    def freight_cost(self) -> Decimal: ...


@dataclass(frozen=True, eq=False)
class Costed:
    """Quantities with what they cost: as a plan has them, but without a claim to be the cheapest."""

    shipments: tuple[Shipment, ...]
    short: tuple[Short, ...]
    unsent: tuple[Unsent, ...]
    freight_cost: Decimal
    freight_payable: Decimal
    short_cost: Decimal
    unsent_cost: Decimal
    opening_cost: Decimal = Decimal(0)

    @property
    def status(self) -> str:
        return "short" if self.short else "met"


def costs_of(plan: Priced) -> Costed:
    """The quantities and costs of a plan, without all that it was worked out from."""
    return Costed(
        plan.shipments,
        plan.short,
        plan.unsent,
        plan.freight_cost,
        plan.freight_payable,
        plan.short_cost,
        plan.unsent_cost,
        plan.opening_cost,
    )


def charges_of(plan: Priced) -> Decimal:
    """Everything that is not freight: for short and unsent, and for opening depots."""
    return total_of((plan.short_cost, plan.unsent_cost, plan.opening_cost))


def costed(week: Week, model: Model, sent: Integers) -> Costed:
    """What these quantities cost; what has gone stands in front, as in a plan.

    sent: (rows,) grains on the model's rate rows; what is short and unsent follows
    """
    going, opening_cost = _going(week, model, sent)
    shipments = (*gone_shipments(week), *going)
    short, unsent = _short(model, sent), _unsent(model, sent)
    return Costed(
        shipments,
        short,
        unsent,
        freight_cost=total_of(one.cost for one in shipments),
        freight_payable=total_of(one.payable for one in shipments),
        short_cost=total_of(one.cost for one in short),
        unsent_cost=total_of(one.cost for one in unsent),
        opening_cost=opening_cost,
    )


def _going(week: Week, model: Model, sent: Integers) -> tuple[Sequence[Shipment], Decimal]:
    """What is still to go, with whole vehicles where the week has them, and what opening depots costs."""
    if not has_whole_loads(week):
        return _shipments(week, model, sent), Decimal(0)
    loads = load_week(week, model)
    quantity = sent[loads.rows]
    openings = (*opened_by_gone(week), *openings_of(model, loads, quantity))
    return shipments_of(week, model, loads, quantity), total_of(one.charge for one in openings)


def _shipments(week: Week, model: Model, sent: Integers) -> list[Shipment]:
    used = np.flatnonzero((sent > 0) & (model.rate_row != NO_RATE))
    used = used[np.argsort(model.rate_row[used], kind="stable")]
    minor, ids = minor_places(week.rules.currency), week.rates.ids_in_order
    found = []
    for row in used.tolist():
        key = week.rates.key_of(int(ids[model.rate_row[row]]))
        quantity, rate = int(sent[row]), int(model.money[row])
        cost = to_decimal(quantity * rate, model.quantity_places + model.money_places)
        found.append(
            Shipment(
                key,
                to_decimal(quantity, model.quantity_places),
                to_decimal(rate, model.money_places),
                cost,
                round_half_up(cost, minor),
                held=key in week.holds,
            )
        )
    return found


def _short(model: Model, sent: Integers) -> tuple[Short, ...]:
    problem, rates = model.problem, np.flatnonzero(model.rate_row != NO_RATE)
    customer = np.repeat(np.arange(problem.customers), np.diff(problem.start))[rates]
    missing = problem.demand[:-1].copy()
    np.subtract.at(missing, customer, sent[rates])
    charges = model.money[model.short_rows].tolist()
    return tuple(
        Short(
            model.customers[j],
            to_decimal(missing[j], model.quantity_places),
            to_decimal(charges[j], model.money_places),
            to_decimal(int(missing[j]) * charges[j], model.quantity_places + model.money_places),
        )
        for j in np.flatnonzero(missing).tolist()
    )


def _unsent(model: Model, sent: Integers) -> tuple[Unsent, ...]:
    problem, rates = model.problem, np.flatnonzero(model.rate_row != NO_RATE)
    kept = problem.supply[:-1].copy()
    np.subtract.at(kept, problem.depot[rates], sent[rates])
    charges = model.money[model.stay_rows].tolist()
    found = []
    for i in np.flatnonzero(kept).tolist():
        quantity, must = int(kept[i]), _must_move(model, i)
        free = int(problem.supply[i]) - must
        found.append(
            Unsent(
                model.depots[i],
                to_decimal(quantity, model.quantity_places),
                to_decimal(charges[i], model.money_places),
                to_decimal(quantity * charges[i], model.quantity_places + model.money_places),
                to_decimal(max(0, quantity - free), model.quantity_places),
            )
        )
    return tuple(found)


def _must_move(model: Model, i: int) -> int:
    row, most = int(model.must_row[i]), model.problem.at_most
    return int(most[row]) if row >= 0 and most is not None else 0
