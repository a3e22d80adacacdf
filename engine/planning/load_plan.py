"""A week with whole vehicles to a plan: solve, then write down quantities, loads, what is payable, the bound.

What a shipment costs is worked out again here, from its quantity and the figures, and must add up to what
the solver said: a plan that does not is not handed out.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from decimal import Decimal
from functools import cached_property
from threading import Event

import numpy as np

from engine.exact import Integers, canonical, places_needed, to_decimal, to_integer, total_of
from engine.figures import PRIORITIES
from engine.findings import Finding, Severity, by_gravity
from engine.loads import LoadFlow, LoadProblem, NoPlan, Progress, least_cost_loads
from engine.money import minor_places, round_half_up
from engine.network import Flow
from engine.network.closure import Closure
from engine.planning.accounts import about_the_plan, gone_shipments, short_of, unsent_of
from engine.planning.gone import left
from engine.planning.load_week import LoadWeek, load_week
from engine.planning.model import Model
from engine.planning.plan import Missed, Opening, Plan, Proof, Shipment, Wholeness
from engine.planning.prices import unit_prices
from engine.week import Week, describe

ShouldStop = Callable[[], bool] | Event


class NotAdded(ArithmeticError):
    """A plan's shipments do not add up to its cost, which would be a fault of ours."""


@dataclass(frozen=True, eq=False)
class Improving:
    """How far a search is: `plan` makes the best plan so far, valid and checked, at any time.

    cost, lower_bound: of that plan, charges and what has gone included; short: what goes short in it, which
    comes before cost; seconds: since the start
    """

    doing: str
    cost: Decimal
    lower_bound: Decimal
    short: Decimal
    seconds: float
    plan: Callable[[], Plan]

    @property
    def gap(self) -> Decimal:
        """How far the best plan may be above the least cost."""
        return total_of((self.cost, -self.lower_bound))


Improved = Callable[[Improving], None]


@dataclass(frozen=True, eq=False)
class Search:
    """Everything that a plan is made from, whichever flow the search has come to.

    model: with even shares worked in; network: its least-cost flow, loads divisible
    divisible: what that costs, with what has gone; aims: what counts in it against each aim before cost
    """

    week: Week
    model: Model
    network: Flow
    found: tuple[Finding, ...]
    loads: LoadWeek
    divisible: Decimal
    aims: tuple[int, ...]

    @cached_property
    def closure(self) -> Closure:
        """The chains of exchanges in the network plan."""
        return unit_prices(self.model, self.network).closure

    def bound_of(self, flow: LoadFlow) -> Decimal:
        """What any plan as good in the aims as this flow costs at least.

        Whatever a plan sends costs no more with loads divisible. So where a flow serves the aims as well as
        the network plan does, nothing can serve them better, and the network plan's cost is a bound too.
        """
        proved = _whole_cost(self, flow.lower_bound)
        opened = total_of(one.charge for one in opened_by_gone(self.week))
        return max(proved, total_of((self.divisible, opened))) if self.best_aims(flow) else proved

    def best_aims(self, flow: LoadFlow) -> bool:
        """Whether a flow serves the aims as well as if loads were divisible."""
        return _aims_in(self.loads.problem, flow.short, flow.unsent) == self.aims


def plan_loads(
    search: Search,
    start: Plan | None = None,
    improved: Improved | None = None,
    should_stop: ShouldStop | None = None,
    time_limit: float | None = None,
) -> Plan:
    """The best plan found by the aims in order and then by cost, with a proved bound.

    start: an earlier plan with whole loads, to search from where it still fits
    improved: told of every better plan and bound; should_stop, time_limit: as for `least_cost_loads`

    Raises:
        NoPlan: what must be sent cannot be sent together.
    """

    def tell(progress: Progress) -> None:
        if improved is not None:
            improved(_improving(search, progress))

    earlier = None if start is None or start.whole is None else _as_start(search, start, start.whole.loads)
    flow = least_cost_loads(
        search.loads.problem, earlier, tell if improved else None, should_stop, time_limit
    )
    return plan_of(search, flow)


def _as_start(search: Search, start: Plan, earlier: LoadFlow) -> LoadFlow | None:
    """An earlier plan's quantities on the rows of this week that go by the same name; None: no row does."""
    week, model, rows = search.week, search.model, search.loads.rows
    ids = week.rates.ids_in_order[model.rate_row[rows]].tolist()
    place = {number: row for row, number in enumerate(ids)}
    quantity = np.zeros(len(rows), dtype=np.int64)
    for one in start.shipments:
        row = place.get(week.rates.find(one.key))
        if row is not None and not one.gone and places_needed(one.quantity) <= model.quantity_places:
            quantity[row] += to_integer(one.quantity, model.quantity_places)
    return replace(earlier, quantity=quantity) if quantity.any() else None


def search_of(week: Week, model: Model, network: Flow, found: tuple[Finding, ...]) -> Search:
    """The search for a week whose network plan is known."""
    loads = load_week(week, model)
    places = model.quantity_places + model.money_places
    used = np.flatnonzero(network.quantity)
    cost = sum(
        a * b for a, b in zip(network.quantity[used].tolist(), model.money[used].tolist(), strict=True)
    )
    gone = total_of(one.cost for one in gone_shipments(week))
    short = network.quantity[model.short_rows] - loads.fixed_short
    unsent = network.quantity[model.stay_rows].copy()
    must = np.flatnonzero(model.must_row >= 0)
    unsent[must] += network.quantity[model.must_row[must]]
    aims = _aims_in(loads.problem, short, unsent)
    return Search(week, model, network, found, loads, total_of((to_decimal(cost, places), gone)), aims)


def _aims_in(problem: LoadProblem, short: Integers, unsent: Integers) -> tuple[int, ...]:
    """Units short by priority, of customers who may not decline, and units kept that must move."""
    counted = ~problem.may_decline
    ranks = [int(short[counted & (problem.rank == rank)].sum()) for rank in range(len(PRIORITIES))]
    kept = np.maximum(0, unsent - (problem.supply - problem.must_move))
    return (*ranks, int(kept.sum()))


def in_words(week: Week, search: Search, refused: NoPlan) -> Finding:
    """Why what must be sent cannot be sent together, as a finding that stops."""
    rows = [_key_words(week, search, row) for row in refused.rows]
    names = {
        "customer": search.model.customers,
        "depot": search.model.depots,
        "haulier": tuple(week.hauliers),
    }
    at = names.get(refused.what)
    where = f" at {at[refused.index]}" if at and 0 <= refused.index < len(at) else ""
    listed = "; ".join(rows[:10]) or "see Holds and At least"
    return Finding(
        Severity.STOPS,
        "contradiction",
        f"These figures contradict each other{where}: what is held or must go cannot go together within "
        f"loads a day, smallest drops, One depot and what hauliers carry: {listed}.",
        "Lower or lift any one of these, or raise the limit.",
    )


def _key_words(week: Week, search: Search, row: int) -> str:
    position = int(search.model.rate_row[search.loads.rows[row]])
    return describe(week.rates.key_of(int(week.rates.ids_in_order[position])))


def _improving(search: Search, progress: Progress) -> Improving:
    cost, bound = _whole_cost(search, progress.best.cost), search.bound_of(progress.best)
    best, places = progress.best, search.model.quantity_places
    short = to_decimal(int(best.short.sum()) + int(search.loads.fixed_short.sum()), places)
    return Improving(progress.doing, cost, bound, short, progress.seconds, lambda: plan_of(search, best))


def _whole_cost(search: Search, cost: int) -> Decimal:
    """A cost of the search with what even shares leave short and what has gone."""
    loads = search.loads
    short = sum(
        a * b for a, b in zip(loads.fixed_short.tolist(), loads.problem.short_cost.tolist(), strict=True)
    )
    gone = total_of(one.cost for one in gone_shipments(search.week))
    opened = total_of(one.charge for one in opened_by_gone(search.week))
    return total_of((to_decimal(cost + short, loads.quantity_places + loads.money_places), gone, opened))


def opened_by_gone(week: Week) -> tuple[Opening, ...]:
    """The depots that are open already, since something has left them, and what that costs."""
    gone = left(week).depot
    return tuple(
        Opening(depot.name, depot.opening_charge)
        for depot in week.depots.values()
        if depot.opening_charge and depot.name in gone
    )


def plan_of(search: Search, flow: LoadFlow) -> Plan:
    """The plan that a flow of the search stands for.

    Raises:
        NotAdded: its shipments and charges are not what the flow says it costs.
    """
    week, model = search.week, search.model
    quantity = _quantities(search, flow)
    gone = gone_shipments(week)
    shipments = (*gone, *shipments_of(week, model, search.loads, flow.quantity))
    short, unsent = short_of(model, quantity), unsent_of(model, quantity)
    openings = (*opened_by_gone(week), *openings_of(model, search.loads, flow.quantity))
    freight = total_of(one.cost for one in shipments)
    short_cost, unsent_cost = total_of(s.cost for s in short), total_of(u.cost for u in unsent)
    opening_cost = total_of(one.charge for one in openings)
    total = total_of((freight, short_cost, unsent_cost, opening_cost))
    if total != _whole_cost(search, flow.cost):
        raise NotAdded(f"The plan adds up to {total}, but was said to cost {_whole_cost(search, flow.cost)}.")
    bound = search.bound_of(flow)
    exact = bound == total if search.best_aims(flow) else flow.proved
    payable = total_of(one.payable for one in shipments)
    remarks = (*search.found, *about_the_plan(week, model, short, unsent))
    plan = Plan(
        week=week,
        shipments=shipments,
        short=short,
        unsent=unsent,
        freight_cost=freight,
        unsent_cost=unsent_cost,
        short_cost=short_cost,
        total_cost=total,
        freight_payable=payable,
        status="short" if short else "met",
        proof=Proof(exact, bound, total_of((total, -bound)), total_of((payable, -freight))),
        depot_prices=(),
        customer_prices=(),
        findings=(),
        model=model,
        flow=search.network,
        closure=search.closure,
        quantity=quantity,
        openings=openings,
        opening_cost=opening_cost,
        whole=_wholeness(search, flow),
    )
    return replace(plan, findings=tuple(by_gravity((*remarks, *_about_the_search(plan)))))


def _quantities(search: Search, flow: LoadFlow) -> Integers:
    """(rows of the model,) what goes on each, what is short and what stays."""
    model, problem = search.model, search.model.problem
    quantity = np.zeros(problem.rows, dtype=np.int64)
    quantity[search.loads.rows] = flow.quantity
    short = flow.short + search.loads.fixed_short
    quantity[model.short_rows] = short
    stays = model.stay_rows
    most = flow.unsent if problem.at_most is None else problem.at_most[stays]
    quantity[stays] = np.minimum(flow.unsent, most)
    must = model.must_row >= 0
    quantity[model.must_row[must]] = (flow.unsent - np.minimum(flow.unsent, most))[must]
    quantity[model.joining_row] = max(0, int(problem.supply[-1]) - int(short.sum()))
    return quantity


def shipments_of(week: Week, model: Model, loads: LoadWeek, quantity: Integers) -> tuple[Shipment, ...]:
    """The used rate rows, in sheet order; `quantity` is what goes on each rate row of `loads`."""
    problem, q, m = loads.problem, loads.quantity_places, loads.money_places
    position = model.rate_row[loads.rows]
    used = np.flatnonzero(quantity)
    minor = minor_places(week.rules.currency)
    found = []
    for row in used[np.argsort(position[used], kind="stable")].tolist():
        key = week.rates.key_of(int(week.rates.ids_in_order[position[row]]))
        cost = to_decimal(cost_on_row(problem, row, int(quantity[row])), q + m)
        size, once = int(problem.load_size[row]), int(problem.charge_per_use[row])
        found.append(
            Shipment(
                key,
                to_decimal(int(quantity[row]), q),
                to_decimal(int(loads.rate[row]), m),
                cost,
                round_half_up(cost, minor),
                loads=loads_on_row(problem, row, int(quantity[row])) if size else None,
                held=key in week.holds,
                per="load" if loads.per_load[row] else "unit",
                load_size=to_decimal(size, q) if size else None,
                once=to_decimal(once, q + m) if once else None,
            )
        )
    return tuple(found)


def loads_on_row(problem: LoadProblem, row: int, quantity: int) -> int:
    """How many vehicles a quantity takes on a row, the last of them perhaps not full."""
    size = int(problem.load_size[row])
    return -(-quantity // size) if size else 1


def cost_on_row(problem: LoadProblem, row: int, quantity: int) -> int:
    """What a quantity above 0 costs on a row: full loads, the last load, and what is due once."""
    loads = loads_on_row(problem, row, quantity)
    size = int(problem.load_size[row]) or quantity
    rate, trip = int(problem.per_unit[row]), int(problem.trip_minimum[row])
    full = max(rate * size, trip) if trip else rate * size
    last = rate * (quantity - (loads - 1) * size)
    last = max(last, trip) if trip else last
    return (loads - 1) * full + last + loads * int(problem.per_load[row]) + int(problem.charge_per_use[row])


def openings_of(model: Model, loads: LoadWeek, quantity: Integers) -> tuple[Opening, ...]:
    """The depots that are opened, and what that costs; `quantity` is what goes on each rate row."""
    problem, places = loads.problem, loads.quantity_places + loads.money_places
    sends = np.bincount(problem.depot[quantity > 0], minlength=problem.depots) > 0
    return tuple(
        Opening(model.depots[i], to_decimal(int(problem.opening_charge[i]), places))
        for i in np.flatnonzero(sends & (problem.opening_charge > 0)).tolist()
    )


def _wholeness(search: Search, flow: LoadFlow) -> Wholeness:
    model, network = search.model, search.network
    short = int(network.quantity[model.short_rows].sum())
    return Wholeness(
        flow,
        divisible_cost=search.divisible,
        divisible_short=to_decimal(short, model.quantity_places),
        missed=tuple(
            Missed(
                aim.name,
                PRIORITIES[aim.rank] if aim.rank >= 0 else "",
                to_decimal(aim.value, model.quantity_places),
                to_decimal(aim.lower_bound, model.quantity_places),
            )
            for aim in flow.aims
            if not aim.proved and not search.best_aims(flow)
        ),
    )


def _about_the_search(plan: Plan) -> list[Finding]:
    """Remarks on what whole loads did to the plan."""
    whole, unit, currency = plan.whole, plan.week.rules.unit, plan.week.rules.currency
    if whole is None:
        return []
    found = []
    short = total_of(one.quantity for one in plan.short)
    if short > whole.divisible_short:
        more = canonical(total_of((short, -whole.divisible_short)))
        found.append(
            Finding(
                Severity.CHECK,
                "short by whole loads",
                f"{more} {unit} go short that could be brought if vehicles could be sent in parts, without "
                "limits on loads and hauliers, smallest drops and One depot.",
                "Raise loads a day or a haulier's limit, or lower a smallest drop.",
            )
        )
    for one in whole.missed:
        what = f"short in priority {one.priority}" if one.aim == "short" else "kept that must move"
        found.append(
            Finding(
                Severity.CHECK,
                "not proved",
                f"{canonical(one.units)} {unit} are {what}; at least {canonical(one.at_least)} {unit} must "
                "be. The search ended before it was clear.",
                "Give it more time.",
            )
        )
    if plan.proof.gap:
        found.append(
            Finding(
                Severity.NOTE,
                "not proved",
                f"A cheaper plan may exist: this one is at most {canonical(plan.proof.gap)} {currency} above "
                "the least cost that is proved.",
                "Give the search more time.",
            )
        )
    return found


def cost_of_wholeness(plan: Plan) -> Decimal | None:
    """What the plan costs above the network plan that could send parts of vehicles; None without loads."""
    if plan.whole is None:
        return None
    return total_of((plan.total_cost, -plan.whole.divisible_cost))
