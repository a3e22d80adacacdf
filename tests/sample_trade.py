"""An invented trade: road salt from a few depots to many stores on an invented island.

Everything is drawn from `Random.random` with fixed seeds, whose sequence Python keeps the same from
version to version. The figures are invented; only their shape (a part per tonne, a part per kilometre,
hauliers who are cheap near by or cheap far away) follows common practice in bulk haulage.
"""

from collections.abc import Callable
from dataclasses import dataclass, field
from decimal import ROUND_HALF_UP, Decimal
from math import asin, cos, radians, sin, sqrt
from random import Random
from typing import Any

from app.parts.coast import Place, coasts, on_land

Row = dict[str, Any]
"""Heading to value; a heading that is missing is a blank cell."""

EARTH_RADIUS_KM = 6371.0088  # mean radius, IUGG
ROAD_FACTOR = 1.27
"""How much longer a road is than the straight line: invented, as is the island's road network."""

SMALL_DEPOTS: dict[str, Place] = {
    "Northgate": (-124.35, -46.48),
    "Quarry": (-125.95, -46.92),
    "Harbour": (-122.72, -47.22),
    "Railhead": (-124.55, -47.55),
    "Saltpan": (-126.05, -48.48),
    "Upland": (-123.35, -48.30),
}

MORE_DEPOTS = (
    "Lighthouse", "Millrace", "Causeway", "Longshore", "Ferrystage", "Stonepit", "Lockside",
    "Windpump", "Breakwater", "Heathland", "Tideway", "Viaduct", "Sluice", "Orchard",
)  # fmt: skip

PLANTS = (
    "Alder", "Aster", "Barley", "Birch", "Bracken", "Bramble", "Briar", "Burdock", "Campion", "Clover",
    "Cole", "Comfrey", "Cowslip", "Cress", "Dogwood", "Elder", "Elm", "Fennel", "Fern", "Flax",
    "Foxglove", "Furze", "Harebell", "Hawthorn", "Hazel", "Heather", "Holly", "Hornbeam", "Ivy", "Juniper",
    "Larch", "Linden", "Lovage", "Lupin", "Mallow", "Maple", "Medlar", "Mistletoe", "Nettle", "Oats",
    "Orchis", "Quince", "Reed", "Rowan", "Rush", "Sedge", "Sorrel", "Spruce", "Tansy", "Teasel",
)  # fmt: skip

PROMISED = (("Saltpan", "Alder", "Packhorse"), ("Railhead", "Sorrel", "Drayman"))
"""Rows on which a haulier was promised work in the small week."""

SITES = ("Yard", "Store", "Shed", "Works", "Siding", "Pound", "Bunker", "Dome", "Ramp", "Stage")
DAYS = ("Mon", "Tue", "Wed", "Thu", "Fri")


@dataclass(frozen=True)
class Haulier:
    """What a haulier charges per tonne, how far it likes to go (km), how much of the island it covers."""

    name: str
    fixed: float
    per_km: float
    nearest: float
    farthest: float
    coverage: float


HAULIERS = (
    Haulier("Oxcart", 2.40, 0.118, 0, 150, 0.50),
    Haulier("Drayman", 3.60, 0.098, 0, 265, 0.70),
    Haulier("Packhorse", 6.10, 0.079, 85, 330, 0.48),
)
MORE_HAULIERS = (
    *HAULIERS,
    Haulier("Tumbrel", 3.10, 0.106, 0, 200, 0.40),
    Haulier("Barrow", 4.90, 0.086, 60, 300, 0.30),
)


@dataclass
class Figures:
    """A week's rows as a spreadsheet holds them."""

    depots: list[Row] = field(default_factory=list)
    customers: list[Row] = field(default_factory=list)
    rates: list[Row] = field(default_factory=list)
    rules: list[Row] = field(default_factory=list)


def small_week(before: bool = False) -> Figures:
    """Six depots, 48 stores, three hauliers, short of stock; `before` gives the week before it."""
    chance = Random(6)
    depots = dict(SMALL_DEPOTS)
    stores = dict(zip(PLANTS[:48], _scattered(48, 0.27, chance, list(depots.values())), strict=True))
    sizes = _sizes(stores, chance, 28, 250)
    orders = Random(5 if before else 106)
    customers = _customers(stores, sizes, orders, first_number=3902 if before else 4101)
    _mark_customers(customers)
    rates = _rates(depots, stores, HAULIERS, chance)
    _mark_rates(rates, before)
    total = sum(_ordered(customers).values(), Decimal(0))
    shares = {"Northgate": 18, "Quarry": 22, "Harbour": 19, "Railhead": 15, "Saltpan": 14, "Upland": 12}
    cover = Decimal("1.02") if before else Decimal("0.955")
    supply = {name: _whole(total * cover * share / 100, 10) for name, share in shares.items()}
    return Figures(
        depots=[
            _depot("Northgate", supply, depots, unsent=Decimal("1.20"), loads=12),
            _depot(
                "Quarry", supply, depots, must_move=_whole(supply["Quarry"] * Decimal("0.8"), 10), loads=16
            ),
            _depot("Harbour", supply, depots, unsent=Decimal("2.50"), loads=14),
            _depot("Railhead", supply, depots, loads=10),
            _depot("Saltpan", supply, depots, must_move=_whole(supply["Saltpan"] / 2, 10), loads=8),
            _depot("Upland", supply, depots, unsent=Decimal("0.80"), loads=8),
        ],
        customers=customers,
        rates=rates,
        rules=_rules("Week 5", Decimal("6.9")) if before else _rules("Week 6", Decimal("7.5")),
    )


def large_week() -> Figures:
    """Twenty depots, 500 stores, five hauliers, a little more stock than orders."""
    chance = Random(20)
    depots = dict(SMALL_DEPOTS)
    depots.update(zip(MORE_DEPOTS, _scattered(14, 0.44, chance, list(depots.values())), strict=True))
    centres = _scattered(50, 0.30, chance, [])
    stores: dict[str, Place] = {}
    for plant, centre in zip(PLANTS, centres, strict=True):
        places = _scattered(len(SITES), 0.030, chance, [], near=(centre, 0.22))
        stores.update({f"{plant} {site}": place for site, place in zip(SITES, places, strict=True)})
    customers = _customers(stores, _sizes(stores, chance, 26, 180), chance, first_number=50001)
    for row in {row["Customer"]: row for row in reversed(customers)}.values():  # the first row of each
        draw = chance.random()
        row["Priority"] = "A" if draw < 0.15 else "B" if draw < 0.55 else None
        row["Charge if short"] = Decimal(60) if row["Priority"] == "A" else None
    rates = _rates(depots, stores, MORE_HAULIERS, chance, nearest_depots=7)
    total = sum(_ordered(customers).values(), Decimal(0))
    weights = {name: Decimal(60 + int(80 * chance.random())) for name in depots}
    whole = sum(weights.values())
    supply = {name: _whole(total * Decimal("1.03") * weight / whole, 10) for name, weight in weights.items()}
    rows = []
    for name in depots:
        draw = chance.random()
        row = _depot(name, supply, depots, loads=int(supply[name] / 120))
        if draw < 0.25:
            row["Must move"] = _whole(supply[name] * Decimal("0.7"), 10)
        elif draw < 0.5:
            row["Charge if unsent"] = Decimal("1.50")
        rows.append(row)
    for number, row in enumerate(rates):
        if number % 97 == 0:
            row["Closed"] = "yes"
        elif number % 31 == 0:
            row["At most"] = Decimal(30 + 5 * (number % 7))
    rules = _rules("Week 6, all stores", Decimal("7.5"))
    return Figures(rows, customers, rates, rules)


def _rules(week: str, fuel_surcharge: Decimal) -> list[Row]:
    values = {
        "Week": week,
        "Unit": "t",
        "Currency": "EUR",
        "Fuel surcharge %": fuel_surcharge,
        "When short": "charge",
        "Charge if short": Decimal(35),
    }
    return [{"Rule": rule, "Value": value} for rule, value in values.items()]


def _mark_customers(customers: list[Row]) -> None:
    """Priorities and charges on the first row of a store, a store tied to one depot."""
    first: dict[str, Row] = {}
    for row in customers:
        first.setdefault(row["Customer"], row)
    for number, (name, row) in enumerate(first.items()):
        row["Priority"] = "A" if number % 8 == 2 else "B" if number % 3 == 0 else "C" if number % 5 else None
        row["Charge if short"] = {"A": Decimal(90), "B": Decimal(55)}.get(row["Priority"])
        if name == "Flax":
            row["One depot"] = "Railhead"


def _mark_rates(rates: list[Row], before: bool) -> None:
    """Closed and limited rows, two promised quantities, a few rows with a surcharge of their own.

    Cole can be reached only over rows whose limits add up to less than its order, so that lanes, not
    stock, leave it short.
    """
    for row in rates:
        if row["Customer"] == "Cole":
            row["At most"] = Decimal(8)
    others = [row for row in rates if row["Customer"] not in ("Cole", "Flax")]
    for number, row in enumerate(others):
        if number % 41 == 17:
            row["Closed"] = "yes"
        elif number % 13 == 5:
            row["At most"] = Decimal(28 * (1 + number % 3))
        if (row["Depot"], row["Customer"], row["Haulier"]) in PROMISED:
            row.update({"At least": Decimal(28), "At most": None, "Closed": None})
        if row["Haulier"] == "Packhorse" and number % 29 == 3:
            row["Surcharge %"] = Decimal("4.0")
        if before and row["Haulier"] == "Drayman" and number % 6 == 0:
            row["Rate"] -= Decimal("0.35")


def _depot(name: str, supply: dict[str, Decimal], places: dict[str, Place], must_move: Decimal | None = None,
           unsent: Decimal | None = None, loads: int | None = None) -> Row:  # fmt: skip
    return {
        "Depot": name,
        "Available": supply[name],
        "Must move": must_move,
        "Charge if unsent": unsent,
        "Loads a day": loads,
        **_coordinates(places[name]),
    }


def _sizes(stores: dict[str, Place], chance: Random, low: int, high: int) -> dict[str, float]:
    """What each store usually orders in a week, in tonnes; many are small and few are large."""
    return {name: low + (high - low) * chance.random() ** 2 for name in stores}


def _customers(
    stores: dict[str, Place], sizes: dict[str, float], chance: Random, first_number: int
) -> list[Row]:
    """One to three order rows a store, numbered in the order in which the orders came in."""
    rows: list[Row] = []
    for name, place in stores.items():
        whole = sizes[name] * (0.75 + 0.5 * chance.random())
        parts = 1 + int(3 * chance.random()) if whole > 60 else 1
        days = sorted(int(5 * chance.random()) for _ in range(parts))
        for day in days:
            quantity = Decimal(max(12, round(whole / parts + 8 * (chance.random() - 0.5))))
            if chance.random() < 0.2:
                quantity += Decimal("0.5")
            rows.append({"Customer": name, "Ordered": quantity, "Day": DAYS[day], **_coordinates(place)})
    arrival = sorted(range(len(rows)), key=lambda position: (chance.random(), position))
    for position, row in enumerate(rows):
        row["Order number"] = f"RS-{first_number + arrival[position]}"
    return rows


def _ordered(customers: list[Row]) -> dict[str, Decimal]:
    totals: dict[str, Decimal] = {}
    for row in customers:
        totals[row["Customer"]] = totals.get(row["Customer"], Decimal(0)) + row["Ordered"]
    return totals


def _rates(depots: dict[str, Place], stores: dict[str, Place], hauliers: tuple[Haulier, ...], chance: Random,
           nearest_depots: int | None = None) -> list[Row]:  # fmt: skip
    """The rows that the hauliers quote, by depot, then store; each store has two depots at least."""
    rows: list[Row] = []
    for store, there in stores.items():
        by_distance = sorted(depots, key=lambda depot: kilometres(depots[depot], there))
        for rank, depot in enumerate(by_distance[:nearest_depots]):
            km = round(kilometres(depots[depot], there) * ROAD_FACTOR)
            for haulier in hauliers:
                quoted = haulier.nearest <= km <= haulier.farthest and chance.random() < haulier.coverage
                if quoted or (rank < 2 and haulier.name == "Drayman"):
                    price = (haulier.fixed + haulier.per_km * km) * (1 + 0.08 * (chance.random() - 0.5))
                    lane = {"Depot": depot, "Customer": store, "Km": km}
                    rows.append({**lane, "Rate": _cents(price), "Haulier": haulier.name})
    order = {depot: position for position, depot in enumerate(depots)}
    return sorted(rows, key=lambda row: order[row["Depot"]])  # a stable sort: stores stay in their order


def _scattered(count: int, apart: float, chance: Random, taken: list[Place],
               near: tuple[Place, float] | None = None) -> list[Place]:  # fmt: skip
    """Places on land, no two nearer than `apart` degrees of latitude; near another place if one is given."""
    outline = coasts()[0]
    xs, ys = zip(*outline, strict=True)
    west, east, south, north = min(xs), max(xs), min(ys), max(ys)
    if near is not None:
        (x, y), reach = near
        west, east, south, north = x - 1.4 * reach, x + 1.4 * reach, y - reach, y + reach
    found: list[Place] = []
    for _ in range(100_000):
        place = (west + (east - west) * chance.random(), south + (north - south) * chance.random())
        clear: Callable[[Place], bool] = lambda other: _apart(place, other) >= apart  # noqa: B023, E731
        if _well_inland(place) and all(map(clear, [*taken, *found])):
            found.append((round(place[0], 4), round(place[1], 4)))
            if len(found) == count:
                return found
    raise ValueError(
        f"Only {len(found)} of {count} places fit {apart} degrees apart: ask for fewer, or closer."
    )


def _well_inland(place: Place) -> bool:
    x, y = place
    return all(on_land((x + dx, y + dy)) for dx, dy in ((0.06, 0), (-0.06, 0), (0, 0.04), (0, -0.04)))


def _apart(first: Place, second: Place) -> float:
    return sqrt(((first[0] - second[0]) * 0.676) ** 2 + (first[1] - second[1]) ** 2)


def kilometres(first: Place, second: Place) -> float:
    """Great-circle distance (haversine) between two places given as longitude and latitude."""
    (x1, y1), (x2, y2) = ((radians(x), radians(y)) for x, y in (first, second))
    half = sin((y2 - y1) / 2) ** 2 + cos(y1) * cos(y2) * sin((x2 - x1) / 2) ** 2
    return 2 * EARTH_RADIUS_KM * asin(sqrt(half))


def _coordinates(place: Place) -> Row:
    return {"Latitude": Decimal(f"{place[1]:.4f}"), "Longitude": Decimal(f"{place[0]:.4f}")}


def _cents(price: float) -> Decimal:
    return Decimal(repr(price)).quantize(Decimal("0.01"), ROUND_HALF_UP)


def _whole(quantity: Decimal, step: int) -> Decimal:
    """The quantity, to the nearest multiple of a step."""
    return (quantity / step).quantize(Decimal(1), ROUND_HALF_UP) * step
