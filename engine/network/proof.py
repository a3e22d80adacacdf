"""Checks a flow and its prices from the original figures, in integers, knowing nothing of the kernels.

The argument is linear-programming duality (Dantzig 1963): with r = cost - depot price - customer price,
every flow within the limits costs at least

    sum supply * depot_price + sum demand * customer_price
        + sum max(r, 0) * at_least + sum min(r, 0) * at_most

so a flow that costs exactly this is a least-cost flow.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from engine.exact import Integers, TooLarge, total
from engine.network.compiled import kernel, part
from engine.network.problem import LARGEST_FIGURE, UNLIMITED, Figures, Problem

WORD = (1 << 31) - 1


class NotProved(ArithmeticError):
    """A flow that breaks a sum or a limit, or prices that do not show it to be the least cost."""


@dataclass(frozen=True)
class Proof:
    """What the check found; it exists only if the check passed.

    cost:        sum of quantity * cost
    lower_bound: what no flow can cost less than, from the prices alone
    rows:        how many rows were checked
    """

    cost: int
    lower_bound: int
    rows: int

    @property
    def gap(self) -> int:
        """Cost minus lower bound: 0."""
        return self.cost - self.lower_bound

    @property
    def exact(self) -> bool:
        """Whether cost and lower bound are the same integer."""
        return self.gap == 0


def prove(problem: Problem, quantity: Integers, depot_price: Integers, customer_price: Integers) -> Proof:
    """Checks that `quantity` is a least-cost flow of `problem`, and says what it costs.

    quantity: (rows,); depot_price: (depots,); customer_price: (customers,), all int64.
    Raises NotProved with the first row, depot or customer where the check fails; TooLarge if
    cost - depot price - customer price could leave int64.
    """
    answer = Answer(quantity, depot_price, customer_price)
    _check_shapes(problem, answer)
    figures = problem.figures
    sent = np.zeros(problem.depots, dtype=np.int64)
    paid = np.zeros(4, dtype=np.int64)
    bound = np.zeros(4, dtype=np.int64)
    rule, place = check_rows(figures, problem.look.every, answer, Sums(sent, paid, bound))
    if rule:
        raise NotProved(_sentence(figures, answer, rule, place))
    if not np.array_equal(sent, problem.supply):
        depot = int(np.argmax(sent != problem.supply))
        raise NotProved(f"Depot {depot} sends {sent[depot]}, its supply is {problem.supply[depot]}.")
    add_products(bound, problem.supply, depot_price)
    add_products(bound, problem.demand, customer_price)
    proof = Proof(cost=_value(paid), lower_bound=_value(bound), rows=problem.rows)
    if not proof.exact:
        raise NotProved(f"The flow costs {proof.cost}, its prices prove only {proof.lower_bound}.")
    return proof


class Answer(NamedTuple):
    """What is to be proved, as kernels take it."""

    quantity: Integers
    depot_price: Integers
    customer_price: Integers


BELOW, ABOVE, DEAR, CHEAP, RECEIVED = 1, 2, 3, 4, 5


class Sums(NamedTuple):
    """What the check adds up.

    sent:  (depots,) receives what each depot sends
    paid:  receives the sum of quantity * cost, in the four words of `add_product`
    bound: receives the rows' share of the lower bound, likewise
    """

    sent: Integers
    paid: Integers
    bound: Integers


@kernel
def check_rows(figures: Figures, every: bool, answer: Answer, sums: Sums) -> tuple[int, int]:
    """One pass over the rows: limits, signs of r, what customers receive, both sides of the cost.

    every: whether each customer has exactly one row from each depot, in the order of the depots
    Returns the first rule that is broken and the row or customer where, or (0, 0).
    """
    return pass_over(figures, every, answer, sums)


@part
def pass_over(figures: Figures, every: bool, answer: Answer, sums: Sums) -> tuple[int, int]:
    """`check_rows`; as a part it counts no references while it runs."""
    start, depot, cost = figures.start, figures.depot, figures.cost
    quantity, depot_price = answer.quantity, answer.depot_price
    sent, paid, bound = sums.sent, sums.paid, sums.bound
    bounded, capped = len(figures.at_least) > 0, len(figures.at_most) > 0
    lower, upper = 0, UNLIMITED
    for j in range(len(figures.demand)):
        missing, price = figures.demand[j], answer.customer_price[j]
        first, last = start[j], start[j + 1]
        if not bounded:
            rows = slice(first, last)
            if every:
                used, place, cheap = glance(cost[rows], quantity[rows], depot_price, price)
            else:
                used, place, cheap = look_up(cost[rows], depot[rows], quantity[rows], depot_price, price)
            if used == 0 and not cheap:
                last = first
            elif used == 1 and not cheap:
                first += place
                last = first + 1
        for row in range(first, last):
            i = row - start[j] if every else depot[row]
            x = quantity[row]
            r = cost[row] - depot_price[i] - price
            if bounded:
                lower = figures.at_least[row]
            if x == 0 and lower == 0 and r >= 0:
                continue
            if capped:
                upper = figures.at_most[row]
            if x < lower:
                return BELOW, row
            if x > upper:
                return ABOVE, row
            if r > 0 and x != lower:
                return DEAR, row
            if r < 0 and x != upper:
                return CHEAP, row
            if x > missing:
                return RECEIVED, j
            missing -= x
            sent[i] += x
            add_product(paid, x, cost[row])
            if r > 0:
                add_product(bound, lower, r)
            if r < 0:
                add_product(bound, upper, r)
        if missing != 0:
            return RECEIVED, j
    return 0, 0


@part
def glance(cost: Integers, quantity: Integers, depot_price: Integers, price: int) -> tuple[int, int, bool]:
    """How many of a customer's rows carry something, where if it is one, and whether any has r < 0.

    Most customers have one row that carries something and none with r < 0: no other row needs a second look.
    For rows of all depots in their order; written so that it runs in vectors.
    """
    used, place, least = 0, 0, UNLIMITED
    for n in range(len(cost)):
        carries = quantity[n] != 0
        used += carries
        place |= n if carries else 0
        least = min(least, cost[n] - depot_price[n])
    return used, place, least < price


@part
def look_up(
    cost: Integers, depot: Integers, quantity: Integers, depot_price: Integers, price: int
) -> tuple[int, int, bool]:
    """`glance` for rows of any depots in any order."""
    used, place, least = 0, 0, UNLIMITED
    for n in range(len(cost)):
        carries = quantity[n] != 0
        used += carries
        place |= n if carries else 0
        least = min(least, cost[n] - depot_price[depot[n]])
    return used, place, least < price


@part
def add_product(words: Integers, a: int, b: int) -> None:
    """Adds a * b to a number kept in four words of 31 bits, each with room for 2**30 carries.

    a and b must lie within plus or minus 2**62; the highest word carries the sign.
    """
    a_low, b_low = a & WORD, b & WORD
    a_high, b_high = a >> 31, b >> 31
    low = a_low * b_low
    middle = a_high * b_low + a_low * b_high
    high = a_high * b_high
    words[0] += low & WORD
    words[1] += (low >> 31) + (middle & WORD)
    words[2] += (middle >> 31) + (high & WORD)
    words[3] += high >> 31


@kernel
def add_products(words: Integers, many: Integers, more: Integers) -> None:
    """Adds the sum of many[n] * more[n], see `add_product`."""
    for n in range(len(many)):
        add_product(words, many[n], more[n])


def _value(words: Integers) -> int:
    """The number that four words stand for."""
    return sum(int(word) << (31 * place) for place, word in enumerate(words))


def _check_shapes(problem: Problem, answer: Answer) -> None:
    for name, array, size in (
        ("quantity", answer.quantity, problem.rows),
        ("depot_price", answer.depot_price, problem.depots),
        ("customer_price", answer.customer_price, problem.customers),
    ):
        if array.dtype != np.int64 or array.shape != (size,):
            raise ValueError(f"{name} is {array.dtype} {array.shape}, it must be int64 ({size},).")
    reach = problem.dearest + sum(
        max(int(array.max(initial=0)), -int(array.min(initial=0)))
        for array in (answer.depot_price, answer.customer_price)
    )
    if reach > LARGEST_FIGURE:
        raise TooLarge(
            f"Costs and prices reach {reach} together, sums up to {LARGEST_FIGURE} can be checked exactly: "
            f"use a larger currency unit."
        )


def _sentence(figures: Figures, answer: Answer, rule: int, place: int) -> str:
    """Which rule is broken where, with the numbers."""
    if rule == RECEIVED:
        rows = slice(figures.start[place], figures.start[place + 1])
        received = total(answer.quantity[rows])
        return f"Customer {place} receives {received}, its demand is {figures.demand[place]}."
    sends = f"Row {place} (depot {figures.depot[place]}) sends {answer.quantity[place]}, "
    return (
        sends
        + {
            BELOW: "less than its lower limit.",
            ABOVE: "more than its upper limit.",
            DEAR: "above its lower limit, although its prices say that it is too dear.",
            CHEAP: "below its upper limit, although its prices say that more of it would be cheaper.",
        }[rule]
    )
