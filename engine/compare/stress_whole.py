"""A case of a stress run where vehicles are whole: a plan searched for a bounded time, and what is proved.

A week with whole loads has no network whose plan could be followed from case to case. Each case is the
week with a change, and its plan is searched for from today's plan on; beside what it costs stands what any
plan that serves as well must cost at least.
"""

from collections.abc import Iterable
from dataclasses import dataclass, replace
from decimal import Decimal

from engine.changes import Alter, Change, Together
from engine.compare.stress_cases import AS_IT_IS, Case, change_of, lanes_lost_by
from engine.compare.stress_solve import Outcome
from engine.exact import TooLarge, total_of
from engine.figures import RateKey
from engine.planning.differences import difference
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Refused, Week

SECONDS_A_CASE = 5.0
"""How long a case is searched for where nobody says otherwise."""

MOST_DEAREST = 10
"""Of the lanes in use, so many that cost most are lost one by one where nobody says otherwise."""


class NotDrawn(ValueError):
    """Weeks are to be drawn where vehicles are whole."""


@dataclass(frozen=True, eq=False)
class WholeGround:
    """A plan with whole loads that is to be stressed; seconds: how long each case is searched for."""

    plan: Plan
    seconds: float = SECONDS_A_CASE


def dearest_lanes_lost(plan: Plan, most: int = MOST_DEAREST) -> tuple[Case, ...]:
    """The lanes in use that cost most freight still to go, the dearest first."""
    return lanes_lost_by(plan, lambda shipment: shipment.payable, most)


def none_drawn(cases: Iterable[Case]) -> None:
    """Raises NotDrawn where weeks are to be drawn: hundreds of plans, each of them a search."""
    if any(case.kind == "drawn" for case in cases):
        raise NotDrawn(
            "With whole loads each plan is a search of seconds and not always proved, so a sample of drawn "
            "weeks would say more about the search than about the weeks: ask for no drawn weeks."
        )


def whole_today(plan: Plan) -> Outcome:
    """The plan itself, to hold the cases against."""
    return _told(AS_IT_IS, plan, plan)


def whole_outcome(ground: WholeGround, case: Case) -> Outcome:
    """Searches for a case's plan from today's on, and says what was found and what is proved."""
    week = ground.plan.week
    try:
        change = change_of(week, case)
        plan = plan_week(week.apply(change), near=ground.plan, time_limit=ground.seconds)
    except (NotPlannable, Refused, TooLarge) as stopped:
        return Outcome(case, why=str(stopped))
    return replace(_told(case, plan, ground.plan), only_closes=_only_closes(week, change))


def _only_closes(week: Week, change: Change) -> bool:
    """Whether a change closes rate rows and nothing else; a promise that it drops was none."""
    match change:
        case Together(changes=changes):
            return bool(changes) and all(_only_closes(week, one) for one in changes)
        case Alter(what="rate", key=RateKey() as key, field="at_least", value=None):
            number = week.rates.find(key)
            row = None if number is None else week.rates.row(number)
            return row is not None and not row.at_least
        case Alter(what="rate", field="closed", value=True):
            return True
    return False


def _told(case: Case, plan: Plan, today: Plan) -> Outcome:
    before = {one.customer: one.quantity for one in today.short}
    short = tuple((one.customer, one.quantity) for one in plan.short)
    hit = [(name, total_of((quantity, -before.get(name, Decimal(0))))) for name, quantity in short]
    moved = [row.more for row in difference(today, plan).rows if row.more > 0]
    return Outcome(
        case,
        freight=plan.freight_cost,
        short_charge=plan.short_cost,
        unsent_charge=plan.unsent_cost,
        opening_charge=plan.opening_cost,
        short=short,
        hit=tuple((name, more) for name, more in hit if more > 0),
        unsent=total_of(one.quantity for one in plan.unsent),
        must_stay=total_of(one.must_move for one in plan.unsent),
        moved=total_of(moved),
        at_least=plan.proof.lower_bound,
        may_serve_better=plan.whole is not None and bool(plan.whole.missed),
        plan=plan,
    )
