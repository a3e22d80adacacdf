"""The price of a change where a search was cut short: between what it certainly lies."""

from decimal import Decimal

from app.parts.words import money
from engine.planning.differences import Outcome


def between(found: Outcome, currency: str, mark: str) -> str:
    """'All costs change by at least … and at most …', as a sentence; empty where the price is exact."""
    if found.bounds is None:
        return ""
    least = _signed(found.bounds.at_least, currency, mark)
    most = _signed(found.bounds.at_most, currency, mark)
    return (
        "Searched for a few seconds only: between the best plans, all costs change by "
        f"at least {least} and at most {most}."
    )


def _signed(amount: Decimal, currency: str, mark: str) -> str:
    return f"+{money(amount, currency, mark)}" if amount > 0 else money(amount, currency, mark)
