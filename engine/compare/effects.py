"""The effects that a bridge tells apart: which figures of a week each is, and its name."""

from collections.abc import Mapping
from types import MappingProxyType

GONE_BEFORE, VOLUME, MIX, STOCK = "gone before", "volume", "mix", "stock"
RATES, SURCHARGE, LIMITS, CHARGES, RULES = "rates", "surcharge", "limits", "charges", "rules"
HOLDS, GONE = "holds", "gone"

STATED_ORDER = (GONE_BEFORE, VOLUME, MIX, STOCK, RATES, SURCHARGE, LIMITS, CHARGES, RULES, HOLDS, GONE)
"""The order of the steps unless another is asked for; named events come after them, as they happened."""

NAMES: Mapping[str, str] = MappingProxyType(
    {
        GONE_BEFORE: "What had gone before",
        VOLUME: "Volume",
        MIX: "Mix",
        STOCK: "Stock",
        RATES: "Rates",
        SURCHARGE: "Surcharge",
        LIMITS: "Limits and lanes",
        CHARGES: "Charges and priorities",
        RULES: "Rules",
        HOLDS: "Holds",
        GONE: "What has gone",
    }
)

ABOUT: Mapping[str, str] = MappingProxyType(
    {
        GONE_BEFORE: "what had left in the first week is free to be planned",
        VOLUME: "all orders grow or shrink alike, to the new total",
        MIX: "who orders how much, at that total",
        STOCK: "what depots can and must send",
        RATES: "what hauliers charge, before surcharge",
        SURCHARGE: "the week's and the rates' own",
        LIMITS: "at least, at most, closed, lanes that only one week has, one depot, loads a day",
        CHARGES: "for short and unsent, priorities, who may decline",
        RULES: "when short, the week's charge if short, step, load size",
        HOLDS: "quantities fixed by hand",
        GONE: "what has left in the second week, at the rates of its days",
    }
)

DEPOT_FIELDS: Mapping[str, str] = MappingProxyType(
    {"available": STOCK, "must_move": STOCK, "charge_if_unsent": CHARGES, "opening_charge": RATES}
)
CUSTOMER_FIELDS: Mapping[str, str] = MappingProxyType(
    {"charge_if_short": CHARGES, "priority": CHARGES, "may_decline": CHARGES}
)
RATE_FIELDS: Mapping[str, str] = MappingProxyType(
    {"at_least": LIMITS, "at_most": LIMITS, "closed": LIMITS, "surcharge": SURCHARGE}
)
RULE_FIELDS: Mapping[str, str] = MappingProxyType({"fuel_surcharge": SURCHARGE})


def of_depot(field: str) -> str:
    """The effect that a figure of a depot belongs to."""
    return DEPOT_FIELDS.get(field, LIMITS)


def of_customer(field: str) -> str:
    """The effect that a figure of a customer, other than its orders, belongs to."""
    return CUSTOMER_FIELDS.get(field, LIMITS)


def of_rate(field: str) -> str:
    """The effect that a figure of a rate row belongs to."""
    return RATE_FIELDS.get(field, RATES)


def of_rule(field: str) -> str:
    """The effect that a rule of the week belongs to."""
    return RULE_FIELDS.get(field, RULES)
