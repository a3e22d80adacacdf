"""How full the vehicles of a plan are: in words, by depot, and what would fill the badly filled ones."""

from collections import defaultdict
from collections.abc import Callable
from dataclasses import dataclass
from decimal import Decimal

from engine.exact import canonical, total_of
from engine.load_sizes import counted_depots
from engine.money import round_half_up
from engine.planning.load_week import loads_gone
from engine.planning.plan import Plan, Shipment

BADLY = Decimal("0.75")
"""A load that is less full than this is badly filled, where nobody says otherwise."""

Number = Callable[[Decimal], str]


@dataclass(frozen=True, slots=True)
class Fill:
    """Loads of one size: how many are full, and what the last one holds where it is not (else None)."""

    full: int
    part: Decimal | None
    size: Decimal

    @property
    def loads(self) -> int:
        return self.full + (self.part is not None)

    @property
    def part_of(self) -> Decimal:
        """How full the last load is, as a part of 1."""
        return Decimal(1) if self.part is None else self.part / self.size

    @property
    def percent(self) -> Decimal:
        """How full the last load is, in whole percent, never rounded up to 100 nor down to 0."""
        whole = round_half_up(self.part_of * 100, 0)
        return whole if self.part is None else min(Decimal(99), max(Decimal(1), whole))

    def words(self) -> str:
        """'3 full + 1 at 62 %'."""
        said = [f"{self.full} full"] if self.full or self.part is None else []
        said += [] if self.part is None else [f"1 at {canonical(self.percent)} %"]
        return " + ".join(said)


def fill_of(quantity: Decimal, size: Decimal | None) -> Fill | None:
    """The loads that a quantity makes, None where nothing says what a load is."""
    if size is None or size <= 0:
        return None
    full, rest = divmod(quantity, size)
    return Fill(int(full), rest or None, size)


@dataclass(frozen=True, slots=True)
class Vehicles:
    """What a depot loads in the week: `most` loads may leave (None: any number), `gone` have left."""

    depot: str
    quantity: Decimal
    loads: int
    full: int
    gone: int
    most: int | None
    fill: Decimal | None

    @property
    def left(self) -> int | None:
        """How many loads more could leave."""
        return None if self.most is None else self.most - self.loads - self.gone


def vehicles(plan: Plan) -> tuple[Vehicles, ...]:
    """The loads of each depot; `fill` is how full they are together, as a part of 1."""
    week = plan.week
    counted = counted_depots(week)
    found = []
    for name, depot in week.depots.items():
        theirs = [s for s in plan.shipments if s.depot == name and not s.gone]
        fills = [fill for s in theirs if (fill := fill_of(s.quantity, s.load_size)) is not None]
        room = total_of(fill.size * fill.loads for fill in fills)
        loaded = total_of(s.quantity for s in theirs if s.load_size)
        most = None
        if counted.get(name) and depot.loads_a_day is not None:
            most = int(depot.loads_a_day * week.rules.loading_days)
        found.append(
            Vehicles(
                name,
                total_of(s.quantity for s in theirs),
                sum(fill.loads for fill in fills),
                sum(fill.full for fill in fills),
                sum(loads_gone(week, one) for one in week.gone.values() if one.depot == name),
                most,
                loaded / room if room else None,
            )
        )
    return tuple(found)


@dataclass(frozen=True, slots=True)
class BadlyFilled:
    """A shipment whose last load is far from full, and what would fill it or save it.

    missing: what more the load could take; holds: what it carries
    short: what the customer goes short of; elsewhere: what it gets by other rates, by depot
    saved: what its freight would fall by if the load did not go
    idle: what of that is paid for empty room, since the load pays whole or its minimum
    """

    shipment: Shipment
    fill: Fill
    missing: Decimal
    holds: Decimal
    short: Decimal
    elsewhere: tuple[tuple[str, Decimal], ...]
    saved: Decimal
    idle: Decimal

    def words(self, unit: str, number: Number = canonical, money: Number = canonical) -> str:
        """What would fill the load, or save it, as a sentence; `money` writes an amount with its currency."""
        said = [f"{number(self.missing)} {unit} more would fill it"]
        if self.short:
            said.append(f"{self.shipment.customer} goes short of {number(self.short)} {unit}")
        said += [
            f"{number(quantity)} {unit} come to it from {depot}" for depot, quantity in self.elsewhere[:2]
        ]
        ways = ": ".join(said[:2]) if len(said) > 1 else said[0]
        rest = "; " + "; ".join(said[2:]) if len(said) > 2 else ""
        spare = f". An order {number(self.holds)} {unit} smaller would save {money(self.saved)}."
        return ways + rest + spare


def badly_filled(plan: Plan, below: Decimal = BADLY) -> tuple[BadlyFilled, ...]:
    """Loads that are less full than `below`: those that pay most for empty room first, then the emptiest."""
    short = {one.customer: one.quantity for one in plan.short}
    gets: dict[str, list[Shipment]] = defaultdict(list)
    for one in plan.shipments:
        if not one.gone:
            gets[one.customer].append(one)
    found = []
    for one in plan.shipments:
        fill = None if one.gone else fill_of(one.quantity, one.load_size)
        if fill is None or fill.part is None or fill.part_of >= below:
            continue
        others = [(s.depot, s.quantity) for s in gets[one.customer] if s.key != one.key]
        found.append(
            BadlyFilled(
                one,
                fill,
                total_of((fill.size, -fill.part)),
                fill.part,
                short.get(one.customer, Decimal(0)),
                tuple(sorted(others, key=lambda other: -other[1])),
                saved := _saved(plan, one, fill),
                _idle(plan, one, fill, saved),
            )
        )
    return tuple(sorted(found, key=lambda one: (-one.idle, one.fill.part_of)))


def _idle(plan: Plan, one: Shipment, fill: Fill, saved: Decimal) -> Decimal:
    """What the last load pays for the room in it that is empty."""
    if fill.part is None:
        return Decimal(0)
    once = one.once if fill.full == 0 and one.once else Decimal(0)
    if one.per == "load":
        return (saved - once) * (fill.size - fill.part) / fill.size
    return max(Decimal(0), saved - once - one.rate * fill.part)


def _saved(plan: Plan, one: Shipment, fill: Fill) -> Decimal:
    """What the last load of a shipment costs by itself: all of the shipment where it is the only one."""
    if fill.full == 0 or fill.part is None:
        return one.cost
    if one.per == "load":
        number = plan.week.rates.find(one.key)
        row = None if number is None else plan.week.rates.row(number)
        trip = row.trip_minimum if row is not None else None
        return max(one.rate, trip or Decimal(0))
    full = _unit_cost(plan, one, fill.size) * fill.full
    return total_of((one.cost, -(one.once or Decimal(0)), -full))


def _unit_cost(plan: Plan, one: Shipment, quantity: Decimal) -> Decimal:
    number = plan.week.rates.find(one.key)
    row = None if number is None else plan.week.rates.row(number)
    trip = row.trip_minimum if row is not None else None
    return max(one.rate * quantity, trip) if trip else one.rate * quantity


def loads_total(plan: Plan) -> int | None:
    """All vehicles of a plan that are still to go; None where no shipment says what a load is."""
    counted = [one.loads for one in plan.shipments if not one.gone and one.loads is not None]
    return sum(counted) if counted else None
