"""The aims in order, as weights on the stand-in rows of one exact solve.

Deliver the most to priority A, then B, then C; move what must move; least cost. A shortest path or a
cycle of exchanges crosses the stand-in depot once and the stand-in customer once, so it gains or loses
at most one unit of each aim. Each weight outweighs twice all that the aims below it can sum to on such a
path: no lower aim is ever traded for a higher one, two paths with equal sums are equal in every aim, and
a sum can be taken apart again.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from engine.exact import LARGEST, TooLarge
from engine.figures import PRIORITIES

MUST_MOVE = "must move"
OUT_OF_REACH = "out of reach"
"""Above all aims: marks the price of a place from which no chain of exchanges leads to the stand-in depot."""


@dataclass(frozen=True, slots=True)
class Parts:
    """A sum of weights and money taken apart: units of each aim that count against it, and money."""

    aims: Mapping[str, int]
    money: int


@dataclass(frozen=True, slots=True)
class Weights:
    """What a unit counts against each aim, the highest aim first; money counts as itself."""

    of: Mapping[str, int]

    def __getitem__(self, aim: str) -> int:
        return self.of[aim]

    def split(self, value: int) -> Parts:
        """Take apart the sum of weights and money along one path."""
        aims = {}
        for aim, weight in self.of.items():
            aims[aim] = (2 * value + weight) // (2 * weight)  # to the nearest multiple
            value -= aims[aim] * weight
        return Parts(aims, value)


def weights(largest_money: int, depots: int, priorities: Iterable[str], must_move: bool) -> Weights:
    """Weights that keep the aims strictly in order.

    Args:
        largest_money: the largest absolute rate or charge, as an integer.
        depots: how many depots there are, without the stand-in.
        priorities: the priorities that occur among customers who may not decline.
        must_move: whether any depot has goods that must move.

    Raises:
        TooLarge: the aims together do not fit the exact integers.
    """
    reach = 2 * (depots + 2) * largest_money  # a simple path has two rows per depot, stand-ins included
    rising: list[tuple[str, int]] = []
    used = set(priorities)
    for aim in (MUST_MOVE, *reversed(PRIORITIES)):
        if (aim == MUST_MOVE and must_move) or aim in used:
            rising.append((aim, 1 + 2 * reach))
            reach += 1 + 2 * reach
    rising.append((OUT_OF_REACH, 1 + 2 * reach))
    reach += 1 + 2 * reach
    if 4 * reach > LARGEST:
        raise TooLarge(
            "The rates and charges are too large or too finely divided to keep the aims in order exactly: "
            "use fewer decimal places, or a larger currency unit."
        )
    return Weights(dict(reversed(rising)))
