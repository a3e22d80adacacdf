"""One customer at given prices: the cheapest way to make up its order in loads, exactly.

Between two corners (0, the least and the most that a row may carry, whole numbers of loads, and where a
trip minimum is used up) a row's cost is a straight line, and it never falls where a line begins. So some
cheapest way has all rows but one at a corner: the quantity that is free is what the others leave. The
others are searched by sums, one row after the other (Bellman 1957), without sums that cannot beat the best.
"""

from __future__ import annotations

from engine.exact import Integers
from engine.loads.arrays import NEVER, Answers, Corners, Priced, Rows, Sums
from engine.loads.compiled import part

MOST_SUMS = 128
"""More sums than this are not followed at one step; what is left out is accounted for in the bound."""

MOST_CORNERS = 1024
"""A row with more corners is searched at some of them only; the bound is then a weaker one."""


@part
def cost_of(rows: Rows, priced: Priced, row: int, x: int) -> int:
    """What `x` > 0 costs on a row, prices included."""
    size = rows.load_size[row]
    loads = 1
    if size > 0:
        loads = (x + size - 1) // size
    last = x - (loads - 1) * size
    rate, trip = rows.per_unit[row], rows.trip_minimum[row]
    cost = priced.unit[row] * x + priced.load[row] * loads + priced.use[row]
    if trip > 0:
        return int(cost + (loads - 1) * max(rate * size, trip) + max(rate * last, trip))
    return int(cost + rate * x)


@part
def add_corner(rows: Rows, priced: Priced, row: int, x: int, corners: Corners, count: int) -> int:
    """Adds one corner, if there is room."""
    if count < len(corners.x):
        corners.x[count] = x
        corners.cost[count] = cost_of(rows, priced, row, x)
        count += 1
    return count


@part
def list_corners(rows: Rows, priced: Priced, row: int, needed: int, corners: Corners, count: int) -> int:
    """Adds the corners above 0 of one row behind the first `count`; returns the new count."""
    least, most, size = rows.least[row], min(rows.most[row], needed), rows.load_size[row]
    if most < least:
        return count
    if least > 1 or rows.forced[row] == 1:
        count = add_corner(rows, priced, row, least, corners, count)
    kink = 0
    if rows.trip_minimum[row] > 0 and rows.per_unit[row] > 0:
        kink = rows.trip_minimum[row] // rows.per_unit[row]
    if size == 0:
        for x in range(kink, kink + 2):
            if kink > 0 and least < x < most:
                count = add_corner(rows, priced, row, x, corners, count)
    else:
        step = 1
        between = most // size - least // size
        if 3 * between + 8 > MOST_CORNERS:
            step = 1 + 3 * between // (MOST_CORNERS - 8)
        load = least // size
        while load * size < most:
            if load * size > least:
                count = add_corner(rows, priced, row, load * size, corners, count)
            for more in range(kink, kink + 2):
                if kink > 0 and more < size and least < load * size + more < most:
                    count = add_corner(rows, priced, row, load * size + more, corners, count)
            load += step
        if step > 1 and (most // size) * size > least:
            count = add_corner(rows, priced, row, (most // size) * size, corners, count)
    if most > least or (least == 1 and rows.forced[row] == 0):
        count = add_corner(rows, priced, row, most, corners, count)
    return count


@part
def is_coarse(rows: Rows, row: int, needed: int) -> bool:
    """Whether not all corners of the row are listed."""
    size, most = rows.load_size[row], min(rows.most[row], needed)
    return bool(size > 0 and 3 * (most // size - rows.least[row] // size) + 8 > MOST_CORNERS)


@part
def value_of(rows: Rows, priced: Priced, answers: Answers, j: int) -> int:
    """Cost of the way that stands in `answers`; NEVER if it is not allowed."""
    left = rows.demand[j] - answers.short[j]
    if answers.short[j] < 0 or answers.short[j] > rows.short_most[j]:
        return NEVER
    cost = priced.short[j] * answers.short[j]
    home = -1
    for row in range(rows.start[j], rows.start[j + 1]):
        x = answers.quantity[row]
        if x == 0:
            if rows.forced[row] == 1:
                return NEVER
            continue
        if x < rows.least[row] or x > rows.most[row]:
            return NEVER
        if rows.one_depot[j] == 1 and home >= 0 and home != rows.depot[row]:
            return NEVER
        home = rows.depot[row]
        cost += cost_of(rows, priced, row, x)
        left -= x
    if left != 0:
        return NEVER
    return int(cost)


@part
def at_customer(
    rows: Rows,
    priced: Priced,
    answers: Answers,
    corners: Corners,
    sums: Sums,
    active: Integers,
    best: Integers,
    j: int,
) -> None:
    """The cheapest way at customer j. `best` holds the best quantities found, and last what is short."""
    first, last, needed = rows.start[j], rows.start[j + 1], rows.demand[j]
    width = last - first
    value = value_of(rows, priced, answers, j)
    for n in range(width):
        best[n] = answers.quantity[first + n]
    best[width] = answers.short[j]
    ratio, coarse, forced = list_all(rows, priced, corners, j)
    if needed == 0 or ratio == NEVER:
        answers.lower[j] = finish_trivial(rows, answers, j, forced, needed)
        answers.value[j] = answers.lower[j]
        return
    if forced == 0:
        value = try_simple(rows, priced, corners, best, j, value)
    value, lost = search_depots(rows, priced, corners, sums, active, best, (j, ratio, value))
    if coarse:
        lost = min(lost, ratio * needed)
    answers.value[j] = value
    answers.lower[j] = min(value, lost)
    if value != NEVER:
        for n in range(width):
            answers.quantity[first + n] = best[n]
        answers.short[j] = best[width]


@part
def list_all(rows: Rows, priced: Priced, corners: Corners, j: int) -> tuple[int, bool, int]:
    """Lists the corners of customer j.

    Returns what a unit costs at least (NEVER if nothing can be had), whether corners were left out, and how
    many rows must carry something.
    """
    first, needed = rows.start[j], rows.demand[j]
    width = rows.start[j + 1] - first
    count = 0
    ratio = NEVER
    if rows.short_most[j] > 0:
        ratio = priced.short[j]
    coarse, forced = False, 0
    for n in range(width):
        corners.first[n] = count
        count = list_corners(rows, priced, first + n, needed, corners, count)
        # a smaller number is as true, and its products cannot wrap
        corners.ratio[n] = NEVER if count == corners.first[n] else NEVER // (2 * max(needed, 1))
        for c in range(corners.first[n], count):
            corners.ratio[n] = min(corners.ratio[n], corners.cost[c] // corners.x[c])
        ratio = min(ratio, corners.ratio[n])
        coarse |= is_coarse(rows, first + n, needed)
        forced += rows.forced[first + n]
    corners.first[width] = count
    return ratio, coarse, forced


@part
def search_depots(
    rows: Rows,
    priced: Priced,
    corners: Corners,
    sums: Sums,
    active: Integers,
    best: Integers,
    about: tuple[int, int, int],
) -> tuple[int, int]:
    """The search of `search_rows` for any depots, or for each depot alone if the customer takes from one."""
    j, ratio, value = about
    if rows.one_depot[j] == 0:
        return search_rows(rows, priced, corners, sums, active, best, (j, -1, ratio, value))
    first = rows.start[j]
    width = rows.start[j + 1] - first
    lost = NEVER
    for n in range(width):
        i = rows.depot[first + n]
        seen, elsewhere = False, 0
        for m in range(width):
            seen |= m < n and rows.depot[first + m] == i
            if rows.depot[first + m] != i:
                elsewhere += rows.forced[first + m]
        if seen or elsewhere > 0:
            continue
        value, dropped = search_rows(rows, priced, corners, sums, active, best, (j, i, ratio, value))
        lost = min(lost, dropped)
    return value, lost


@part
def regrets_at(
    rows: Rows,
    priced: Priced,
    corners: Corners,
    sums: Sums,
    active: Integers,
    best: Integers,
    about: tuple[int, int, int],
    regret: Integers,
) -> None:
    """How much dearer customer j is at least, for each of its rows, if that row must be used.

    regret: (rows of j,) receives them
    about:  j, its least cost, and what interests: regrets beyond that may be given as any smaller number
            that is beyond it too
    """
    j, lower, most = about
    first, last, needed = rows.start[j], rows.start[j + 1], rows.demand[j]
    ceiling = lower + most
    ratio, coarse, _ = list_all(rows, priced, corners, j)
    for row in range(first, last):
        found = NEVER
        least = rows.least[row]
        if rows.forced[row] == 1 or coarse:
            found = lower
        elif least <= min(rows.most[row], needed):
            found = cost_of(rows, priced, row, least) + ratio * (needed - least)
            for c in range(corners.first[row - first], corners.first[row - first + 1]):
                found = min(found, corners.cost[c] + ratio * (needed - corners.x[c]))
        regret[row - first] = NEVER if found == NEVER else max(found - lower, 0)
    if coarse:
        return
    for row in range(first, last):
        if rows.forced[row] == 1 or regret[row - first] >= most:
            continue
        rows.forced[row] = 1
        again, _, _ = list_all(rows, priced, corners, j)
        value, lost = search_depots(rows, priced, corners, sums, active, best, (j, again, ceiling))
        rows.forced[row] = 0
        regret[row - first] = max(regret[row - first], min(value, lost) - lower)


@part
def finish_trivial(rows: Rows, answers: Answers, j: int, forced: int, needed: int) -> int:
    """A customer that needs nothing, or whom nothing can reach."""
    for row in range(rows.start[j], rows.start[j + 1]):
        answers.quantity[row] = 0
    answers.short[j] = 0
    if forced > 0 or needed > 0:
        return NEVER
    return 0


@part
def try_simple(rows: Rows, priced: Priced, corners: Corners, best: Integers, j: int, value: int) -> int:
    """All on one row, all short, or whole loads on one row and the rest on another: a good first value."""
    first, needed = rows.start[j], rows.demand[j]
    width = rows.start[j + 1] - first
    chosen, other, whole = -2, -2, 0
    if rows.short_most[j] >= needed and priced.short[j] * needed < value:
        value, chosen, whole = priced.short[j] * needed, width, needed
    lead, lead_ratio = -1, NEVER
    for n in range(width):
        row = first + n
        if rows.least[row] <= needed <= rows.most[row]:
            cost = cost_of(rows, priced, row, needed)
            if cost < value:
                value, chosen, other, whole = cost, n, -2, needed
        for c in range(corners.first[n], corners.first[n + 1]):
            if corners.cost[c] // corners.x[c] < lead_ratio:
                lead, lead_ratio = n, corners.cost[c] // corners.x[c]
    if lead >= 0 and rows.load_size[first + lead] > 0:
        row = first + lead
        x = min(needed, rows.most[row]) // rows.load_size[row] * rows.load_size[row]
        if x >= rows.least[row] and x < needed:
            start = cost_of(rows, priced, row, x)
            rest = needed - x
            for n in range(width):
                row = first + n
                if n == lead or not rows.least[row] <= rest <= rows.most[row]:
                    continue
                if rows.one_depot[j] == 1 and rows.depot[row] != rows.depot[first + lead]:
                    continue
                cost = start + cost_of(rows, priced, row, rest)
                if cost < value:
                    value, chosen, other, whole = cost, lead, n, x
            if rows.short_most[j] >= rest and start + priced.short[j] * rest < value:
                value, chosen, other, whole = start + priced.short[j] * rest, lead, width, x
    if chosen != -2:
        for n in range(width + 1):
            best[n] = 0
        best[chosen] = whole
        if other != -2:
            best[other] = needed - whole
    return value


@part
def search_rows(
    rows: Rows,
    priced: Priced,
    corners: Corners,
    sums: Sums,
    active: Integers,
    best: Integers,
    about: tuple[int, int, int, int],
) -> tuple[int, int]:
    """The best value from rows of one depot (or of all, -1), and the least that was left out unseen.

    about: customer, depot, least cost of a unit by any row, best value so far
    """
    j, depot, ratio, value = about
    first, needed = rows.start[j], rows.demand[j]
    width = rows.start[j + 1] - first
    lost = NEVER
    count = 0
    for n in range(width):
        if depot >= 0 and rows.depot[first + n] != depot:
            continue
        useful, least = rows.forced[first + n] == 1, rows.least[first + n]
        if least <= min(rows.most[first + n], needed):
            useful |= cost_of(rows, priced, first + n, least) + ratio * (needed - least) < value
        for c in range(corners.first[n], corners.first[n + 1]):
            useful |= corners.cost[c] + ratio * (needed - corners.x[c]) < value
        if useful:
            # the cheapest first: what is left can then only be dearer
            at = count
            while at > 0 and corners.ratio[active[at - 1]] > corners.ratio[n]:
                active[at] = active[at - 1]
                at -= 1
            active[at] = n
            count += 1
    # the free one is each row in turn, and what is short
    for free in range(count + 1):
        if free == count and rows.short_most[j] == 0:
            continue
        level, begin, end, dropped = reach(rows, priced, corners, sums, active, (j, count, free, value))
        lost = min(lost, dropped)
        row = first + (active[free] if free < count else 0)
        found = -1
        for s in range(begin, end):
            rest = needed - sums.sum[s]
            if free == count:
                if rest > rows.short_most[j]:
                    continue
                cost = sums.cost[s] + priced.short[j] * rest
            elif rest == 0 and rows.forced[row] == 0:
                cost = sums.cost[s]
            elif rest > 0 and rows.least[row] <= rest <= rows.most[row]:
                cost = sums.cost[s] + cost_of(rows, priced, row, rest)
            else:
                continue
            if cost < value:
                value, found = cost, s
        if found >= 0:
            trace(sums, active, best, (level, found, free, count, width, needed))
    return value, lost


@part
def trace(sums: Sums, active: Integers, best: Integers, about: tuple[int, int, int, int, int, int]) -> None:
    """Writes down how a sum came about, and gives the rest to the free row."""
    level, at, free, count, width, needed = about
    for n in range(width + 1):
        best[n] = 0
    rest = needed
    for step in range(level - 1, -1, -1):
        # steps go through the active rows and then what is short, the free one left out
        place = step if step < free else step + 1
        x = sums.chosen[at]
        best[active[place] if place < count else width] = x
        rest -= x
        at = sums.parent[at]
    best[active[free] if free < count else width] = rest


@part
def ratio_behind(
    rows: Rows, priced: Priced, corners: Corners, active: Integers, about: tuple[int, int, int, int]
) -> int:
    """What a unit costs at least on the free row, as what is short, or on rows behind a place."""
    j, count, free, place = about
    ratio = NEVER
    if free < count:
        ratio = corners.ratio[active[free]]
    if rows.short_most[j] > 0:
        ratio = min(ratio, priced.short[j])
    behind = place + 1
    if behind == free:
        behind += 1
    if behind < count:
        ratio = min(ratio, corners.ratio[active[behind]])
    return int(ratio)


@part
def with_rest(cost: int, ratio: int, rest: int) -> int:
    """A cost, and the rest at a ratio."""
    if rest == 0:
        return cost
    if ratio == NEVER:
        return NEVER
    return cost + ratio * rest


@part
def reach(
    rows: Rows,
    priced: Priced,
    corners: Corners,
    sums: Sums,
    active: Integers,
    about: tuple[int, int, int, int],
) -> tuple[int, int, int, int]:
    """All sums at corners of the active rows but the free one; sums that cannot beat `value` are left out.

    Returns the number of steps, where the last step's sums begin and end, and the least value that was
    left out because there was no room.
    """
    j, count, free, value = about
    needed, first = rows.demand[j], rows.start[j]
    lost = NEVER
    begin, end, level = 0, 1, 0
    sums.sum[0], sums.cost[0], sums.parent[0], sums.chosen[0] = 0, 0, -1, 0
    for place in range(count + 1):
        if place == free or (place == count and rows.short_most[j] == 0):
            continue
        into = end
        ratio = ratio_behind(rows, priced, corners, active, (j, count, free, place))
        if place == count:
            most = min(rows.short_most[j], needed)
            for s in range(begin, end):
                if into + 2 > len(sums.sum):
                    lost = min(lost, with_rest(sums.cost[s], ratio, needed - sums.sum[s]))
                    continue
                into = put(sums, into, s, 0, 0)
                if sums.sum[s] + most > needed:
                    continue
                cost = sums.cost[s] + priced.short[j] * most
                if with_rest(cost, ratio, needed - sums.sum[s] - most) < value:
                    into = put(sums, into, s, most, priced.short[j] * most)
        else:
            n = active[place]
            for s in range(begin, end):
                if rows.forced[first + n] == 0:
                    bound = with_rest(sums.cost[s], ratio, needed - sums.sum[s])
                    if bound < value:
                        if into + 1 > len(sums.sum):
                            lost = min(lost, bound)
                        else:
                            into = put(sums, into, s, 0, 0)
                for c in range(corners.first[n], corners.first[n + 1]):
                    x, cost = corners.x[c], corners.cost[c]
                    if sums.sum[s] + x > needed:
                        continue
                    bound = with_rest(sums.cost[s] + cost, ratio, needed - sums.sum[s] - x)
                    if bound >= value:
                        continue
                    if into + 1 > len(sums.sum):
                        lost = min(lost, bound)
                    else:
                        into = put(sums, into, s, x, cost)
        begin, end, dropped = thin(sums, end, into, (ratio, needed))
        lost = min(lost, dropped)
        level += 1
        if end == begin:
            break
    return level, begin, end, lost


@part
def put(sums: Sums, into: int, parent: int, x: int, cost: int) -> int:
    """Writes one sum down."""
    sums.sum[into] = sums.sum[parent] + x
    sums.cost[into] = sums.cost[parent] + cost
    sums.parent[into] = parent
    sums.chosen[into] = x
    return into + 1


@part
def thin(sums: Sums, begin: int, end: int, about: tuple[int, int]) -> tuple[int, int, int]:
    """Of equal sums keeps the cheapest, and of all the most promising that there is room for.

    The sums stand at `begin` up to `end`. Returns where they stand now and the least value left out.
    """
    ratio, needed = about
    count = end - begin
    if count <= 1:
        return begin, end, NEVER
    order, kept = sums.order, sums.kept
    sort_sums(sums, begin, count)
    many = 0
    kept[:count] = 0
    for n in range(count):
        if n == 0 or sums.sum[order[n]] != sums.sum[order[n - 1]]:
            kept[order[n] - begin] = 1
            many += 1
    lost, highest = NEVER, NEVER
    if many > MOST_SUMS // 2:
        low, highest = NEVER, -NEVER
        for n in range(count):
            if kept[n] == 1:
                bound = with_rest(sums.cost[begin + n], ratio, needed - sums.sum[begin + n])
                low, highest = min(low, bound), max(highest, bound)
        while low < highest:
            middle = low + (highest - low) // 2
            within = 0
            for n in range(count):
                bound = with_rest(sums.cost[begin + n], ratio, needed - sums.sum[begin + n])
                within += kept[n] == 1 and bound <= middle
            if within > MOST_SUMS // 2:
                highest = middle
            else:
                low = middle + 1
    into = begin
    for n in range(count):
        if kept[n] == 0:
            continue
        s = begin + n
        bound = with_rest(sums.cost[s], ratio, needed - sums.sum[s])
        if bound > highest or into - begin == MOST_SUMS // 2:
            lost = min(lost, bound)
            continue
        sums.sum[into], sums.cost[into] = sums.sum[s], sums.cost[s]
        sums.parent[into], sums.chosen[into] = sums.parent[s], sums.chosen[s]
        into += 1
    return begin, into, lost


@part
def sort_sums(sums: Sums, begin: int, count: int) -> None:
    """Puts the places of some sums into `order`: rising sums, of equal ones the cheapest first (Shell)."""
    order = sums.order
    step = 1
    while step < count // 3:
        step = 3 * step + 1
    for n in range(count):
        order[n] = begin + n
    while step > 0:
        for n in range(step, count):
            s = order[n]
            total, cost = sums.sum[s], sums.cost[s]
            at = n
            while at >= step:
                t = order[at - step]
                if sums.sum[t] < total or (sums.sum[t] == total and sums.cost[t] <= cost):
                    break
                order[at] = t
                at -= step
            order[at] = s
        step //= 3
