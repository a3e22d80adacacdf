"""Limits and holds that cannot all be kept: each contradiction named with a minimal set of figures.

Anything may go short and anything may stay, so figures contradict each other only where something is
*forced*: at a customer (beyond its order, or from a depot it does not take from) or at a depot (beyond
what it has).
"""

from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from decimal import Decimal

import numpy as np

from engine.exact import canonical, total_of
from engine.figures import ANY_SINGLE_DEPOT, RateKey
from engine.findings import Finding, Severity
from engine.planning.gone import left, remaining
from engine.week import Week, describe

RULE = "contradiction"


@dataclass(frozen=True, slots=True)
class Forced:
    """A quantity that a hold or an *at least* forces onto a rate row; `rest` is what of it has not gone."""

    key: RateKey
    quantity: Decimal
    held: bool
    rest: Decimal

    def words(self, unit: str) -> str:
        kind = "hold" if self.held else "at least"
        return f"{describe(self.key)} ({kind} {canonical(self.quantity)} {unit})"


def contradictions(week: Week) -> tuple[Finding, ...]:
    """Every contradiction between rows; none: the week can be planned.

    What speaks against itself on a single row, `engine.intake.check` has found before.
    """
    forced = list(_forced(week))
    findings = [finding for one in forced for finding in _against_one_depot(week, one)]
    if findings:
        return tuple(findings)
    unit, gone = week.rules.unit, left(week)
    for what, limit_word, limits, used in (
        ("customer", "ordered", {name: c.ordered for name, c in week.customers.items()}, gone.customer),
        ("depot", "available", {name: d.available for name, d in week.depots.items()}, gone.depot),
    ):
        at: dict[str, list[Forced]] = defaultdict(list)
        for one in forced:
            at[getattr(one.key, what)].append(one)
        for name, there in at.items():
            limit = remaining(limits[name], used.get(name))
            if total_of(one.rest for one in there) > limit:
                has = f"{name} has {canonical(limits[name])} {unit} {limit_word}"
                if name in used:
                    has += f", of which {canonical(used[name])} {unit} have gone"
                findings.append(_beyond(has, minimal(there, limit), unit))
    return tuple(findings)


def minimal(forced: Iterable[Forced], limit: Decimal) -> list[Forced]:
    """Members that together go beyond the limit while no member less would."""
    kept = sorted(forced, key=lambda one: one.rest, reverse=True)
    total = total_of(one.rest for one in kept)
    for one in reversed(kept.copy()):  # the smallest first, so that few large ones remain
        if total - one.rest > limit:
            kept.remove(one)
            total -= one.rest
    return kept


def _forced(week: Week) -> Iterable[Forced]:
    """What is forced on the rows whose depot and customer are in the week."""
    gone = left(week).row
    for key, hold in week.holds.items():
        if key.depot in week.depots and key.customer in week.customers:
            yield Forced(key, hold.quantity, True, remaining(hold.quantity, _gone_on(gone, key)))
    flat = week.rates.flat
    if "at_least" not in flat.decimals:
        return
    for position in np.flatnonzero(flat.decimals["at_least"].values > 0):
        key = week.rates.key_of(int(week.rates.ids_in_order[position]))
        least = flat.decimals["at_least"].get(int(position))
        if least and key not in week.holds and key.depot in week.depots and key.customer in week.customers:
            yield Forced(key, least, False, remaining(least, _gone_on(gone, key)))


def _gone_on(gone: Mapping[tuple[str, str, str | None], Decimal], key: RateKey) -> Decimal | None:
    """What has gone on a row; of rows alike it is counted on the first."""
    return gone.get((key.depot, key.customer, key.haulier)) if key.number == 1 else None


def _against_one_depot(week: Week, forced: Forced) -> Iterable[Finding]:
    """What is forced on a row of a customer that takes from another depot only."""
    only = week.customers[forced.key.customer].one_depot
    if only not in (None, ANY_SINGLE_DEPOT, forced.key.depot) and forced.quantity > 0:
        yield _finding(
            f"{forced.words(week.rules.unit)} goes to a customer that takes from {only} only.",
            "Take the quantity off the row, or change One depot.",
        )


def _beyond(has: str, members: list[Forced], unit: str) -> Finding:
    total = total_of(one.rest for one in members)
    still = "still " if any(one.rest != one.quantity for one in members) or has.endswith("gone") else ""
    listed = "; ".join(one.words(unit) for one in members)
    return _finding(
        f"{has}, but {canonical(total)} {unit} are {still}forced: {listed}.",
        "Lower or lift any one of these, or raise the figure.",
    )


def _finding(message: str, mend: str) -> Finding:
    return Finding(Severity.STOPS, RULE, f"These figures contradict each other: {message}", mend)
