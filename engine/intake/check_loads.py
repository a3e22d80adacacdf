"""The findings on whole loads: sizes that are missing or make no sense, drops, hauliers and their limits."""

from collections.abc import Iterator
from decimal import Decimal

import numpy as np

from engine.exact import BLANK, canonical
from engine.findings import Finding, Severity
from engine.intake.names import nearest
from engine.intake.places import Where
from engine.load_sizes import counted_depots, given, load_sizes
from engine.rates import RateTable
from engine.week import Week

_MOST = 20


def about_loads(week: Week, where: Where) -> Iterator[Finding]:
    """Everything there is to say of load sizes, rates per load, smallest drops and hauliers."""
    yield from _without_size(week, where)
    yield from _uncounted(week, where)
    yield from _empty_loads(week, where)
    yield from _negative_per_load(week, where)
    yield from _drops(week, where)
    yield from _hauliers(week, where)


def _without_size(week: Week, where: Where) -> Iterator[Finding]:
    """Rows that are charged by the load, where neither row, haulier nor week says what a load is."""
    table = week.rates.flat
    unsized = (load_sizes(week).values == BLANK) & ~table.closed
    for marked, field, why in (
        (table.per_load, "per", "the rate is per load"),
        (given(table, "trip_minimum") & ~table.per_load, "trip_minimum", "the trip minimum is per load"),
    ):
        rows = np.flatnonzero(unsized & marked)
        if len(rows):
            more = f" and {len(rows) - 1} more" if len(rows) > 1 else ""
            yield _on(
                where("rates", int(rows[0]), field),
                Severity.STOPS,
                "load size missing",
                f"{_lane(table, int(rows[0]))}{more}: {why}, and no load size is given.",
                "Give the load size of the row, of its haulier on Hauliers, or on Rules.",
            )


def _uncounted(week: Week, where: Where) -> Iterator[Finding]:
    """Depots whose loads a day cannot be counted, since some open row does not say what a load is."""
    names = [name for name, counted in counted_depots(week).items() if not counted]
    if not names:
        return
    sized = bool((load_sizes(week).values != BLANK).any())
    shown = ", ".join(names[:5]) + (f" and {len(names) - 5} more" if len(names) > 5 else "")
    yield _on(
        where("depots", names[0], "loads_a_day"),
        Severity.CHECK if sized else Severity.NOTE,
        "loads a day not counted",
        f"Loads a day of {shown} is not planned with: "
        + ("some rates from there have no load size." if sized else "no load size is given."),
        "Give a load size on Rules, on Hauliers or on the rates.",
    )


def _empty_loads(week: Week, where: Where) -> Iterator[Finding]:
    table = week.rates.flat
    column = table.decimals.get("load_size")
    if column is not None:
        for row in np.flatnonzero((column.values != BLANK) & (column.values <= 0))[:_MOST].tolist():
            yield _on(
                where("rates", row, "load_size"),
                Severity.STOPS,
                "load size",
                f"{_lane(table, row)}: a load size must be more than 0.",
                "Type a number above 0, or leave it blank.",
                canonical(column.get(row) or Decimal(0)),
            )
    for one in week.hauliers.values():
        if one.load_size is not None and one.load_size <= 0:
            yield _on(
                where("hauliers", one.name, "load_size"),
                Severity.STOPS,
                "load size",
                f"{one.name}: a load size must be more than 0.",
                "Type a number above 0, or leave it blank.",
                canonical(one.load_size),
            )


def _negative_per_load(week: Week, where: Where) -> Iterator[Finding]:
    table = week.rates.flat
    rows = np.flatnonzero(table.per_load & (table.rate.values < 0) & (table.rate.values != BLANK))
    if len(rows):
        row = int(rows[0])
        more = f" and {len(rows) - 1} more" if len(rows) > 1 else ""
        yield _on(
            where("rates", row, "rate"),
            Severity.STOPS,
            "negative rate per load",
            f"{_lane(table, row)}{more}: a rate per load below 0 would pay for sending empty vehicles.",
            "Give it per unit, or without the minus.",
            canonical(table.rate.get(row) or Decimal(0)),
        )


def _drops(week: Week, where: Where) -> Iterator[Finding]:
    for customer in week.customers.values():
        drop = customer.smallest_drop
        if drop is not None and customer.ordered and drop > customer.ordered:
            yield _on(
                where("customers", customer.name, "smallest_drop"),
                Severity.CHECK,
                "smallest drop over order",
                f"{customer.name} ordered {canonical(customer.ordered)}, less than its smallest drop "
                f"{canonical(drop)}: nothing can be delivered.",
                "Lower Smallest drop, or raise the order.",
                canonical(drop),
            )


def _hauliers(week: Week, where: Where) -> Iterator[Finding]:
    known = set(week.rates.flat.haulier_names)
    for name in [name for name in week.hauliers if name not in known][:_MOST]:
        near = nearest(name, sorted(known))
        asked = f" Did you mean {near}?" if near else ""
        yield _on(
            where("hauliers", name, "name"),
            Severity.CHECK,
            "unknown haulier",
            f"'{name}' on Hauliers is on no rate row; nothing is limited by it.{asked}",
            "Spell it as on Rates.",
            name,
        )


def _lane(table: RateTable, row: int) -> str:
    depot, customer, _ = table.named(row)
    return f"{depot} to {customer}"


def _on(
    place: tuple[str, str, str], severity: Severity, rule: str, message: str, mend: str, read: str = ""
) -> Finding:
    file, sheet, cell = place
    return Finding(severity, rule, message, mend, file, sheet, cell, read)
