"""Week to plan: check the figures, solve the aims in order exactly, and say what came out."""

from collections.abc import Callable

import numpy as np

from engine.exact import canonical, to_decimal, to_integer, total_of
from engine.findings import Finding, Severity, by_gravity, stops
from engine.intake.check import check_week
from engine.intake.earlier import Quantities
from engine.money import minor_places, round_half_up
from engine.network import Flow, least_cost
from engine.planning.contradictions import contradictions
from engine.planning.gone import about_gone, cost_of, key_of, used_up
from engine.planning.model import EVEN_SHARE, Model, model_of
from engine.planning.near import nearest_flow
from engine.planning.plan import Plan, Proof, Shipment, Short, UnitPrice, Unsent
from engine.planning.prices import unit_prices
from engine.planning.shortage import evenly_shared, shortages
from engine.week import Week

Progress = Callable[[str], None]


class NotPlannable(ValueError):
    """The figures cannot be planned; `findings` says where and why, and how to mend it."""

    def __init__(self, findings: tuple[Finding, ...]) -> None:
        self.findings = findings
        super().__init__(" ".join(f.message for f in findings if f.severity is Severity.STOPS))


def plan_week(week: Week, near: Plan | Quantities | None = None, progress: Progress | None = None) -> Plan:
    """The plan of least cost that serves the aims in order (see `engine.planning.aims`), proved.

    Args:
        week: what to plan.
        near: an earlier plan; among plans of equal cost the one nearest to it is taken.
        progress: told in words what is being done.

    Raises:
        NotPlannable: a finding stops the week, or limits and holds contradict each other.
        TooLarge: a figure does not fit the exact integers.
    """
    tell = progress or (lambda _: None)
    tell("Checking the figures")
    found = check_week(week)
    if not stops(found):
        found = (*found, *about_gone(week), *used_up(week), *contradictions(week))
    if stops(found):
        raise NotPlannable(tuple(by_gravity(found)))
    tell("Building the problem")
    model = model_of(week)
    if week.rules.when_short == EVEN_SHARE:
        tell("Sharing evenly")
        model = evenly_shared(week, model)
    tell("Solving")
    flow = nearest_flow(week, model, least_cost(model.problem), near)
    tell("Writing the plan down")
    return _plan(week, model, flow, found)


def _plan(week: Week, model: Model, flow: Flow, found: tuple[Finding, ...]) -> Plan:
    gone = _gone(week)
    shipments = (*gone, *_shipments(week, model, flow))
    short, unsent = _short(model, flow), _unsent(model, flow)
    freight, short_cost, unsent_cost = _costs(model, flow)
    minor = minor_places(week.rules.currency)
    payable = sum(to_integer(shipment.payable, minor) for shipment in shipments)
    places = model.quantity_places + model.money_places
    prices = unit_prices(model, flow)
    gone_cost = total_of(one.cost for one in gone)
    freight_cost = total_of((to_decimal(freight, places), gone_cost))
    freight_payable = to_decimal(payable, minor)
    total = freight + short_cost + unsent_cost
    return Plan(
        week=week,
        shipments=shipments,
        short=short,
        unsent=unsent,
        freight_cost=freight_cost,
        unsent_cost=to_decimal(unsent_cost, places),
        short_cost=to_decimal(short_cost, places),
        total_cost=total_of((to_decimal(total, places), gone_cost)),
        freight_payable=freight_payable,
        status="short" if short else "met",
        proof=Proof(
            exact=flow.proof.exact,
            lower_bound=total_of((to_decimal(prices.lower_bound, places), gone_cost)),
            gap=to_decimal(total - prices.lower_bound, places),
            rounding=total_of((freight_payable, -freight_cost)),
        ),
        depot_prices=_named_prices(model.depots, prices.depot, model.money_places),
        customer_prices=_named_prices(model.customers, prices.customer, model.money_places),
        findings=tuple(by_gravity((*found, *_about_the_plan(week, model, short, unsent)))),
        model=model,
        flow=flow,
        closure=prices.closure,
    )


def _gone(week: Week) -> tuple[Shipment, ...]:
    """What has gone, at the rates it went at."""
    minor = minor_places(week.rules.currency)
    found = []
    for one in week.gone.values():
        cost = cost_of(one)
        found.append(
            Shipment(key_of(one), one.quantity, one.rate, cost, round_half_up(cost, minor), gone=one.name)
        )
    return tuple(found)


def _costs(model: Model, flow: Flow) -> tuple[int, int, int]:
    """Exact freight, charges for short and charges for unsent, in integers."""
    used = np.flatnonzero(flow.quantity)
    cost = [q * c for q, c in zip(flow.quantity[used].tolist(), model.money[used].tolist(), strict=True)]
    is_rate = (model.rate_row[used] >= 0).tolist()
    is_short = (model.problem.depot[used] == model.stand_in).tolist()
    freight = sum(c for c, rate in zip(cost, is_rate, strict=True) if rate)
    short = sum(c for c, one in zip(cost, is_short, strict=True) if one)
    return freight, short, sum(cost) - freight - short


def _named_prices(names: tuple[str, ...], prices: list[int], places: int) -> tuple[UnitPrice, ...]:
    return tuple(
        UnitPrice(name, to_decimal(price, places)) for name, price in zip(names, prices, strict=True)
    )


def _shipments(week: Week, model: Model, flow: Flow) -> tuple[Shipment, ...]:
    """The used rate rows, in sheet order."""
    used = np.flatnonzero((flow.quantity > 0) & (model.rate_row >= 0))
    used = used[np.argsort(model.rate_row[used], kind="stable")]
    minor = minor_places(week.rules.currency)
    ids = week.rates.ids_in_order
    places = model.quantity_places + model.money_places
    shipments = []
    for row in used.tolist():
        key = week.rates.key_of(int(ids[model.rate_row[row]]))
        quantity, rate = int(flow.quantity[row]), int(model.money[row])
        cost = to_decimal(quantity * rate, places)
        shipments.append(
            Shipment(
                key,
                to_decimal(quantity, model.quantity_places),
                to_decimal(rate, model.money_places),
                cost,
                round_half_up(cost, minor),
                held=key in week.holds,
            )
        )
    return tuple(shipments)


def _short(model: Model, flow: Flow) -> tuple[Short, ...]:
    found = []
    for j, row in enumerate(model.short_rows.tolist()):
        quantity, charge = int(flow.quantity[row]), int(model.money[row])
        if quantity:
            found.append(
                Short(
                    model.customers[j],
                    to_decimal(quantity, model.quantity_places),
                    to_decimal(charge, model.money_places),
                    to_decimal(quantity * charge, model.quantity_places + model.money_places),
                )
            )
    return tuple(found)


def _unsent(model: Model, flow: Flow) -> tuple[Unsent, ...]:
    found = []
    for i, (stay, must) in enumerate(zip(model.stay_rows.tolist(), model.must_row.tolist(), strict=True)):
        must_stay = int(flow.quantity[must]) if must >= 0 else 0
        quantity, charge = int(flow.quantity[stay]) + must_stay, int(model.money[stay])
        if quantity:
            found.append(
                Unsent(
                    model.depots[i],
                    to_decimal(quantity, model.quantity_places),
                    to_decimal(charge, model.money_places),
                    to_decimal(quantity * charge, model.quantity_places + model.money_places),
                    to_decimal(must_stay, model.quantity_places),
                )
            )
    return tuple(found)


def _about_the_plan(
    week: Week, model: Model, short: tuple[Short, ...], unsent: tuple[Unsent, ...]
) -> tuple[Finding, ...]:
    """Remarks that only the plan shows."""
    found = []
    unpriced = [
        one.customer
        for one in short
        if week.customers[one.customer].charge_if_short is None and week.rules.charge_if_short is None
    ]
    if unpriced:
        found.append(
            Finding(
                Severity.CHECK,
                "freight alone decided who is short",
                f"{_listed(unpriced)} went short and no charge if short is given: freight alone decided who.",
                "Give a charge if short to the customers or to the week if that is not what you want.",
            )
        )
    unit = week.rules.unit
    found.extend(
        Finding(
            Severity.CHECK,
            "short",
            group.sentence(unit),
            "Add stock, open a lane or raise a limit; or lower the orders.",
        )
        for group in (shortages(model) if short else ())
    )
    found.extend(
        Finding(
            Severity.CHECK,
            "must move not reached",
            f"{one.depot} keeps {canonical(one.must_move)} {unit} that must move: "
            "orders and rates leave no way to send it.",
            "Raise an order, open a lane, or lower Must move.",
        )
        for one in unsent
        if one.must_move
    )
    return tuple(found)


def _listed(names: list[str]) -> str:
    """The first five names and how many there are."""
    shown = ", ".join(names[:5])
    return shown if len(names) <= 5 else f"{shown} and {len(names) - 5} more"
