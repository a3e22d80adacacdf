"""A plan's quantities added up."""

from dataclasses import dataclass
from decimal import Decimal

from engine.exact import total_of
from engine.planning.plan import Plan


@dataclass(frozen=True, slots=True)
class Totals:
    """Sums over a plan, in the week's unit; `lanes` counts depot-customer pairs that are used."""

    ordered: Decimal
    available: Decimal
    delivered: Decimal
    short: Decimal
    unsent: Decimal
    lanes: int


def totals(plan: Plan) -> Totals:
    """What the plan's quantities add up to."""
    return Totals(
        ordered=total_of(customer.ordered for customer in plan.week.customers.values()),
        available=total_of(depot.available for depot in plan.week.depots.values()),
        delivered=total_of(shipment.quantity for shipment in plan.shipments),
        short=total_of(short.quantity for short in plan.short),
        unsent=total_of(unsent.quantity for unsent in plan.unsent),
        lanes=len({(shipment.depot, shipment.customer) for shipment in plan.shipments}),
    )


@dataclass(frozen=True, slots=True)
class LaneFlow:
    """What goes on a lane, by whichever hauliers."""

    depot: str
    customer: str
    quantity: Decimal


def flows(plan: Plan) -> tuple[LaneFlow, ...]:
    """The used lanes with their quantities, in order of first appearance."""
    by_lane: dict[tuple[str, str], list[Decimal]] = {}
    for shipment in plan.shipments:
        by_lane.setdefault((shipment.depot, shipment.customer), []).append(shipment.quantity)
    return tuple(LaneFlow(*lane, total_of(quantities)) for lane, quantities in by_lane.items())


def dearest_lanes(plan: Plan) -> frozenset[tuple[str, str]]:
    """The fewest lanes (depot, customer) that together come to half of the freight payable, or more."""
    cost: dict[tuple[str, str], Decimal] = {}
    for one in plan.shipments:
        lane = one.depot, one.customer
        cost[lane] = total_of((cost.get(lane, Decimal(0)), one.payable))
    chosen, left = [], plan.freight_payable
    for lane in sorted(cost, key=lambda lane: -cost[lane]):
        if 2 * left <= plan.freight_payable:
            break
        chosen.append(lane)
        left = total_of((left, -cost[lane]))
    return frozenset(chosen)
