"""The rate rows of two weeks side by side, so that a mixed week can take each figure from either.

Rows correspond by lane, haulier and their count among the rows in force; what a later *Valid from* has
replaced corresponds to nothing. A row that only one week has borrows that week's rate in the other, where
it is closed.
"""

from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from engine.compare.effects import LIMITS, of_rate
from engine.exact import DecimalColumn
from engine.planning.gone import superseded
from engine.rates import DECIMAL_FIELDS, NO_CODE, Codes, Flags, Rates, RateTable

Integers = npt.NDArray[np.int64]
NONE = -1


class Names(NamedTuple):
    """Depots, customers and hauliers that rate rows of either week name."""

    depots: tuple[str, ...]
    customers: tuple[str, ...]
    hauliers: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class Rows:
    """Rate rows of two weeks: those of the second in its own order and count, then what only the first has.

    first, second: (rows,) position in the two tables, NONE where that week has no such row in force
    taken_out: (rows,) rows that were taken out of the second week: they hold the count, and stay closed
    """

    names: Names
    depot: Codes
    customer: Codes
    haulier: Codes
    first: Integers
    second: Integers
    taken_out: Flags
    tables: tuple[RateTable, RateTable]

    def mixed(self, from_second: frozenset[str]) -> Rates:
        """The rows with the figures of these effects from the second week, the others from the first."""
        columns: dict[str, DecimalColumn] = {}
        absent = self.taken_out | ((self.second if LIMITS in from_second else self.first) == NONE)
        for name in DECIMAL_FIELDS:
            if name in self.tables[0].decimals or name in self.tables[1].decimals:
                column = self._decimals(name, from_second)
                if name == "at_least":
                    column = _blanked(column, absent)
                columns[name] = column
        rates = self._picked(of_rate("rate") in from_second)
        limits = self._picked(LIMITS in from_second)
        first, second = self.tables
        return Rates(
            RateTable(
                *self.names,
                self.depot,
                self.customer,
                self.haulier,
                rate=first.rate.joined(second.rate).taken(rates),
                per_load=np.concatenate([first.per_load, second.per_load])[rates],
                closed=np.concatenate([first.closed, second.closed])[limits] | absent,
                decimals=columns,
                valid_from=self._valid_from(),
            )
        )

    def _decimals(self, name: str, from_second: frozenset[str]) -> DecimalColumn:
        first, second = (table.decimals.get(name, DecimalColumn.blank(len(table))) for table in self.tables)
        return first.joined(second).taken(self._picked(of_rate(name) in from_second))

    def _picked(self, second: bool) -> Integers:
        """(rows,) positions in the second table stacked below the first; borrowed where a week has none."""
        below = self.second + len(self.tables[0])
        if second:
            return np.where(self.second != NONE, below, self.first)
        return np.where(self.first != NONE, self.first, below)

    def _valid_from(self) -> Codes | None:
        """Days of the second week, which are behind its counts; rows of the first replace nothing."""
        days = self.tables[1].valid_from
        if days is None:
            return None
        own = np.where(self.second != NONE, days[self.second], NO_CODE).astype(np.int32)
        only = np.flatnonzero(self.second == NONE)
        if len(only):
            latest: dict[tuple[int, int, int], int] = {}
            lanes = list(zip(self.depot.tolist(), self.customer.tolist(), self.haulier.tolist(), strict=True))
            for lane, day in zip(lanes, own.tolist(), strict=True):
                latest[lane] = max(latest.get(lane, NO_CODE), day)
            own[only] = [latest[lanes[row]] for row in only.tolist()]
        return own

    def of_first(self, position: int) -> int | None:
        """The row that a rate row of the first week has become, None where nothing corresponds to it."""
        found = np.flatnonzero(self.first == position)
        return int(found[0]) if len(found) else None


def rows_of(first: Rates, second: Rates) -> Rows:
    """The rate rows of two weeks side by side."""
    one = first.flat
    two = replace(second, removed=frozenset()).flat
    there = np.zeros(len(two), dtype=bool)
    there[second.ids_in_order] = True
    names = Names(*(_joined(getattr(one, f"{w}_names"), getattr(two, f"{w}_names")) for w in _WHAT))
    codes_one, codes_two = (_recoded(table, names) for table in (one, two))
    live_one = np.flatnonzero(~superseded(one))
    live_two = np.flatnonzero(there)
    live_two = live_two[~superseded(second.flat)]
    keys_one, keys_two = _keys(names, codes_one, live_one, codes_two, live_two)
    order = np.argsort(keys_one, kind="stable")
    place = np.searchsorted(keys_one, keys_two, sorter=order)
    hit = place < len(order)
    hit[hit] = keys_one[order[place[hit]]] == keys_two[hit]
    first_of = np.full(len(two), NONE, dtype=np.int64)
    first_of[live_two[hit]] = live_one[order[place[hit]]]
    matched = np.zeros(len(one), dtype=bool)
    matched[first_of[first_of != NONE]] = True
    only = live_one[~matched[live_one]]
    depot, customer, haulier = (
        np.concatenate([b, a[only]]) for a, b in zip(codes_one, codes_two, strict=True)
    )
    return Rows(
        names,
        depot,
        customer,
        haulier,
        first=np.concatenate([first_of, only]),
        second=np.concatenate([np.arange(len(two)), np.full(len(only), NONE, dtype=np.int64)]),
        taken_out=np.concatenate([~there, np.zeros(len(only), dtype=bool)]),
        tables=(one, two),
    )


_WHAT = ("depot", "customer", "haulier")


def _joined(first: tuple[str, ...], second: tuple[str, ...]) -> tuple[str, ...]:
    return tuple(dict.fromkeys([*second, *first]))


def _recoded(table: RateTable, names: Names) -> tuple[Codes, Codes, Codes]:
    """Depot, customer and haulier of each row as positions in the common names."""
    found = []
    for what, common in zip(_WHAT, names, strict=True):
        place = {name: code for code, name in enumerate(common)}
        moved = [place[name] for name in getattr(table, f"{what}_names")]
        codes = np.array([*moved, NO_CODE], dtype=np.int32)  # NO_CODE, used as an index, stays
        found.append(codes[getattr(table, what)])
    return found[0], found[1], found[2]


def _keys(
    names: Names,
    codes_one: tuple[Codes, Codes, Codes],
    live_one: Integers,
    codes_two: tuple[Codes, Codes, Codes],
    live_two: Integers,
) -> tuple[Integers, Integers]:
    """A number for lane, haulier and count, the same in both tables for rows that correspond."""
    lanes = [
        (
            (codes[1][live].astype(np.int64) * max(1, len(names.depots)) + codes[0][live])
            * (len(names.hauliers) + 1)
            + codes[2][live]
            + 1
        )
        for codes, live in ((codes_one, live_one), (codes_two, live_two))
    ]
    counts = [_counted(lane) for lane in lanes]
    many = 1 + max((int(count.max(initial=0)) for count in counts), default=0)
    return lanes[0] * many + counts[0], lanes[1] * many + counts[1]


def _counted(lane: Integers) -> Integers:
    """How many rows before each one have the same number."""
    order = np.argsort(lane, kind="stable")
    ordered = lane[order]
    starts = np.flatnonzero(np.append(True, ordered[1:] != ordered[:-1])) if len(lane) else order
    run = np.repeat(starts, np.diff(np.append(starts, len(lane))))
    counts = np.empty(len(lane), dtype=np.int64)
    counts[order] = np.arange(len(lane)) - run
    return counts


def _blanked(column: DecimalColumn, absent: Flags) -> DecimalColumn:
    blank = DecimalColumn.blank(1).values[0]
    return DecimalColumn(np.where(absent, blank, column.values), column.places)
