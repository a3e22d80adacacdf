"""Which rules a plan went by, in words: only those that mattered this week are told."""

from collections.abc import Callable
from typing import NamedTuple

from engine.exact import canonical
from engine.figures import ANY_SINGLE_DEPOT, Customer, Depot
from engine.money import is_known, minor_places
from engine.planning.gone import superseded
from engine.planning.plan import Plan


class Rule(NamedTuple):
    """What a rule is about, when it is told, and how it reads."""

    about: str
    applies: Callable[[Plan], bool]
    words: Callable[[Plan], str]


def rules_used(plan: Plan) -> list[tuple[str, str]]:
    """The rules that this plan used: what each is about, and a sentence or two."""
    return [(rule.about, rule.words(plan)) for rule in _RULES if rule.applies(plan)]


def _always(_: Plan) -> bool:
    return True


def _any_depot(test: Callable[[Depot], object]) -> Callable[[Plan], bool]:
    return lambda plan: any(test(depot) for depot in plan.week.depots.values())


def _any_customer(test: Callable[[Customer], object]) -> Callable[[Plan], bool]:
    return lambda plan: any(test(customer) for customer in plan.week.customers.values())


def _any_rate(field: str) -> Callable[[Plan], bool]:
    """Whether a column of the rates is filled anywhere."""
    return lambda plan: field in plan.week.rates.flat.decimals


def _order_of_aims(plan: Plan) -> str:
    priorities = any(customer.priority for customer in plan.week.customers.values())
    must_move = any(depot.must_move for depot in plan.week.depots.values())
    aims = ["What is held stays as it is."] if plan.week.holds else []
    most = "priority A before B before C (blank counts as C)" if priorities else "all customers alike"
    aims.append(f"Then the most is delivered, {most}." if aims else f"The most is delivered first, {most}.")
    if must_move:
        aims.append("Then what must move is sent, as far as orders and rates allow; the rest is reported.")
    aims.append("Last comes the least cost. A lower aim never takes anything from a higher one.")
    return " ".join(aims)


def _blank_charges(plan: Plan) -> str:
    default = plan.week.rules.charge_if_short
    unit, currency = plan.week.rules.unit, plan.week.rules.currency
    if default is not None:
        charge = f"{canonical(default)} {currency} per {unit}"
        return f"A customer without a charge if short of its own has the week's: {charge}."
    return "A customer without a charge if short counts with 0, as the week has none: freight decides there."


def _surcharge(plan: Plan) -> str:
    week = plan.week.rules.fuel_surcharge
    own = "surcharge" in plan.week.rates.flat.decimals
    parts = []
    if week:
        parts.append(
            f"{canonical(week)} % fuel surcharge is on every "
            f"rate{' that has none of its own' if own else ''}."
        )
    if own:
        parts.append("A surcharge on a rate row goes before the week's.")
    parts.append("It is never rounded by itself, and fixed charges do not bear it.")
    return " ".join(parts)


def _rounding(plan: Plan) -> str:
    currency = plan.week.rules.currency
    places = minor_places(currency)
    guess = (
        ""
        if is_known(currency)
        else f" {currency} is not in our list of currencies, so two places are assumed."
    )
    return (
        f"Each shipment is rounded once, halves up, to {places} decimal places ({currency}).{guess} "
        "Haulier totals add up the rounded amounts, as invoices do; Costs and Proof show the exact sum "
        "beside them."
    )


def _one_depot(plan: Plan) -> str:
    named = [c.name for c in plan.week.customers.values() if c.one_depot and c.one_depot != ANY_SINGLE_DEPOT]
    any_single = [c.name for c in plan.week.customers.values() if c.one_depot == ANY_SINGLE_DEPOT]
    parts = []
    if named:
        parts.append(f"Taking from one named depot only: {_listed(named)}.")
    if any_single:
        parts.append(f"Taking from a single depot, whichever costs least: {_listed(any_single)}.")
    return " ".join(parts)


def _listed(names: list[str]) -> str:
    """The first five names and how many more there are."""
    shown = ", ".join(names[:5])
    return shown if len(names) <= 5 else f"{shown} and {len(names) - 5} more"


def _unsent_charges(plan: Plan) -> str:
    credit = any((depot.charge_if_unsent or 0) < 0 for depot in plan.week.depots.values())
    return "A unit that stays costs its depot's charge if unsent." + (
        " A negative charge is a credit: keeping goods there earns it." if credit else ""
    )


_RULES = (
    Rule("Order of aims", _always, _order_of_aims),
    Rule(
        "The whole week",
        _always,
        lambda plan: (
            "Ordered and Available state the whole week. Quantities are in "
            f"{plan.week.rules.unit}, money in {plan.week.rules.currency}; one unit and one product per week."
        ),
    ),
    Rule(
        "Orders in several rows",
        _any_customer(lambda customer: len(customer.orders) > 1),
        lambda _: (
            "Order rows of one customer are added up; their numbers and days are kept for the loading lists."
        ),
    ),
    Rule(
        "Blank is not zero", _any_customer(lambda customer: customer.charge_if_short is None), _blank_charges
    ),
    Rule(
        "May decline",
        _any_customer(lambda customer: customer.may_decline),
        lambda _: (
            "A customer that may decline is served only where serving costs less than its charge if short."
        ),
    ),
    Rule(
        "Must move",
        _any_depot(lambda depot: depot.must_move),
        lambda _: "Must move is a part of Available, not on top of it.",
    ),
    Rule("Charge if unsent", _any_depot(lambda depot: depot.charge_if_unsent), _unsent_charges),
    Rule(
        "Headline",
        _always,
        lambda _: (
            "The headline is freight payable. Charges for what is short or unsent stand apart and are "
            "notional: they steer the plan, nobody sends an invoice for them."
        ),
    ),
    Rule(
        "Surcharge",
        lambda plan: bool(plan.week.rules.fuel_surcharge) or _any_rate("surcharge")(plan),
        _surcharge,
    ),
    Rule("Rounding", _always, _rounding),
    Rule(
        "Whole loads",
        lambda plan: any(shipment.loads is not None for shipment in plan.shipments),
        lambda _: (
            "Where a rate is per load, the quantity is divided by the load size and rounded up per customer "
            "and rate row: a part load pays whole."
        ),
    ),
    Rule(
        "Limits",
        lambda plan: (
            _any_rate("at_least")(plan)
            or _any_rate("at_most")(plan)
            or bool(plan.week.rates.flat.closed.any())
        ),
        lambda _: (
            "At least and At most hold on their rate row whatever they cost; nothing goes on a closed row."
        ),
    ),
    Rule(
        "Even share",
        lambda plan: plan.week.rules.when_short == "even share" and bool(plan.short),
        lambda _: (
            "What there is, is shared evenly as far as the lanes allow, rounded down to the week's step; "
            "remainders go by the largest fraction, then by sheet order."
        ),
    ),
    Rule("One depot", _any_customer(lambda customer: customer.one_depot), _one_depot),
    Rule(
        "Holds",
        lambda plan: bool(plan.week.holds),
        lambda _: (
            "A held quantity was fixed by a dispatcher; the rest is planned around it. Below is each, with "
            "its reason."
        ),
    ),
    Rule(
        "Gone",
        lambda plan: bool(plan.week.gone),
        lambda _: (
            "What has gone is a fact: it counts against Ordered, Available, limits and holds, which state "
            "the whole week; it is paid by the rate of its day; no plan moves or reprices it. Loading lists "
            "show "
            "only what is still to go."
        ),
    ),
    Rule(
        "Later rates",
        lambda plan: bool(superseded(plan.week.rates.flat).any()),
        lambda _: "Of a haulier's rates on a lane the one with the latest Valid from is planned with.",
    ),
    Rule(
        "Several rates on a lane",
        lambda plan: len(plan.week.rates.flat.haulier_names) > 1,
        lambda _: "Hauliers on one lane are alternatives: the cheaper goes first, up to its limit.",
    ),
)
