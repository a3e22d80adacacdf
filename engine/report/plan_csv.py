"""A plan as a CSV file: the columns of sheet *Plan*."""

import csv
import io
from decimal import Decimal

from engine.exact import canonical
from engine.planning.plan import Plan
from engine.report.book import Target, open_whole
from engine.report.lines import lines_of
from engine.report.plan_sheet import plan_columns
from engine.report.sheet import Value
from engine.report.text import csv_text


def write_plan_csv(plan: Plan, target: Target) -> None:
    """Write a row for every shipment, UTF-8 with a mark, comma between, decimal point.

    Numbers are exact and never start with '='; text that a spreadsheet might take for a formula has an
    apostrophe before it.

    Args:
        plan: what to write.
        target: a path, or a file open for writing bytes.
    """
    columns = plan_columns(plan)
    held = io.StringIO(newline="")
    writer = csv.writer(held, lineterminator="\r\n")  # RFC 4180
    writer.writerow(column.heading for column in columns)
    for line in lines_of(plan):
        writer.writerow(_text(column.value(line)) for column in columns)
    with open_whole(target) as file:
        file.write(held.getvalue().encode("utf-8-sig"))  # without the mark some programs misread names


def _text(value: Value) -> str:
    match value:
        case None:
            return ""
        case Decimal():
            return canonical(value)
        case int():
            return str(value)
        case str():
            return csv_text(value)
    raise TypeError(f"A CSV cell cannot hold {type(value).__name__}.")
