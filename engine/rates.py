"""Rate rows in columns, and what changed on top of them.

A desk may have a million rate rows and alter three of them. `RateTable` holds rows as arrays that are
never written to again; `Rates` is such a table with an overlay of altered, removed and added rows, so
that a changed week shares all the rest with the one it came from.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from datetime import date
from decimal import Decimal
from functools import cached_property
from types import MappingProxyType
from typing import Any

import numpy as np
import numpy.typing as npt

from engine.exact import DecimalColumn
from engine.figures import Basis, RateKey, RateRow

Codes = npt.NDArray[np.int32]
Flags = npt.NDArray[np.bool_]

DECIMAL_FIELDS = ("at_least", "at_most", "load_size", "trip_minimum", "charge_per_use", "surcharge", "km")
"""Optional decimals of a rate row; a column that is blank throughout is not kept."""

NO_CODE = -1
"""No haulier named, or no date given."""


@dataclass(frozen=True, eq=False)
class RateTable:
    """Rate rows in sheet order, one array a column.

    `depot`, `customer` and `haulier` are positions in the lists of names (`NO_CODE`: no haulier);
    `valid_from` is a proleptic ordinal day (`NO_CODE`: none). `decimals` has the optional columns of
    `DECIMAL_FIELDS` that are not blank throughout.
    """

    depot_names: tuple[str, ...]
    customer_names: tuple[str, ...]
    haulier_names: tuple[str, ...]
    depot: Codes
    customer: Codes
    haulier: Codes
    rate: DecimalColumn
    per_load: Flags
    closed: Flags
    decimals: Mapping[str, DecimalColumn] = field(default_factory=dict)
    valid_from: Codes | None = None

    def __len__(self) -> int:
        return len(self.depot)

    @classmethod
    def of(cls, rows: Sequence[RateRow]) -> "RateTable":
        """The table of these rows, in this order."""
        depots, depot = _coded([row.depot for row in rows])
        customers, customer = _coded([row.customer for row in rows])
        hauliers, haulier = _coded([row.haulier for row in rows])
        decimals = {
            name: DecimalColumn.of([getattr(row, name) for row in rows])
            for name in DECIMAL_FIELDS
            if any(getattr(row, name) is not None for row in rows)
        }
        days = [NO_CODE if row.valid_from is None else row.valid_from.toordinal() for row in rows]
        return cls(
            depots, customers, hauliers, depot, customer, haulier,
            rate=DecimalColumn.of([row.rate for row in rows]),
            per_load=np.array([row.per == "load" for row in rows], dtype=bool),
            closed=np.array([row.closed for row in rows], dtype=bool),
            decimals=decimals,
            valid_from=np.array(days, dtype=np.int32) if any(day != NO_CODE for day in days) else None,
        )  # fmt: skip

    def row(self, position: int) -> RateRow:
        """The row at a position, as a value."""
        decimals: dict[str, Decimal | None] = {
            name: column.get(position) for name, column in self.decimals.items()
        }
        day = NO_CODE if self.valid_from is None else int(self.valid_from[position])
        rate = self.rate.get(position)
        if rate is None:
            raise ValueError(f"Rate row {position + 1} has no rate: a row without a rate is no lane.")
        basis: Basis = "load" if self.per_load[position] else "unit"
        return RateRow(
            depot=self.depot_names[self.depot[position]],
            customer=self.customer_names[self.customer[position]],
            rate=rate,
            per=basis,
            haulier=self.haulier_of(position),
            closed=bool(self.closed[position]),
            valid_from=None if day == NO_CODE else date.fromordinal(day),
            **decimals,
        )

    def haulier_of(self, position: int) -> str | None:
        code = self.haulier[position]
        return None if code == NO_CODE else self.haulier_names[code]

    def named(self, position: int) -> tuple[str, str, str | None]:
        """Depot, customer and haulier of the row at a position."""
        return (
            self.depot_names[self.depot[position]],
            self.customer_names[self.customer[position]],
            self.haulier_of(position),
        )

    @cached_property
    def _codes_of_names(self) -> tuple[dict[str, int], dict[str, int], dict[str | None, int]]:
        hauliers: dict[str | None, int] = {name: code for code, name in enumerate(self.haulier_names)}
        hauliers[None] = NO_CODE
        return (
            {name: code for code, name in enumerate(self.depot_names)},
            {name: code for code, name in enumerate(self.customer_names)},
            hauliers,
        )

    @cached_property
    def _by_lane(self) -> tuple[npt.NDArray[np.int64], npt.NDArray[np.int64]]:
        """Rows sorted by lane (sheet order within a lane), and the lane number of each."""
        lane = self.customer.astype(np.int64) * max(1, len(self.depot_names)) + self.depot
        order = np.argsort(lane, kind="stable")
        return order, lane[order]

    def positions(self, depot: str, customer: str, haulier: str | None) -> list[int]:
        """Where the rows of this lane and haulier stand, in sheet order."""
        depots, customers, hauliers = self._codes_of_names
        i, j, code = depots.get(depot), customers.get(customer), hauliers.get(haulier)
        if i is None or j is None or code is None:
            return []
        order, lanes = self._by_lane
        lane = j * max(1, len(self.depot_names)) + i
        first, last = np.searchsorted(lanes, [lane, lane + 1])
        return [int(p) for p in order[first:last] if self.haulier[p] == code]


def _coded(names: Sequence[str | None]) -> tuple[tuple[str, ...], Codes]:
    """Distinct names in order of appearance, and each one's position among them."""
    codes: dict[str, int] = {}
    coded = [NO_CODE if name is None else codes.setdefault(name, len(codes)) for name in names]
    return tuple(codes), np.array(coded, dtype=np.int32)


NO_ROWS = RateTable.of([])


@dataclass(frozen=True, eq=False)
class Rates:
    """A rate table, the rows altered or added since (`overlay`), and the ids of those taken out.

    A row's id is its position in `table`, or `len(table)` and up for added rows; ids are never reused.
    """

    table: RateTable = NO_ROWS
    overlay: Mapping[int, RateRow] = field(default_factory=dict)
    removed: frozenset[int] = frozenset()
    added: int = 0

    @classmethod
    def of(cls, rows: Sequence[RateRow]) -> "Rates":
        return cls(RateTable.of(rows))

    def __len__(self) -> int:
        return self.end - len(self.removed)

    def __iter__(self) -> Iterator[RateRow]:
        return (row for number in range(self.end) if (row := self.row(number)) is not None)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Rates):
            return NotImplemented
        if self.table is other.table and self.overlay == other.overlay and self.removed == other.removed:
            return True
        return len(self) == len(other) and all(a == b for a, b in zip(self, other, strict=True))

    @property
    def end(self) -> int:
        """One more than the largest row id."""
        return len(self.table) + self.added

    def row(self, number: int) -> RateRow | None:
        """The row with this id, None where it was removed."""
        if number in self.removed:
            return None
        return self.overlay[number] if number in self.overlay else self.table.row(number)

    def with_row(self, number: int, row: RateRow) -> "Rates":
        """The same rates with one row altered, put back or, at id `end`, added."""
        return replace(
            self,
            overlay=MappingProxyType({**self.overlay, number: row}),
            removed=self.removed - {number},
            added=max(self.added, number + 1 - len(self.table)),
        )

    def without_row(self, number: int) -> "Rates":
        """The same rates with one row taken out; its id stays its own."""
        return replace(self, removed=self.removed | {number})

    def ids(self, depot: str, customer: str, haulier: str | None) -> list[int]:
        """Ids of all rows of this lane and haulier, removed ones included, in order."""
        name = (depot, customer, haulier)
        found = self.table.positions(depot, customer, haulier)
        for number in range(len(self.table), self.end):
            row = self.overlay[number]
            if (row.depot, row.customer, row.haulier) == name:
                found.append(number)
        return found

    def find(self, key: RateKey) -> int | None:
        """The id of the row that a key names, None where there is none."""
        ids = self.ids(key.depot, key.customer, key.haulier)
        if not 1 <= key.number <= len(ids) or ids[key.number - 1] in self.removed:
            return None
        return ids[key.number - 1]

    def key_of(self, number: int) -> RateKey:
        """What names the row with this id, which must be there."""
        row = self.overlay.get(number)
        depot, customer, haulier = (
            self.table.named(number) if row is None else (row.depot, row.customer, row.haulier)
        )
        return RateKey(depot, customer, haulier, 1 + self.ids(depot, customer, haulier).index(number))

    def renamed(self, what: str, old: str, new: str) -> "Rates":
        """The same rates with a depot or customer called otherwise; `what` is 'depot' or 'customer'."""
        names: dict[str, Any] = {
            f"{what}_names": tuple(
                new if name == old else name for name in getattr(self.table, f"{what}_names")
            )
        }
        overlay: dict[int, RateRow] = {}
        for number, row in self.overlay.items():
            named: dict[str, Any] = {what: new} if getattr(row, what) == old else {}
            overlay[number] = replace(row, **named)
        return replace(self, table=replace(self.table, **names), overlay=MappingProxyType(overlay))

    def name_used(self, what: str, name: str, instead_of: str) -> bool:
        """Whether rows stand in the way of calling the depot or customer `instead_of` by this name.

        Rows that name it do; of those taken out again only the ones that would come to stand before rows of
        `instead_of`, which would then be counted otherwise.
        """
        if name in getattr(self.table, f"{what}_names"):
            return True
        for number, row in self.overlay.items():
            if getattr(row, what) != name:
                continue
            if number not in self.removed:
                return True
            lane = {"depot": row.depot, "customer": row.customer, what: instead_of}
            if any(other > number for other in self.ids(lane["depot"], lane["customer"], row.haulier)):
                return True
        return False

    @cached_property
    def ids_in_order(self) -> npt.NDArray[np.int64]:
        """Ids of the rows that are there, in order: the rows of `flat`."""
        there = np.ones(self.end, dtype=bool)
        there[list(self.removed)] = False
        return np.flatnonzero(there)

    @cached_property
    def flat(self) -> RateTable:
        """One table of all rows that are there, the overlay worked in."""
        if not self.overlay and not self.removed:
            return self.table
        altered = {n: row for n, row in sorted(self.overlay.items()) if n not in self.removed}
        kept = np.ones(len(self.table), dtype=bool)
        kept[[n for n in (*self.overlay, *self.removed) if n < len(self.table)]] = False
        stacked = _stacked(self.table, np.flatnonzero(kept), RateTable.of(list(altered.values())))
        ids = np.concatenate([np.flatnonzero(kept), np.array(list(altered), dtype=np.int64)])
        return _taken(stacked, np.argsort(ids, kind="stable"))


def _joined_names(first: tuple[str, ...], second: tuple[str, ...]) -> tuple[tuple[str, ...], Codes]:
    """The names of both lists, and where each of the second stands in them."""
    codes = {name: code for code, name in enumerate(first)}
    moved = [codes.setdefault(name, len(codes)) for name in second]
    return tuple(codes), np.array([*moved, NO_CODE], dtype=np.int32)  # NO_CODE, used as an index, stays


def _stacked(first: RateTable, kept: npt.NDArray[np.int64], second: RateTable) -> RateTable:
    """The kept rows of one table with all rows of another below them."""
    depots, move_depot = _joined_names(first.depot_names, second.depot_names)
    customers, move_customer = _joined_names(first.customer_names, second.customer_names)
    hauliers, move_haulier = _joined_names(first.haulier_names, second.haulier_names)
    decimals = {
        name: first.decimals.get(name, DecimalColumn.blank(len(first)))
        .taken(kept)
        .joined(second.decimals.get(name, DecimalColumn.blank(len(second))))
        for name in DECIMAL_FIELDS
        if name in first.decimals or name in second.decimals
    }
    days = None
    if first.valid_from is not None or second.valid_from is not None:
        none_first, none_second = (np.full(len(t), NO_CODE, dtype=np.int32) for t in (first, second))
        days = np.concatenate([
            (none_first if first.valid_from is None else first.valid_from)[kept],
            none_second if second.valid_from is None else second.valid_from,
        ])  # fmt: skip
    return RateTable(
        depots,
        customers,
        hauliers,
        np.concatenate([first.depot[kept], move_depot[second.depot]]),
        np.concatenate([first.customer[kept], move_customer[second.customer]]),
        np.concatenate([first.haulier[kept], move_haulier[second.haulier]]),
        rate=first.rate.taken(kept).joined(second.rate),
        per_load=np.concatenate([first.per_load[kept], second.per_load]),
        closed=np.concatenate([first.closed[kept], second.closed]),
        decimals=decimals,
        valid_from=days,
    )


def _taken(table: RateTable, positions: npt.NDArray[np.int64]) -> RateTable:
    """The rows of a table at these positions, in that order."""
    return replace(
        table,
        depot=table.depot[positions],
        customer=table.customer[positions],
        haulier=table.haulier[positions],
        rate=table.rate.taken(positions),
        per_load=table.per_load[positions],
        closed=table.closed[positions],
        decimals={name: column.taken(positions) for name, column in table.decimals.items()},
        valid_from=None if table.valid_from is None else table.valid_from[positions],
    )
