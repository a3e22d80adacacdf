"""One case of a stress run solved exactly: the week's arrays altered, the plan found from the one in hand.

Of a large week only the rows near the plan are searched. The prices that this gives are then held against
all other rows; those that would pay are let in, until none would: so every plan is proved for the whole
week, at the price of one pass over its rows.
"""

from dataclasses import dataclass, field, replace
from decimal import Decimal
from typing import NamedTuple

import numpy as np

from engine.compare.stress_cases import Case, ratio
from engine.compare.stress_draws import THOUSAND, factors
from engine.compare.stress_ground import Flags, Ground, Integers, Window, window
from engine.compare.stress_kernels import would_pay
from engine.exact import LARGEST, TooLarge, to_decimal, total, total_of
from engine.network import Contradiction, Flow, Problem, least_cost
from engine.planning.aims import MUST_MOVE, OUT_OF_REACH, Weights, weights
from engine.planning.model import EVEN_SHARE, NO_RATE, Model, limits_of
from engine.planning.plan import Plan
from engine.planning.shortage import evenly_shared, sharing_of
from engine.week import Week

MOST_ROUNDS = 4
"""After letting rows in so often, all are let in."""


class Unanswered(ValueError):
    """A case that cannot be planned; the message says why."""


@dataclass(frozen=True, slots=True)
class Outcome:
    """What a case comes to. Money is exact; what has gone is in the freight.

    short:     who goes short by how much, in sheet order; hit: the same as far as it is more than today
    unsent:    what depots keep; must_stay: what of it should have moved
    moved:     how much goes on other rate rows than today
    why:       why it cannot be planned; empty where it can, and then the figures count
    With whole loads also:
    opening_charge: of the depots that are opened
    at_least:  what any plan that serves as well costs at least, proved; None: the plan itself is proved
    may_serve_better: whether it is not proved that no plan leaves less short, or moves more that must
    only_closes: whether the case takes ways to send away and nothing else, no promise or hold either
    plan:      the plan that was found, so that nobody searches for it again
    """

    case: Case
    freight: Decimal = Decimal(0)
    short_charge: Decimal = Decimal(0)
    unsent_charge: Decimal = Decimal(0)
    short: tuple[tuple[str, Decimal], ...] = ()
    hit: tuple[tuple[str, Decimal], ...] = ()
    unsent: Decimal = Decimal(0)
    must_stay: Decimal = Decimal(0)
    moved: Decimal = Decimal(0)
    why: str = ""
    opening_charge: Decimal = Decimal(0)
    at_least: Decimal | None = None
    may_serve_better: bool = False
    only_closes: bool = False
    plan: Plan | None = field(default=None, compare=False, repr=False)

    @property
    def total(self) -> Decimal:
        """Freight and charges: what was made least."""
        return total_of((self.freight, self.short_charge, self.unsent_charge, self.opening_charge))

    @property
    def gap(self) -> Decimal:
        """How far the plan may be above the least cost, 0 where it is proved."""
        return Decimal(0) if self.at_least is None else total_of((self.total, -self.at_least))

    @property
    def missing(self) -> Decimal:
        """How much goes short in all."""
        return total_of(quantity for _, quantity in self.short)


class Altered(NamedTuple):
    """What a case makes of the week's arrays; the rest stays.

    supply, demand: (depots + 1,), (customers + 1,)
    cost, money:    (rows,), with `money_places` decimal places
    lost:           places of the rate rows that carry nothing any more
    stay, must:     (depots,) most that may stay, most that should not but may
    """

    supply: Integers
    demand: Integers
    cost: Integers
    money: Integers
    money_places: int
    lost: Integers
    stay: Integers
    must: Integers


def outcome_of(ground: Ground, case: Case) -> Outcome:
    """Solves a case; every plan is proved before it is told.

    Raises NotProved where a plan cannot be proved, which would be a fault of ours.
    """
    try:
        altered = alter(ground, case)
        try:
            flow, seen = solve(ground, altered)
        except Contradiction:
            return Outcome(case, why=_against(ground, altered))
    except (Unanswered, TooLarge) as reason:
        return Outcome(case, why=str(reason))
    return _told(ground, case, altered, flow, seen)


def alter(ground: Ground, case: Case) -> Altered:
    """The week's arrays as the case leaves them.

    Raises TooLarge where changed figures do not fit the exact integers, Unanswered where the case names
    what is not in the week.
    """
    model = ground.model
    problem = model.problem
    available, must_move, ordered = ground.available, ground.must_move, ground.ordered
    cost, money, places = problem.cost, model.money, model.money_places
    lost = np.empty(0, dtype=np.int64)
    match case.kind:
        case "depot lost":
            i = _index(model.depots, case.depot, "depot")
            available, must_move = available.copy(), must_move.copy()
            available[i], must_move[i] = min(ground.gone_from[i], available[i]), 0
            lost = ground.promised[problem.depot[ground.promised] == i]
        case "lane lost":
            i, j = (
                _index(model.depots, case.depot, "depot"),
                _index(model.customers, case.customer, "customer"),
            )
            lane = np.arange(problem.start[j], problem.start[j + 1] - 1)
            lost = lane[problem.depot[lane] == i]
        case "haulier lost":
            lost = np.flatnonzero(ground.haulier == _index(ground.hauliers, case.haulier, "haulier"))
        case "orders":
            numerator, denominator = ratio(case.percent)
            whole = np.full(len(ordered), numerator)
            ordered = rounded(ordered, whole, denominator, ground.step, ground.gone_to)
        case "rates":
            numerator, denominator = ratio(case.percent)
            each = np.full(len(ground.hauliers) + 1, numerator)
            cost, money, places = _dearer(ground, each, denominator)
        case "drawn":
            if case.draws is None:
                raise ValueError("A drawn week says nothing of how it is drawn: give it Draws.")
            draws, number = case.draws, case.number
            if draws.orders is not None:
                whole = factors(draws, number, "orders", len(ordered))
                ordered = rounded(ordered, whole, THOUSAND, ground.step, ground.gone_to)
            if draws.stock is not None:
                whole = factors(draws, number, "stock", len(available))
                available = rounded(available, whole, THOUSAND, ground.step, ground.gone_from)
                must_move = np.minimum(must_move, available)
            if draws.rates is not None:
                each = factors(draws, number, "rates", len(ground.hauliers) + 1)
                cost, money, places = _dearer(ground, each, THOUSAND)
    still = np.maximum(available - ground.gone_from, 0)
    still_must = np.maximum(must_move - ground.gone_from, 0)
    wanted = np.maximum(ordered - ground.gone_to, 0)
    return Altered(
        supply=np.append(still, total(wanted)),
        demand=np.append(wanted, total(still)),
        cost=cost,
        money=money,
        money_places=places,
        lost=lost,
        stay=still - still_must,
        must=still_must,
    )


def rounded(whole: Integers, numerators: Integers, denominator: int, step: int, least: Integers) -> Integers:
    """Quantities times factors; each difference is rounded to the step, halves away from 0.

    None falls below what has gone of it (`least`), nor below 0.
    """
    reach = int(np.abs(whole).max(initial=0)) * max(int(np.abs(numerators).max(initial=0)), denominator)
    if 4 * reach + 4 * denominator * step > LARGEST:
        raise TooLarge("The week's quantities are too large to be changed by so fine a percentage.")
    difference = whole * (numerators - denominator)
    steps = (2 * np.abs(difference) + denominator * step) // (2 * denominator * step)
    found: Integers = np.maximum(whole + np.sign(difference) * steps * step, np.minimum(whole, least))
    return np.maximum(found, 0)


def solve(ground: Ground, altered: Altered) -> tuple[Flow, Window]:
    """The plan of an altered week, proved for all its rows, and the rows that it was found on.

    Raises Contradiction where no plan keeps all limits.
    """
    near, whole = ground.near, ground.model.problem
    shares = _even_shares(ground, altered)
    seen, start, left_out = near.window, near.start, near.left_out
    if len(altered.lost) and not seen.is_whole:
        left_out = left_out.copy()
        left_out[altered.lost] = False
    for _ in range(MOST_ROUNDS):
        try:
            flow = least_cost(_problem(ground, altered, seen, shares), start)
        except Contradiction:
            if seen.is_whole:
                raise
            break  # shares that are fixed may need a row that is not there
        if seen.is_whole:
            return flow, seen
        found = np.empty(whole.rows, dtype=np.int64)
        count = would_pay(
            whole.start, whole.depot, altered.cost, left_out, _asked(ground, altered, flow),
            flow.depot_price, flow.customer_price, found,
        )  # fmt: skip
        if count == 0:
            return flow, seen
        entering = found[:count]
        seen, start = window(ground.model, np.union1d(seen.rows, entering)), flow
        left_out = left_out.copy()
        left_out[entering] = False
    every = window(ground.model, np.arange(whole.rows))
    return least_cost(_problem(ground, altered, every, shares), start), every


def _asked(ground: Ground, altered: Altered, flow: Flow) -> Flags:
    """(customers,) where a row that was left out could pay: not where prices moved less than it was dear."""
    near, before = ground.near, ground.near.start
    if altered.cost is not ground.model.problem.cost:
        return np.ones(len(near.margin), dtype=np.bool_)
    rise = int((flow.depot_price - before.depot_price).max())
    return near.margin < flow.customer_price - before.customer_price + rise


def _problem(ground: Ground, altered: Altered, seen: Window, shares: Integers | None) -> Problem:
    """The altered problem on some of its rows."""
    model, base = ground.model, ground.near.start.problem
    whole = model.problem
    if seen is ground.near.window:
        start, depot, cost = base.start, base.depot, base.cost
    else:
        start = np.searchsorted(seen.rows, whole.start).astype(np.int64)
        depot, cost = whole.depot[seen.rows], whole.cost[seen.rows]
        base = whole
    if altered.cost is not whole.cost:
        cost = altered.cost[seen.rows]
    lower, upper = _limits(base)
    lower, upper = (lower.copy(), upper.copy()) if len(lower) == len(seen.rows) else (
        lower[seen.rows], upper[seen.rows]
    )  # fmt: skip
    gone = seen.place[altered.lost]
    gone = gone[gone >= 0]
    lower[gone] = upper[gone] = 0
    upper[seen.stay_at] = altered.stay
    upper[seen.must_at] = altered.must[model.must_row != NO_RATE]
    if shares is not None:
        fixed = shares >= 0
        lower[seen.short_at[fixed]] = upper[seen.short_at[fixed]] = shares[fixed]
    return Problem(altered.supply, altered.demand, start, depot, cost, lower, upper)


def _limits(problem: Problem) -> tuple[Integers, Integers]:
    if problem.at_least is None or problem.at_most is None:
        raise ValueError("A week's problem has limits on its stand-in rows; this one has none.")
    return problem.at_least, problem.at_most


def _even_shares(ground: Ground, altered: Altered) -> Integers | None:
    """(customers,) what goes short where shares are even, -1 where cost decides; None: it always does."""
    if ground.rules.when_short != EVEN_SHARE:
        return None
    every = window(ground.model, np.arange(ground.model.problem.rows))
    model = replace(ground.model, problem=_problem(ground, altered, every, None))
    sharing = sharing_of(model)
    if (sharing.forced > sharing.ordered).any() or (sharing.free < 0).any():
        return None  # a contradiction, which solving will tell
    shared = evenly_shared(Week.of((), ground.customers, (), ground.rules), model)
    if shared is model:
        return None
    lower, upper = limits_of(shared)
    rows = model.short_rows
    return np.where(lower[rows] == upper[rows], lower[rows], -1)


def _dearer(ground: Ground, numerators: Integers, denominator: int) -> tuple[Integers, Integers, int]:
    """Costs, money and its places with rates times a factor by haulier; the last is for rows without one."""
    model = ground.model
    is_rate = model.rate_row != NO_RATE
    largest = int(np.abs(model.money).max(initial=0)) * max(int(np.abs(numerators).max()), denominator)
    if largest > LARGEST // 4:
        raise TooLarge("Rates changed by so fine a percentage have too many digits to be kept exactly.")
    by_row = numerators[ground.haulier]  # NO_CODE is the last place
    money = model.money * np.where(is_rate, by_row, denominator)
    aims = _weights_for(model, int(np.abs(money).max(initial=0)))
    weight = model.problem.cost - model.money
    cost = money.copy()
    marked = np.flatnonzero(weight)
    for aim, old in model.weights.of.items():
        cost[marked[weight[marked] == old]] += aims[aim]
    return cost, money, model.money_places + len(str(denominator)) - 1


def _weights_for(model: Model, largest: int) -> Weights:
    aims = set(model.weights.of) - {MUST_MOVE, OUT_OF_REACH}
    return weights(largest, len(model.depots), aims, must_move=MUST_MOVE in model.weights.of)


def _told(ground: Ground, case: Case, altered: Altered, flow: Flow, seen: Window) -> Outcome:
    model, near = ground.model, ground.near
    used = np.flatnonzero(flow.quantity)
    quantity, money = flow.quantity[used], altered.money[seen.rows[used]]
    is_rate = seen.is_rate[used]
    is_short = (flow.problem.depot[used] == model.stand_in) & ~is_rate
    places = model.quantity_places + altered.money_places
    freight, short, unsent = (
        to_decimal(_products(quantity[part], money[part]), places)
        for part in (is_rate, is_short, ~is_rate & ~is_short)
    )
    before = near.start.quantity if seen is near.window else ground.start.quantity[seen.rows]
    more = flow.quantity - before
    missing = flow.quantity[seen.short_at]
    must_stay = total(flow.quantity[seen.must_at])
    return Outcome(
        case,
        freight=total_of((freight, ground.gone_cost)),
        short_charge=short,
        unsent_charge=unsent,
        short=_named(model, missing),
        hit=_named(model, more[seen.short_at]),
        unsent=to_decimal(total(flow.quantity[seen.stay_at]) + must_stay, model.quantity_places),
        must_stay=to_decimal(must_stay, model.quantity_places),
        moved=to_decimal(total(more[seen.is_rate & (more > 0)]), model.quantity_places),
    )


def _named(model: Model, quantities: Integers) -> tuple[tuple[str, Decimal], ...]:
    return tuple(
        (model.customers[j], to_decimal(int(quantities[j]), model.quantity_places))
        for j in np.flatnonzero(quantities > 0).tolist()
    )


def _products(many: Integers, more: Integers) -> int:
    """The exact sum of products."""
    if len(many) == 0:
        return 0
    reach = int(many.max()) * max(int(more.max()), -int(more.min())) * len(many)
    if reach < LARGEST:
        return int(np.dot(many, more))
    return sum(a * b for a, b in zip(many.tolist(), more.tolist(), strict=True))


def _index(names: tuple[str, ...], name: str, what: str) -> int:
    if name not in names:
        raise Unanswered(f"There is no {what} '{name}' in the week.")
    return names.index(name)


def _against(ground: Ground, altered: Altered) -> str:
    """Why no plan keeps all limits, with names."""
    model = ground.model
    rows = np.setdiff1d(ground.promised, altered.lost)
    lower, _ = limits_of(model)
    names = []
    for ends, have, those in (
        (model.problem.depot, altered.supply, model.depots),
        (model.problem.customer, altered.demand, model.customers),
    ):
        promised = np.zeros(len(have), dtype=np.int64)
        np.add.at(promised, ends[rows], lower[rows])
        names += [those[place] for place in np.flatnonzero(promised > have).tolist()]
    shown = ", ".join(names[:5]) + (f" and {len(names) - 5} more" if len(names) > 5 else "")
    return (
        f"More is held or promised than there would be ({shown})." if names else "No plan keeps all limits."
    )
