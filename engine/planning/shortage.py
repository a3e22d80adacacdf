"""Why somebody goes short: the customers and the depots that cannot bring them more, with the numbers.

The most that can be delivered equals the least that some cut lets through (Ford & Fulkerson 1956), so a
shortage is always explained by a set of customers and all that reaches them.
"""

from collections.abc import Iterable
from dataclasses import dataclass, replace
from decimal import Decimal

import numpy as np

from engine.exact import canonical, to_decimal, to_integer
from engine.figures import PRIORITIES
from engine.planning.even_share import Sharing, rounded, shares, tightest_cut
from engine.planning.model import Integers, Model, priority_of, step_of
from engine.week import Week


@dataclass(frozen=True, slots=True)
class Shortage:
    """Customers who together need more than can be brought to them.

    `depots` are used up by these customers (and by what is forced elsewhere); `limited` reach them only
    through rows that are full. Quantities are in the week's unit.
    """

    customers: tuple[str, ...]
    depots: tuple[str, ...]
    limited: tuple[str, ...]
    needed: Decimal
    brought: Decimal

    def sentence(self, unit: str) -> str:
        """The shortage in words."""
        who = _listed(self.customers)
        need = "needs" if len(self.customers) == 1 else "need"
        needed, brought = (f"{canonical(q)} {unit}" for q in (self.needed, self.brought))
        if not self.depots and not self.limited:
            return f"{who} {need} {needed}; no open lane reaches {_them(self.customers)}."
        reach = [_listed(self.depots)] if self.depots else []
        reach += [f"{_listed(self.limited)} within {_its(self.limited)} limits"] if self.limited else []
        verb = "reaches" if len(self.depots) + len(self.limited) == 1 else "reach"
        those = "it" if len(self.depots) + len(self.limited) == 1 else "those"
        return (
            f"{who} {need} {needed}; only {' and '.join(reach)} {verb} {_them(self.customers)}, "
            f"and {those} can bring {brought}."
        )


def shortages(model: Model) -> tuple[Shortage, ...]:
    """Each group of customers that cannot be served in full, the largest shortage first.

    Customers who may decline are left out: they go short where that is cheaper.
    """
    sharing = sharing_of(model)
    counted = np.isin(model.short_rows, [row for _, rows in model.counted for row in rows.tolist()])
    needs = np.where(counted, sharing.ordered - sharing.forced, 0)
    short, cut = tightest_cut(sharing, sharing.free, needs.tolist())
    if short == 0:
        return ()
    found = [_group(model, sharing, needs, *parts) for parts in _groups(sharing, cut.customers, cut.depots)]
    missing = [one for one in found if one.needed > one.brought]
    return tuple(sorted(missing, key=lambda one: one.brought - one.needed))


def evenly_shared(week: Week, model: Model) -> Model:
    """The model with what goes short fixed to even shares, priority by priority."""
    customers = list(week.customers.values())
    classes = [
        [j for j, c in enumerate(customers) if not c.may_decline and priority_of(c) == priority]
        for priority in PRIORITIES
    ]
    sharing = sharing_of(model)
    step = to_integer(step_of(week.rules), model.quantity_places)
    received = rounded(sharing, shares(sharing, classes), step, classes)
    members = np.array([j for members in classes for j in members], dtype=np.int64)
    if np.array_equal(received[members], sharing.ordered[members]):
        return model
    problem = model.problem
    at_least, at_most = (np.array(limits, dtype=np.int64) for limits in (problem.at_least, problem.at_most))
    rows = model.short_rows[members]
    at_least[rows] = at_most[rows] = (sharing.ordered - received)[members]
    return replace(model, problem=replace(problem, at_least=at_least, at_most=at_most))


def sharing_of(model: Model) -> Sharing:
    """The stock, orders and rate rows of a model, without its stand-ins."""
    problem = model.problem
    rows = np.flatnonzero(model.rate_row >= 0)
    customers = len(model.customers)
    at_least, at_most = model.stated_limits
    return Sharing(
        available=problem.supply[:-1],
        ordered=problem.demand[:-1],
        start=problem.start[:-1] - np.arange(customers + 1),
        depot=problem.depot[rows],
        at_least=at_least[rows],
        at_most=at_most[rows],
    )


def _groups(
    sharing: Sharing, customers: frozenset[int], depots: frozenset[int]
) -> Iterable[tuple[set[int], set[int]]]:
    """The cut's customers and depots in parts that share no row."""
    reached_by: dict[int, set[int]] = {j: set() for j in customers}
    for j, i, room in zip(
        sharing.customer.tolist(), sharing.depot.tolist(), sharing.room.tolist(), strict=True
    ):
        if j in reached_by and i in depots and room:
            reached_by[j].add(i)
    left = dict(sorted(reached_by.items()))
    while left:
        first = next(iter(left))
        group, members = left.pop(first), {first}
        grown = True
        while grown:
            joining = [j for j, reach in left.items() if reach & group]
            grown = bool(joining)
            for j in joining:
                group |= left.pop(j)
                members.add(j)
        yield members, group


def _group(model: Model, sharing: Sharing, needs: Integers, members: set[int], depots: set[int]) -> Shortage:
    inside = np.isin(sharing.customer, list(members)) & ~np.isin(sharing.depot, list(depots))
    limited = inside & (sharing.room > 0)
    forced = sum(int(sharing.forced[j]) for j in members)
    needed = sum(int(needs[j]) for j in members) + forced
    brought = sum(int(sharing.free[i]) for i in depots) + sum(sharing.room[inside].tolist()) + forced
    return Shortage(
        customers=tuple(model.customers[j] for j in sorted(members)),
        depots=tuple(model.depots[i] for i in sorted(depots)),
        limited=tuple(model.depots[i] for i in sorted(set(sharing.depot[limited].tolist()))),
        needed=to_decimal(needed, model.quantity_places),
        brought=to_decimal(min(brought, needed), model.quantity_places),
    )


def _listed(names: tuple[str, ...]) -> str:
    if len(names) == 1:
        return names[0]
    if len(names) <= 6:
        return f"{', '.join(names[:-1])} and {names[-1]}"
    return f"{', '.join(names[:5])} and {len(names) - 5} more"


def _them(names: tuple[str, ...]) -> str:
    return "it" if len(names) == 1 else "them"


def _its(names: tuple[str, ...]) -> str:
    return "its" if len(names) == 1 else "their"
