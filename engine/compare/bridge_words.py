"""A bridge as a paragraph: how much dearer or cheaper, and why, the largest reasons first."""

from collections.abc import Callable, Iterable
from decimal import Decimal

from engine.compare.bridge import Bridge, Step
from engine.compare.mixed import is_event
from engine.exact import canonical, total_of

MOST_REASONS = 4

Written = Callable[[Decimal], str]


def paragraph(bridge: Bridge, money: Written | None = None, quantity: Written | None = None) -> str:
    """The bridge in plain words; the arguments are those of `sentences`."""
    return " ".join(sentences(bridge, money, quantity))


def sentences(bridge: Bridge, money: Written | None = None, quantity: Written | None = None) -> list[str]:
    """The bridge in plain words, sentence by sentence.

    money, quantity: how an amount and a quantity are written, unit and currency included
    """
    pay = money or (lambda value: f"{canonical(value)} {bridge.currency}")
    much = quantity or (lambda value: f"{canonical(value)} {bridge.unit}")
    said = [_headline(bridge, pay)]
    reasons = [step for step in bridge.steps if step.freight and step.key != "rounding"]
    if reasons:
        reasons.sort(key=lambda step: -abs(step.freight))
        said.append(f"The reasons: {_listed(_reason(step, pay) for step in reasons[:MOST_REASONS])}.")
        rest = [step.freight for step in bridge.steps if step not in reasons[:MOST_REASONS]]
        if any(rest):
            over = total_of(rest)
            said.append(f"All else together comes to {_signed(over, pay)}.")
    said += _service(bridge, pay, much)
    if bridge.averaged:
        said.append("Each reason is its average over all orders in which they could have come.")
    if bridge.note:
        said.append(bridge.note)
    return said


def _headline(bridge: Bridge, pay: Written) -> str:
    if not bridge.freight:
        return f"{bridge.second} costs the same freight as {bridge.first}: {pay(bridge.second_freight)}."
    word = "more" if bridge.freight > 0 else "less"
    return (
        f"{bridge.second} costs {pay(abs(bridge.freight))} {word} freight than {bridge.first}: "
        f"{pay(bridge.second_freight)} after {pay(bridge.first_freight)}."
    )


def _reason(step: Step, pay: Written) -> str:
    return f"{_signed(step.freight, pay)} by {_lower(step)}"


def _listed(reasons: Iterable[str]) -> str:
    *first, last = list(reasons)
    return f"{', '.join(first)} and {last}" if first else last


def _service(bridge: Bridge, pay: Written, much: Written) -> Iterable[str]:
    if bridge.short:
        word = "more" if bridge.short > 0 else "less"
        most = max(bridge.steps, key=lambda step: step.short * (1 if bridge.short > 0 else -1))
        yield f"{much(abs(bridge.short))} {word} go short, most of it by {_lower(most)}."
    if bridge.charges:
        word = "more" if bridge.charges > 0 else "less"
        yield f"Charges, which stand apart from freight, come to {pay(abs(bridge.charges))} {word}."


def _signed(value: Decimal, pay: Written) -> str:
    return f"{pay(abs(value))} {'more' if value >= 0 else 'less'}"


def _lower(step: Step) -> str:
    """Its name inside a sentence; an event keeps the name that it was given."""
    return step.name if is_event(step.key) else step.name[:1].lower() + step.name[1:]
