"""What may happen to a week: the cases of a stress run, in words and as changes to the week.

What has gone has gone: no case takes it back. A lost depot keeps nothing and takes its holds and promises
with it, a lost lane or haulier its rows' holds and promises.
"""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from decimal import Decimal
from typing import Literal

import numpy as np

from engine.changes import Alter, Change, Lift, Together
from engine.compare.stress_draws import THOUSAND, Draws, factors
from engine.exact import canonical, places_needed, to_decimal, to_integer, total_of
from engine.figures import RateKey
from engine.planning.gone import left
from engine.planning.model import step_of
from engine.planning.plan import Plan, Shipment
from engine.rates import NO_CODE
from engine.week import Week

Kind = Literal["as it is", "depot lost", "lane lost", "haulier lost", "orders", "rates", "drawn"]


@dataclass(frozen=True, slots=True)
class Case:
    """One thing that may happen. Which fields count depends on `kind`; `percent` is a change, 5 or -5."""

    kind: Kind
    depot: str = ""
    customer: str = ""
    haulier: str = ""
    percent: Decimal = Decimal(0)
    number: int = 0
    draws: Draws | None = None

    @property
    def words(self) -> str:
        """The case in a few words."""
        match self.kind:
            case "as it is":
                return "the week as it is"
            case "depot lost":
                return f"{self.depot} lost"
            case "lane lost":
                return f"{self.depot} to {self.customer} lost"
            case "haulier lost":
                return f"{self.haulier} lost"
            case "drawn":
                return f"drawn week {self.number + 1}"
        way = "up" if self.percent >= 0 else "down"
        return f"{self.kind} {way} {canonical(abs(self.percent))} %"


AS_IT_IS = Case("as it is")


def depots_lost(plan: Plan) -> tuple[Case, ...]:
    """Each depot of the week, in sheet order."""
    return tuple(Case("depot lost", depot=name) for name in plan.model.depots)


def lanes_lost(plan: Plan, most: int | None = None) -> tuple[Case, ...]:
    """Each lane that the plan still sends on, what carries most first; an unused lane changes nothing."""
    return lanes_lost_by(plan, lambda shipment: shipment.quantity, most)


def lanes_lost_by(
    plan: Plan, weight: Callable[[Shipment], Decimal], most: int | None = None
) -> tuple[Case, ...]:
    """Each lane that the plan still sends on, by what its shipments weigh together, the most first."""
    found: dict[tuple[str, str], list[Decimal]] = {}
    for shipment in plan.shipments:
        if not shipment.gone:
            found.setdefault((shipment.depot, shipment.customer), []).append(weight(shipment))
    sums = {lane: total_of(amounts) for lane, amounts in found.items()}
    line = sorted(sums, key=lambda lane: -sums[lane])
    return tuple(Case("lane lost", depot=i, customer=j) for i, j in line[:most])


def hauliers_lost(plan: Plan) -> tuple[Case, ...]:
    """Each named haulier that the plan still sends with, in order of appearance."""
    used = dict.fromkeys(one.haulier for one in plan.shipments if one.haulier and not one.gone)
    return tuple(Case("haulier lost", haulier=name) for name in used)


def all_by(kind: Literal["orders", "rates"], percents: Iterable[Decimal]) -> tuple[Case, ...]:
    """All orders or all rates changed by each of these percentages; 0 is left out."""
    return tuple(Case(kind, percent=percent) for percent in percents if percent)


def drawn(draws: Draws, count: int, first: int = 0) -> tuple[Case, ...]:
    """So many weeks of a sample; a longer sample begins with the same weeks."""
    return tuple(Case("drawn", number=number, draws=draws) for number in range(first, first + count))


def unchanged(plan: Plan) -> tuple[str, ...]:
    """What may be lost without a trace, as sentences: nothing is solved for it."""
    open_lanes = {
        (int(i), int(j))
        for i, j, row in zip(
            plan.model.problem.depot.tolist(),
            plan.model.problem.customer.tolist(),
            plan.model.rate_row.tolist(),
            strict=True,
        )
        if row >= 0
    }
    used = {(one.depot, one.customer) for one in plan.shipments if not one.gone}
    said = []
    if len(open_lanes) > len(used):
        many = len(open_lanes) - len(used)
        what, it = ("One lane carries", "it") if many == 1 else (f"{many:,} lanes carry", "one")
        said.append(f"{what} nothing: losing {it} changes nothing.")
    going = {one.haulier for one in plan.shipments if not one.gone}
    idle = [name for name in plan.week.rates.flat.haulier_names if name not in going]
    if idle:
        shown = idle if len(idle) < 6 else [*idle[:5], f"{len(idle) - 5} more"]
        named = shown[0] if len(shown) == 1 else f"{', '.join(shown[:-1])} and {shown[-1]}"
        said.append(
            f"Nothing is left to go with {named}: losing "
            f"{'it' if len(idle) == 1 else 'them'} changes nothing."
        )
    return tuple(said)


def change_of(week: Week, case: Case) -> Change:
    """The case as a change to the week: what a desk would type if it happened.

    Raises Refused, when applied, where the case names what is not in the week.
    """
    match case.kind:
        case "as it is":
            return Together(())
        case "depot lost":
            gone = left(week).depot.get(case.depot, Decimal(0))
            depot: list[Change] = [Alter("depot", case.depot, "must_move", None)]
            depot.append(
                Alter("depot", case.depot, "available", min(gone, week.depots[case.depot].available))
            )
            depot += _promises_dropped(week, _rows_of(week, depot=case.depot))
            return Together(tuple(depot), case.words)
        case "lane lost":
            rows = _rows_of(week, depot=case.depot, customer=case.customer)
            return Together(tuple(_rows_lost(week, rows)), case.words)
        case "haulier lost":
            return Together(tuple(_rows_lost(week, _rows_of(week, haulier=case.haulier))), case.words)
        case "orders":
            numerator, denominator = ratio(case.percent)
            return Together(tuple(_orders(week, [numerator] * len(week.customers), denominator)), case.words)
        case "rates":
            numerator, denominator = ratio(case.percent)
            return Together(tuple(_rates(week, lambda _: numerator, denominator)), case.words)
    if case.draws is None:
        raise ValueError(f"{case.words} says nothing of how it is drawn: give it Draws.")
    orders = factors(case.draws, case.number, "orders", len(week.customers)).tolist()
    stock = factors(case.draws, case.number, "stock", len(week.depots)).tolist()
    hauliers = week.rates.flat.haulier_names
    rates = factors(case.draws, case.number, "rates", len(hauliers) + 1).tolist()
    by_name = dict(zip((*hauliers, None), rates, strict=True))
    changes = [*_orders(week, orders, THOUSAND), *_stock(week, stock)]
    if case.draws.rates is not None:
        changes += _rates(week, by_name.__getitem__, THOUSAND)
    return Together(tuple(changes), case.words)


def ratio(percent: Decimal) -> tuple[int, int]:
    """A change in percent as the factor that it is: 7.5 is 1075 over 1000."""
    places = places_needed(percent)
    denominator: int = 10 ** (places + 2)
    return denominator + to_integer(percent, places), denominator


def changed(whole: int, numerator: int, denominator: int, step: int) -> int:
    """A quantity in grains times a factor: the difference is rounded to the step, halves away from 0."""
    difference = whole * (numerator - denominator)
    steps = (2 * abs(difference) + denominator * step) // (2 * denominator * step)
    return max(0, whole + (steps * step if difference >= 0 else -steps * step))


def _orders(week: Week, numerators: Sequence[int], denominator: int) -> Iterable[Change]:
    gone = left(week).customer
    for customer, numerator in zip(week.customers.values(), numerators, strict=True):
        ordered = _scaled(week, customer.ordered, numerator, denominator)
        ordered = max(ordered, min(customer.ordered, gone.get(customer.name, Decimal(0))))
        if ordered != customer.ordered:
            yield Alter("customer", customer.name, "ordered", ordered)


def _stock(week: Week, numerators: Sequence[int]) -> Iterable[Change]:
    gone = left(week).depot
    for depot, numerator in zip(week.depots.values(), numerators, strict=True):
        available = _scaled(week, depot.available, numerator, THOUSAND)
        available = max(available, min(depot.available, gone.get(depot.name, Decimal(0))))
        if available != depot.available:
            if depot.must_move is not None and depot.must_move > available:
                yield Alter("depot", depot.name, "must_move", available)
            yield Alter("depot", depot.name, "available", available)


def _scaled(week: Week, quantity: Decimal, numerator: int, denominator: int) -> Decimal:
    step = step_of(week.rules)
    places = max(places_needed(step), places_needed(quantity))
    grains = changed(to_integer(quantity, places), numerator, denominator, to_integer(step, places))
    return to_decimal(grains, places)


def _rates(week: Week, numerator_of: Callable[[str | None], int], denominator: int) -> Iterable[Change]:
    extra = len(str(denominator)) - 1  # a power of ten
    for number in week.rates.ids_in_order.tolist():
        row = week.rates.row(number)
        if row is None:
            continue
        places = places_needed(row.rate)
        rate = to_decimal(to_integer(row.rate, places) * numerator_of(row.haulier), places + extra)
        yield Alter("rate", week.rates.key_of(number), "rate", rate)


def _rows_of(week: Week, depot: str = "", customer: str = "", haulier: str = "") -> list[RateKey]:
    flat = week.rates.flat
    there = np.ones(len(flat), dtype=bool)
    for name, names, codes in (
        (depot, flat.depot_names, flat.depot),
        (customer, flat.customer_names, flat.customer),
        (haulier, flat.haulier_names, flat.haulier),
    ):
        if name:
            there &= codes == (names.index(name) if name in names else NO_CODE - 1)
    ids = week.rates.ids_in_order
    return [week.rates.key_of(int(ids[position])) for position in np.flatnonzero(there)]


def _rows_lost(week: Week, keys: Sequence[RateKey]) -> Iterable[Change]:
    yield from _promises_dropped(week, keys)
    for key in keys:
        yield Alter("rate", key, "closed", True)


def _promises_dropped(week: Week, keys: Iterable[RateKey]) -> Iterable[Change]:
    """Nothing is held or promised on these rows any more."""
    floors = week.rates.flat.decimals.get("at_least")
    for key in keys:
        if key in week.holds:
            yield Lift(key)
        if floors is not None:
            yield Alter("rate", key, "at_least", None)
