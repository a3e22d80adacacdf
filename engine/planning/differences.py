"""What differs between two plans, row by row, and what a change would make of a plan before it is made."""

from dataclasses import dataclass
from decimal import Decimal
from typing import Protocol

from engine.changes import Change
from engine.exact import TooLarge, canonical, total_of
from engine.figures import RateKey
from engine.findings import Finding, Severity
from engine.intake.earlier import Quantities
from engine.planning.plan import Plan, Shipment, Short
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Refused, Week, describe


@dataclass(frozen=True, slots=True)
class RowDifference:
    """A rate row that carries another quantity in the second plan."""

    key: RateKey
    before: Decimal
    after: Decimal

    @property
    def more(self) -> Decimal:
        """What is added; negative where something is taken away."""
        return total_of((self.after, -self.before))

    def words(self, unit: str) -> str:
        """The difference for a person: who sends what more or less to whom."""
        more = self.more
        word = "more" if more > 0 else "less"
        return f"{canonical(abs(more))} {unit} {word} from {describe(self.key)}"


@dataclass(frozen=True, slots=True)
class ShortDifference:
    """A customer who goes short of another quantity in the second plan; `more` is negative for less."""

    customer: str
    more: Decimal


@dataclass(frozen=True, slots=True)
class Difference:
    """The second plan against the first: positive is dearer, or more.

    `rows` are the rate rows that changed, the largest change first; `to_ring` the depots, customers and
    hauliers that they concern. `who_short` are the customers behind `short`, the worst hit first.
    """

    freight_payable: Decimal
    charges: Decimal
    short: Decimal
    rows: tuple[RowDifference, ...]
    who_short: tuple[ShortDifference, ...] = ()

    @property
    def to_ring(self) -> tuple[str, ...]:
        """Whom to ring: every depot, customer and haulier of a changed row, once, in order."""
        names = [name for row in self.rows for name in (row.key.depot, row.key.customer, row.key.haulier)]
        return tuple(dict.fromkeys(name for name in names if name))


class Delivered(Protocol):
    """A plan as it stands, or as it was issued."""

    @property
    def shipments(self) -> tuple[Shipment, ...]: ...
    @property
    def short(self) -> tuple[Short, ...]: ...
    @property
    def freight_payable(self) -> Decimal: ...
    @property
    def short_cost(self) -> Decimal: ...
    @property
    def unsent_cost(self) -> Decimal: ...
    @property
    def opening_cost(self) -> Decimal: ...


def difference(before: Delivered, after: Delivered) -> Difference:
    """What the second plan does otherwise than the first."""
    first, second = (_by_row(plan) for plan in (before, after))
    rows = [
        RowDifference(key, first.get(key, Decimal(0)), second.get(key, Decimal(0)))
        for key in dict.fromkeys([*first, *second])
        if first.get(key, Decimal(0)) != second.get(key, Decimal(0))
    ]
    return Difference(
        freight_payable=total_of((after.freight_payable, -before.freight_payable)),
        charges=total_of((_charges(after), -_charges(before))),
        short=total_of([*(s.quantity for s in after.short), *(-s.quantity for s in before.short)]),
        rows=tuple(sorted(rows, key=lambda row: -abs(row.more))),
        who_short=_who_short(before, after),
    )


def _who_short(before: Delivered, after: Delivered) -> tuple[ShortDifference, ...]:
    """Each customer whose shortage is another, those who lose most first."""
    was, now = ({one.customer: one.quantity for one in plan.short} for plan in (before, after))
    nothing = Decimal(0)
    changed = (
        ShortDifference(name, total_of((now.get(name, nothing), -was.get(name, nothing))))
        for name in dict.fromkeys([*now, *was])
    )
    return tuple(sorted((one for one in changed if one.more), key=lambda one: -one.more))


@dataclass(frozen=True, slots=True)
class Bounds:
    """Between what a change certainly costs, charges included, where a search was cut short."""

    at_least: Decimal
    at_most: Decimal


@dataclass(frozen=True, slots=True)
class Outcome:
    """What a change would lead to: a plan and its difference, or the findings that stand in the way."""

    week: Week
    plan: Plan | None
    difference: Difference | None
    findings: tuple[Finding, ...] = ()
    bounds: Bounds | None = None


WHAT_IF_SECONDS = 5.0
"""How long a search by whole loads may take for the price of a change that is only put up."""


def outcome(
    plan: Plan,
    change: Change,
    near: Plan | Quantities | None = None,
    time_limit: float | None = WHAT_IF_SECONDS,
) -> Outcome:
    """What a change to a plan's week would cost and move, and whether it can be done at all.

    near: the plan that the changed one stays nearest to; None: `plan` itself
    time_limit: seconds for a search by whole loads
    """
    try:
        week = plan.week.apply(change)
    except Refused as refused:
        return Outcome(plan.week, None, None, (Finding(Severity.STOPS, "refused", str(refused)),))
    try:
        near = plan if near is None or plan.whole is not None else near
        after = plan_week(week, near=near, time_limit=time_limit)
    except NotPlannable as stopped:
        return Outcome(week, None, None, stopped.findings)
    except TooLarge as too_large:
        return Outcome(week, None, None, (Finding(Severity.STOPS, "too large", str(too_large)),))
    return Outcome(week, after, difference(plan, after), bounds=_bounds(plan, after))


def _bounds(before: Plan, after: Plan) -> Bounds | None:
    """None where both plans are proved to cost the least."""
    if not before.proof.gap and not after.proof.gap:
        return None
    return Bounds(
        total_of((after.proof.lower_bound, -before.total_cost)),
        total_of((after.total_cost, -before.proof.lower_bound)),
    )


def _charges(plan: Delivered) -> Decimal:
    """Charges for short, unsent and opened."""
    return total_of((plan.short_cost, plan.unsent_cost, plan.opening_cost))


def _by_row(plan: Delivered) -> dict[RateKey, Decimal]:
    """Quantities by rate row; what has gone on a row counts into it."""
    sums: dict[RateKey, list[Decimal]] = {}
    for shipment in plan.shipments:
        sums.setdefault(shipment.key, []).append(shipment.quantity)
    return {key: total_of(quantities) for key, quantities in sums.items()}
