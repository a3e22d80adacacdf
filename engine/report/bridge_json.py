"""A comparison as JSON: decimals as exact strings, in the manner of a plan's JSON."""

from decimal import Decimal
from fractions import Fraction
from typing import Any

from engine.compare.bridge import Bridge
from engine.exact import canonical, to_decimal


def bridge_as_json(bridge: Bridge) -> dict[str, Any]:
    """The bridge as a dictionary that `json.dumps` takes; positive is dearer, or more that is short."""
    return {
        "first": bridge.first,
        "second": bridge.second,
        "unit": bridge.unit,
        "currency": bridge.currency,
        "averaged": bridge.averaged,
        "freight_payable": _ends(bridge.first_freight, bridge.second_freight, bridge.freight),
        "charges": _ends(bridge.first_charges, bridge.second_charges, bridge.charges),
        "short": _ends(bridge.first_short, bridge.second_short, bridge.short),
        "steps": [
            {
                "effect": step.key,
                "name": step.name,
                "about": step.about,
                "freight": canonical(step.freight),
                "freight_exact": _exact(step.exact.freight),
                "charges": canonical(step.charges),
                "charges_exact": _exact(step.exact.charges),
                "short": canonical(step.short),
                "freight_then": None if step.after is None else canonical(step.after),
                "remarks": list(step.remarks),
            }
            for step in bridge.steps
        ],
        **({"note": bridge.note} if bridge.note else {}),
    }


def _exact(value: Fraction) -> str:
    """A decimal where it is one, else a fraction such as "10/3", as averages may be."""
    rest = value.denominator
    for prime in (2, 5):
        while rest % prime == 0:
            rest //= prime
    if rest != 1:
        return str(value)
    places = value.denominator.bit_length()  # more than enough: at most one place a factor of two or five
    return canonical(to_decimal(int(value * 10**places), places))


def _ends(first: Decimal, second: Decimal, difference: Decimal) -> dict[str, str]:
    return {
        "first": canonical(first),
        "second": canonical(second),
        "difference": canonical(difference),
    }
