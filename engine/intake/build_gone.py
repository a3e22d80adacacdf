"""What has gone, from its sheet: facts with their haulier, day and rate."""

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from engine.columns import GONE_COLUMNS
from engine.figures import Gone
from engine.findings import Finding, Severity
from engine.intake.build_lists import Built, Unused
from engine.intake.column_reader import read_values
from engine.intake.fields import text_of
from engine.intake.manner import Manner
from engine.intake.names import folded
from engine.intake.numbers import is_blank
from engine.intake.places import Spot
from engine.intake.recognise import Table, is_total
from engine.intake.remarks import Counts, Remark, gathered
from engine.intake.units import times

_NEEDED = {column.field: column for column in GONE_COLUMNS if column.needed or column.field == "rate"}


def build_gone(
    tables: Sequence[Table], depots: Iterable[str], customers: Iterable[str], manner: Manner
) -> Built:
    """The quantities that have gone, names spelled as among the depots and customers."""
    spelled = {
        "depot": {folded(name): name for name in depots},
        "customer": {folded(name): name for name in customers},
    }
    kept: dict[str, Gone] = {}
    spots: dict[tuple[str, str], Spot] = {}
    findings: list[Finding] = []
    unused: list[Unused] = []
    counts = Counts()
    for table in tables:
        remarks: list[Remark] = []
        read = 0
        for number, row, problems in _rows(table, manner):
            read += 1
            texts = _texts(table, number)
            stops = {name: f for name, f in problems.items() if f.severity is Severity.STOPS}
            lost = any(name in _NEEDED for name in stops)
            remarks.extend(Remark(number, n, f, n in stops and n in _NEEDED) for n, f in problems.items())
            missing = next((name for name in _NEEDED if row.get(name) is None), None)
            if row["name"] is not None and is_total(row["name"]):
                remarks.append(Remark(number, "name", _total(row["name"]), True))
                continue
            if not lost and missing is not None:
                remarks.append(Remark(number, missing, _missing(missing), True))
            elif not lost and row["name"] in kept:
                remarks.append(Remark(number, "name", _twice(row["name"]), True))
            if lost or missing is not None or row["name"] in kept:
                unused.append(Unused("gone", texts))
                continue
            for what, names in spelled.items():
                row[what] = names.get(folded(row[what]), row[what])
            kept[row["name"]] = Gone(**row)
            spots["gone", row["name"]] = Spot(table.sheet, number, table.columns)
        found, named = gathered(
            remarks,
            table.sheet,
            lambda remark, t=table: t.columns.get(remark.field, t.columns["name"]),  # type: ignore[misc]
        )
        findings.extend(found)
        counts = counts.plus(Counts(read, read - named, named))
    return Built(tuple(kept.values()), spots, tuple(findings), counts, tuple(unused))


def _rows(table: Table, manner: Manner) -> Iterable[tuple[int, dict[str, Any], Mapping[str, Finding]]]:
    """Number, values and remarks of each row that holds anything."""
    values: dict[str, list[Any]] = {}
    problems: dict[int, dict[str, Finding]] = {}
    for column in GONE_COLUMNS:
        if column.field not in table.columns:
            continue
        values[column.field], found = read_values(
            column, table.cells(column.field), manner.style(table, column.field)
        )
        by = manner.factor(table, column.field)
        if by is not None:
            values[column.field] = [None if v is None else times(v, by) for v in values[column.field]]
        for position, finding in found:
            problems.setdefault(position, {})[column.field] = finding
    for offset in range(table.end - table.head - 1):
        number = table.head + 1 + offset
        cells = table.sheet.rows[number][table.left : table.right + 1]
        if all(is_blank(cell) for cell in cells):
            continue
        yield number, {name: column[offset] for name, column in values.items()}, problems.get(offset, {})


def _texts(table: Table, number: int) -> dict[str, str]:
    cells = table.sheet.rows[number]
    return {
        name: text_of(cells[column]) for name, column in table.columns.items() if not is_blank(cells[column])
    }


def _missing(name: str) -> Finding:
    heading = _NEEDED[name].heading
    return Finding(
        Severity.STOPS,
        "figure missing",
        f"A row of what has gone has no {heading}.",
        f"Type {heading}.",
        read=heading,
    )


def _twice(name: str) -> Finding:
    return Finding(
        Severity.STOPS,
        "same load twice",
        f"The load '{name}' stands twice among what has gone; the first row is used.",
        "Give each load its own name, or take one out.",
        read=name,
    )


def _total(name: str) -> Finding:
    return Finding(Severity.NOTE, "total left out", f"'{name}' was taken as a row of totals.", read=name)
