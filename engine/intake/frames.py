"""The figures of a week as frames of text for a grid, and an edited frame as changes to the week.

Grids hold text only: every cell is read by `read_field`, and what cannot be read stays where it is and is
reported, never dropped.
"""

from collections.abc import Hashable, Mapping, Sequence
from dataclasses import dataclass, replace
from decimal import Decimal
from typing import Any

import pandas as pd

from engine.changes import Add, Alter, Change, Remove
from engine.columns import (
    CUSTOMER_COLUMNS,
    DEPOT_COLUMNS,
    HAULIER_COLUMNS,
    RATE_COLUMNS,
    RULE_COLUMNS,
    Column,
)
from engine.figures import Customer, Depot, Haulier, Order, RateKey, RateRow, Rules
from engine.findings import Finding, Severity
from engine.intake.build_lists import Unused
from engine.intake.build_rules import read_rule
from engine.intake.column_reader import read_values
from engine.intake.fields import show_field
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle
from engine.week import Week

TABLES = ("depots", "customers", "rates", "hauliers", "rules")
GRID_COLUMNS: Mapping[str, tuple[Column, ...]] = {
    "depots": DEPOT_COLUMNS,
    "customers": tuple(column for column in CUSTOMER_COLUMNS if column.field not in ("number", "day")),
    "rates": RATE_COLUMNS,
    "hauliers": HAULIER_COLUMNS,
    "rules": RULE_COLUMNS,
}
"""The columns that each grid shows; the rules stand one a row, under Rule and Value."""


@dataclass(frozen=True, slots=True)
class CellProblem:
    """A cell of a grid that could not be read, or is to be checked.

    row: the row's label in the frame's index; column: its heading
    """

    table: str
    row: Hashable
    column: str
    finding: Finding

    @property
    def stops(self) -> bool:
        return self.finding.severity is Severity.STOPS


def style_of(week: Week, decimal_mark: str = ".") -> NumberStyle:
    """How numbers are typed and shown for a week: its unit and currency, and the desk's decimal mark."""
    return NumberStyle(decimal_mark, week.rules.unit, week.rules.currency)


def frame_of(week: Week, table: str, style: NumberStyle | None = None) -> pd.DataFrame:
    """One table of a week as text, one row a figure, under the headings of `engine.columns`.

    table: 'depots', 'customers' (one row a customer, Ordered is the total), 'rates', 'hauliers' or 'rules'
    """
    if table == "rules":
        cells = [(c.heading, show_field(c, getattr(week.rules, c.field), style)) for c in RULE_COLUMNS]
        return pd.DataFrame(cells, columns=["Rule", "Value"], dtype=object)
    columns = GRID_COLUMNS[table]
    records: Sequence[Any] = list(_records(week, table))
    return pd.DataFrame(
        {c.heading: [show_field(c, getattr(record, c.field), style) for record in records] for c in columns},
        dtype=object,
    )


def draft_of(
    week: Week, table: str, unused: Sequence[Unused], style: NumberStyle | None = None
) -> pd.DataFrame:
    """`frame_of` with the texts of a reading that are not in the week: unread cells, and rows below."""
    frame = frame_of(week, table, style)
    here = [one for one in unused if one.table == table]
    if table == "rules":
        places = {column.field: number for number, column in enumerate(RULE_COLUMNS)}
        for one in here:
            if one.key in places:
                frame.loc[places[one.key], "Value"] = one.texts.get("value", "")
        return frame
    headings = {column.field: column.heading for column in GRID_COLUMNS[table]}
    rows = []
    names: dict[Any, int] = {}
    if any(one.key is not None for one in here):
        names = {key: place for place, key in enumerate(_keys_in_order(week, table))}
    for one in here:
        texts = {headings[name]: text for name, text in one.texts.items() if name in headings}
        if one.key is None:
            rows.append({heading: texts.get(heading, "") for heading in frame.columns})
        elif one.key in names:
            for heading, text in texts.items():
                frame.loc[names[one.key], heading] = text
        else:  # its row has gone from the week since: the texts stay, in a row of their own
            told = _named_by(table, one.key) | texts
            rows.append({heading: told.get(heading, "") for heading in frame.columns})
    return pd.concat([frame, pd.DataFrame(rows, dtype=object)], ignore_index=True) if rows else frame


def keys_of(week: Week, table: str, frame: pd.DataFrame) -> dict[Hashable, Any]:
    """The name, or `RateKey`, that each row of a frame has in a week, by label, where it is in it."""
    if table == "rules":
        return {
            label: RULE_COLUMNS[place].field for place, label in enumerate(frame.index[: len(RULE_COLUMNS)])
        }
    return {label: _key(week, table, found) for label, found in _keys(week, table, frame).items()}


def identified(
    table: str, before: pd.DataFrame, after: pd.DataFrame, unread: set[tuple[Hashable, str]]
) -> pd.DataFrame:
    """An edited frame that still says which row is which: names that nobody can read are those of before.

    before: the frame that last said so; unread: label and heading of the cells that could not be read
    """
    named = after.copy()
    for column in GRID_COLUMNS[table] if table != "rules" else ():
        if column.field not in ("name", "depot", "customer", "haulier"):
            continue
        earlier = dict(zip(before.index, before[column.heading], strict=True))
        named[column.heading] = [
            earlier[label] if (label, column.heading) in unread and label in earlier else text
            for label, text in zip(after.index, after[column.heading], strict=True)
        ]
    return named


def changes_between(
    week: Week, table: str, before: pd.DataFrame, after: pd.DataFrame, style: NumberStyle | None = None
) -> tuple[list[Change], list[CellProblem]]:
    """The changes that make a week say what an edited frame says, and the cells that nobody can read.

    Rows are matched by the label in the frames' index: a label that is gone was removed, a new one was
    added. A row with an unreadable cell keeps its other edits; a new row waits until its needed cells read.

    week: the week as it is now; before: the frame that it showed; after: the frame as edited
    """
    style = style or style_of(week)
    if table == "rules":
        return _rule_changes(week, after, style)
    columns = GRID_COLUMNS[table]
    values: dict[str, list[Any]] = {}
    found: dict[Hashable, dict[str, Finding]] = {}
    labels = list(after.index)
    for column in columns:
        values[column.field], problems = read_values(column, _texts(after, column), style)
        for position, finding in problems:
            found.setdefault(labels[position], {})[column.field] = finding
    keys = _keys(week, table, before)
    same = _unchanged(before, after, columns)
    there = set(labels)
    changes: list[Change] = [
        Remove(_WHAT[table], _key(week, table, keys[label])) for label in keys if label not in there
    ]
    problems_out: list[CellProblem] = []
    needed = [column.field for column in columns if column.needed]
    taken = _names_taken(week, table, keys, labels)
    for position, label in enumerate(labels):
        faults = found.get(label, {})
        whole = not faults and all(values[name][position] is not None for name in needed)
        if label in keys and label in same and whole:
            continue
        row = {name: _spelled(week, name, column[position]) for name, column in values.items()}
        if label not in keys and not faults and all(not v or v == "unit" for v in row.values()):
            continue
        more, said = _row_changes(week, table, _key(week, table, keys.get(label)), row, faults, taken)
        changes.extend(more)
        headings = {column.field: column.heading for column in columns}
        problems_out.extend(
            CellProblem(table, label, headings[name], finding) for name, finding in said.items()
        )
    return changes, problems_out


def _keys_in_order(week: Week, table: str) -> list[Any]:
    if table == "rates":
        return [week.rates.key_of(number) for number in week.rates.ids_in_order.tolist()]
    return list(_named(week, table))


def _named_by(table: str, key: Any) -> dict[str, str]:
    """The names of a row by the key that it had in a week."""
    if table == "rates":
        return {"Depot": key.depot, "Customer": key.customer, "Haulier": key.haulier or ""}
    return {GRID_COLUMNS[table][0].heading: str(key)}


_WHAT: Mapping[str, Any] = {
    "depots": "depot",
    "customers": "customer",
    "rates": "rate",
    "hauliers": "haulier",
}


def _spelled(week: Week, name: str, value: Any) -> Any:
    """A depot's or customer's name in a rate row or in *One depot*, spelled as the week spells it."""
    if not isinstance(value, str) or name not in ("depot", "customer", "one_depot"):
        return value
    known = week.customers if name == "customer" else week.depots
    if value in known:
        return value
    return next((other for other in known if folded(other) == folded(value)), value)


def _records(week: Week, table: str) -> Sequence[Any]:
    return list(week.rates) if table == "rates" else list(_named(week, table).values())


def _named(week: Week, table: str) -> Mapping[str, Any]:
    """The records of a table whose records go by their names."""
    return {"depots": week.depots, "customers": week.customers, "hauliers": week.hauliers}[table]


def _texts(frame: pd.DataFrame, column: Column) -> list[Any]:
    if column.heading not in frame:
        return [""] * len(frame)
    return ["" if _is_nothing(cell) else cell for cell in frame[column.heading].tolist()]


def _is_nothing(cell: Any) -> bool:
    return cell is None or cell is pd.NA or (isinstance(cell, float) and cell != cell)


def _keys(week: Week, table: str, before: pd.DataFrame) -> dict[Hashable, Any]:
    """The name, or id of the rate row, of each row of a frame; rows that are not in the week are left out."""
    if table != "rates":
        names = _texts(before, GRID_COLUMNS[table][0])
        known = _named(week, table)
        keys: dict[Hashable, Any] = {}
        seen: set[str] = set()
        for label, cell in zip(before.index, names, strict=True):
            name = " ".join(str(cell).split())
            if name in known and name not in seen:
                seen.add(name)
                keys[label] = name
        return keys
    return _rate_keys(week, before)


def _rate_keys(week: Week, before: pd.DataFrame) -> dict[Hashable, Any]:
    """Rows of one lane and haulier are told apart by their order, then by their rate."""
    lanes: dict[tuple[str, str, str | None], list[int]] = {}
    columns = [
        _texts(before, column) for column in RATE_COLUMNS if column.field in ("depot", "customer", "haulier")
    ]
    for position, (depot, customer, haulier) in enumerate(zip(*columns, strict=True)):
        lanes.setdefault(
            (str(depot).strip(), str(customer).strip(), str(haulier).strip() or None), []
        ).append(position)
    rate = next(column for column in RATE_COLUMNS if column.field == "rate")
    rates = _texts(before, rate)
    keys: dict[Hashable, Any] = {}
    in_order: dict[tuple[str, str, str | None], list[int]] = {}
    for number in week.rates.ids_in_order.tolist():
        row = week.rates.overlay.get(number)
        name = week.rates.table.named(number) if row is None else (row.depot, row.customer, row.haulier)
        in_order.setdefault(name, []).append(number)
    for name, positions in lanes.items():
        ids = in_order.get(name, [])
        if len(ids) < len(positions):
            wanted = [_row_at(week, number).rate for number in ids]
            texts = {show_field(rate, value) for value in wanted} | {
                show_field(rate, v, NumberStyle(",")) for v in wanted
            }
            positions = [p for p in positions if rates[p] in texts] + [
                p for p in positions if rates[p] not in texts
            ]
            positions = sorted(positions[: len(ids)])
        for position, number in zip(positions, ids, strict=False):
            keys[before.index[position]] = number
    return keys


def _key(week: Week, table: str, found: Any) -> Any:
    """What names a row in the week: a name, or the key of the rate row with this id."""
    return week.rates.key_of(found) if table == "rates" and found is not None else found


def _row_at(week: Week, number: int) -> RateRow:
    row = week.rates.row(number)
    if row is None:
        raise ValueError(f"Rate row {number} was removed.")
    return row


def _unchanged(before: pd.DataFrame, after: pd.DataFrame, columns: Sequence[Column]) -> set[Hashable]:
    shared = before.index.intersection(after.index)
    headings = [c.heading for c in columns if c.heading in before and c.heading in after]
    first, second = before.loc[shared, headings].fillna(""), after.loc[shared, headings].fillna("")
    return set(shared[(first.to_numpy() == second.to_numpy()).all(axis=1)])


def _names_taken(
    week: Week, table: str, keys: Mapping[Hashable, Any], labels: Sequence[Hashable]
) -> set[str]:
    """Names that an added or renamed row may not take, folded."""
    if table == "rates":
        return set()
    there = set(labels)
    return {folded(name) for label, name in keys.items() if label in there}


def _row_changes(
    week: Week,
    table: str,
    key: Any,
    row: dict[str, Any],
    faults: Mapping[str, Finding],
    taken: set[str],
) -> tuple[list[Change], dict[str, Finding]]:
    said = dict(faults)
    for column in GRID_COLUMNS[table]:
        blank = row[column.field] is None and column.field not in said
        if column.needed and blank and not (table == "customers" and column.field == "ordered"):
            said[column.field] = _needed(column, row)
    unread = {name for name, finding in said.items() if finding.severity is Severity.STOPS}
    if table != "rates" and "name" not in unread:
        name = folded(row["name"])
        if name in taken and (key is None or folded(key) != name):
            said["name"] = _name_taken(row["name"])
            unread.add("name")
        elif key is None or folded(key) != name:
            taken.add(name)
    if key is None:
        needed = {column.field for column in GRID_COLUMNS[table] if column.needed}
        return ([] if unread & needed else [Add(_record(table, row))]), said
    if table == "rates":
        return _rate_changes(week, key, row, unread), said
    return _record_changes(week, table, key, row, unread), said


def _record(table: str, row: Mapping[str, Any]) -> Depot | Customer | Haulier | RateRow:
    if table == "depots":
        return Depot(**row)
    if table == "rates":
        return RateRow(**row)
    if table == "hauliers":
        return Haulier(**row)
    values = {name: value for name, value in row.items() if name != "ordered"}
    return Customer(orders=(Order(row["ordered"] or Decimal(0)),), **values)


def _record_changes(
    week: Week, table: str, key: str, row: Mapping[str, Any], unread: set[str]
) -> list[Change]:
    record: Any = _named(week, table)[key]
    if table == "hauliers" and "name" not in unread and row["name"] != key:
        place = list(week.hauliers).index(key)
        values = {name: getattr(record, name) if name in unread else value for name, value in row.items()}
        return [Remove("haulier", key), Add(Haulier(**values), place)]  # its name is what rate rows go by
    changes: list[Change] = []
    for name, value in row.items():
        if name in unread or name == "name":
            continue
        if name == "ordered" and value is None:
            value = Decimal(0)
        if value != getattr(record, name):
            changes.append(Alter(_WHAT[table], key, name, value))
    if "name" not in unread and row["name"] != key:
        changes.append(Alter(_WHAT[table], key, "name", row["name"]))
    return changes


def _rate_changes(week: Week, key: RateKey, row: dict[str, Any], unread: set[str]) -> list[Change]:
    number = week.rates.find(key)
    if number is None:
        return []
    current = _row_at(week, number)
    values = {name: getattr(current, name) if name in unread else value for name, value in row.items()}
    if (values["depot"], values["customer"], values["haulier"]) != (key.depot, key.customer, key.haulier):
        return [Remove("rate", key), Add(RateRow(**values))]
    return [
        Alter("rate", key, name, value)
        for name, value in values.items()
        if name not in ("depot", "customer", "haulier") and value != getattr(current, name)
    ]


def _rule_changes(
    week: Week, after: pd.DataFrame, style: NumberStyle
) -> tuple[list[Change], list[CellProblem]]:
    changes: list[Change] = []
    problems: list[CellProblem] = []
    by_heading = {column.heading: column for column in RULE_COLUMNS}
    default = Rules()
    style = _as_stated(after, by_heading, style)
    for label, name, raw in zip(after.index, after["Rule"], after["Value"], strict=True):
        column = by_heading.get(str(name).strip())
        if column is None:
            if not _is_nothing(name) and str(name).strip():
                problems.append(CellProblem("rules", label, "Rule", _no_rule(str(name))))
            continue
        value, finding = read_rule(column, "" if _is_nothing(raw) else raw, style)
        if finding is not None:
            problems.append(CellProblem("rules", label, "Value", finding))
            if finding.severity is Severity.STOPS:
                continue
        value = getattr(default, column.field) if value is None else value
        if value != getattr(week.rules, column.field):
            changes.append(Alter("rule", "", column.field, value))
    return changes, problems


def _as_stated(after: pd.DataFrame, by_heading: Mapping[str, Column], style: NumberStyle) -> NumberStyle:
    """The style with the unit and currency that the rules themselves name."""
    for name, raw in zip(after["Rule"], after["Value"], strict=True):
        column = by_heading.get(str(name).strip())
        if column is not None and column.field in ("unit", "currency"):
            value, _ = read_rule(column, "" if _is_nothing(raw) else raw, style)
            if value is not None:
                style = replace(style, **{column.field: value})
    return style


def _needed(column: Column, row: Mapping[str, Any]) -> Finding:
    some = next((value for value in row.values() if value), "")
    return Finding(
        Severity.STOPS,
        "figure missing",
        f"{column.heading} is blank, and is needed.",
        f"Type {column.heading}.",
        read=show_field(column, some),
    )


def _name_taken(name: str) -> Finding:
    return Finding(
        Severity.STOPS,
        "same name twice",
        f"'{name}' stands in another row already.",
        "Give it another name, or clear the row.",
        read=name,
    )


def _no_rule(name: str) -> Finding:
    return Finding(
        Severity.CHECK,
        "unknown rule",
        f"'{name[:60]}' is no rule that is known.",
        "Clear the row.",
        read=name[:60],
    )
