"""Why this lane: what every other lane of a customer would cost, after what it would displace elsewhere."""

from dataclasses import dataclass
from decimal import Decimal
from typing import Literal

from engine.exact import to_decimal
from engine.figures import RateKey
from engine.planning.model import NO_RATE
from engine.planning.plan import Plan
from engine.reasons.chains import Chain, Leg, leg_of_row
from engine.reasons.ground import Ground, ground_of, is_shared
from engine.reasons.rows import key_at

Standing = Literal["used", "full", "unused", "shut"]


@dataclass(frozen=True, slots=True)
class Alternative:
    """A rate row of a customer and what one more unit on it would cost, per unit, charges included.

    `rate` includes the surcharge. `instead` is the depot that would bring a unit less (None: the unit is
    short now); `displaced` is what that moves elsewhere. `dearer` is the rate less what is saved at the
    customer, plus what is displaced; None where no unit more can go on the row.
    """

    key: RateKey
    standing: Standing
    quantity: Decimal
    rate: Decimal
    dearer: Decimal | None = None
    instead: str | None = None
    instead_haulier: str | None = None
    displaced: Decimal | None = None
    chain: Chain | None = None

    @property
    def leg(self) -> Leg | None:
        """What one more unit on the row would displace."""
        return self.chain.legs[0] if self.chain and self.chain.legs else None


@dataclass(frozen=True, slots=True)
class Why:
    """All rate rows of a customer, those in use first, then by what they would cost more."""

    customer: str
    alternatives: tuple[Alternative, ...]
    note: str = ""


def why(plan: Plan, customer: str) -> Why:
    """What the alternatives for a customer cost after what they would displace.

    Raises:
        ValueError: the customer is not in the week.
        TooLarge: a chain's cost could leave the exact integers.
    """
    model = plan.model
    if customer not in model.customers:
        raise ValueError(f"There is no customer '{customer}' in the week.")
    ground = ground_of(plan)
    j = model.customers.index(customer)
    rows = [row for row in range(*ground.problem.start[j : j + 2].tolist()) if model.rate_row[row] != NO_RATE]
    found = [_alternative(plan, ground, row) for row in rows]
    note = (
        "Goods are shared evenly: these are the costs given the shares as they are."
        if is_shared(plan)
        else ""
    )
    return Why(customer, tuple(sorted(found, key=_order)), note)


def _order(one: Alternative) -> tuple[bool, bool, bool, Decimal]:
    leg, dearer = one.leg, Decimal(0) if one.dearer is None else one.dearer
    worse = leg is not None and (leg.short > 0 or leg.kept > 0)
    return one.quantity == 0, one.dearer is None, worse, dearer


def _alternative(plan: Plan, ground: Ground, row: int) -> Alternative:
    model = plan.model
    quantity, upper = int(ground.quantity[row]), int(ground.upper[row])
    rate = to_decimal(int(model.money[row]), model.money_places)
    standing: Standing = "used" if quantity else "unused"
    if quantity == upper:
        standing = "full" if quantity else "shut"
    bare = Alternative(key_at(plan, row), standing, to_decimal(quantity, model.quantity_places), rate)
    if quantity == upper:
        return bare
    found = leg_of_row(plan, ground, row, 1)
    if found is None:
        return bare
    other = found.legs[0].moves[1]
    return Alternative(
        bare.key,
        standing,
        bare.quantity,
        rate,
        dearer=found.legs[0].cost,
        instead=other.depot,
        instead_haulier=other.haulier,
        displaced=found.legs[0].cost - rate + other.cost,
        chain=found,
    )
