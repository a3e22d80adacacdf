"""Loading lists: one file per depot, with nothing that it need not know (no money, no other depot)."""

from collections.abc import Iterable
from io import BytesIO
from typing import IO

from engine.report.book import Target, fixed_zip, open_whole, write_book
from engine.report.groupings import loading_columns
from engine.report.lines import Line, Sent, heading_row, line_rows, lines_of, still_to_go, styles_of
from engine.report.look import Style
from engine.report.notes import CAUTIONS
from engine.report.plan_sheet import total_values
from engine.report.sheet import Row, Sheet
from engine.report.text import safe_file_name

_HEADING_ROW = 4


def write_loading_list(plan: Sent, depot: str, target: Target) -> None:
    """Write what one depot loads this week as a workbook of one printable sheet.

    Args:
        plan: the plan, or the week and the shipments of one.
        depot: a depot of the plan's week.
        target: a path, or a file open for writing bytes.

    Raises:
        KeyError: the week has no such depot.
        OSError: the file cannot be written.
    """
    _write(
        plan, depot, [line for line in still_to_go(lines_of(plan)) if line.shipment.depot == depot], target
    )


def write_loading_zip(plan: Sent, target: Target) -> None:
    """Write every depot's loading list into one zip file, under the names of `loading_file_names`."""
    lines: dict[str, list[Line]] = {depot: [] for depot in plan.week.depots}
    for line in still_to_go(lines_of(plan)):
        lines[line.shipment.depot].append(line)
    members = []
    for depot, name in loading_file_names(plan.week.depots).items():
        held = BytesIO()
        _write(plan, depot, lines[depot], held)
        members.append((name, held.getvalue()))
    with open_whole(target) as file:
        fixed_zip(file, members)


def loading_file_names(depots: Iterable[str]) -> dict[str, str]:
    """A file name for each depot's loading list: plain ASCII, never a path, no two alike."""
    names: dict[str, str] = {}
    for depot in depots:
        stem = safe_file_name(depot, taken=(name.removesuffix(".xlsx") for name in names.values()))
        names[depot] = f"{stem}.xlsx"
    return names


def _write(plan: Sent, depot: str, lines: list[Line], target: Target | IO[bytes]) -> None:
    if depot not in plan.week.depots:
        raise KeyError(f"The week has no depot '{depot}': there is no loading list to write.")
    week = plan.week.rules.week
    write_book([_sheet(plan, depot, lines)], target, title=f"Loading list {depot}, {week}")


def _sheet(plan: Sent, depot: str, lines: list[Line]) -> Sheet:
    columns = loading_columns(plan)
    rows = [
        Row([f"Loading list: {depot}"], [Style("title")], height=24),
        Row([f"{plan.week.rules.week}, quantities in {plan.week.rules.unit}"], [Style("quiet")]),
        Row([]),
        heading_row(columns),
    ]
    styles = styles_of(columns)
    rows.extend(line_rows(columns, lines))
    if lines:
        first = _HEADING_ROW + 1
        rows.append(Row(["Total", *total_values(columns, lines, first, len(rows))], styles["total"]))
    else:
        rows.append(Row(["Nothing to load this week."], [Style()]))
    rows.append(Row([]))
    rows.extend(Row([sentence], [Style("quiet")]) for sentence in CAUTIONS)
    return Sheet(
        "Loading list",
        [column.width for column in columns],
        rows,
        length=len(rows),
        frozen=f"A{_HEADING_ROW + 1}",
        repeated=f"{_HEADING_ROW}:{_HEADING_ROW}",
        header=f"{depot}, {plan.week.rules.week}",
    )
