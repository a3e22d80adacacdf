"""What has gone: it counts against stock, orders and limits of the whole week, and nothing moves it."""

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date
from decimal import Decimal

import numpy as np

from engine.exact import canonical, places_needed, to_decimal, to_integer
from engine.figures import Gone, RateKey, RateRow
from engine.findings import Finding, Severity
from engine.load_sizes import loads_of
from engine.money import round_half_up
from engine.rates import NO_CODE, Codes, Flags, RateTable
from engine.week import Week, describe


@dataclass(frozen=True, slots=True)
class Left:
    """Sums of what has gone: from a depot, to a customer, on a lane by a haulier."""

    depot: dict[str, Decimal]
    customer: dict[str, Decimal]
    row: dict[tuple[str, str, str | None], Decimal]


def left(week: Week) -> Left:
    """What has gone, added up."""
    sums = Left({}, {}, {})
    for gone in week.gone.values():
        lane = (gone.depot, gone.customer, gone.haulier)
        sums.depot[gone.depot] = sums.depot.get(gone.depot, Decimal(0)) + gone.quantity
        sums.customer[gone.customer] = sums.customer.get(gone.customer, Decimal(0)) + gone.quantity
        sums.row[lane] = sums.row.get(lane, Decimal(0)) + gone.quantity
    return sums


def remaining(figure: Decimal | None, gone: Decimal | None) -> Decimal:
    """What is left of a figure of the whole week, never less than nothing."""
    return max(Decimal(0), (figure or Decimal(0)) - (gone or Decimal(0)))


def cost_of(gone: Gone) -> Decimal:
    """Exactly quantity times rate."""
    quantity_places, rate_places = places_needed(gone.quantity), places_needed(gone.rate)
    product = to_integer(gone.quantity, quantity_places) * to_integer(gone.rate, rate_places)
    return to_decimal(product, quantity_places + rate_places)


def rate_on(week: Week, depot: str, customer: str, haulier: str | None, day: date | None) -> Decimal | None:
    """What a haulier charges per unit on a lane on a day, surcharge included; None where nothing is quoted.

    Of several rows the one that became valid last counts; without a day, the latest of all.
    """
    row = _valid_row([row for row in _rows(week, depot, customer, haulier) if row.per == "unit"], day)
    return None if row is None else _with_surcharge(week, row)


def _valid_row(rows: list[RateRow], day: date | None) -> RateRow | None:
    """The row that became valid last, by a day or of all."""
    valid = [row for row in rows if day is None or row.valid_from is None or row.valid_from <= day]
    return max(valid, key=lambda row: row.valid_from or date.min) if valid else None


def _with_surcharge(week: Week, row: RateRow) -> Decimal:
    percent = row.surcharge if row.surcharge is not None else week.rules.fuel_surcharge or Decimal(0)
    places, percent_places = places_needed(row.rate), places_needed(percent)
    factor = 100 * 10**percent_places + to_integer(percent, percent_places)
    return to_decimal(to_integer(row.rate, places) * factor, places + percent_places + 2)


def paid_per_unit(
    week: Week, depot: str, customer: str, haulier: str | None, day: date | None, quantity: Decimal
) -> Decimal | None:
    """What is payable per unit for a quantity that left: in whole loads, by trip minimum, a charge due once.

    Per unit exactly as quoted where the rate is. Else what the loads cost over the quantity, to so many
    places that the amount payable is the same to the cent. The charge per use is in what leaves first.
    """
    row = _valid_row(_rows(week, depot, customer, haulier), day)
    if row is None or not quantity:
        return None if row is None else rate_on(week, depot, customer, haulier, day)
    first = (depot, customer, haulier) not in left(week).row
    once = (row.charge_per_use or Decimal(0)) if first else Decimal(0)
    trip = row.trip_minimum or Decimal(0)
    if row.per == "unit" and not trip and not once:
        return rate_on(week, depot, customer, haulier, day)
    rate = _with_surcharge(week, row)
    theirs = week.hauliers.get(haulier or "")
    size = row.load_size or (theirs.load_size if theirs else None) or week.rules.load_size
    loads = loads_of(quantity, size) or 1
    if row.per == "load":
        cost = loads * max(rate, trip)
    elif trip and size:
        cost = (loads - 1) * max(rate * size, trip) + max(rate * (quantity - (loads - 1) * size), trip)
    else:
        cost = max(rate * quantity, trip)
    return round_half_up((cost + once) / quantity, PAID_PLACES)


PAID_PLACES = 10


def hauliers_of(week: Week, depot: str, customer: str) -> list[str | None]:
    """The hauliers that quote a rate on a lane, in sheet order."""
    flat = week.rates.flat
    rows = np.flatnonzero(
        _named(flat.depot_names, flat.depot, depot) & _named(flat.customer_names, flat.customer, customer)
    )
    return list(dict.fromkeys(flat.haulier_of(int(row)) for row in rows))


def unused_name(week: Week) -> str:
    """A name for the next quantity that goes: Load 1, Load 2 and so on."""
    number = len(week.gone) + 1
    while f"Load {number}" in week.gone:
        number += 1
    return f"Load {number}"


def superseded(flat: RateTable) -> Flags:
    """(rows,) rates that a row of the same lane and haulier with a later *Valid from* has replaced."""
    replaced = np.zeros(len(flat), dtype=bool)
    if flat.valid_from is None or not (flat.valid_from != NO_CODE).any():
        return replaced
    order = np.lexsort((flat.valid_from, flat.haulier, flat.depot, flat.customer))
    same = np.ones(len(order) - 1, dtype=bool)
    for column in (flat.customer, flat.depot, flat.haulier):
        same &= column[order[1:]] == column[order[:-1]]
    later = same & (flat.valid_from[order[1:]] > flat.valid_from[order[:-1]])
    dead = False
    for place in range(len(order) - 2, -1, -1):  # from the latest of each lane and haulier backwards
        dead = bool(same[place]) and (bool(later[place]) or dead)
        replaced[order[place]] = dead
    return replaced


def about_gone(week: Week) -> Iterable[Finding]:
    """Remarks on what has gone against what the week says."""
    sums, unit = left(week), week.rules.unit
    figures = (
        ("depot", "available", sums.depot, {d.name: d.available for d in week.depots.values()}),
        ("customer", "ordered", sums.customer, {c.name: c.ordered for c in week.customers.values()}),
    )
    for what, word, gone, stated in figures:
        for name, quantity in gone.items():
            if name not in stated:
                yield _finding(
                    f"{canonical(quantity)} {unit} have gone {_way(what)} {name}, which is not in the week.",
                    f"Add the {what}, or take the quantity out.",
                )
            elif quantity > stated[name]:
                yield _finding(
                    f"{canonical(quantity)} {unit} have gone {_way(what)} {name}, but only "
                    f"{canonical(stated[name])} {unit} are {word}.",
                    "Ordered and Available state the whole week: raise the figure, or mend what has gone.",
                )


def used_up(week: Week) -> Iterable[Finding]:
    """Limits and holds that what has gone already breaks."""
    sums = left(week)
    for key, hold in week.holds.items():
        gone = sums.row.get((key.depot, key.customer, key.haulier), Decimal(0))
        if key.number == 1 and gone > hold.quantity:
            yield Finding(
                Severity.STOPS,
                "contradiction",
                f"These figures contradict each other: {canonical(hold.quantity)} {week.rules.unit} are held "
                f"on {describe(key)}, but {canonical(gone)} {week.rules.unit} have gone.",
                "A hold states the whole week: raise it, or lift it.",
            )


def _named(names: tuple[str, ...], codes: Codes, name: str) -> Flags:
    """Which rows carry a name."""
    return np.equal(codes, names.index(name) if name in names else NO_CODE)


def _rows(week: Week, depot: str, customer: str, haulier: str | None) -> list[RateRow]:
    rows = (week.rates.row(number) for number in week.rates.ids(depot, customer, haulier))
    return [row for row in rows if row is not None]


def _way(what: str) -> str:
    return "from" if what == "depot" else "to"


def _finding(message: str, mend: str) -> Finding:
    return Finding(Severity.CHECK, "gone", message, mend)


def key_of(gone: Gone) -> RateKey:
    """The lane and haulier as a rate key."""
    return RateKey(gone.depot, gone.customer, gone.haulier)
