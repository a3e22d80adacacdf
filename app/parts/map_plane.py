"""Degrees to places on a flat drawing, measured in pixels as the map first opens; and its grid."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, cos, floor, radians

from app.parts.coast import Place, around_here, coasts

Spot = tuple[float, float]
"""Right and down from the middle of the drawing, in pixels."""

WIDTH, HEIGHT = 440, 500
"""What the drawing is fitted into, in pixels: a little less than the least room a map usually has."""

GRID_STEPS = (0.01, 0.02, 0.05, 0.1, 0.25, 0.5, 1, 2, 5, 10, 15, 30)
SMALLEST_SPAN = 0.05
"""Degrees; a desk with a single place is not magnified beyond this."""


@dataclass(frozen=True)
class Plane:
    """A flat drawing around a middle; longitudes shrink by the cosine of the middle latitude."""

    longitude: float
    latitude: float
    shrink: float
    scale: float

    def spot(self, place: Place) -> Spot:
        """Where a place is drawn."""
        longitude, latitude = place
        turned = (longitude - self.longitude + 180) % 360 - 180
        return (
            round(turned * self.shrink * self.scale, 2),
            round((self.latitude - latitude) * self.scale, 2),
        )


@dataclass(frozen=True)
class Ground:
    """What lies under the flows: the plane, coastlines if they are ours, and grid lines with their labels."""

    plane: Plane
    outlines: tuple[tuple[Spot, ...], ...]
    grid: tuple[tuple[Spot, Spot], ...]
    grid_labels: tuple[tuple[str, Spot], ...]


def ground(places: Sequence[Place]) -> Ground:
    """The ground for these places, of which there must be one at least."""
    ours = around_here(places)
    plane = _plane([*places, *coasts()[0]] if ours else places)
    outlines = tuple(tuple(plane.spot(corner) for corner in coast) for coast in coasts()) if ours else ()
    grid, labels = _grid(plane)
    return Ground(plane, outlines, grid, labels)


def _plane(places: Sequence[Place]) -> Plane:
    longitudes = _unwrapped([longitude for longitude, _ in places])
    latitudes = [latitude for _, latitude in places]
    west, east, south, north = min(longitudes), max(longitudes), min(latitudes), max(latitudes)
    latitude = (south + north) / 2
    shrink = max(0.05, cos(radians(latitude)))
    wide = max((east - west) * shrink, SMALLEST_SPAN)
    high = max(north - south, SMALLEST_SPAN)
    return Plane((west + east) / 2, latitude, shrink, scale=min(WIDTH / wide, HEIGHT / high))


def _unwrapped(longitudes: list[float]) -> list[float]:
    """The longitudes without a jump where the desk lies across the 180th meridian."""
    if max(longitudes) - min(longitudes) <= 180:
        return longitudes
    return [longitude + 360 if longitude < 0 else longitude for longitude in longitudes]


def _grid(plane: Plane) -> tuple[tuple[tuple[Spot, Spot], ...], tuple[tuple[str, Spot], ...]]:
    """Lines at round degrees, reaching well beyond what is seen, labelled near its left and lower edge."""
    high = HEIGHT / plane.scale
    wide = WIDTH / plane.scale / plane.shrink
    step = next((s for s in GRID_STEPS if high / s <= 6 and wide / s <= 7), GRID_STEPS[-1])
    lines: list[tuple[Spot, Spot]] = []
    labels: list[tuple[str, Spot]] = []
    for degrees in _multiples(step, plane.latitude, 2 * high):
        if abs(degrees) <= 90:
            _, y = plane.spot((plane.longitude, degrees))
            lines.append(((-2 * WIDTH, y), (2 * WIDTH, y)))
            if abs(y) < HEIGHT / 2:
                labels.append((_degrees(degrees, "N", "S"), (-WIDTH / 2 - 16, y - 8)))
    for degrees in _multiples(step, plane.longitude, min(2 * wide, 179.9)):
        x, _ = plane.spot((degrees, plane.latitude))
        lines.append(((x, -2 * HEIGHT), (x, 2 * HEIGHT)))
        if abs(x) < WIDTH / 2 - 20:
            turned = (degrees + 180) % 360 - 180
            labels.append((_degrees(turned, "E", "W"), (x + 4, HEIGHT / 2 + 20)))
    return tuple(lines), tuple(labels)


def _multiples(step: float, middle: float, reach: float) -> list[float]:
    """The multiples of a step that are no farther than this from a middle."""
    return [
        number * step for number in range(ceil((middle - reach) / step), floor((middle + reach) / step) + 1)
    ]


def _degrees(value: float, positive: str, negative: str) -> str:
    """Degrees and minutes, or hundredths of a degree where the grid is finer than minutes."""
    side = "" if abs(value) in (0, 180) else f" {positive if value > 0 else negative}"
    minutes = abs(value) * 60
    if abs(minutes - round(minutes)) > 1e-6:
        return f"{abs(value):.2f}°{side}"
    whole, rest = divmod(round(minutes), 60)
    return f"{whole}°{rest:02d}′{side}" if rest else f"{whole}°{side}"
