"""The usual plan: what the desk would have done by a rule of thumb, or did, completed to a full plan.

Whatever the rule, what has gone and what is held stays, limits and closed lanes are kept, and nobody
sends more than there is. Lane after lane then takes as much as stock, order and limit allow, in the order
of the rule: the least-cost method (also "matrix minimum"; Dantzig 1963, ch. 14; Winston, *Operations
Research*, "minimum cost method") with the rate, or the distance, as what is least. Customers of priority A
come first, as the week's own aims have it.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal
from enum import StrEnum
from fractions import Fraction
from typing import Any

import numpy as np
import numpy.typing as npt

from engine.compare.distances import distances
from engine.compare.quantities import Costed, costed
from engine.compare.wishes import Wish, as_sent, in_shares
from engine.exact import canonical, to_decimal
from engine.figures import PRIORITIES
from engine.intake.earlier import Quantities
from engine.planning.model import NO_RATE, Integers, Model, model_of, priority_of
from engine.planning.spread import has_whole_loads
from engine.week import Week


class Rule(StrEnum):
    """How the desk would have planned; `words` is what the rule is called on screen."""

    NEAREST = "nearest"
    CHEAPEST = "cheapest"
    SHARES = "shares"
    ACTUAL = "actual"

    @property
    def words(self) -> str:
        return _WORDS[self.value]


_WORDS = {
    "nearest": "nearest depot first",
    "cheapest": "cheapest lane first",
    "shares": "last week's shares",
    "actual": "the plan as it was sent",
}


class NoRule(ValueError):
    """The rule cannot be followed with these figures; the message says what is missing."""


@dataclass(frozen=True, eq=False)
class UsualPlan:
    """A usual plan with its costs. `remarks` say, as sentences, what the rule could not do as it stands."""

    rule: Rule
    costs: Costed
    remarks: tuple[str, ...] = ()


def rules_possible(week: Week, model: Model | None = None) -> tuple[Rule, ...]:
    """The rules that need nothing but the figures of the week, the usual one first."""
    found = distances(week, model or model_of(week))
    near = (Rule.NEAREST,) if found.given + found.straight else ()
    return (*near, Rule.CHEAPEST)


def usual_plan(
    week: Week, rule: Rule, sent: Quantities | None = None, completed: Rule | None = None
) -> UsualPlan:
    """What the desk would have sent this week.

    Args:
        week: one that can be planned (`plan_week` says whether it can).
        rule: how the desk decides.
        sent: for shares, what went last week; for the plan as sent, its quantities, by rate row.
        completed: how the rest is sent where shares or quantities do not fit this week's figures; None: the
            nearest depot first where distances are known, else the cheapest lane.

    Raises:
        NoRule: distances or earlier quantities are needed and there are none.
        TooLarge: a figure does not fit the exact integers.
    """
    model = model_of(week)
    remarks: list[str] = []
    ground = _Ground.of(week, model)
    filling = rule
    if rule in (Rule.SHARES, Rule.ACTUAL):
        if sent is None:
            raise NoRule(
                "Last week's plan is not in the records, so there are no shares to go by."
                if rule is Rule.SHARES
                else "Give the plan as it was sent: a list of Depot, Customer and Send."
            )
        filling = completed or rules_possible(week, model)[0]
        wishes, lost = (in_shares if rule is Rule.SHARES else as_sent)(week, model, sent)
        granted = sum(ground.grant(wish) for wish in wishes)
        remarks += _about_wishes(week, model, wishes, granted, lost, rule)
    rest = ground.fill(_order(week, model, filling))
    if filling is not rule and rest:
        amount = canonical(to_decimal(rest, model.quantity_places))
        remarks.append(f"The other {amount} {week.rules.unit} were sent {filling.words}.")
    if filling is Rule.NEAREST:
        remarks += _about_distances(week, model)
    if has_whole_loads(week):
        remarks.append(
            "Loads a day, hauliers' limits, smallest drops and single depots were not minded, so the usual "
            "plan may be cheaper here than it could be."
        )
    return UsualPlan(rule, costed(week, model, ground.sent), tuple(remarks))


@dataclass(eq=False)
class _Ground:
    """What is still to be had while a plan is filled, in grains: by depot, customer and row.

    promised: what limits and holds have put on each row, as far as no wish has been met by it
    """

    sent: Integers
    promised: list[int]
    stock: list[int]
    wanted: list[int]
    room: list[int]
    depot: list[int]
    customer: list[int]

    @classmethod
    def of(cls, week: Week, model: Model) -> "_Ground":
        """Everything but what limits and holds force, which is sent already."""
        problem = model.problem
        is_rate = model.rate_row != NO_RATE
        least = np.zeros(problem.rows, np.int64) if problem.at_least is None else problem.at_least
        most = problem.at_most if problem.at_most is not None else np.full(problem.rows, 2**62)
        customer = np.repeat(np.arange(problem.customers), np.diff(problem.start))
        sent = np.where(is_rate, least, 0)
        stock, wanted = problem.supply[:-1].copy(), problem.demand[:-1].copy()
        np.subtract.at(stock, problem.depot[is_rate], sent[is_rate])
        np.subtract.at(wanted, customer[is_rate], sent[is_rate])
        room = np.where(is_rate, most - sent, 0)
        room[_declined(week, model, customer)] = 0
        lists = (part.tolist() for part in (sent, stock, wanted, room, problem.depot, customer))
        return cls(sent, *lists)

    def send(self, row: int, wish: int) -> int:
        """Send as much of a wish along a row as can be; what was sent."""
        i, j = self.depot[row], self.customer[row]
        much = min(wish, self.room[row], self.stock[i], self.wanted[j])
        if much > 0:
            self.sent[row] += much
            self.room[row] -= much
            self.stock[i] -= much
            self.wanted[j] -= much
        return max(0, much)

    def grant(self, wish: Wish) -> int:
        """Send what somebody sent before along the rows it may go by; what of it could be."""
        left = wish.grains
        for row in wish.rows:
            met = min(left, self.promised[row])
            self.promised[row] -= met
            left -= met
            left -= self.send(row, left)
        return wish.grains - left

    def fill(self, order: Iterable[int]) -> int:
        """Send as much as can be along each row in turn; the sum."""
        wanted, stock, customer, depot = self.wanted, self.stock, self.customer, self.depot
        sent = 0
        for row in order:
            still = wanted[customer[row]]
            if still > 0 and stock[depot[row]] > 0:  # most rows of a large week end here
                sent += self.send(row, still)
        return sent


def _declined(week: Week, model: Model, customer: Integers) -> Integers:
    """Rows to customers who may decline and would: the rate is above the charge if short."""
    declining = [j for j, one in enumerate(week.customers.values()) if one.may_decline]
    if not declining:
        return np.zeros(0, dtype=np.int64)
    rows = np.flatnonzero((model.rate_row != NO_RATE) & np.isin(customer, declining))
    charge = model.money[model.short_rows]
    return rows[model.money[rows] > charge[customer[rows]]]


def _order(week: Week, model: Model, rule: Rule) -> list[int]:
    """The open rate rows in the order in which the rule takes them; sheet order among equals."""
    problem = model.problem
    rows = np.flatnonzero(model.rate_row != NO_RATE)
    if problem.at_most is not None:
        rows = rows[problem.at_most[rows] > 0]
    customer = np.repeat(np.arange(problem.customers), np.diff(problem.start))[rows]
    first = np.array([PRIORITIES.index(priority_of(c)) for c in week.customers.values()], dtype=np.int64)
    keys: list[npt.NDArray[Any]] = [model.rate_row[rows], model.money[rows]]  # the last key sorts first
    if rule is Rule.NEAREST:
        found = distances(week, model)
        if not found.given + found.straight:
            raise NoRule("No lane has Km, and depots or customers have no coordinates: nobody is nearest.")
        keys.append(found.km[rows])
    ordered: list[int] = rows[np.lexsort((*keys, first[customer]))].tolist()
    return ordered


def _about_wishes(
    week: Week, model: Model, wishes: list[Wish], granted: int, lost: Fraction, rule: Rule
) -> list[str]:
    unit, places = week.rules.unit, model.quantity_places
    said = []
    what = "last week" if rule is Rule.SHARES else "in that plan"
    if lost:
        amount = canonical(_shown(lost, places))
        said.append(f"{amount} {unit} went {what} on lanes that have no open rate this week.")
    trimmed = sum(wish.grains for wish in wishes) - granted
    if trimmed:
        amount = canonical(to_decimal(trimmed, places))
        said.append(f"{amount} {unit} of it do not fit this week's stock, orders, limits or holds.")
    return said


def _shown(lost: Fraction, places: int) -> Decimal:
    return to_decimal(int(lost * 10**places), places)


def _about_distances(week: Week, model: Model) -> list[str]:
    found = distances(week, model)
    if found.unknown:
        return [f"{found.unknown:,} rate rows have neither Km nor coordinates and come last."]
    if found.given and found.straight:
        return [f"Km as given on {found.given:,} rate rows, the straight line on {found.straight:,}."]
    return []
