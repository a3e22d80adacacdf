"""What the Compare page asks of the engine and the records, each worked out once and kept for everybody.

What is kept goes by the versions of the weeks that it was worked out from, so that a change of either is
worked out anew; a week that is in no records is kept in its own session.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from decimal import Decimal
from types import MappingProxyType
from typing import Any, TypeVar

import streamlit as st

from app.access import answers, before, issued_of, learn, opened
from app.parts.change_words import words_of
from app.parts.reasons_asked import asked
from app.session import Desk
from engine.compare.bridge import Bridge, Side, bridge
from engine.compare.events import events_of
from engine.compare.quantities import Priced
from engine.compare.service import SECONDS, Saving, saving
from engine.compare.usual import Rule, UsualPlan, rules_possible, usual_plan
from engine.compare.variants import Variant
from engine.figures import RateKey
from engine.intake.earlier import Quantities
from engine.planning.near import sent_by
from engine.planning.plan import Plan
from engine.planning.planner import plan_week
from engine.records import Issued, Listed, Missing, list_variants, load_sent

USUAL_PLAN = "usual plan"
"""What the desk's answer goes by: how it would have planned without the tool."""

Answer = TypeVar("Answer")
Key = tuple[Any, ...]


@dataclass(frozen=True)
class Point:
    """One end of a comparison: a week in the records at a version, or an issued plan of it.

    number: of the issued plan, 0 for the week as it stands
    """

    week: Listed
    name: str
    version: int
    number: int = 0

    @property
    def key(self) -> Key:
        return self.week.id, self.name, self.version, self.number


@st.cache_resource(show_spinner=False, max_entries=64)
def _shared(key: Key, _work: Callable[[], Any]) -> Any:
    return _work()


def kept(state: Desk, plan: Plan, key: Key, work: Callable[[], Answer]) -> Answer:
    """The answer to a question about the plan on the desk, worked out once for all sessions."""
    own = own_key(state)
    if own is None:
        return asked(plan, key, work)
    found: Answer = _shared((*own, *key), work)
    return found


def own_key(state: Desk) -> Key | None:
    """What the plan on the desk goes by: its week, version and the plan it stays near to."""
    if state.kept is None or state.kept.saved != len(state.history.entries):
        return None
    issued = 0 if state.issued is None else state.issued.number
    return state.kept.records.where, state.kept.week_id, state.kept.saved, issued


def last_week(state: Desk) -> Point | None:
    """Where last week ended: its plan issued last, or the week as it stands; None where there is none."""
    found = None if state.kept is None else before(state.kept.week_id)
    return None if found is None else latest_of(found)


def latest_of(listed: Listed) -> Point:
    """The plan of a week that was issued last, or the week as it stands."""
    try:
        issued = issued_of(listed)
    except Missing:
        return Point(listed, listed.name, listed.version)
    return Point(listed, listed.name, issued.version, issued.number)


def side_of(point: Point, since: int | None = None) -> Side:
    """The plan at a point with its week, planned where it was not issued.

    since: a version; the changes from there on are events of their own. None: those from the first on
    """
    history = opened(point.week.id).history
    week = history.week if point.version == len(history.entries) else history.at(point.version)
    plan: Priced = (
        issued_of(point.week, point.number) if point.number else plan_week(week, time_limit=SECONDS)
    )
    figures, events = events_of(history, words_of, since or 0, point.version)
    return Side(point.name, week, plan, figures, events)


def change_from(state: Desk, plan: Plan, point: Point, average: bool = False) -> Bridge:
    """Why the plan on the desk costs other than the one at a point."""
    here = state.kept is not None and state.kept.week_id == point.week.id

    def work() -> Bridge:
        figures, events = events_of(state.history, words_of, point.version if here else 0)
        second = Side(plan.week.rules.week, plan.week, plan, figures, events)
        first = side_of(point)
        if first.name == second.name:
            opened_on = point.week.created.astimezone().strftime("%d %b, %H:%M")
            first = replace(first, name=f"{first.name} as opened on {opened_on}")
        return bridge(first, second, average=average)

    return kept(state, plan, ("bridge", point.key, average), work)


def between(first: Point, second: Point, average: bool = False) -> Bridge:
    """Why the plan at one point costs other than the one at another."""

    def work() -> Bridge:
        since = first.version if first.week.id == second.week.id else None
        return bridge(side_of(first), side_of(second, since), average=average)

    found: Bridge = _shared(("between", first.key, second.key, average), work)
    return found


def desk_rule(state: Desk, plan: Plan) -> Rule:
    """The rule that this desk goes by: what it said, else the first that the figures allow."""
    possible = rules_possible(plan.week, plan.model)
    said = answers().to(USUAL_PLAN, "")
    if said == Rule.SHARES or (said == Rule.ACTUAL and sent_of(state)):
        return Rule(said)
    return next((rule for rule in possible if rule.value == said), possible[0])


def remember_rule(rule: Rule) -> None:
    """Let the desk go by this rule from now on.

    Raises:
        NotSaved: it could not be written.
        Refused: the person may only read.
    """
    given = {**answers().given, (USUAL_PLAN, ""): rule.value}
    learn(replace(answers(), given=MappingProxyType(given)), answers())


def sent_of(state: Desk) -> Quantities:
    """The plan that was really sent in the week on the desk, empty where nobody said.

    Raises:
        NotSaved: the records cannot be read.
    """
    return {} if state.kept is None else load_sent(state.kept.records, state.kept.week_id)


def quantities_at(point: Point) -> Quantities:
    """What the plan at a point sends, as it was issued or as it would be planned."""
    return _sent(side_of(point).plan)


def variants_of(state: Desk) -> tuple[Variant, ...]:
    """The variants that are kept beside the week on the desk.

    Raises:
        NotSaved: the records cannot be read.
    """
    if state.kept is None:
        return ()
    found = list_variants(state.kept.records, state.kept.week_id)
    return tuple(Variant(name, changes) for name, changes, _ in found)


def usual_of(state: Desk, plan: Plan, rule: Rule, sent: Quantities | None = None) -> tuple[UsualPlan, Saving]:
    """The usual plan by a rule, and what the plan saves against it.

    sent: the plan as it was sent, None for the one in the records; for shares the last week's is taken

    Raises:
        NoRule: the rule needs what is not there.
        NotPlannable: the week cannot be planned with that service.
    """
    if rule is Rule.ACTUAL and sent is None:
        sent = sent_of(state) or None
    point = last_week(state) if rule is Rule.SHARES else None
    key = ("usual", rule, None if point is None else point.key, None if sent is None else tuple(sent.items()))

    def work() -> tuple[UsualPlan, Saving]:
        went = sent if point is None else _sent(side_of(point).plan)
        usual = usual_plan(plan.week, rule, went)
        return usual, saving(plan, usual.costs)

    return kept(state, plan, key, work)


def _sent(plan: Priced) -> dict[RateKey, Decimal]:
    if isinstance(plan, Plan):
        return dict(sent_by(plan))
    return dict(plan.quantities) if isinstance(plan, Issued) else {}
