"""An invented island in open ocean, around the place that is farthest from any land.

That is the oceanic pole of inaccessibility, at 48°52.6′ S 123°23.6′ W (Lukatela 1992; from memory).
The coast is kept as a few corners and roughened the same way every time, so that the map and the
sample figures agree on what is land.
"""

from collections.abc import Iterable
from functools import cache
from random import Random

Place = tuple[float, float]
"""Longitude and latitude, in degrees."""

ISLAND: tuple[Place, ...] = (
    (-126.95, -46.90), (-126.30, -46.42), (-125.45, -46.52), (-124.90, -46.20), (-124.10, -46.12),
    (-123.62, -46.42), (-123.95, -46.85), (-123.40, -46.98), (-122.70, -46.68), (-122.35, -47.15),
    (-122.72, -47.68), (-122.50, -48.20), (-123.05, -48.58), (-123.35, -49.08), (-123.88, -49.16),
    (-124.02, -48.72), (-124.50, -48.42), (-125.10, -48.62), (-125.48, -48.98), (-126.20, -48.90),
    (-126.52, -48.42), (-127.10, -48.12), (-126.72, -47.72), (-126.12, -47.56), (-126.62, -47.36),
    (-127.18, -47.28),
)  # fmt: skip

ISLETS: tuple[tuple[Place, ...], ...] = (
    ((-122.30, -48.62), (-122.06, -48.50), (-121.92, -48.74), (-122.16, -48.90)),
    ((-127.42, -46.62), (-127.20, -46.52), (-127.14, -46.70), (-127.34, -46.78)),
    ((-124.72, -49.02), (-124.56, -48.94), (-124.50, -49.10), (-124.66, -49.16)),
)

HALVINGS = 4
"""How often each side is broken in two."""

ROUGHNESS = 0.16
"""How far a broken side's middle may stray, as a part of its length."""


@cache
def coasts() -> tuple[tuple[Place, ...], ...]:
    """The outlines, the main island first, each without repeating its first corner."""
    chance = Random(47)
    return tuple(_roughened(corners, chance) for corners in (ISLAND, *ISLETS))


def _roughened(corners: tuple[Place, ...], chance: Random) -> tuple[Place, ...]:
    """The outline with each side broken in two, again and again, its middle moved sideways at random."""
    outline = list(corners)
    for _ in range(HALVINGS):
        finer: list[Place] = []
        for (x, y), (next_x, next_y) in zip(outline, [*outline[1:], outline[0]], strict=True):
            stray = (chance.random() * 2 - 1) * ROUGHNESS
            middle = (
                (x + next_x) / 2 - (next_y - y) * stray * 1.4,
                (y + next_y) / 2 + (next_x - x) * stray / 1.4,
            )
            finer += [(x, y), middle]
        outline = finer
    return tuple((round(x, 4), round(y, 4)) for x, y in outline)


def on_land(place: Place) -> bool:
    """Whether a place is on the main island: a ray crosses the coast an odd number of times."""
    longitude, latitude = place
    inside = False
    outline = coasts()[0]
    for (x, y), (next_x, next_y) in zip(outline, (*outline[1:], outline[0]), strict=True):
        if (y > latitude) != (next_y > latitude):
            crossing = x + (latitude - y) * (next_x - x) / (next_y - y)
            inside ^= longitude < crossing
    return inside


def around_here(places: Iterable[Place], margin: float = 0.5) -> bool:
    """Whether there are places at all, and all of them lie on the island or within a margin in degrees."""
    xs, ys = zip(*coasts()[0], strict=True)
    west, east, south, north = min(xs) - margin, max(xs) + margin, min(ys) - margin, max(ys) + margin
    listed = list(places)
    return bool(listed) and all(west <= x <= east and south <= y <= north for x, y in listed)
