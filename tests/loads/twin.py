"""Two slow, obvious ways to the best plan: enumeration of everything, and OR-Tools' CP-SAT."""

from __future__ import annotations

from itertools import product

from ortools.sat.python import cp_model

from engine.loads import NO_LIMIT, LoadProblem


def row_cost(week: LoadProblem, row: int, x: int) -> tuple[int, int]:
    """What `x` on a row costs, load by load, and how many loads it is."""
    if x == 0:
        return 0, 0
    size = int(week.load_size[row]) or x
    cost, loads, left = int(week.charge_per_use[row]), 0, x
    while left > 0:
        part = min(left, size)
        freight = int(week.per_unit[row]) * part
        if week.trip_minimum[row] > 0:
            freight = max(freight, int(week.trip_minimum[row]))
        cost += freight + int(week.per_load[row])
        left -= part
        loads += 1
    return cost, loads


def best_by_enumeration(week: LoadProblem) -> tuple[int, ...] | None:
    """Aims in order and then cost of the best plan: every way at every customer, in every combination."""
    ranks = aims(week)
    states: dict[tuple[tuple[int, ...], ...], tuple[int, ...]] = {
        ((0,) * week.depots, (0,) * week.depots, (0,) * len(week.haulier_most)): (0,) * (len(ranks) + 1)
    }
    for j in range(week.customers):
        ways = list(_ways(week, j))
        after: dict[tuple[tuple[int, ...], ...], tuple[int, ...]] = {}
        for (sent, loads, carried), value in states.items():
            for way_sent, way_loads, way_carried, short, cost in ways:
                state = (
                    tuple(a + b for a, b in zip(sent, way_sent, strict=True)),
                    tuple(a + b for a, b in zip(loads, way_loads, strict=True)),
                    tuple(a + b for a, b in zip(carried, way_carried, strict=True)),
                )
                if _too_much(week, state):
                    continue
                counts = [0] * len(ranks)
                if not week.may_decline[j] and week.demand[j] > 0:
                    counts[ranks.index(int(week.rank[j]))] = short
                total = tuple(a + b for a, b in zip(value, (*counts, cost), strict=True))
                if state not in after or total < after[state]:
                    after[state] = total
        states = after
    best = None
    for (sent, _, _), value in states.items():
        cost, kept = value[-1], 0
        for i in range(week.depots):
            cost += int(week.unsent_cost[i]) * (int(week.supply[i]) - sent[i])
            cost += int(week.opening_charge[i]) if sent[i] else 0
            kept += max(0, int(week.must_move[i]) - sent[i])
        whole = (*value[:-1], *((kept,) if week.must_move.any() else ()), cost)
        if best is None or whole < best:
            best = whole
    return best


def aims(week: LoadProblem) -> list[int]:
    """The ranks that count."""
    return sorted(
        {
            int(rank)
            for rank, decline, demand in zip(week.rank, week.may_decline, week.demand, strict=True)
            if not decline and demand > 0
        }
    )


def _ways(week: LoadProblem, j: int):  # type: ignore[no-untyped-def]
    """Every way to serve one customer, with what it takes."""
    rows = range(int(week.start[j]), int(week.start[j + 1]))
    demand = int(week.demand[j])
    choices = []
    for row in rows:
        low, high = int(week.at_least[row]), min(int(week.at_most[row]), demand)
        allowed = [x for x in range(low, high + 1) if x == 0 or x >= week.smallest_drop[row]]
        choices.append(allowed)
    for way in product(*choices):
        if sum(way) > demand:
            continue
        used = [(row, x) for row, x in zip(rows, way, strict=True) if x]
        if week.one_depot[j] and len({int(week.depot[row]) for row, _ in used}) > 1:
            continue
        sent, loads = [0] * week.depots, [0] * week.depots
        carried = [0] * len(week.haulier_most)
        short = demand - sum(way)
        cost = short * int(week.short_cost[j])
        for row, x in used:
            price, many = row_cost(week, row, x)
            cost += price
            sent[week.depot[row]] += x
            loads[week.depot[row]] += many
            if week.haulier[row] >= 0:
                carried[week.haulier[row]] += x
        yield tuple(sent), tuple(loads), tuple(carried), short, cost


def _too_much(week: LoadProblem, state: tuple[tuple[int, ...], ...]) -> bool:
    sent, loads, carried = state
    return (
        any(a > b for a, b in zip(sent, week.supply, strict=True))
        or any(b != NO_LIMIT and a > b for a, b in zip(loads, week.most_loads, strict=True))
        or any(b != NO_LIMIT and a > b for a, b in zip(carried, week.haulier_most, strict=True))
    )


def best_by_cp_sat(week: LoadProblem) -> tuple[int, ...] | None:
    """The same by OR-Tools' CP-SAT: every quantity picks its cost from a table, one aim after the other."""
    model = cp_model.CpModel()
    quantity, cost, loads, used = [], [], [], []
    for row in range(week.rows):
        customer = int(week.customer[row])
        high = min(int(week.demand[customer]), int(week.at_most[row]), int(week.supply[week.depot[row]]))
        allowed = [
            x for x in range(high + 1) if x >= week.at_least[row] and (x == 0 or x >= week.smallest_drop[row])
        ]
        if not allowed:
            return None
        table = [(x, *row_cost(week, row, x), int(x > 0)) for x in allowed]
        columns = list(zip(*table, strict=True))
        variables = [model.new_int_var(min(column), max(column), "") for column in columns]
        model.add_allowed_assignments(variables, table)
        for kind, variable in zip((quantity, cost, loads, used), variables, strict=True):
            kind.append(variable)
    ranks = aims(week)
    counts: list[list[cp_model.LinearExprT]] = [[] for _ in ranks]
    total: list[cp_model.LinearExprT] = list(cost)
    for j in range(week.customers):
        rows = range(int(week.start[j]), int(week.start[j + 1]))
        short = model.new_int_var(0, int(week.demand[j]), "")
        model.add(sum(quantity[row] for row in rows) + short == int(week.demand[j]))
        total.append(int(week.short_cost[j]) * short)
        if not week.may_decline[j] and week.demand[j] > 0:
            counts[ranks.index(int(week.rank[j]))].append(short)
        if week.one_depot[j]:
            for row in rows:
                for other in rows:
                    if row < other and week.depot[row] != week.depot[other]:
                        model.add(used[row] + used[other] <= 1)
    kept = []
    for i in range(week.depots):
        rows_there = [row for row in range(week.rows) if week.depot[row] == i]
        sent = sum(quantity[row] for row in rows_there)
        model.add(sent <= int(week.supply[i]))
        if week.most_loads[i] != NO_LIMIT:
            model.add(sum(loads[row] for row in rows_there) <= int(week.most_loads[i]))
        total.append(int(week.unsent_cost[i]) * (int(week.supply[i]) - sent))
        opened = model.new_bool_var("")
        for row in rows_there:
            model.add(used[row] <= opened)
        total.append(int(week.opening_charge[i]) * opened)
        if week.must_move[i] > 0:
            lacking = model.new_int_var(0, int(week.must_move[i]), "")
            model.add(lacking >= int(week.must_move[i]) - sent)
            kept.append(lacking)
    for haulier, most in enumerate(week.haulier_most.tolist()):
        if most != NO_LIMIT:
            mine = [quantity[row] for row in range(week.rows) if week.haulier[row] == haulier]
            model.add(sum(mine) <= most)
    goals = [*counts, *([kept] if kept else []), total]
    values = []
    solver = cp_model.CpSolver()
    solver.parameters.num_workers = 1
    for goal in goals:
        aim = sum(goal)
        model.minimize(aim)
        if solver.solve(model) != cp_model.OPTIMAL:
            return None
        values.append(round(solver.objective_value))
        model.add(aim == values[-1])
    return tuple(values)
