"""Exact fractions to amounts that are paid, so that what they add up to stays what it is.

Each part is rounded down to the grain; the grains that are then missing go to the largest remainders,
earlier parts first among equals (the method of largest remainders, after Hamilton 1792; see Balinski and
Young, *Fair Representation*, 1982).
"""

from collections.abc import Sequence
from decimal import Decimal
from fractions import Fraction

from engine.exact import to_decimal, to_integer


def apportioned(parts: Sequence[Fraction], places: int, total: Decimal | None = None) -> list[Decimal]:
    """The parts at a number of decimal places, adding up to `total` exactly.

    total: at these places; None is the exact sum, which must fit them

    Raises:
        ValueError: the total does not fit the places, or is more than a grain away from the sum of the parts.
    """
    scale = 10**places
    scaled = [part * scale for part in parts]
    exact = sum(scaled, Fraction(0))
    if total is None:
        if exact.denominator != 1:
            raise ValueError(
                f"The parts add up to {exact}/{scale}, which {places} decimal places cannot say."
            )
        wanted = int(exact)
    else:
        wanted = to_integer(total, places)
    if abs(wanted - exact) > 1 and len(parts):
        raise ValueError(f"The parts add up to {float(exact) / scale}, not to the total {total}.")
    down = [part.numerator // part.denominator for part in scaled]
    missing = wanted - sum(down)
    by_remainder = sorted(range(len(parts)), key=lambda n: (down[n] - scaled[n], n))
    for n in by_remainder[: max(0, missing)]:
        down[n] += 1
    if missing < 0:  # the total was rounded down below the parts: take from the smallest remainders
        for n in list(reversed(by_remainder))[:-missing]:
            down[n] -= 1
    return [to_decimal(part, places) for part in down]
