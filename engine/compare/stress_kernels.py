"""Which rate rows matter near a plan: machine code for one pass over all of them."""

import numpy as np
import numpy.typing as npt

from engine.exact import Integers
from engine.network.compiled import kernel

Flags = npt.NDArray[np.bool_]

DEAREST = 2**62


@kernel
def keep_cheapest(start: Integers, spare: Integers, kept: Flags, count: int) -> None:
    """Marks, for each customer, so many more rows: those of least `spare` that are not kept yet.

    start: (customers + 1,); spare: (rows,); kept: (rows,) receives the marks
    """
    for j in range(len(start) - 1):
        for _ in range(count):
            least, place = DEAREST, -1
            for row in range(start[j], start[j + 1]):
                if spare[row] < least and not kept[row]:
                    least, place = spare[row], row
            if place < 0:
                break
            kept[place] = True


@kernel
def would_pay(
    start: Integers, depot: Integers, cost: Integers, left_out: Flags, asked: Flags, depot_price: Integers,
    customer_price: Integers, found: Integers,
) -> int:  # fmt: skip
    """How many rows that were left out cost less than both prices together; their places go to `found`.

    If there is none, what is cheapest without these rows is cheapest with them: a row at 0 whose cost less
    both prices is not negative adds nothing to either side of the proof (Dantzig 1963).

    start: (customers + 1,); depot, cost, left_out, found: (rows,); asked: (customers,) where to look
    """
    count = 0
    for j in range(len(start) - 1):
        if not asked[j]:
            continue
        price = customer_price[j]
        for row in range(start[j], start[j + 1]):
            if cost[row] - depot_price[depot[row]] < price and left_out[row]:
                found[count] = row
                count += 1
    return count


def prepare() -> None:
    """Compiles these kernels, or loads them from the user's cache folder."""
    start, one = np.array([0, 1]), np.zeros(1, dtype=np.int64)
    kept, asked = np.zeros(1, dtype=np.bool_), np.ones(1, dtype=np.bool_)
    keep_cheapest(start, one, kept, 1)
    would_pay(start, one, one, kept, asked, one, one, one.copy())
