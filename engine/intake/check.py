"""The findings that depend on a week as a whole: after reading it, and after every edit."""

from collections.abc import Iterator
from decimal import Decimal

from engine.exact import canonical
from engine.figures import ANY_SINGLE_DEPOT, WHEN_SHORT
from engine.findings import Finding, Severity
from engine.intake.check_loads import about_loads
from engine.intake.check_rates import (
    contradicting_limits,
    out_of_reach,
    same_rows,
    unknown_names,
)
from engine.intake.check_sizes import out_of_proportion, swapped_places
from engine.intake.names import nearly_alike
from engine.intake.places import Where, nowhere
from engine.week import Week, describe

_MOST = 20


def check_week(week: Week, where: Where = nowhere) -> tuple[Finding, ...]:
    """What there is to say of a week, gravest first.

    where: gives file, sheet and cell of a figure by table, name (or position of the rate row in
        `week.rates.flat`) and field
    """
    findings = [
        *_missing(week),
        *_depots(week, where),
        *_customers(week, where),
        *_rules(week, where),
        *unknown_names(week, where),
        *contradicting_limits(week, where),
        *about_loads(week, where),
        *same_rows(week, where),
        *out_of_reach(week, where),
        *out_of_proportion(week, where),
        *swapped_places(week, where),
        *_holds(week, where),
    ]
    return tuple(sorted(findings, key=lambda finding: finding.severity))


def _missing(week: Week) -> Iterator[Finding]:
    wanted = (
        (len(week.depots), "depots", "There are no depots.", "Depot and Available"),
        (len(week.customers), "customers", "There are no customers.", "Customer and Ordered"),
        (len(week.rates), "rates", "There are no rates: no lane from any depot to any customer.",
         "Depot, Customer and Rate, or a grid of rates"),
    )  # fmt: skip
    for count, table, message, headings in wanted:
        if not count:
            yield Finding(
                Severity.STOPS,
                f"no {table}",
                message,
                f"Give a sheet with the headings {headings}.",
                sheet=table.capitalize(),
            )


def _depots(week: Week, where: Where) -> Iterator[Finding]:
    for depot in week.depots.values():
        if depot.must_move is not None and depot.must_move > depot.available:
            yield _on(
                where("depots", depot.name, "must_move"),
                Severity.STOPS,
                "must move over available",
                f"{depot.name} must move {canonical(depot.must_move)} but has only "
                f"{canonical(depot.available)} available.",
                "Lower Must move, or raise Available.",
                canonical(depot.must_move),
            )
        if depot.charge_if_unsent is not None and depot.charge_if_unsent < 0:
            yield _on(
                where("depots", depot.name, "charge_if_unsent"),
                Severity.CHECK,
                "credit if unsent",
                f"{depot.name}: a negative charge if unsent is a credit for every unit that is kept.",
                "Take the minus away if a cost is meant.",
                canonical(depot.charge_if_unsent),
            )
        if (depot.latitude is None) != (depot.longitude is None):
            yield _half_a_place("depots", depot.name, where)
    yield from _alike("depots", list(week.depots), where)


def _customers(week: Week, where: Where) -> Iterator[Finding]:
    for customer in week.customers.values():
        if (customer.latitude is None) != (customer.longitude is None):
            yield _half_a_place("customers", customer.name, where)
        tied = customer.one_depot
        if tied is not None and tied != ANY_SINGLE_DEPOT and tied not in week.depots:
            yield _on(
                where("customers", customer.name, "one_depot"),
                Severity.STOPS,
                "unknown name",
                f"{customer.name} takes from the depot '{tied}' only, which is not among the depots.",
                "Type a depot's name, yes, or leave it blank.",
                tied,
            )
    yield from _alike("customers", list(week.customers), where)


def _alike(table: str, names: list[str], where: Where) -> Iterator[Finding]:
    for first, second in nearly_alike(names)[:_MOST]:
        yield _on(
            where(table, second, "name"),
            Severity.CHECK,
            "names nearly alike",
            f"'{first}' and '{second}' were read as two {table}; only spaces, accents or marks differ.",
            "Give both the same spelling if one is meant.",
            second,
        )


def _half_a_place(table: str, name: str, where: Where) -> Finding:
    return _on(
        where(table, name, "latitude"),
        Severity.CHECK,
        "half a place",
        f"{name} has only one of latitude and longitude, and is not put on the map.",
        "Give both, or none.",
        name,
    )


def _rules(week: Week, where: Where) -> Iterator[Finding]:
    rules = week.rules
    if rules.when_short not in WHEN_SHORT:
        yield _on(
            where("rules", "when_short", "value"),
            Severity.STOPS,
            "rule",
            f"When short is '{rules.when_short}', which is no rule.",
            f"Choose {', '.join(WHEN_SHORT[:-1])} or {WHEN_SHORT[-1]}.",
            rules.when_short,
        )
    for name, value in (("load_size", rules.load_size), ("step", rules.step), ("days", rules.days)):
        if value is not None and value <= 0:
            yield _on(
                where("rules", name, "value"),
                Severity.STOPS,
                "rule",
                f"{name.replace('_', ' ').capitalize()} must be more than 0.",
                "Type a number above 0, or leave it blank.",
                canonical(value),
            )


def _holds(week: Week, where: Where) -> Iterator[Finding]:
    """Holds on rows that are not there, and holds outside the limits of their row."""
    position = (
        {int(number): place for place, number in enumerate(week.rates.ids_in_order)} if week.holds else {}
    )
    for key, hold in week.holds.items():
        number = week.rates.find(key)
        row = None if number is None else week.rates.row(number)
        if number is None or row is None:
            yield Finding(
                Severity.STOPS,
                "hold",
                f"A hold is on {describe(key)}, for which there is no rate.",
                "Lift the hold, or give the rate.",
            )
            continue
        low, high = row.at_least or Decimal(0), row.at_most
        if row.closed and hold.quantity:
            broken = "the row is closed"
        elif hold.quantity < low or (high is not None and hold.quantity > high):
            limit = f"at most {canonical(high)}" if high is not None and hold.quantity > high else ""
            broken = f"the row takes {limit or f'at least {canonical(low)}'}"
        else:
            continue
        yield _on(
            where("rates", position[number], "hold"),
            Severity.STOPS,
            "hold",
            f"{canonical(hold.quantity)} is held on {describe(key)}, but {broken}.",
            "Lift the hold, or change the limit.",
            canonical(hold.quantity),
        )


def _on(
    place: tuple[str, str, str], severity: Severity, rule: str, message: str, mend: str, read: str = ""
) -> Finding:
    file, sheet, cell = place
    return Finding(severity, rule, message, mend, file, sheet, cell, read)
