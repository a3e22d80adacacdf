"""The findings on all rate rows of a week at once: names, limits, doubles, and what lanes can bring."""

from collections.abc import Container, Iterator, Sequence
from decimal import Decimal

import numpy as np
import numpy.typing as npt

from engine.exact import BLANK, DecimalColumn, canonical
from engine.findings import Finding, Severity
from engine.intake.names import folded, nearest
from engine.intake.places import Where
from engine.rates import NO_CODE, Flags, RateTable
from engine.week import Week

_MOST = 20
_MOST_NEAR = 200
"""So many unknown names are compared with the known ones."""

Places = npt.NDArray[np.int64]


def unknown_names(week: Week, where: Where) -> Iterator[Finding]:
    """Depots and customers that only rate rows name; their rows wait until the name is known."""
    table = week.rates.flat
    for what, names, codes, known in (
        ("depot", table.depot_names, table.depot, week.depots),
        ("customer", table.customer_names, table.customer, week.customers),
    ):
        if not len(codes) or not known:
            continue
        counts = np.bincount(codes, minlength=len(names))
        strange = [code for code in np.flatnonzero(counts).tolist() if names[code] not in known]
        first = _first_rows(codes, strange)
        for number, code in enumerate(strange):
            if number == _MOST:
                rest = sum(int(counts[c]) for c in strange[_MOST:])
                yield _finding(
                    where("rates", first[code], what), Severity.CHECK, "unknown name",
                    f"{len(strange) - _MOST} more names in {rest} rate rows are not among the {what}s.",
                    f"Add them to the {what}s, or mend the names.",
                )  # fmt: skip
                break
            near = nearest(names[code], known) if number < _MOST_NEAR else None
            rows = f"{counts[code]} rate rows name" if counts[code] > 1 else "A rate row names"
            asked = f" Did you mean {near}?" if near else ""
            yield _finding(
                where("rates", first[code], what), Severity.CHECK, "unknown name",
                f"{rows} the {what} '{names[code]}', which is not among the {what}s.{asked}",
                f"Mend the name, or add it to the {what}s; until then its rates wait.",
                names[code], f"{what}: {folded(names[code])}", (near,) if near else (),
            )  # fmt: skip


def contradicting_limits(week: Week, where: Where) -> Iterator[Finding]:
    """Rows where at least is over at most, and closed rows that must carry something."""
    table = week.rates.flat
    low, high = table.decimals.get("at_least"), table.decimals.get("at_most")
    if low is None:
        return
    some = (low.values != BLANK) & (low.values > 0)
    if high is not None:
        places = max(low.places, high.places)
        least, most = low.rescaled(places), high.rescaled(places)
        over = some & (most != BLANK) & (least > most)
        for row in _some(over):
            yield _finding(
                where("rates", row, "at_least"), Severity.STOPS, "at least over at most",
                f"{_lane(table, row)}: at least {_shown(low, row)} is more than at most {_shown(high, row)}.",
                "Lower At least, or raise At most.", _shown(low, row),
            )  # fmt: skip
    for row in _some(some & table.closed):
        yield _finding(
            where("rates", row, "at_least"), Severity.STOPS, "closed with at least",
            f"{_lane(table, row)} is closed, yet at least {_shown(low, row)} must go on it.",
            "Open the lane, or clear At least.", _shown(low, row),
        )  # fmt: skip


def same_rows(week: Week, where: Where) -> Iterator[Finding]:
    """Rows of one lane and one haulier: alternatives on paper, more often a slip."""
    table = week.rates.flat
    if len(table) < 2:
        return
    wide = max(1, len(table.customer_names)) * (len(table.haulier_names) + 1)
    key = table.depot.astype(np.int64) * wide
    key += table.customer.astype(np.int64) * (len(table.haulier_names) + 1) + (table.haulier + 1)
    if _all_differ(key):
        return
    order = np.argsort(key, kind="stable")
    again = np.zeros(len(table), dtype=bool)
    again[order[1:]] = key[order[1:]] == key[order[:-1]]
    if table.valid_from is not None:  # a row that is valid from a later day takes the other's place
        again[order[1:]] &= table.valid_from[order[1:]] == table.valid_from[order[:-1]]
    before = np.full(len(table), -1, dtype=np.int64)
    before[order[1:]] = order[:-1]
    for row in _some(again):
        first = int(before[row])
        by = f" by {table.haulier_of(row)}" if table.haulier[row] != NO_CODE else ""
        rates = _shown(table.rate, first), _shown(table.rate, row)
        said = f"twice at {rates[0]}" if rates[0] == rates[1] else f"at {rates[0]} and at {rates[1]}"
        yield _finding(
            where("rates", row, "rate"), Severity.CHECK, "same lane twice",
            f"{_lane(table, row)}{by} stands {said}; both rows are kept as alternatives.",
            "Take one out, or name the hauliers.", rates[1],
        )  # fmt: skip
    if again.sum() > _MOST:
        yield _finding(
            where("rates", int(np.flatnonzero(again)[_MOST]), "rate"), Severity.CHECK, "same lane twice",
            f"{int(again.sum()) - _MOST} more rate rows repeat a lane and haulier.", "Take them out.",
        )  # fmt: skip


def out_of_reach(week: Week, where: Where) -> Iterator[Finding]:
    """Customers that no open lane reaches, orders beyond all that can reach them, depots without a lane."""
    table = week.rates.flat
    if not len(table) or not week.depots or not week.customers:
        return
    open_rows = _open(table) & _known(table.depot_names, table.depot, week.depots)
    open_rows &= _known(table.customer_names, table.customer, week.customers)
    reached = _names_in(table.customer_names, table.customer[open_rows])
    used = _names_in(table.depot_names, table.depot[open_rows])
    unreached = [c.name for c in week.customers.values() if c.ordered and c.name not in reached]
    for name in unreached[:_MOST]:
        yield _finding(
            where("customers", name, "name"), Severity.CHECK, "no lane reaches",
            f"No open lane reaches {name}, who goes short of {canonical(week.customers[name].ordered)}.",
            "Give a rate for a lane to it, or take the order out.", name,
        )  # fmt: skip
    if len(unreached) > _MOST:
        yield _finding(
            where("customers", unreached[_MOST], "name"), Severity.CHECK, "no lane reaches",
            f"No open lane reaches {len(unreached) - _MOST} more customers.", "Give rates for lanes to them.",
        )  # fmt: skip
    for depot in week.depots.values():
        if depot.available and depot.name not in used:
            yield _finding(
                where("depots", depot.name, "name"), Severity.CHECK, "no lane leaves",
                f"No open lane leaves {depot.name}: its {canonical(depot.available)} stays.",
                "Give a rate for a lane from it.", depot.name,
            )  # fmt: skip
    yield from _beyond_reach(week, table, open_rows, reached, where)


def _beyond_reach(
    week: Week, table: RateTable, open_rows: Flags, reached: set[str], where: Where
) -> Iterator[Finding]:
    available = np.array(
        [float(week.depots[n].available) if n in week.depots else 0.0 for n in table.depot_names]
    )
    depots, customers = len(table.depot_names), len(table.customer_names)
    depot, customer = table.depot[open_rows], table.customer[open_rows]
    most = available[depot]
    lane = customer.astype(np.int64) * depots + depot
    if "at_most" in table.decimals or not _all_differ(lane):
        lane, of_row = np.unique(lane, return_inverse=True)
        cap = np.full(len(of_row), np.inf)
        if "at_most" in table.decimals:
            column = table.decimals["at_most"]
            cap = np.where(column.values == BLANK, np.inf, column.values / 10.0**column.places)[open_rows]
        most = np.minimum(np.bincount(of_row, weights=cap, minlength=len(lane)), available[lane % depots])
        customer = lane // depots
    brought = np.bincount(customer, weights=most, minlength=customers)
    told = 0
    for code, name in enumerate(table.customer_names):
        if name not in reached:
            continue
        ordered = week.customers[name].ordered
        if float(ordered) > brought[code] * (1 + 1e-9) + 1e-9:
            told += 1
            if told > _MOST:
                break
            yield _finding(
                where("customers", name, "ordered"), Severity.CHECK, "order beyond reach",
                f"{name} ordered {canonical(ordered)}; all depots that reach it can bring "
                f"{_rounded(brought[code])} at most.",
                "Check the order, or add a lane.", canonical(ordered),
            )  # fmt: skip


def _open(table: RateTable) -> Flags:
    open_rows = ~table.closed
    if "at_most" in table.decimals:
        open_rows &= table.decimals["at_most"].values != 0
    return open_rows


def _known(names: Sequence[str], codes: npt.NDArray[np.int32], known: Container[str]) -> Flags:
    flags = np.array([name in known for name in names], dtype=bool)
    if flags.all():
        return np.ones(len(codes), dtype=bool)
    there: Flags = flags[codes]
    return there


def _all_differ(key: Places) -> bool:
    """Whether no number repeats; at once where the numbers fill a range densely, otherwise by sorting."""
    if not len(key):
        return True
    span = int(key.max()) + 1
    if span <= 8 * len(key) + 1024:
        seen = np.zeros(span, dtype=bool)
        seen[key] = True
        return int(seen.sum()) == len(key)
    return len(np.unique(key)) == len(key)


def _names_in(names: Sequence[str], codes: npt.NDArray[np.int32]) -> set[str]:
    return {names[code] for code in np.flatnonzero(np.bincount(codes, minlength=len(names))).tolist()}


def _first_rows(codes: npt.NDArray[np.int32], wanted: list[int]) -> dict[int, int]:
    if not wanted:
        return {}
    found, rows = np.unique(codes, return_index=True)
    first = dict(zip(found.tolist(), rows.tolist(), strict=True))
    return {code: first[code] for code in wanted}


def _some(flags: Flags) -> list[int]:
    return [int(row) for row in np.flatnonzero(flags)[:_MOST]]


def _lane(table: RateTable, row: int) -> str:
    depot, customer, _ = table.named(row)
    return f"{depot} to {customer}"


def _shown(column: DecimalColumn, row: int) -> str:
    number = column.get(row)
    return "" if number is None else canonical(number)


def _rounded(number: float) -> str:
    return canonical(Decimal(repr(round(float(number), 6))))


def _finding(
    place: tuple[str, str, str],
    severity: Severity,
    rule: str,
    message: str,
    mend: str,
    read: str = "",
    subject: str = "",
    options: tuple[str, ...] = (),
) -> Finding:
    file, sheet, cell = place
    return Finding(severity, rule, message, mend, file, sheet, cell, read, 0, subject, options)
