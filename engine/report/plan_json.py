"""A plan as JSON: decimals as exact strings, under the field names that other tools rely on."""

from collections.abc import Iterable
from decimal import Decimal
from typing import Any

from engine.exact import canonical
from engine.planning.load_plan import cost_of_wholeness
from engine.planning.plan import Plan, Shipment, Wholeness
from engine.reasons import RateInterval, UnitValue, rate_intervals, values
from engine.reasons.ground import why_withheld


def plan_as_json(plan: Plan, full: bool = False) -> dict[str, Any]:
    """The plan as a dictionary that `json.dumps` takes.

    Args:
        plan: what is written.
        full: whether to say as well how far values hold (null: without limit, or no value) and within which
            rates, before surcharge, the plan stays as it is (null: no limit).
    """
    rules = plan.week.rules
    value_of = values(plan, holds=full)
    written = {
        "week": rules.week,
        "unit": rules.unit,
        "currency": rules.currency,
        "status": plan.status,
        "freight_cost": canonical(plan.freight_cost),
        "unsent_cost": canonical(plan.unsent_cost),
        "short_cost": canonical(plan.short_cost),
        "total_cost": canonical(plan.total_cost),
        "freight_payable": canonical(plan.freight_payable),
        "shipments": [_shipment(one, plan.whole is not None) for one in plan.shipments],
        "short": [{"customer": one.customer, "quantity": canonical(one.quantity)} for one in plan.short],
        "unsent": [{"depot": one.depot, "quantity": canonical(one.quantity)} for one in plan.unsent],
        "depot_values": list(_values("depot", value_of.depots)),
        "customer_values": list(_values("customer", value_of.customers)),
        "proof": {
            "exact": plan.proof.exact,
            "lower_bound": canonical(plan.proof.lower_bound),
            "gap": canonical(plan.proof.gap),
            "rounding": canonical(plan.proof.rounding),
        },
        "findings": [
            {
                "severity": finding.severity.word,
                "sheet": finding.sheet,
                "cell": finding.cell,
                "message": finding.message,
            }
            for finding in plan.findings
        ],
    }
    if plan.whole is not None:
        written |= {
            "opening_cost": canonical(plan.opening_cost),
            "openings": [{"depot": one.depot, "charge": canonical(one.charge)} for one in plan.openings],
            "whole_loads": _wholeness(plan, plan.whole),
        }
    if because := why_withheld(plan):
        written["values_withheld"] = because
    if not full:
        return written
    return {**written, "rates": [] if because else [_rate(one) for one in rate_intervals(plan)]}


def _shipment(one: Shipment, whole: bool) -> dict[str, Any]:
    """With whole loads it says as well what the rate is charged by, and what is due once."""
    said: dict[str, Any] = {
        "depot": one.depot,
        "customer": one.customer,
        "haulier": one.haulier,
        "quantity": canonical(one.quantity),
        "loads": one.loads,
        "rate": canonical(one.rate),
        "cost": canonical(one.cost),
        "payable": canonical(one.payable),
    }
    if whole:
        said |= {"per": one.per, "load_size": _text(one.load_size), "charge_per_use": _text(one.once)}
    return said


def _wholeness(plan: Plan, whole: Wholeness) -> dict[str, Any]:
    """How the plan was found, and what whole vehicles cost beside the network plan of the same week."""
    cost = cost_of_wholeness(plan)
    return {
        "found": whole.loads.how,
        "ended": whole.loads.ended,
        "seconds": round(whole.loads.seconds, 3),
        "divisible_cost": canonical(whole.divisible_cost),
        "divisible_short": canonical(whole.divisible_short),
        "cost_of_wholeness": None if cost is None else canonical(cost),
    }


def _rate(one: RateInterval) -> dict[str, str | None]:
    return {
        "depot": one.key.depot,
        "customer": one.key.customer,
        "haulier": one.key.haulier,
        "rate": canonical(one.rate),
        "stays_from": _text(one.stays_from),
        "stays_to": _text(one.stays_to),
        "pays_below": _text(one.pays_below),
    }


def _values(what: str, found: Iterable[UnitValue]) -> Iterable[dict[str, str | None]]:
    for value in found:
        yield {
            what: value.name,
            "price": canonical(value.price),
            "one_more": _text(value.one_more),
            "one_more_short": _text(value.one_more_short),
            "one_more_holds_for": _text(value.one_more_holds_for),
            "one_less": _text(value.one_less),
            "one_less_short": _text(value.one_less_short),
            "one_less_holds_for": _text(value.one_less_holds_for),
        }


def _text(value: Decimal | None) -> str | None:
    return None if value is None else canonical(value)
