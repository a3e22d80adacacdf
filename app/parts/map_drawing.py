"""Figures to marks and lines: what the flow map shows, as plain values and without any browser."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from decimal import Decimal
from functools import cached_property
from typing import Literal

from app.parts.coast import Place
from app.parts.map_plane import Ground, Spot, ground

MOST_LINES = 500
MOST_MARKS = 1_500
"""Beyond these, customers near each other share a mark and a line: a browser draws no more with ease."""

WIDEST, THINNEST = 11.0, 1.0
"""Pixels of a line."""
LARGEST, SMALLEST = 9.0, 2.5
"""Pixels of a customer's radius."""
DEPOT, CROWDED_DEPOT = 7.0, 5.0
"""Half of a depot's side in pixels, with few depots and with many."""
FEW_DEPOTS = 40
TONES = 4

Number = Callable[[Decimal], str]


@dataclass(frozen=True, slots=True)
class MapPoint:
    """A depot with what it has available, or a customer with what it ordered and what it goes short.

    `note` is one more line that the pointer shows.
    """

    kind: Literal["depot", "customer"]
    name: str
    latitude: Decimal | float | None
    longitude: Decimal | float | None
    quantity: Decimal
    short: Decimal = Decimal(0)
    note: str = ""

    @property
    def place(self) -> Place | None:
        """Longitude and latitude, None where either is missing or is no place on earth."""
        if self.latitude is None or self.longitude is None:
            return None
        longitude, latitude = float(self.longitude), float(self.latitude)
        return (longitude, latitude) if abs(longitude) <= 180 and abs(latitude) <= 90 else None


@dataclass(frozen=True, slots=True)
class MapFlow:
    """What goes from a depot to a customer; `label` is one more line that the pointer shows."""

    depot: str
    customer: str
    quantity: Decimal
    label: str = ""


@dataclass(frozen=True, slots=True)
class Focus:
    """What the desk looks at: a depot, some customers, what goes from the one to the others, or some lanes.

    Where `lanes` (depot, customer) are given, they alone say which flows are part of it.
    """

    depot: str | None = None
    customers: tuple[str, ...] = ()
    lanes: frozenset[tuple[str, str]] = frozenset()

    def holds(self, flow: MapFlow) -> bool:
        """Whether a flow is part of it."""
        if self.lanes:
            return (flow.depot, flow.customer) in self.lanes
        return self.depot in (None, flow.depot) and (not self.customers or flow.customer in self.customers)


@dataclass(frozen=True, slots=True)
class Mark:
    """A depot, or one or several customers, on the drawing. `size` is half its width in pixels."""

    names: tuple[str, ...]
    spot: Spot
    quantity: Decimal
    short: Decimal
    size: float
    note: str = ""
    tone: int = 0

    @property
    def title(self) -> str:
        return (
            self.names[0] if len(self.names) == 1 else f"{len(self.names)} customers around {self.names[0]}"
        )


@dataclass(frozen=True, slots=True)
class Line:
    """What goes from a depot to a mark. `width` is in pixels, `flows` counts what is drawn as one."""

    depot: str
    customers: tuple[str, ...]
    start: Spot
    end: Spot
    quantity: Decimal
    width: float
    tone: int
    flows: int = 1
    label: str = ""


@dataclass(frozen=True)
class Drawing:
    """All that is drawn, and what is not: `unplaced` are those without coordinates."""

    ground: Ground
    depots: tuple[Mark, ...]
    customers: tuple[Mark, ...]
    lines: tuple[Line, ...]
    flows_drawn: int
    unplaced: tuple[MapPoint, ...]
    flows_not_drawn: int

    @cached_property
    def largest_flow(self) -> Decimal:
        return max((line.quantity for line in self.lines), default=Decimal(0))


def drawing(points: Sequence[MapPoint], flows: Iterable[MapFlow]) -> Drawing | None:
    """What to draw; None where no point has coordinates. Flows of nothing are left out."""
    placed = [point for point in points if point.place is not None]
    if not placed:
        return None
    under = ground([place for point in placed if (place := point.place) is not None])
    depots = _depots([point for point in placed if point.kind == "depot"], under)
    stores = {point.name: point for point in placed if point.kind == "customer"}
    known = {mark.names[0] for mark in depots}
    moving = [flow for flow in flows if flow.quantity > 0]
    drawable = [flow for flow in moving if flow.depot in known and flow.customer in stores]
    groups = _groups(stores, drawable, under)
    marks = _customers(groups, stores, under)
    return Drawing(
        ground=under,
        depots=depots,
        customers=marks,
        lines=lines(drawable, depots, marks),
        flows_drawn=len(drawable),
        unplaced=tuple(point for point in points if point.place is None),
        flows_not_drawn=len(moving) - len(drawable),
    )


def lines(
    flows: Sequence[MapFlow], depots: Sequence[Mark], customers: Sequence[Mark], like: Sequence[Line] = ()
) -> tuple[Line, ...]:
    """Flows as lines between marks, the widest first; as wide as others of their quantity in `like`."""
    depot_of = {mark.names[0]: mark for mark in depots}
    mark_of = {name: mark for mark in customers for name in mark.names}
    together: dict[tuple[str, tuple[str, ...]], list[MapFlow]] = {}
    for flow in flows:
        mark = mark_of.get(flow.customer)
        if mark is not None and flow.depot in depot_of:
            together.setdefault((flow.depot, mark.names), []).append(flow)
    sums = {lane: sum((flow.quantity for flow in those), Decimal(0)) for lane, those in together.items()}
    most = like[0].quantity if like else max(sums.values(), default=Decimal(1))
    widest = like[0].width if like else max(WIDEST * min(1.0, (80 / max(1, len(sums))) ** 0.5), 4.0)
    drawn = [
        Line(
            depot=depot,
            customers=tuple(dict.fromkeys(flow.customer for flow in those)),
            start=depot_of[depot].spot,
            end=mark_of[those[0].customer].spot,
            quantity=sums[depot, names],
            width=round(max(THINNEST, min(1.0, float(sums[depot, names] / most)) * widest), 2),
            tone=depot_of[depot].tone,
            flows=len(those),
            label="\n".join(flow.label for flow in those if flow.label) if len(names) == 1 else "",
        )
        for (depot, names), those in together.items()
    ]
    return tuple(sorted(drawn, key=lambda line: -line.quantity))


def _depots(points: Sequence[MapPoint], under: Ground) -> tuple[Mark, ...]:
    marks: list[Mark] = []
    size = DEPOT if len(points) <= FEW_DEPOTS else CROWDED_DEPOT
    for point in points:
        if point.place is not None:
            spot = under.plane.spot(point.place)
            mark = Mark((point.name,), spot, point.quantity, point.short, size, point.note)
            marks.append(replace(mark, tone=_tone(mark.spot, marks)))
    return tuple(marks)


def _tone(spot: Spot, others: Sequence[Mark]) -> int:
    """The tone that is least present near by, so that neighbouring depots differ."""
    weight = [0.0] * TONES
    for other in others:
        weight[other.tone] += 1 / (1 + (other.spot[0] - spot[0]) ** 2 + (other.spot[1] - spot[1]) ** 2)
    return weight.index(min(weight))


def _groups(stores: dict[str, MapPoint], flows: Sequence[MapFlow], under: Ground) -> list[list[str]]:
    """Customers that share a mark: each by itself, or by squares, as small as the limits allow."""
    spots = {name: under.plane.spot(point.place) for name, point in stores.items() if point.place is not None}
    if len(stores) <= MOST_MARKS and len(flows) <= MOST_LINES:
        return [[name] for name in stores]
    side = 8.0
    while True:
        squares: dict[tuple[int, int], list[str]] = {}
        for name, (x, y) in spots.items():
            squares.setdefault((int(x // side), int(y // side)), []).append(name)
        square_of = {name: square for square, names in squares.items() for name in names}
        lanes = {(flow.depot, square_of[flow.customer]) for flow in flows}
        depots = {flow.depot for flow in flows}
        if len(squares) <= MOST_MARKS and len(lanes) <= max(MOST_LINES, len(depots)):
            return list(squares.values())
        side *= 1.3


def _customers(groups: list[list[str]], stores: dict[str, MapPoint], under: Ground) -> tuple[Mark, ...]:
    gathered = [_gathered([stores[name] for name in names], under) for names in groups]
    most = max((mark.quantity for mark in gathered), default=Decimal(1)) or Decimal(1)
    largest = max(LARGEST * min(1.0, (80 / max(1, len(gathered))) ** 0.35), 4.5)
    return tuple(
        replace(mark, size=round(max(SMALLEST, max(0.0, float(mark.quantity / most)) ** 0.5 * largest), 2))
        for mark in gathered
    )


def _gathered(points: Sequence[MapPoint], under: Ground) -> Mark:
    """One mark for these customers, the largest named first, where most of their orders are."""
    ordered = sorted(points, key=lambda point: -point.quantity)
    total = sum((point.quantity for point in ordered), Decimal(0))
    spots = [under.plane.spot(point.place) for point in ordered if point.place is not None]
    weights = [float(point.quantity / total) if total > 0 else 1 / len(ordered) for point in ordered]
    return Mark(
        names=tuple(point.name for point in ordered),
        spot=(
            round(sum(weight * x for weight, (x, _) in zip(weights, spots, strict=True)), 2),
            round(sum(weight * y for weight, (_, y) in zip(weights, spots, strict=True)), 2),
        ),
        quantity=total,
        short=sum((point.short for point in ordered), Decimal(0)),
        size=SMALLEST,
        note=ordered[0].note if len(ordered) == 1 else "",
    )
