"""Variants of a week: lists of changes on top of the same figures, planned and measured side by side."""

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal

from engine.changes import Change, Together
from engine.compare.distances import km_along
from engine.compare.quantities import charges_of
from engine.compare.service import SECONDS
from engine.exact import TooLarge, places_needed, to_decimal, to_integer, total_of
from engine.findings import Finding, Severity
from engine.money import per_unit
from engine.planning.differences import Difference, difference
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Refused


@dataclass(frozen=True, slots=True)
class Variant:
    """A named list of changes."""

    name: str
    changes: tuple[Change, ...]

    @property
    def as_one(self) -> Change:
        """All its changes as one grouped change, which is what makes it the week's own."""
        return Together(self.changes, self.name)


@dataclass(frozen=True, slots=True)
class Measures:
    """What a plan comes to. `freight` is payable; `charges` are for short, unsent and opening, exact.

    per_unit: freight by unit delivered, to four places; None where nothing is delivered
    loads: None where nothing is charged by the load; unit_km: None where a used lane has no distance
    """

    freight: Decimal
    per_unit: Decimal | None
    charges: Decimal
    delivered: Decimal
    short: Decimal
    left: Decimal
    lanes: int
    loads: int | None
    unit_km: Decimal | None


@dataclass(frozen=True, eq=False)
class Measured:
    """A variant beside the base: its measures and what it does otherwise, or why it cannot be planned."""

    variant: Variant
    measures: Measures | None
    difference: Difference | None
    findings: tuple[Finding, ...] = ()


def measured(plan: Plan) -> Measures:
    """What a plan comes to."""
    delivered = total_of(one.quantity for one in plan.shipments)
    loads = [one.loads for one in plan.shipments if one.loads is not None]
    return Measures(
        plan.freight_payable,
        per_unit(plan.freight_payable, delivered),
        charges_of(plan),
        delivered,
        total_of(one.quantity for one in plan.short),
        total_of(one.quantity for one in plan.unsent),
        len({(one.depot, one.customer) for one in plan.shipments}),
        sum(loads) if loads else None,
        _unit_km(plan),
    )


def side_by_side(base: Plan, variants: Iterable[Variant]) -> tuple[Measured, ...]:
    """Every variant of the base's week, planned near to the base and held against it."""
    return tuple(_measured(base, variant) for variant in variants)


def _measured(base: Plan, variant: Variant) -> Measured:
    try:
        plan = plan_week(base.week.apply(variant.as_one), near=base, time_limit=SECONDS)
    except NotPlannable as stopped:
        return Measured(variant, None, None, stopped.findings)
    except (Refused, TooLarge) as refused:
        finding = Finding(Severity.STOPS, "refused", f"It does not fit the week as it is now: {refused}")
        return Measured(variant, None, None, (finding,))
    return Measured(variant, measured(plan), difference(base, plan))


def _unit_km(plan: Plan) -> Decimal | None:
    """Quantity times kilometres, added up over the shipments."""
    products = []
    for one in plan.shipments:
        km = km_along(plan.week, one.key)
        if km is None:
            return None
        places, km_places = places_needed(one.quantity), places_needed(km)
        product = to_integer(one.quantity, places) * to_integer(km, km_places)
        products.append(to_decimal(product, places + km_places))
    return total_of(products)
