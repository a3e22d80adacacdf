"""Part of a week uploaded anew: what it says otherwise than the week on the desk, as one change.

Only what the upload holds is altered: a sheet with Depot and Available changes what is available and nothing
else, and rows that it does not name stay as they are, with holds and everything else on them.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from decimal import Decimal
from typing import Any

from engine.changes import Add, Alter, Change, Remove, Together
from engine.columns import RULE_COLUMNS
from engine.exact import canonical
from engine.figures import Gone, RateKey, RateRow
from engine.findings import Finding, by_gravity
from engine.intake.answers import Answers
from engine.intake.cells import Source
from engine.intake.check import check_week
from engine.intake.fields import show_field
from engine.intake.headings import TITLES, column_of
from engine.intake.names import folded
from engine.intake.reading import Reading, read_week
from engine.intake.refusal import Limits
from engine.week import Week, describe

_MOST_TOLD = 200


@dataclass(frozen=True, eq=False)
class Part:
    """What an upload of part of a week changes.

    change: all of it as one change; differences: what it alters, adds or leaves, a sentence each;
    findings: what there is to say of the upload, and of the week as it would be
    """

    reading: Reading
    change: Together
    differences: tuple[str, ...]
    findings: tuple[Finding, ...]

    @property
    def is_empty(self) -> bool:
        return not self.change.changes


def read_part(
    source: Source | Iterable[Source],
    week: Week,
    *,
    limits: Limits | None = None,
    answers: Answers | None = None,
    decimal_mark: str = ".",
    product: str | None = None,
) -> Part:
    """The differences between an upload of some tables and the week on the desk.

    source, limits, answers, decimal_mark, product: as for `read_week`; week: the week that would be changed

    Raises:
        Unreadable: as `read_week`.
    """
    reading = read_week(
        source, limits=limits, answers=answers, known=week, decimal_mark=decimal_mark, product=product
    )
    changes: list[Change] = []
    told: list[str] = []
    for table, compare in (
        ("depots", _depots),
        ("customers", _customers),
        ("rates", _rates),
        ("hauliers", _hauliers),
        ("rules", _rules),
        ("gone", _gone),
    ):
        if table in reading.tables:
            more, said = compare(reading, week)
            changes.extend(more)
            told.extend(said)
    change = Together(
        tuple(changes), ", ".join(TITLES[t] for t in TITLES if t in reading.tables) + " uploaded"
    )
    after = week.apply(change)
    if len(told) > _MOST_TOLD:
        told = [*told[:_MOST_TOLD], f"and {len(told) - _MOST_TOLD} more."]
    findings = by_gravity([*reading.on_sheets, *check_week(after)])
    return Part(reading, change, tuple(told), tuple(findings))


def _depots(reading: Reading, week: Week) -> tuple[list[Change], list[str]]:
    return _records(reading, week, "depots", "depot", reading.week.depots, week.depots)


def _customers(reading: Reading, week: Week) -> tuple[list[Change], list[str]]:
    return _records(reading, week, "customers", "customer", reading.week.customers, week.customers)


def _hauliers(reading: Reading, week: Week) -> tuple[list[Change], list[str]]:
    return _records(reading, week, "hauliers", "haulier", reading.week.hauliers, week.hauliers)


def _records(
    reading: Reading, week: Week, table: str, what: Any, new: Mapping[str, Any], old: Mapping[str, Any]
) -> tuple[list[Change], list[str]]:
    spelled = {folded(name): name for name in old}
    changes: list[Change] = []
    told: list[str] = []
    for name, record in new.items():
        known = spelled.get(folded(name))
        if known is None:
            changes.append(Add(record))
            told.append(f"{name} is new.")
            continue
        spot = reading.places.spots[table, name]
        for field in spot.columns:
            if field in ("name", "number", "day"):
                continue
            column = column_of(table, field)
            before, after = getattr(old[known], field), getattr(record, field)
            if field == "ordered" and old[known].orders != record.orders:
                changes.append(Alter(what, known, "orders", record.orders))
                if before == after:
                    continue
            elif field != "ordered" and before != after:
                changes.append(Alter(what, known, field, after))
            if before != after:
                told.append(
                    f"{known}: {column.heading} {_shown(column, before)} becomes {_shown(column, after)}."
                )
    left = len(old) - len({folded(name) for name in new} & set(spelled))
    if left:
        many = f"{left} {what}s are not in the upload and stay as they are."
        told.append(many if left > 1 else f"1 {what} is not in the upload and stays as it is.")
    return changes, told


def _rates(reading: Reading, week: Week) -> tuple[list[Change], list[str]]:
    names = {
        what: {folded(name): name for name in known}
        for what, known in (("depot", week.depots), ("customer", week.customers))
    }
    fields = {field for part in reading.places.rates for field in part.columns} or {"rate"}
    if any(reading.week.rates.flat.haulier_names):
        fields |= {"haulier"}
    changes: list[Change] = []
    told: list[str] = []
    seen: dict[tuple[str, str, str | None], int] = {}
    lanes = _rows_by_lane(week)
    rate = column_of("rates", "rate")
    for row in reading.week.rates:
        row = replace(
            row,
            depot=names["depot"].get(folded(row.depot), row.depot),
            customer=names["customer"].get(folded(row.customer), row.customer),
        )
        name = (row.depot, row.customer, row.haulier)
        seen[name] = seen.get(name, 0) + 1
        key: RateKey | None = RateKey(*name, seen[name])
        if key is not None and week.rates.find(key) is None:
            here = lanes.get((row.depot, row.customer), [])
            # A sheet that names no hauliers speaks of the lane's only row
            key = week.rates.key_of(here[0]) if "haulier" not in fields and len(here) == 1 else None
        if key is None:
            changes.append(Add(row))
            told.append(f"{row.depot} to {row.customer}{_by(row)}: {_shown(rate, row.rate)} is new.")
            continue
        more, said = _altered(week, key, row, fields)
        changes.extend(more)
        told.extend(said)
    if not changes:
        told.append("All rates are as they were.")
    return changes, told


def _gone(reading: Reading, week: Week) -> tuple[list[Change], list[str]]:
    """What has gone by the upload: new loads come in, one told otherwise is replaced, the rest stays."""
    changes: list[Change] = []
    told: list[str] = []
    unit = week.rules.unit
    depots = {folded(name): name for name in week.depots}
    customers = {folded(name): name for name in week.customers}
    for name, said in reading.week.gone.items():
        depot = depots.get(folded(said.depot), said.depot)
        load = replace(said, depot=depot, customer=customers.get(folded(said.customer), said.customer))
        before = week.gone.get(name)
        if before == load:
            continue
        what = f"{canonical(load.quantity)} {unit} from {load.depot} to {load.customer}"
        if before is None:
            told.append(f"Load {name} has gone: {what}.")
        else:
            changes.append(Remove("gone", name))
            told.append(f"Load {name} has gone otherwise than it said: {what}{_by(load)}.")
        changes.append(Add(load))
    left = len(week.gone.keys() - reading.week.gone.keys())
    if left:
        told.append(
            f"{left} loads that have gone are not in the upload and stay."
            if left > 1
            else "1 load that has gone is not in the upload and stays."
        )
    return changes, told


def _altered(week: Week, key: RateKey, row: RateRow, fields: set[str]) -> tuple[list[Change], list[str]]:
    number = week.rates.find(key)
    current = None if number is None else week.rates.row(number)
    changes: list[Change] = []
    told: list[str] = []
    for field in sorted((fields | {"rate", "per"}) - {"depot", "customer", "haulier", "hold", "hold_reason"}):
        column = column_of("rates", field)
        before, after = getattr(current, field), getattr(row, field)
        if before != after:
            changes.append(Alter("rate", key, field, after))
            told.append(
                f"{describe(key)}: {column.heading} {_shown(column, before)} becomes {_shown(column, after)}."
            )
    return changes, told


def _rows_by_lane(week: Week) -> dict[tuple[str, str], list[int]]:
    lanes: dict[tuple[str, str], list[int]] = {}
    for number in week.rates.ids_in_order.tolist():
        row = week.rates.overlay.get(number)
        depot, customer = week.rates.table.named(number)[:2] if row is None else (row.depot, row.customer)
        lanes.setdefault((depot, customer), []).append(number)
    return lanes


def _rules(reading: Reading, week: Week) -> tuple[list[Change], list[str]]:
    changes: list[Change] = []
    told: list[str] = []
    for column in RULE_COLUMNS:
        before, after = getattr(week.rules, column.field), getattr(reading.week.rules, column.field)
        if ("rules", column.field) in reading.places.spots and before != after:
            changes.append(Alter("rule", "", column.field, after))
            told.append(f"Rule {column.heading}: {_shown(column, before)} becomes {_shown(column, after)}.")
    return changes, told


def _by(row: RateRow | Gone) -> str:
    return f" by {row.haulier}" if row.haulier else ""


def _shown(column: Any, value: Any) -> str:
    if value is False:
        return "no"
    return canonical(value) if isinstance(value, Decimal) else show_field(column, value) or "blank"
