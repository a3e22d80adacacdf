"""What a plan saves against another way of doing the week, in freight and at equal service.

Where both deliver the same to everybody, the saving is the freight of the other less that of the plan.
Where they do not, freight alone would praise whoever delivers less: then the week is planned once more
with exactly the service of the other as its orders, that plan is what the other is held against, and what
the service differs by is said.
"""

from collections.abc import Iterable
from dataclasses import dataclass, replace
from decimal import Decimal
from types import MappingProxyType

from engine.compare.quantities import Costed, Priced, charges_of, costs_of
from engine.exact import canonical, total_of
from engine.figures import Order
from engine.money import per_unit
from engine.planning.plan import Plan, Shipment
from engine.planning.planner import plan_week
from engine.week import Week

SHOWN = 5
SECONDS = 10.0
"""How long a plan with whole loads is searched for, where the service has to be made equal."""


@dataclass(frozen=True, slots=True)
class LaneSaving:
    """A lane in both plans; `saving` is the freight payable of the other less that of the plan."""

    depot: str
    customer: str
    usual: Decimal
    planned: Decimal
    usual_payable: Decimal
    planned_payable: Decimal

    @property
    def saving(self) -> Decimal:
        return total_of((self.usual_payable, -self.planned_payable))


@dataclass(frozen=True, eq=False)
class Saving:
    """The saving against another plan of the same week; positive: the plan is cheaper.

    freight:  at equal service, in freight payable
    per_unit: the same per unit delivered, to four places; None where nothing is delivered
    equal:    whether the plan itself gives the same service as the other
    against:  the plan that the other was held against: the plan itself, or one with the other's service
    charges:  charges of the other less those of `against`, which no freight shows
    differs:  what differs in service, as sentences
    lanes:    lane by lane, the largest difference first; savings add up to `freight`
    """

    freight: Decimal
    per_unit: Decimal | None
    equal: bool
    against: Costed
    charges: Decimal
    differs: tuple[str, ...]
    lanes: tuple[LaneSaving, ...]


def saving(plan: Plan, other: Priced, seconds: float = SECONDS) -> Saving:
    """What the plan saves against another way of doing its week, at equal service.

    seconds: how long a plan with whole loads is searched for

    Raises:
        NotPlannable: the other's service cannot be planned, so it does not keep the week's limits and holds.
    """
    differs = tuple(_differences(plan.week.rules.unit, plan, other))
    against = costs_of(plan if not differs else plan_week(with_service(plan.week, other), time_limit=seconds))
    if differs and any(_differences(plan.week.rules.unit, against, other)):
        differs += (
            "No plan that keeps loads a day, hauliers' limits, smallest drops and One depot serves like "
            "that: the plan beside it delivers otherwise too.",
        )
    freight = total_of((other.freight_payable, -against.freight_payable))
    delivered = total_of(one.quantity for one in other.shipments)
    return Saving(
        freight,
        per_unit(freight, delivered),
        not differs,
        against,
        total_of((charges_of(other), -charges_of(against))),
        differs,
        lane_savings(other, against),
    )


def with_service(week: Week, other: Priced) -> Week:
    """The week with orders, and what must move, as another plan serves them; nobody may decline."""
    got, sent = _by(other.shipments, "customer"), _by(other.shipments, "depot")
    customers = {
        name: replace(one, orders=(Order(got.get(name, Decimal(0))),), may_decline=False)
        for name, one in week.customers.items()
    }
    depots = {
        name: replace(one, must_move=min(one.must_move, sent.get(name, Decimal(0)))) if one.must_move else one
        for name, one in week.depots.items()
    }
    return replace(week, customers=MappingProxyType(customers), depots=MappingProxyType(depots))


def lane_savings(usual: Priced, planned: Priced) -> tuple[LaneSaving, ...]:
    """Every lane that either plan uses, the largest difference of freight first."""
    lanes: dict[tuple[str, str], list[list[Decimal]]] = {}
    for place, plan in enumerate((usual, planned)):
        for one in plan.shipments:
            sums = lanes.setdefault((one.depot, one.customer), [[], [], [], []])
            sums[place].append(one.quantity)
            sums[place + 2].append(one.payable)
    found = [LaneSaving(*lane, *(total_of(part) for part in sums)) for lane, sums in lanes.items()]
    return tuple(sorted(found, key=lambda one: -abs(one.saving)))


def _by(shipments: Iterable[Shipment], what: str) -> dict[str, Decimal]:
    sums: dict[str, list[Decimal]] = {}
    for one in shipments:
        sums.setdefault(getattr(one, what), []).append(one.quantity)
    return {name: total_of(quantities) for name, quantities in sums.items()}


def _differences(unit: str, plan: Priced, other: Priced) -> Iterable[str]:
    """What the other plan delivers otherwise, and what it moves less of what must move."""
    mine, theirs = _by(plan.shipments, "customer"), _by(other.shipments, "customer")
    by = {
        name: total_of((theirs.get(name, Decimal(0)), -mine.get(name, Decimal(0))))
        for name in dict.fromkeys([*mine, *theirs])
    }
    for word, sign in (("less", -1), ("more", 1)):
        those = sorted(
            ((sign * more, name) for name, more in by.items() if sign * more > 0), key=lambda one: -one[0]
        )
        if those:
            listed = ", ".join(f"{name} {canonical(much)}" for much, name in those[:SHOWN])
            rest = f" and {len(those) - SHOWN} more" if len(those) > SHOWN else ""
            total = canonical(total_of(much for much, _ in those))
            yield f"The usual plan delivers {total} {unit} {word}: {listed}{rest}."
    kept = total_of([*(u.must_move for u in other.unsent), *(-u.must_move for u in plan.unsent)])
    if kept:
        word = "more" if kept > 0 else "less"
        yield f"The usual plan keeps {canonical(abs(kept))} {unit} {word} of what must move."
