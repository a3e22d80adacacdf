"""Which rules a plan went by, in words: only those that mattered this week are told."""

from collections.abc import Callable
from typing import NamedTuple

from engine.exact import canonical
from engine.figures import ANY_SINGLE_DEPOT, Customer, Depot
from engine.load_sizes import counted_depots, given
from engine.money import is_known, minor_places
from engine.planning.gone import superseded
from engine.planning.load_plan import cost_of_wholeness
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


def _load_sizes(plan: Plan) -> str:
    week, said = plan.week, []
    if "load_size" in week.rates.flat.decimals:
        said.append("A rate row's own load size goes first")
    theirs = [f"{h.name} {canonical(h.load_size)}" for h in week.hauliers.values() if h.load_size is not None]
    if theirs:
        said.append(f"{'then' if said else 'First goes'} that of the haulier ({_listed(theirs)})")
    if week.rules.load_size is not None:
        size, of_week = f"{canonical(week.rules.load_size)} {week.rules.unit}", "the week's, "
        said.append(f"{'then' if said else 'A load is'} {of_week if said else ''}{size}")
    return ", ".join(said) + ". All loads of a shipment are full but the last."


def _smallest_drops(plan: Plan) -> str:
    listed = [
        f"{c.name} {canonical(c.smallest_drop)} {plan.week.rules.unit}"
        for c in plan.week.customers.values()
        if c.smallest_drop
    ]
    return f"By one rate a customer gets nothing, or at least its smallest drop: {_listed(listed)}."


def _loads_a_day(plan: Plan) -> str:
    rules, counted = plan.week.rules, counted_depots(plan.week)
    days = canonical(rules.loading_days)
    why = "" if rules.days is not None else ", Monday to Friday, the common practice where Days says nothing"
    listed = [
        f"{d.name} {canonical(d.loads_a_day * rules.loading_days)}"
        for d in plan.week.depots.values()
        if d.loads_a_day is not None and counted.get(d.name)
    ]
    return (
        f"The week has {days} loading days{why}. So many loads may leave in it, Loads a day times days: "
        f"{_listed(listed)}. On which day each goes is not planned."
    )


def _hauliers(plan: Plan) -> str:
    listed = [
        f"{h.name} {canonical(h.at_most)} {plan.week.rules.unit}"
        for h in plan.week.hauliers.values()
        if h.at_most is not None
    ]
    return f"Over all lanes together a haulier carries at most: {_listed(listed)}."


def _how_found(plan: Plan) -> str:
    whole, currency = plan.whole, plan.week.rules.currency
    if whole is None:
        return ""
    cost = cost_of_wholeness(plan)
    beside = (
        ""
        if cost is None
        else (
            f" A plan that could send parts of vehicles, without the rules on whole loads, would cost "
            f"{canonical(whole.divisible_cost)} {currency}: {canonical(cost)} less."
        )
    )
    near = " A plan that was issued before decides nothing here but where the search starts."
    return whole.how(plan.proof.exact) + beside + near


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
        lambda plan: bool(plan.week.rates.flat.per_load.any()),
        lambda _: (
            "Where a rate is per load, the quantity is divided by the load size and rounded up per customer "
            "and rate row: a part load pays whole."
        ),
    ),
    Rule(
        "Load size",
        lambda plan: any(shipment.loads is not None for shipment in plan.shipments),
        _load_sizes,
    ),
    Rule(
        "Trip minimum",
        lambda plan: bool(given(plan.week.rates.flat, "trip_minimum").any()),
        lambda _: (
            "A load costs at least its trip minimum. It is compared with what the load costs with its "
            "surcharge, and bears none itself."
        ),
    ),
    Rule(
        "Charge per use",
        lambda plan: bool(given(plan.week.rates.flat, "charge_per_use").any()),
        lambda _: (
            "A charge per use is paid once in the week for a rate row that carries anything, within the "
            "shipment that it belongs to; no surcharge is on it."
        ),
    ),
    Rule(
        "Opening charge",
        _any_depot(lambda depot: depot.opening_charge),
        lambda _: (
            "A depot's opening charge is paid once if anything is sent from it this week. It is payable and "
            "no freight: it stands apart, on Costs."
        ),
    ),
    Rule("Smallest drop", _any_customer(lambda customer: customer.smallest_drop), _smallest_drops),
    Rule("Loads a day", lambda plan: any(counted_depots(plan.week).values()), _loads_a_day),
    Rule("Hauliers", lambda plan: any(h.at_most is not None for h in plan.week.hauliers.values()), _hauliers),
    Rule(
        "Gone and whole loads",
        lambda plan: plan.whole is not None and bool(plan.week.gone),
        lambda _: (
            "What has gone is paid as its own rate says, a charge per use included, which is not due again. "
            "A depot that something has left is open: its opening charge stands. Its loads count against "
            "Loads a day."
        ),
    ),
    Rule("How it was found", lambda plan: plan.whole is not None, _how_found),
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
    Rule(
        "Aims one by one",
        lambda plan: plan.model.apart,
        lambda _: (
            "The rates have so many digits that the aims were solved one after the other, each proved, and "
            "each on what the ones before leave free. What a unit is worth is not told for such a plan."
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
