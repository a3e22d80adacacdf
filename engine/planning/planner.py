"""Week to plan: check the figures, solve the aims in order exactly, and say what came out."""

from collections.abc import Callable
from functools import cache

import numpy as np

from engine.exact import TooLarge, to_decimal, to_integer, total_of
from engine.findings import Finding, Severity, by_gravity, stops
from engine.intake.check import check_week
from engine.intake.earlier import Quantities
from engine.load_sizes import load_sizes, loads_of
from engine.loads import NoPlan, prepare
from engine.money import minor_places, round_half_up
from engine.network import Flow, least_cost
from engine.planning.accounts import about_the_plan, gone_shipments, short_of, unsent_of
from engine.planning.aim_by_aim import decided
from engine.planning.contradictions import contradictions
from engine.planning.gone import about_gone, used_up
from engine.planning.load_plan import Improved, ShouldStop, in_words, plan_loads, search_of
from engine.planning.model import EVEN_SHARE, Model, model_of
from engine.planning.near import nearest_flow
from engine.planning.plan import Plan, Proof, Shipment, UnitPrice
from engine.planning.prices import unit_prices
from engine.planning.shortage import evenly_shared
from engine.planning.spread import has_whole_loads
from engine.week import Week

Progress = Callable[[str], None]


USUAL_SECONDS = 60.0
"""How long a search by whole loads may take where nobody says otherwise."""


TOO_FINE_FOR_LOADS = (
    "The rates and charges are too large or too finely divided to keep the aims in order with whole loads: "
    "use fewer decimal places, or a larger currency unit."
)


class NotPlannable(ValueError):
    """The figures cannot be planned; `findings` says where and why, and how to mend it."""

    def __init__(self, findings: tuple[Finding, ...]) -> None:
        self.findings = findings
        super().__init__(" ".join(f.message for f in findings if f.severity is Severity.STOPS))


def plan_week(
    week: Week,
    near: Plan | Quantities | None = None,
    progress: Progress | None = None,
    improved: Improved | None = None,
    should_stop: ShouldStop | None = None,
    time_limit: float | None = USUAL_SECONDS,
) -> Plan:
    """The plan of least cost that serves the aims in order (see `engine.planning.aims`), proved.

    With whole loads it is the best plan found in the time given, with a proved lower bound.

    Args:
        week: what to plan.
        near: an earlier plan; among plans of equal cost the one nearest to it is taken. With whole loads the
            search starts from it, and nearness decides nothing else.
        progress: told in words what is being done.
        improved: with whole loads, told of every better plan and bound.
        should_stop: with whole loads, an event or a question asked often; once set or true, the best plan so
            far is returned.
        time_limit: seconds after which that happens; None searches until the plan is proved best.

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
    if model.apart and has_whole_loads(week):
        raise TooLarge(TOO_FINE_FOR_LOADS)
    if has_whole_loads(week):
        search = search_of(week, model, least_cost(model.problem), found)
        tell("Preparing the search")
        _prepared()
        tell("Searching by whole loads")
        start = near if isinstance(near, Plan) else None
        try:
            return plan_loads(search, start, improved, should_stop, time_limit)
        except NoPlan as refused:
            raise NotPlannable((in_words(week, search, refused), *found)) from None
    model = decided(model)
    flow = nearest_flow(week, model, least_cost(model.problem), near)
    tell("Writing the plan down")
    return _plan(week, model, flow, found)


@cache
def _prepared() -> None:
    """The kernels compiled before the time of a search runs: some seconds the very first time."""
    prepare()


def _plan(week: Week, model: Model, flow: Flow, found: tuple[Finding, ...]) -> Plan:
    gone = gone_shipments(week)
    shipments = (*gone, *_shipments(week, model, flow))
    short, unsent = short_of(model, flow.quantity), unsent_of(model, flow.quantity)
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
        findings=tuple(by_gravity((*found, *about_the_plan(week, model, short, unsent)))),
        model=model,
        flow=flow,
        closure=prices.closure,
        quantity=flow.quantity,
    )


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
    ids, sizes = week.rates.ids_in_order, load_sizes(week)
    places = model.quantity_places + model.money_places
    shipments = []
    for row in used.tolist():
        key = week.rates.key_of(int(ids[model.rate_row[row]]))
        size = sizes.get(int(model.rate_row[row]))
        quantity, rate = int(flow.quantity[row]), int(model.money[row])
        cost = to_decimal(quantity * rate, places)
        shipments.append(
            Shipment(
                key,
                to_decimal(quantity, model.quantity_places),
                to_decimal(rate, model.money_places),
                cost,
                round_half_up(cost, minor),
                loads=loads_of(to_decimal(quantity, model.quantity_places), size),
                held=key in week.holds,
                load_size=size,
            )
        )
    return tuple(shipments)
