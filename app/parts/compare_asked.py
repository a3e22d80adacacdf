"""Comparisons that were worked out once, kept for the plan in hand."""

from app.parts.reasons_asked import asked
from app.session import Desk
from engine.compare.service import Saving, saving
from engine.compare.usual import Rule, UsualPlan, usual_plan
from engine.planning.plan import Plan


def usual_of(state: Desk, plan: Plan, rule: Rule) -> tuple[UsualPlan, Saving]:
    """The usual plan by a rule, and what the plan saves against it."""

    def work() -> tuple[UsualPlan, Saving]:
        usual = usual_plan(plan.week, rule)
        return usual, saving(plan, usual.costs)

    return asked(plan, ("usual", rule), work)
