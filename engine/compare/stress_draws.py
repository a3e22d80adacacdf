"""Drawn weeks: how far orders, stock and rates may stray, and case k of a sample.

Case k is drawn from a stream of its own, whose counter holds k (Philox: Salmon, Moraes, Dror & Shaw 2011),
so that it is the same week in whichever part of a run, process or machine it is worked out. Only the raw
numbers of the stream are used, which numpy keeps the same from version to version; they become percentages
by inverting the distribution, to a tenth of a percent, and are whole numbers from there on.
"""

from dataclasses import dataclass
from decimal import Decimal, InvalidOperation
from functools import lru_cache
from threading import get_ident
from typing import Any, Literal

import numpy as np
import numpy.typing as npt
from scipy.special import ndtr, ndtri

from engine.exact import Integers

Shape = Literal["triangular", "normal", "even"]
SHAPES: tuple[Shape, ...] = ("triangular", "normal", "even")

THOUSAND = 1_000
"""Factors are whole thousandths."""

LEAST_PERCENT = Decimal(-100)


@dataclass(frozen=True, slots=True)
class Spread:
    """How far a figure may stray from what the week says, in percent of it.

    shape:    triangular (`low`, most likely `centre`, `high`), normal (mean `centre`, standard deviation
              `deviation`, only between `low` and `high`), or even between `low` and `high`
    together: all figures of the kind stray alike; otherwise each by itself
    """

    shape: Shape
    low: Decimal
    high: Decimal
    centre: Decimal = Decimal(0)
    deviation: Decimal = Decimal(0)
    together: bool = False

    def __post_init__(self) -> None:
        if self.shape not in SHAPES:
            raise ValueError(f"A figure cannot stray like '{self.shape}': say {', '.join(SHAPES)}.")
        if not LEAST_PERCENT <= self.low <= self.high:
            raise ValueError(
                f"A figure cannot stray from {self.low} to {self.high} percent: give the smaller first, "
                "not below -100."
            )
        if self.shape == "triangular" and not self.low <= self.centre <= self.high:
            raise ValueError(
                f"The most likely change, {self.centre} percent, must lie between {self.low} and {self.high}."
            )
        if self.shape == "normal" and self.deviation <= 0:
            raise ValueError("A normal distribution needs a standard deviation above 0 percent.")

    def percents(self, chance: npt.NDArray[np.float64]) -> npt.NDArray[np.float64]:
        """The percentages that these chances (each between 0 and 1) stand for."""
        low, high, centre = float(self.low), float(self.high), float(self.centre)
        if low == high:
            return np.full(len(chance), low)
        if self.shape == "even":
            return low + (high - low) * chance
        if self.shape == "normal":
            spread = float(self.deviation)
            below, above = ndtr((low - centre) / spread), ndtr((high - centre) / spread)
            found = centre + spread * ndtri(below + (above - below) * chance)
            return np.clip(found, low, high)
        split = (centre - low) / (high - low)
        rising = low + np.sqrt(chance * (high - low) * (centre - low))
        falling = high - np.sqrt((1 - chance) * (high - low) * (high - centre))
        return np.where(chance < split, rising, falling)


@dataclass(frozen=True, slots=True)
class Draws:
    """A sample of weeks: its seed, and what strays. None: as the week says.

    Each customer's order, each depot's stock and each haulier's rates stray by themselves, or together.
    """

    seed: int
    orders: Spread | None = None
    stock: Spread | None = None
    rates: Spread | None = None

    def __post_init__(self) -> None:
        if not 0 <= self.seed < 2**63:
            raise ValueError(f"The seed {self.seed} must lie between 0 and {2**63 - 1}.")

    @property
    def is_empty(self) -> bool:
        return self.orders is None and self.stock is None and self.rates is None


def factors(draws: Draws, number: int, what: Literal["orders", "stock", "rates"], count: int) -> Integers:
    """(count,) by how many thousandths each figure is multiplied in case `number` of the sample."""
    spread: Spread | None = getattr(draws, what)
    if spread is None or count == 0:
        return np.full(count, THOUSAND, dtype=np.int64)
    place = ("orders", "stock", "rates").index(what)
    raw = raw_numbers(draws.seed, (0, 0, place, number), 1 if spread.together else count)
    chance = ((raw >> np.uint64(11)).astype(np.float64) + 0.5) / 2**53
    percents = spread.percents(chance)
    thousandths = THOUSAND + np.rint(10 * percents).astype(np.int64)
    return np.repeat(thousandths, count) if spread.together else thousandths


def raw_numbers(seed: int, counter: tuple[int, int, int, int], count: int) -> npt.NDArray[np.uint64]:
    """So many 64-bit numbers of the stream with this key, from this counter on."""
    stream = _stream(seed, get_ident())
    state: Any = stream.state
    state["state"]["counter"] = np.array(counter, dtype=np.uint64)
    state["buffer_pos"] = 4  # nothing is left over from the numbers asked for before
    stream.state = state
    return np.asarray(stream.random_raw(count), dtype=np.uint64)


@lru_cache(maxsize=64)
def _stream(seed: int, thread: int) -> np.random.Philox:
    """A stream of a thread's own: making one takes longer than a case, setting it back does not."""
    return np.random.Philox(key=seed)


def spread_of(text: str) -> Spread:
    """A spread as it is typed: 'triangular -20 0 30', 'normal 0 5 -15 15', 'even -10 5'; 'together' behind.

    Triangular: lowest, most likely, highest; normal: mean, standard deviation, lowest, highest; all in
    percent, with a decimal point.

    Raises ValueError with a sentence where it cannot be read.
    """
    words = text.replace("%", " ").split()
    together = bool(words) and words[-1] == "together"
    shape, *numbers = words[:-1] if together else words or [""]
    wanted = {"triangular": 3, "normal": 4, "even": 2}.get(shape)
    try:
        figures = [Decimal(number) for number in numbers]
    except InvalidOperation:
        figures = []
    if wanted is None or len(figures) != wanted or not all(figure.is_finite() for figure in figures):
        raise ValueError(
            f"'{text}' does not say how a figure strays: type 'triangular -20 0 30' (lowest, most likely, "
            "highest percent), 'normal 0 5 -15 15' (mean, deviation, lowest, highest) or 'even -10 5'."
        )
    if shape == "triangular":
        return Spread("triangular", figures[0], figures[2], centre=figures[1], together=together)
    if shape == "normal":
        return Spread("normal", figures[2], figures[3], figures[0], figures[1], together)
    return Spread("even", figures[0], figures[1], together=together)
