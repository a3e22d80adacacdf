"""What solving a problem gives: a flow with its prices and proof, or the reason why there is none."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from engine.exact import Integers
from engine.network.problem import Problem
from engine.network.proof import Proof

Method = Literal["exchange", "simplex"]


@dataclass(frozen=True, eq=False)
class Flow:
    """A least-cost flow, proved.

    With r = cost - depot_price - customer_price on each row: r > 0 only where the quantity is at its
    lower limit, r < 0 only where it is at its upper limit. Prices are known up to a constant (added to
    every depot, taken from every customer); it is chosen so that the first depot's price is 0.

    problem:        what was solved
    quantity:       (rows,) int64
    depot_price:    (depots,) int64, per unit: the field's dual values of the depots' sums
    customer_price: (customers,) int64, per unit
    proof:          the figures of the check, recomputed from the problem alone
    method:         which kernel found it
    """

    problem: Problem
    quantity: Integers
    depot_price: Integers
    customer_price: Integers
    proof: Proof
    method: Method

    @property
    def cost(self) -> int:
        """Total cost, exact."""
        return self.proof.cost


@dataclass(frozen=True)
class Cut:
    """Customers that cannot be served by what can reach them (Ford & Fulkerson 1956; Hoffman 1960).

    needed > brought + limited - bound, whichever way the goods are sent:

    customers: who needs `needed` in all
    depots:    the depots that reach them without limit; in all they have `brought`
    limited:   the most that all other depots may bring these customers, by the rows' upper limits
    bound:     what these depots must send to other customers, by the rows' lower limits
    """

    depots: tuple[int, ...]
    customers: tuple[int, ...]
    needed: int
    brought: int
    limited: int
    bound: int

    @property
    def missing(self) -> int:
        """By how much the figures contradict each other, always above 0."""
        return self.needed - (self.brought + self.limited - self.bound)


class Contradiction(Exception):
    """No flow keeps all sums and limits; `cut` says which of them contradict each other."""

    def __init__(self, cut: Cut) -> None:
        self.cut = cut
        super().__init__(
            f"No plan keeps all sums and limits: customers {_some(cut.customers)} need {cut.needed}; "
            f"depots {_some(cut.depots)} have {cut.brought} for them, of which {cut.bound} must go "
            f"elsewhere, and all others may bring {cut.limited}: {cut.missing} too few. "
            f"Change one of these figures."
        )


def _some(indices: tuple[int, ...]) -> str:
    """The first five of `indices` and how many there are."""
    if not indices:
        return "(none)"
    shown = ", ".join(map(str, indices[:5]))
    return shown if len(indices) <= 5 else f"{shown}, ... ({len(indices)} in all)"
