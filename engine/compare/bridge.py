"""Why does this week cost more than that one? The difference, effect by effect, each a full re-planning.

Figures change from the first week's to the second's, one effect after the other in a stated order, and
the whole week is planned anew after each: what the plan then costs more is that effect. Nothing is left
over, since the first step starts at the first plan and the last one ends at the second. An effect depends
on its place in the order; the average over all orders does not (Shapley, "A value for n-person games",
1953): it is worked out from the plans of all subsets of the effects. Where these are too many, the named
events of the week are one effect together, which is what they have in common by Owen's value ("Values of
games with a priori unions", 1977); where even then they are too many, the stated order stands.

Freight, charges and what is short are bridged each by itself, in exact fractions; freight and charges are
then cut to cents by largest remainder, so that the cents add up as well.
"""

from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass, replace
from decimal import Decimal
from fractions import Fraction
from math import factorial
from typing import NamedTuple

from engine.compare.cents import apportioned
from engine.compare.effects import ABOUT, NAMES
from engine.compare.mixed import Event, Mixture, NotComparable, event_key, is_event
from engine.compare.possible import made_possible
from engine.compare.quantities import Priced, charges_of
from engine.compare.service import SECONDS
from engine.exact import TooLarge, canonical, places_needed, total_of
from engine.money import minor_places, round_half_up
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week

MOST_AVERAGED = 10
"""With more effects than this there are too many plans to average over: 2 to their power."""

MOST_NAMED = 4

EVENTS = "events"
"""The effect that all named events are together."""

DEPARTS_BEFORE, DEPARTS_AFTER, ROUNDING = "departs before", "departs after", "rounding"

Progress = Callable[[int, int], None]


class Worth(NamedTuple):
    """What a plan comes to, exactly."""

    freight: Fraction
    charges: Fraction
    short: Fraction

    def less(self, other: "Worth") -> "Worth":
        return Worth(*(mine - theirs for mine, theirs in zip(self, other, strict=True)))


@dataclass(frozen=True, eq=False)
class Side:
    """One end of a bridge: a plan and its week.

    plan:   what was planned, issued or sent; its costs are where the bridge starts or ends
    before: the week before its events, which then lead to `week`; None: no event has a name
    """

    name: str
    week: Week
    plan: Priced
    before: Week | None = None
    events: tuple[Event, ...] = ()


@dataclass(frozen=True, slots=True)
class Step:
    """One effect. Money is in cents that add up, `exact` what they were cut from; `after` is where the
    freight stands when this step is done, None in an average, which has no order."""

    key: str
    name: str
    about: str
    freight: Decimal
    charges: Decimal
    short: Decimal
    exact: Worth
    after: Decimal | None = None
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class Bridge:
    """From a first plan to a second: positive is dearer, or more that is short.

    note: how the average that was asked for had to be made smaller, or why there is none; empty otherwise
    """

    first: str
    second: str
    unit: str
    currency: str
    first_freight: Decimal
    second_freight: Decimal
    first_charges: Decimal
    second_charges: Decimal
    first_short: Decimal
    second_short: Decimal
    steps: tuple[Step, ...]
    averaged: bool
    planned: int
    note: str = ""

    @property
    def freight(self) -> Decimal:
        return total_of((self.second_freight, -self.first_freight))

    @property
    def charges(self) -> Decimal:
        return total_of((self.second_charges, -self.first_charges))

    @property
    def short(self) -> Decimal:
        return total_of((self.second_short, -self.first_short))

    @property
    def order(self) -> tuple[str, ...]:
        """The keys of the steps in their order."""
        return tuple(step.key for step in self.steps)

    @property
    def remarks(self) -> tuple[str, ...]:
        """What had to give way in the mixed weeks, each once."""
        return tuple(dict.fromkeys(f"{step.name}: {said}" for step in self.steps for said in step.remarks))


def bridge(
    first: Side,
    second: Side,
    order: Sequence[str] = (),
    average: bool = False,
    progress: Progress | None = None,
    seconds: float = SECONDS,
) -> Bridge:
    """The difference between two plans, effect by effect.

    Args:
        first, second: where it starts and ends.
        order: effects to be taken first, in this order; the others follow in the stated one.
        average: the average over all orders instead of one order; `Bridge.note` says where there are too many
            effects for that.
        progress: told how many of how many weeks are planned.
        seconds: how long each week with whole loads is searched for; what is not proved then is remarked.

    Raises:
        NotComparable: units or currencies differ, an effect is not known or does not differ, or some mixture
            of the two cannot be planned, so that there is no average.
        NotPlannable: one of the two weeks cannot be planned.
    """
    mixture = Mixture.of(first.week, second.week if second.before is None else second.before, second.events)
    effects = ordered(mixture.effects, order)
    together, note = _together(effects) if average else ({}, "")
    average = average and not (effects and not together)
    expected = 2 ** len(together) if average else len(effects) + 1
    plans = _Plans(mixture, (first, second), seconds, progress, expected)
    found = _averaged(plans, together) if average else _in_order(plans, effects)
    ends = plans.worth(()), plans.worth(effects)
    if ends[0] is None or ends[1] is None:
        raise NotComparable("A week that cannot be planned cannot be compared.")
    actual = _worth(first.plan), _worth(second.plan)
    if actual[0] != ends[0]:
        found.insert(0, (DEPARTS_BEFORE, ends[0].less(actual[0]), ()))
    if actual[1] != ends[1]:
        found.append((DEPARTS_AFTER, actual[1].less(ends[1]), ()))
    return replace(_written(first, second, mixture, found, average, plans.count), note=note)


def _together(effects: Sequence[str]) -> tuple[dict[str, tuple[str, ...]], str]:
    """What is averaged over: each effect by itself, or the events as one of them; nothing where too many.

    With a note where it is not each effect by itself.
    """
    single: dict[str, tuple[str, ...]] = {effect: (effect,) for effect in effects}
    if len(effects) <= MOST_AVERAGED:
        return single, ""
    events = tuple(effect for effect in effects if is_event(effect))
    fewer = {effect: those for effect, those in single.items() if effect not in events}
    if events and len(fewer) < MOST_AVERAGED:
        return {**fewer, EVENTS: events}, (
            f"An average tells at most {MOST_AVERAGED} reasons apart and there are {len(effects)}, so the "
            f"{len(events)} events of the week are one reason together (Owen 1977); without the average they "
            "are told one by one."
        )
    return {}, (
        f"{len(effects)} reasons differ, and an average over all orders is worked out for at most "
        f"{MOST_AVERAGED}: it would take {2 ** len(effects):,} plans. So this is no average: the reasons "
        "stand in the stated order, each on top of those before it."
    )


def ordered(effects: Sequence[str], first: Sequence[str]) -> tuple[str, ...]:
    """The effects with some of them in front.

    Raises:
        NotComparable: one of those is no effect that differs.
    """
    for key in first:
        if key not in effects:
            known = ", ".join(effects) or "none"
            raise NotComparable(f"'{key}' is no effect in which these two differ; there are: {known}.")
    return (*dict.fromkeys(first), *(key for key in effects if key not in first))


class _Plans:
    """The worth of each mixed week, planned once; of the two ends, what the sides themselves plan."""

    def __init__(
        self,
        mixture: Mixture,
        ends: tuple[Side, Side],
        seconds: float,
        progress: Progress | None,
        expected: int,
    ) -> None:
        self.mixture, self.count = mixture, 0
        self._seconds, self._last = seconds, None if not isinstance(ends[0].plan, Plan) else ends[0].plan
        if self._last is not None and self._last.whole is None:
            self._last = None
        self._ends = ends
        self._known: dict[frozenset[str], tuple[Worth | None, tuple[str, ...]]] = {}
        self._progress, self._expected = progress, expected

    def worth(self, chosen: Collection[str]) -> Worth | None:
        return self.planned(chosen)[0]

    def planned(self, chosen: Collection[str]) -> tuple[Worth | None, tuple[str, ...]]:
        """The worth of the week with these effects in it, None where it cannot be planned, and remarks."""
        key = frozenset(chosen)
        if key not in self._known:
            self._known[key] = self._plan(key)
            self.count += 1
            if self._progress is not None:
                self._progress(self.count, max(self.count, self._expected))
        return self._known[key]

    def _plan(self, chosen: frozenset[str]) -> tuple[Worth | None, tuple[str, ...]]:
        if not chosen or len(chosen) == len(self.mixture.effects):
            return _end(self._ends[bool(chosen)], self._seconds)
        week, said = self.mixture.week(chosen)
        week, shrunk = made_possible(week)
        try:
            plan = plan_week(week, near=self._last, time_limit=self._seconds)
            self._last = plan if plan.whole is not None else None  # where the next search starts from
            return _worth(plan), (*said, *shrunk, *_not_proved(plan))
        except (NotPlannable, TooLarge) as stopped:
            why = f"Could not be planned on its own and is counted with the next: {stopped}"
            return None, (*said, *shrunk, why)


def _end(side: Side, seconds: float) -> tuple[Worth, tuple[str, ...]]:
    """What the cheapest plan of a side's week comes to; of equal ones, the one that the side has."""
    own = _worth(side.plan)
    if isinstance(side.plan, Plan):
        return own, tuple(f"{side.name}: {said}" for said in _not_proved(side.plan))
    plan = plan_week(side.week, time_limit=seconds)
    best = _worth(plan)
    alike = own.freight + own.charges == best.freight + best.charges and own.short == best.short
    return own if alike else best, tuple(f"{side.name}: {said}" for said in _not_proved(plan))


def _not_proved(plan: Plan) -> tuple[str, ...]:
    """A remark on a plan with whole loads that may not be the cheapest."""
    if not plan.proof.gap:
        return ()
    return (
        f"The search ended within {canonical(plan.proof.gap)} {plan.week.rules.currency} of the least cost "
        "that is proved: this step may be so much larger or smaller.",
    )


_Found = tuple[str, Worth, tuple[str, ...]]


def _in_order(plans: _Plans, effects: Sequence[str]) -> list[_Found]:
    """Each effect as the difference that it makes after those before it."""
    found: list[_Found] = []
    at, before = plans.planned(())
    for number, effect in enumerate(effects, 1):
        now, remarks = plans.planned(effects[:number])
        if now is None or at is None:
            now = at
        worth = _NOTHING if now is None or at is None else now.less(at)
        found.append((effect, worth, (*before, *remarks)))
        at, before = now, ()
    return found


_NOTHING = Worth(Fraction(0), Fraction(0), Fraction(0))


def _averaged(plans: _Plans, together: Mapping[str, tuple[str, ...]]) -> list[_Found]:
    """The average of each effect over all orders, from all subsets (Shapley 1953).

    together: what each effect stands for, itself or several at once
    """
    effects = tuple(together)
    count = len(effects)
    weights = [
        Fraction(factorial(size) * factorial(count - size - 1), factorial(count)) for size in range(count)
    ]
    found: list[_Found] = []
    for effect in effects:
        others = [one for one in effects if one != effect]
        sums, remarks = _NOTHING, dict[str, None]()
        for bits in range(2 ** len(others)):
            chosen = [one for n, one in enumerate(others) if bits >> n & 1]
            inside = [key for one in chosen for key in together[one]]
            without, with_it = plans.worth(inside), plans.planned([*inside, *together[effect]])
            if without is None or with_it[0] is None:
                raise NotComparable(
                    "Some mixtures of the two weeks cannot be planned, so there is no average over all "
                    "orders. Compare in one order."
                )
            weight = weights[len(chosen)]
            change = with_it[0].less(without)
            sums = Worth(*(old + weight * new for old, new in zip(sums, change, strict=True)))
            remarks.update(dict.fromkeys(with_it[1] if not chosen else ()))
        found.append((effect, sums, tuple(remarks)))
    return found


def _worth(plan: Priced) -> Worth:
    return Worth(
        Fraction(plan.freight_cost),
        Fraction(charges_of(plan)),
        Fraction(total_of(one.quantity for one in plan.short)),
    )


def _written(
    first: Side, second: Side, mixture: Mixture, found: list[_Found], average: bool, planned: int
) -> Bridge:
    """The effects in cents that add up, with rounding as the last of them."""
    minor = minor_places(first.week.rules.currency)
    ends = [
        (
            side.plan.freight_payable,
            round_half_up(charges_of(side.plan), minor),
            total_of(one.quantity for one in side.plan.short),
        )
        for side in (first, second)
    ]
    differences = [total_of((two, -one)) for one, two in zip(*ends, strict=True)]
    rounding = Fraction(differences[0]) - sum((worth.freight for _, worth, _ in found), Fraction(0))
    if rounding:
        found = [*found, (ROUNDING, Worth(rounding, Fraction(0), Fraction(0)), ())]
    places = max((places_needed(one.quantity) for s in (first, second) for one in s.plan.short), default=0)
    if average:
        places += 2
    freight = apportioned([worth.freight for _, worth, _ in found], minor, differences[0])
    charges = apportioned([worth.charges for _, worth, _ in found], minor, differences[1])
    places = max([places, *(_places(worth.short) for _, worth, _ in found if not average)])
    short = apportioned([worth.short for _, worth, _ in found], places, differences[2])
    steps, at = [], ends[0][0]
    for (key, worth, remarks), money, charge, missing in zip(found, freight, charges, short, strict=True):
        at = total_of((at, money))
        name, about = _called(key, mixture)
        steps.append(Step(key, name, about, money, charge, missing, worth, None if average else at, remarks))
    return Bridge(
        first.name, second.name, first.week.rules.unit, first.week.rules.currency,
        ends[0][0], ends[1][0], ends[0][1], ends[1][1], ends[0][2], ends[1][2],
        tuple(steps), average, planned,
    )  # fmt: skip


def _places(quantity: Fraction) -> int:
    """Decimal places of a fraction that is a decimal."""
    places = 0
    while (quantity * 10**places).denominator != 1:
        places += 1
    return places


def _called(key: str, mixture: Mixture) -> tuple[str, str]:
    """An effect's name and what it is about."""
    own = {
        DEPARTS_BEFORE: ("First plan as it was", "the first plan was not the cheapest of its week"),
        DEPARTS_AFTER: ("Second plan as it is", "the second plan is not the cheapest of its week"),
        ROUNDING: ("Rounding", "every shipment is rounded once"),
    }
    if key in own:
        return own[key]
    if key == EVENTS:
        named = [event.name for event in mixture.events]
        more = [f"and {len(named) - MOST_NAMED} more"] if len(named) > MOST_NAMED else []
        return "Events of the week", "; ".join([*named[:MOST_NAMED], *more])
    for number, event in enumerate(mixture.events):
        if key == event_key(number):
            return event.name, "an event of the week"
    return NAMES[key], ABOUT[key]
