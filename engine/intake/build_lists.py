"""Depots, customers and rules from their lists: each row becomes a figure, or is named in a finding."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from decimal import Decimal
from typing import Any, NamedTuple

from engine.columns import Kind
from engine.exact import canonical
from engine.figures import ANY_SINGLE_DEPOT, Customer, Depot, Order
from engine.findings import Finding, Severity
from engine.intake.column_reader import read_values
from engine.intake.fields import text_of
from engine.intake.headings import column_of
from engine.intake.manner import Manner
from engine.intake.names import folded
from engine.intake.numbers import is_blank
from engine.intake.places import Spot
from engine.intake.recognise import Table, is_total
from engine.intake.remarks import Counts, Remark, gathered
from engine.intake.units import times

ADD_UP, KEEP_FIRST, KEEP_LAST = "add up", "keep the first", "keep the last"


@dataclass(frozen=True, slots=True)
class Unused:
    """The text of a row that is not in the week, or of cells that are blank in it because nobody could read
    them: `key` is the name (or `RateKey`) of the row in the week, None where it is not in it."""

    table: str
    texts: Mapping[str, str]
    key: Any = None


@dataclass(frozen=True, eq=False)
class Built:
    """What came out of one table."""

    records: tuple[Any, ...]
    spots: Mapping[tuple[str, str], Spot] = field(default_factory=dict)
    findings: tuple[Finding, ...] = ()
    counts: Counts = field(default_factory=Counts)
    unused: tuple[Unused, ...] = ()


class NamedRow(NamedTuple):
    """A row of a list: its sheet row, its name, its figures by field, and what stops any of them."""

    number: int
    name: str
    values: Mapping[str, Any]
    problems: Mapping[str, Finding]


def build_depots(tables: Sequence[Table], manner: Manner) -> Built:
    """The depots of all lists of depots; one that stands twice is kept once and asked about."""
    kept: dict[str, Depot] = {}
    spelled: dict[str, str] = {}
    spots: dict[tuple[str, str], Spot] = {}
    findings: list[Finding] = []
    unused: list[Unused] = []
    counts = Counts()
    for table in tables:
        rows, remarks, read = named_rows(table, manner, "available")
        unused.extend(nameless_rows(table, remarks))
        used = 0
        for row in rows:
            fault = row.problems.get("available")
            if fault is not None or row.values.get("available") is None:
                if fault is None:
                    remarks.append(Remark(row.number, "available", _missing(row.name, "Available"), True))
                unused.append(Unused("depots", texts_of(table, row.number)))
                continue
            depot = Depot(row.name, **{name: row.values[name] for name in row.values if name != "name"})
            first = spelled.setdefault(folded(row.name), row.name)
            if first not in kept:
                kept[depot.name] = depot
                spots["depots", depot.name] = Spot(table.sheet, row.number, table.columns)
                used += 1
            else:
                answer = manner.answers.to("same depot twice", row.name)
                if answer is None:
                    remarks.append(Remark(row.number, "name", _twice(kept[first], depot), True))
                    unused.append(Unused("depots", texts_of(table, row.number)))
                else:
                    kept[first] = _settled(kept[first], depot, answer)
                    remarks.append(Remark(row.number, "name", _settled_note(depot, answer)))
                    used += 1
            unused.extend(unread_cells(table, row))
        found, named = gathered(remarks, table.sheet, lambda remark, t=table: t.columns[remark.field])  # type: ignore[misc]
        findings.extend(found)
        counts = counts.plus(Counts(read, used, named))
    return Built(tuple(kept.values()), spots, tuple(findings), counts, tuple(unused))


def build_customers(tables: Sequence[Table], manner: Manner) -> Built:
    """The customers of all lists of customers, with their order rows added up."""
    kept: dict[str, dict[str, Any]] = {}
    orders: dict[str, list[Order]] = {}
    spots: dict[tuple[str, str], Spot] = {}
    findings: list[Finding] = []
    unused: list[Unused] = []
    counts = Counts()
    for table in tables:
        rows, remarks, read = named_rows(table, manner, "ordered")
        unused.extend(nameless_rows(table, remarks))
        used = 0
        for row in rows:
            if "ordered" in row.problems:
                unused.append(Unused("customers", texts_of(table, row.number)))
                continue
            quantity = row.values.get("ordered")
            if quantity is None:
                remarks.append(Remark(row.number, "ordered", _no_order(row.name)))
            used += 1
            key = folded(row.name)
            order = Order(quantity or Decimal(0), row.values.get("number"), row.values.get("day"))
            values = {name: v for name, v in row.values.items() if name not in ("ordered", "number", "day")}
            if key not in kept:
                kept[key] = values
                orders[key] = [order]
                spots["customers", row.name] = Spot(table.sheet, row.number, table.columns)
            else:
                orders[key].append(order)
                remarks.extend(_merged(kept[key], values, row))
            unused.extend(unread_cells(table, row))
        found, named = gathered(remarks, table.sheet, lambda remark, t=table: t.columns[remark.field])  # type: ignore[misc]
        findings.extend(found)
        counts = counts.plus(Counts(read, used, named))
    customers = tuple(Customer(orders=tuple(orders[key]), **values) for key, values in kept.items())
    return Built(customers, spots, tuple(findings), counts, tuple(unused))


def with_depot_spelling(customers: Sequence[Customer], depots: Sequence[Depot]) -> tuple[Customer, ...]:
    """The customers, each *One depot* spelled as among the depots."""
    spelled = {folded(depot.name): depot.name for depot in depots}
    return tuple(
        customer
        if customer.one_depot in (None, ANY_SINGLE_DEPOT)
        else replace(customer, one_depot=spelled.get(folded(customer.one_depot or ""), customer.one_depot))
        for customer in customers
    )


def named_rows(table: Table, manner: Manner, quantity: str) -> tuple[list[NamedRow], list[Remark], int]:
    """The rows of a list that have a name, the remarks on its cells, and how many rows hold anything."""
    values: dict[str, list[Any]] = {}
    problems: dict[str, dict[int, Finding]] = {}
    for name in table.columns:
        column = column_of(table.kind, name)
        values[name], found = read_values(column, table.cells(name), manner.style(table, name))
        by = manner.factor(table, name)
        if by is not None:
            values[name] = [None if v is None else times(v, by) for v in values[name]]
        problems[name] = dict(found)
    rows: list[NamedRow] = []
    remarks: list[Remark] = []
    read = 0
    since: dict[str, Decimal] = {}
    sums = {name: Decimal(0) for name in table.columns if column_of(table.kind, name).kind is Kind.QUANTITY}
    sheet_rows = table.sheet.rows
    faulty = {name: found for name, found in problems.items() if found}
    after_blank = False
    for offset in range(table.end - table.head - 1):
        number = table.head + 1 + offset
        cells = sheet_rows[number][table.left : table.right + 1]
        filled = [cell for cell in cells if cell != "" and not is_blank(cell)]
        if not filled:
            after_blank = True
            continue
        read += 1
        name = values["name"][offset]
        here = {name: found[offset] for name, found in faulty.items() if offset in found}
        if name is None and "name" in here:
            remarks.append(Remark(number, "name", here["name"], True))
        elif name is None:
            remarks.append(Remark(number, "name", _nameless(table, number, sums, values, offset), True))
        elif is_total(name):
            remarks.append(Remark(number, "name", _total(table, name, sums, since, values, offset), True))
            since = {}
        elif len(filled) == 1 and (after_blank or len(name) > 40 or name[0] in "*†#"):
            remarks.append(Remark(number, "name", _note(name), True))
            continue
        else:
            for field_name, finding in here.items():
                stops = finding.severity is Severity.STOPS
                remarks.append(Remark(number, field_name, finding, stops and field_name == quantity))
            faults = {n: finding for n, finding in here.items() if finding.severity is Severity.STOPS}
            rows.append(NamedRow(number, name, {n: column[offset] for n, column in values.items()}, faults))
            for field_name in sums:
                sums[field_name] += values[field_name][offset] or 0
                since[field_name] = since.get(field_name, Decimal(0)) + (values[field_name][offset] or 0)
        after_blank = False
    return rows, remarks, read


def _total(
    table: Table,
    name: str,
    sums: Mapping[str, Decimal],
    since: Mapping[str, Decimal],
    values: Mapping[str, Sequence[Any]],
    offset: int,
) -> Finding:
    """A row of totals: left out, and compared with our sums of all rows and of those since the last."""
    for field_name, ours in sums.items():
        theirs = values[field_name][offset]
        if theirs is not None and theirs not in (ours, since.get(field_name)):
            heading = column_of(table.kind, field_name).heading
            return Finding(
                Severity.CHECK,
                "total differs",
                f"'{name}' says {canonical(theirs)} in {heading}; the rows above add up to "
                f"{canonical(ours)}.",
                "Look for a row that is missing or was read otherwise than meant.",
                read=canonical(theirs),
            )
    return Finding(
        Severity.NOTE, "total left out", f"'{name}' was taken as a row of totals and left out.", read=name
    )


def _nameless(
    table: Table, number: int, sums: Mapping[str, Decimal], values: Mapping[str, Sequence[Any]], offset: int
) -> Finding:
    theirs = {name: values[name][offset] for name in sums if values[name][offset] is not None}
    if theirs and all(sums[name] == value and value for name, value in theirs.items()):
        return Finding(
            Severity.NOTE, "total left out", "A row without a name adds up the rows above, and was left out."
        )
    known = set(table.columns.values())
    cells = table.sheet.rows[number]
    text = next((text_of(cell) for cell in cells[table.left : table.right + 1] if not is_blank(cell)), "")
    if all(is_blank(cells[column]) for column in known):
        return Finding(
            Severity.NOTE, "remark left out", f"'{text[:60]}' was taken as a remark.", read=text[:60]
        )
    return Finding(
        Severity.STOPS,
        "no name",
        f"A row with figures has no name in {table.headings.get(table.columns['name'], 'its first column')}.",
        "Type the name, or clear the row.",
        read=text[:60],
    )


def _note(text: str) -> Finding:
    return Finding(
        Severity.NOTE,
        "remark left out",
        f"'{text[:60]}' was taken as a remark, not as a name.",
        read=text[:60],
    )


def _missing(name: str, heading: str) -> Finding:
    return Finding(
        Severity.STOPS,
        "figure missing",
        f"{name} has no figure in {heading}; blank is not zero.",
        "Type the figure, 0 for nothing.",
        read=name,
    )


def _no_order(name: str) -> Finding:
    return Finding(
        Severity.CHECK,
        "no order",
        f"{name} has no figure in Ordered; it was read as nothing ordered.",
        "Type the order, or 0 to confirm.",
    )


def _twice(first: Depot, second: Depot) -> Finding:
    return Finding(
        Severity.STOPS,
        "same depot twice",
        f"{first.name} stands twice, with {canonical(first.available)} and "
        f"{canonical(second.available)} available.",
        "Say whether to add them up or which one to keep, or take one out.",
        read=second.name,
        subject=second.name,
        options=(ADD_UP, KEEP_FIRST, KEEP_LAST),
    )


def _settled(first: Depot, second: Depot, answer: str) -> Depot:
    if answer == KEEP_FIRST:
        return first
    if answer == KEEP_LAST:
        return replace(second, name=first.name)
    both = [value for value in (first.must_move, second.must_move) if value is not None]
    return replace(
        first,
        available=first.available + second.available,
        must_move=sum(both, Decimal(0)) if both else None,
    )


def _settled_note(depot: Depot, answer: str) -> Finding:
    return Finding(
        Severity.NOTE,
        "same depot twice",
        f"{depot.name} stands twice; as answered: {answer}.",
        read=depot.name,
    )


def _merged(kept: dict[str, Any], values: Mapping[str, Any], row: NamedRow) -> list[Remark]:
    """What a further order row adds to the customer; what it says otherwise is asked."""
    remarks = []
    for name, value in values.items():
        if name == "name" or value is None or value is False:
            continue
        if kept.get(name) in (None, False):
            kept[name] = value
        elif kept[name] != value:
            heading = column_of("customers", name).heading
            first = canonical(kept[name]) if isinstance(kept[name], Decimal) else str(kept[name])
            remarks.append(Remark(row.number, name, Finding(
                Severity.CHECK, "rows differ",
                f"{kept['name']} has two figures in {heading}; the first one, {first}, is used.",
                "Give all rows of the customer the same figure.", read=text_of(value),
            )))  # fmt: skip
    return remarks


def texts_of(table: Table, number: int) -> dict[str, str]:
    """The texts of a row, by field."""
    cells = table.sheet.rows[number]
    return {
        name: text_of(cells[column]) for name, column in table.columns.items() if not is_blank(cells[column])
    }


def nameless_rows(table: Table, remarks: Sequence[Remark]) -> list[Unused]:
    """Rows with figures and no name, which wait on screen until they have one."""
    rules = ("no name", "error cell", "formula without value", "long name")
    rows = [r.row for r in remarks if r.field == "name" and r.sets_aside and r.finding.rule in rules]
    return [Unused(table.kind, texts_of(table, row)) for row in rows]


def unread_cells(table: Table, row: NamedRow, name: str = "") -> list[Unused]:
    """The texts of cells that could not be read, and wait on screen."""
    if not row.problems:
        return []
    cells = table.sheet.rows[row.number]
    texts = {name: text_of(cells[table.columns[name]]) for name in row.problems}
    return [Unused(table.kind, texts, name or row.name)]
