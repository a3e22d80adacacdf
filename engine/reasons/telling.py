"""Chains in trade words: '10 t more to Elm from Harbour: Harbour gives up 10 t at Ash, which …'."""

from collections.abc import Callable
from decimal import Decimal

from engine.exact import canonical
from engine.reasons.chains import Chain, Leg, Step

Number = Callable[[Decimal], str]


def sentences(chain: Chain, unit: str, currency: str, number: Number = canonical) -> tuple[str, ...]:
    """A sentence for each leg of a chain; `number` writes quantities and money."""
    return tuple(sentence(chain, leg, unit, currency, number) for leg in chain.legs)


def sentence(chain: Chain, leg: Leg, unit: str, currency: str, number: Number = canonical) -> str:
    """What one leg displaces, and what that costs per unit."""
    quantity = f"{number(leg.quantity)} {unit}"
    taking = chain.asked < 0 if chain.what == "ordered" else chain.asked > 0 and chain.what == "available"
    told = [_step(step, quantity, taking) for step in leg.steps]
    told = [words for words in told if words]
    last = _last(chain, leg, quantity)
    told += [last] if last and last not in told else []
    head = _head(chain, leg, quantity)
    body = f"{head}: {'; '.join(told)}" if told else head
    short = {1: f", and 1 {unit} more goes short", -1: f", and 1 {unit} less goes short"}.get(leg.short, "")
    kept = {
        1: f", and 1 {unit} more stays that must move",
        -1: f", and 1 {unit} more leaves that must move",
    }.get(leg.kept, "")
    return f"{body}; {signed(leg.cost, number)} {currency} per {unit}{short}{kept}."


def signed(amount: Decimal, number: Number = canonical) -> str:
    """An amount with its sign, also where it is a rise."""
    return f"+{number(amount)}" if amount > 0 else number(amount)


def _head(chain: Chain, leg: Leg, quantity: str) -> str:
    more = "more" if chain.asked > 0 else "less"
    haulier = f" by {leg.by_haulier}" if leg.by_haulier else ""
    if chain.what == "available":
        return f"{quantity} {more} at {chain.depot}"
    if chain.what == "ordered":
        if leg.by is None:
            return f"{chain.customer} goes short of {quantity} {more}"
        return f"{quantity} {more} to {chain.customer} from {leg.by}{haulier}"
    return f"{quantity} {more} from {chain.depot} to {chain.customer}{haulier}{_other(chain, leg)}"


def _other(chain: Chain, leg: Leg) -> str:
    """Which row of the same customer makes room for a row that is held, or stands in for it."""
    other = leg.moves[1]
    haulier = f" by {other.haulier}" if other.haulier else ""
    if chain.asked > 0:
        return ", which was short" if other.depot is None else f", in place of {other.depot}{haulier}"
    return ", which goes short" if other.depot is None else f", which {other.depot}{haulier} brings instead"


def _step(step: Step, quantity: str, taking: bool) -> str:
    """One exchange, told from the depot that gives up, or (`taking`) from the one that takes over."""
    gives, takes, at = step.gives, step.takes, step.at
    if at is None:
        less = f"{gives} keeps {quantity} less" if gives else ""
        more = f"{takes} keeps {quantity} more" if takes else ""
        return " and ".join(part for part in ((more, less) if taking else (less, more)) if part)
    if gives is None:
        return f"{takes} brings {at} {quantity} that was short"
    if takes is None:
        return f"{gives} gives up {quantity} at {at}, which goes short"
    if taking:
        return f"{takes} takes over {quantity} at {at} from {gives}"
    return f"{gives} gives up {quantity} at {at}, which {takes} takes"


def _last(chain: Chain, leg: Leg, quantity: str) -> str:
    """Where a depot's stock goes, or comes from, in the end."""
    if chain.what != "available" or leg.by is None:
        return ""
    return f"{leg.by} keeps {quantity} {'more' if chain.asked > 0 else 'less'}"
