"""Hauliers from their sheet: what each carries in a week, and what one of its vehicles holds."""

from collections.abc import Iterable, Sequence

from engine.figures import Haulier
from engine.findings import Finding, Severity
from engine.intake.build_lists import Built, Unused, named_rows, nameless_rows, texts_of, unread_cells
from engine.intake.manner import Manner
from engine.intake.names import folded
from engine.intake.places import Spot
from engine.intake.recognise import Table
from engine.intake.remarks import Counts, Remark, gathered


def build_hauliers(tables: Sequence[Table], on_rates: Iterable[str], manner: Manner) -> Built:
    """The hauliers of all lists, names spelled as on the rate rows.

    Of one that stands twice the first row is kept, and said.
    """
    spelled = {folded(name): name for name in on_rates}
    kept: dict[str, Haulier] = {}
    spots: dict[tuple[str, str], Spot] = {}
    findings: list[Finding] = []
    unused: list[Unused] = []
    counts = Counts()
    for table in tables:
        rows, remarks, read = named_rows(table, manner, "")
        unused.extend(nameless_rows(table, remarks))
        used = 0
        for row in rows:
            if folded(row.name) in kept:
                remarks.append(Remark(row.number, "name", _twice(row.name), True))
                unused.append(Unused("hauliers", texts_of(table, row.number)))
                continue
            values = {field: value for field, value in row.values.items() if field != "name"}
            name = spelled.get(folded(row.name), row.name)
            kept[folded(row.name)] = Haulier(name, **values)
            spots["hauliers", name] = Spot(table.sheet, row.number, table.columns)
            used += 1
            unused.extend(unread_cells(table, row, name))
        found, named = gathered(remarks, table.sheet, lambda remark, t=table: t.columns[remark.field])  # type: ignore[misc]
        findings.extend(found)
        counts = counts.plus(Counts(read, used, named))
    return Built(tuple(kept.values()), spots, tuple(findings), counts, tuple(unused))


def _twice(name: str) -> Finding:
    return Finding(
        Severity.STOPS,
        "same haulier twice",
        f"The haulier '{name}' stands twice; the first row is used.",
        "Take one out.",
        read=name,
    )
