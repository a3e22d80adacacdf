"""A stressed plan: what each case costs beside today, ranked, and how the drawn weeks are distributed."""

from collections.abc import Callable, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass
from decimal import Decimal

from engine.compare.stress_cases import (
    AS_IT_IS,
    Case,
    all_by,
    depots_lost,
    hauliers_lost,
    lanes_lost,
    unchanged,
)
from engine.compare.stress_draws import Draws
from engine.compare.stress_ground import ground_of, is_no_network
from engine.compare.stress_run import Progress, stress
from engine.compare.stress_solve import Outcome, outcome_of
from engine.compare.stress_whole import (
    SECONDS_A_CASE,
    WholeGround,
    dearest_lanes_lost,
    none_drawn,
    whole_today,
)
from engine.exact import total_of
from engine.planning.plan import Plan

MOST_BINS = 20


@dataclass(frozen=True, eq=False)
class Stressed:
    """What a plan comes to in each case.

    today:     the week as it is; all differences are from it
    outcomes:  each case that was done, in the order asked
    unchanged: what was not solved since it changes nothing, as sentences
    asked:     how many cases were asked; fewer were done where the run was stopped
    seconds:   with whole loads, how long each case was searched for; None: every plan is proved
    """

    plan: Plan
    today: Outcome
    outcomes: tuple[Outcome, ...]
    unchanged: tuple[str, ...]
    asked: int
    seconds: float | None = None

    @property
    def named(self) -> tuple[Outcome, ...]:
        """What is lost, dearer or more: all but the drawn weeks."""
        return tuple(one for one in self.outcomes if one.case.kind != "drawn")

    @property
    def drawn(self) -> tuple[Outcome, ...]:
        """The drawn weeks that could be planned."""
        return tuple(one for one in self.outcomes if one.case.kind == "drawn" and not one.why)

    @property
    def stopped(self) -> bool:
        return len(self.outcomes) < self.asked

    @property
    def draws(self) -> Draws | None:
        """What the drawn weeks are drawn by."""
        return next((one.case.draws for one in self.outcomes if one.case.draws is not None), None)

    def more_short(self, outcome: Outcome) -> Decimal:
        """How much more goes short than today."""
        return total_of((outcome.missing, -self.today.missing))

    def dearer(self, outcome: Outcome) -> Decimal:
        """How much more freight and charges come to than today."""
        return total_of((outcome.total, -self.today.total))

    def surely_dearer(self, outcome: Outcome) -> Decimal:
        """By how much the least cost rises at least, service as good: what is proved.

        Today's least cost is no more than today's plan, and a case that only closes lanes lowers none.
        """
        least = outcome.total if outcome.at_least is None else outcome.at_least
        more = total_of((least, -self.today.total))
        as_good = not self.more_short(outcome) and not outcome.may_serve_better
        return max(more, Decimal(0)) if outcome.only_closes and as_good else more

    def ranked(self) -> tuple[Outcome, ...]:
        """The named cases, the worst first: what cannot be planned, then by what goes short, then by cost.

        With whole loads by the cost that is proved, since what a search comes to also depends on the search.
        """

        def worse(one: Outcome) -> tuple[bool, Decimal, Decimal, Decimal]:
            return not one.why, -self.more_short(one), -self.surely_dearer(one), -self.dearer(one)

        return tuple(sorted(self.named, key=worse))


def usual_cases(
    plan: Plan, percents: Sequence[Decimal] = (Decimal(10),), lanes: int | None = None
) -> list[Case]:
    """Each depot, haulier and lane (the `lanes` that carry most) lost, orders and rates changed.

    Orders go up and down by each percentage, rates up.
    """
    both = [signed for percent in percents for signed in (percent, -percent)]
    return [
        *depots_lost(plan),
        *hauliers_lost(plan),
        *(dearest_lanes_lost(plan) if is_no_network(plan) else lanes_lost(plan, lanes)),
        *all_by("orders", both),
        *all_by("rates", percents),
    ]


def stressed(
    plan: Plan,
    cases: Sequence[Case],
    executor: Executor | None = None,
    *,
    workers: int = 2,
    progress: Progress | None = None,
    stop: Callable[[], bool] | None = None,
    renew: Callable[[], Executor] | None = None,
    seconds: float = SECONDS_A_CASE,
) -> Stressed:
    """Stresses a plan; see `engine.compare.stress_run.stress` for what is given and raised.

    seconds: with whole loads, how long each case is searched for

    Raises NotDrawn where weeks are to be drawn of a plan with whole loads.
    """
    if is_no_network(plan):
        none_drawn(cases)
        run = stress(WholeGround(plan, seconds), cases, progress=progress, stop=stop)
        found = tuple(run.outcomes.values())
        return Stressed(plan, whole_today(plan), found, unchanged(plan), run.asked, seconds)
    ground = ground_of(plan)
    run = stress(ground, cases, executor, workers=workers, progress=progress, stop=stop, renew=renew)
    today = outcome_of(ground, AS_IT_IS)
    return Stressed(plan, today, tuple(run.outcomes.values()), unchanged(plan), run.asked)


@dataclass(frozen=True, slots=True)
class Spreading:
    """How a figure is distributed over the drawn weeks: exact figures of single weeks, none in between."""

    least: Decimal
    tenth: Decimal
    middle: Decimal
    ninetieth: Decimal
    most: Decimal


def spreading(figures: Sequence[Decimal]) -> Spreading | None:
    """The least, the figure that a tenth, half, nine tenths of the weeks do not exceed, and the most."""
    if not figures:
        return None
    line = sorted(figures)
    tenth, middle, ninetieth = (line[max(0, -(-len(line) * part // 10) - 1)] for part in (1, 5, 9))
    return Spreading(line[0], tenth, middle, ninetieth, line[-1])


@dataclass(frozen=True, slots=True)
class Bin:
    """How many drawn weeks lie from `low` up to, not including, `high` (the last: including)."""

    low: Decimal
    high: Decimal
    count: int


def histogram(figures: Sequence[Decimal]) -> tuple[Bin, ...]:
    """The figures in bins of equal, round width."""
    if not figures:
        return ()
    low, high = min(figures), max(figures)
    width = _round_width((high - low) / MOST_BINS)
    first, last = int(low // width), int(high // width)
    counts = [0] * (last - first + 1)
    for figure in figures:
        counts[int(figure // width) - first] += 1
    return tuple(Bin((first + n) * width, (first + n + 1) * width, count) for n, count in enumerate(counts))


def _round_width(least: Decimal) -> Decimal:
    """The next of 1, 2 or 5 times a power of ten."""
    if least <= 0:
        return Decimal(1)
    power = Decimal(1).scaleb(least.adjusted())
    return next(times * power for times in (1, 2, 5, 10) if times * power >= least)


@dataclass(frozen=True, slots=True)
class ShortOften:
    """In how many drawn weeks a customer goes short, and by how much at most and on average over all."""

    customer: str
    weeks: int
    most: Decimal
    sum: Decimal


def short_often(outcomes: Sequence[Outcome]) -> tuple[ShortOften, ...]:
    """Who goes short in drawn weeks, who does most often first."""
    found: dict[str, list[Decimal]] = {}
    for outcome in outcomes:
        for name, quantity in outcome.short:
            found.setdefault(name, []).append(quantity)
    line = [ShortOften(name, len(those), max(those), total_of(those)) for name, those in found.items()]
    return tuple(sorted(line, key=lambda one: (-one.weeks, -one.sum, one.customer)))
