"""Reading one cell of one column to a value, and showing a value as the text that reads back to it.

Every rule on a single cell stands here, once: sheets and the browser's grids both go through it.
"""

from dataclasses import replace
from datetime import date, datetime, time
from decimal import Decimal
from typing import Any

from engine.columns import Column, Kind
from engine.exact import canonical
from engine.figures import ANY_SINGLE_DEPOT, PRIORITIES
from engine.findings import Finding, Severity
from engine.intake.numbers import (
    ErrorCell,
    Expected,
    FormulaCell,
    NumberStyle,
    PercentCell,
    is_blank,
    plain_text,
    read_number,
    spoilt,
)
from engine.intake.units import same_unit, unit_of

LONGEST_NAME = 200
_INVISIBLE = {0x200B: None, 0x2060: None, 0xFEFF: None, 0xAD: None}

_EXPECTED: dict[Kind, Expected] = {
    Kind.QUANTITY: "quantity",
    Kind.RATE: "money",
    Kind.CHARGE: "money",
    Kind.PRICE: "money",
    Kind.PERCENT: "percent",
    Kind.COUNT: "quantity",
    Kind.DISTANCE: "distance",
    Kind.LATITUDE: "degrees",
    Kind.LONGITUDE: "degrees",
}
NUMBER_KINDS = frozenset(_EXPECTED)
NOT_NEGATIVE = frozenset({Kind.QUANTITY, Kind.PRICE, Kind.COUNT, Kind.DISTANCE})
_FARTHEST = {Kind.LATITUDE: 90, Kind.LONGITUDE: 180}

YES_WORDS = frozenset({"yes", "y", "true", "1", "x", "✓", "✔", "☑", "on"})
NO_WORDS = frozenset({"no", "n", "false", "0", "-", "off", "none"})
CLOSED_WORDS = frozenset({"-", "--", "x", "n/a", "na", "n.a.", "closed", "no lane", "none", "no", "n", "nil"})
"""What stands where a lane has no rate because nothing goes there."""

_NOTHING_WORDS = frozenset({"-", "--", "n/a", "na", "n.a.", "none", "nil"})
_LOAD_WORDS = frozenset(
    {
        "load",
        "loads",
        "full load",
        "truck",
        "truckload",
        "vehicle",
        "lorry",
        "trip",
        "flat",
        "drop",
        "container",
    }
)
_DATE_FORMS = (
    "%Y-%m-%d",
    "%Y/%m/%d",
    "%Y.%m.%d",
    "%d.%m.%Y",
    "%d.%m.%y",
    "%d %b %Y",
    "%d %B %Y",
    "%d-%b-%Y",
    "%d-%b-%y",
    "%b %d, %Y",
    "%B %d, %Y",
)


def read_field(column: Column, raw: Any, style: NumberStyle) -> tuple[Any, Finding | None]:
    """The value in a cell of this column, and what there is to say about it.

    A blank cell gives the column's blank value (None; False for yes or no; 'unit' for Per). A finding
    that stops comes with the blank value; a note or check comes with the value as it was understood.

    raw: what the cell holds, as it came from a workbook, a text file or a grid
    style: the decimal mark, unit and currency to read by
    """
    if is_blank(raw):
        return blank_value(column), None
    if isinstance(raw, (ErrorCell, FormulaCell)):
        return blank_value(column), spoilt(raw)
    value, problem = _read(column, raw, style)
    if problem is not None and problem.severity is Severity.STOPS:
        value = blank_value(column)
    return value, problem


def show_field(column: Column, value: Any, style: NumberStyle | None = None) -> str:
    """A value as the text that `read_field` reads back to it, in the same style."""
    if value is None or value is False:
        return ""
    if value is True:
        return "yes"
    if isinstance(value, Decimal):
        mark = "." if style is None else style.decimal_mark
        return canonical(value).replace(".", mark)
    return value.isoformat() if isinstance(value, date) else str(value)


def blank_value(column: Column) -> Any:
    """What a blank cell of the column stands for."""
    return {Kind.YES: False, Kind.BASIS: "unit"}.get(column.kind)


def text_of(raw: Any) -> str:
    """A cell as text: numbers as they are typed, days as year-month-day, invisible marks dropped."""
    if isinstance(raw, bool):
        return "yes" if raw else "no"
    if isinstance(raw, float):
        return str(int(raw)) if raw.is_integer() and abs(raw) < 1e15 else repr(float(raw))
    if isinstance(raw, datetime):
        return raw.date().isoformat() if raw.time() == time() else raw.isoformat(" ", "minutes")
    if isinstance(raw, date):
        return raw.isoformat()
    text = raw if isinstance(raw, str) else str(raw)
    if text.isprintable() and "  " not in text and text[:1] != " " and text[-1:] != " ":
        return text
    if not text.isprintable():
        text = text.translate(_INVISIBLE)
        text = "".join(c if c.isprintable() else " " for c in text)
    return " ".join(text.split())


def _read(column: Column, raw: Any, style: NumberStyle) -> tuple[Any, Finding | None]:
    kind = column.kind
    if kind in NUMBER_KINDS:
        return _number(column, raw, style)
    if kind in (Kind.NAME, Kind.TEXT):
        return _text(column, raw)
    if kind is Kind.DATE:
        return _date(column, raw)
    text = text_of(raw)
    word = text.casefold()
    if kind is Kind.YES:
        if word in YES_WORDS or (column.field == "closed" and word == "closed"):
            return True, None
        if word in NO_WORDS or (column.field == "closed" and word == "open"):
            return False, None
        return None, _refused(
            "not yes or no", column, text, "takes yes or no", "Type yes, no, or leave it blank."
        )
    if kind is Kind.PRIORITY:
        if text.upper() in PRIORITIES:
            return text.upper(), None
        return None, _refused(
            "not a priority", column, text, "takes A, B or C", "Type A, B, C or leave it blank."
        )
    if kind is Kind.ONE_DEPOT:
        if word in YES_WORDS:
            return ANY_SINGLE_DEPOT, None
        return (None, None) if word in NO_WORDS else (text, None)
    return _basis(column, text, style)


def _number(column: Column, raw: Any, style: NumberStyle) -> tuple[Decimal | None, Finding | None]:
    kind = column.kind
    if isinstance(raw, str) and plain_text(raw).casefold() in _NOTHING_WORDS:
        if column.needed:
            return None, _refused(
                "not a number", column, raw, "needs a number", "Type a number, 0 for nothing."
            )
        return None, Finding(
            Severity.CHECK,
            "read as blank",
            f"'{raw}' in {column.heading} was read as a blank cell, not as 0.",
            "Type 0 if nothing is meant, or clear the cell.",
            read=raw,
        )
    number, finding = read_number(raw, style, _EXPECTED[kind])
    if kind in _FARTHEST:
        return _degrees(column, raw, style, number, finding)
    if number is None:
        return None, finding
    if number < 0 and kind in NOT_NEGATIVE:
        return None, _refused(
            "negative",
            column,
            raw,
            "takes no negative number",
            "Type it without the minus, or leave it blank.",
        )
    if kind is Kind.COUNT and number != number.to_integral_value():
        return None, _refused("not whole", column, raw, "takes a whole number", "Type a whole number.")
    if kind is Kind.PERCENT:
        return _percent(column, raw, number, finding)
    return number, finding


def _percent(
    column: Column, raw: Any, number: Decimal, finding: Finding | None
) -> tuple[Decimal | None, Finding | None]:
    if number <= -100:
        return None, _refused("percent", column, raw, "takes more than -100 %", "Type the percentage.")
    bare = not isinstance(raw, PercentCell) and "%" not in str(raw)
    if finding is None and bare and 0 < abs(number) < 1 and abs(number) * 100 <= 60:
        times_100 = canonical(number * 100)
        return number, Finding(
            Severity.CHECK,
            "small percent",
            f"{column.heading} {canonical(number)} was read as {canonical(number)} %, not as {times_100} %.",
            f"Type {times_100} if that is meant.",
            read=text_of(raw),
        )
    return number, finding


def _degrees(
    column: Column, raw: Any, style: NumberStyle, number: Decimal | None, finding: Finding | None
) -> tuple[Decimal | None, Finding | None]:
    """Degrees: where only the other decimal mark gives a place on earth, that one was meant."""
    farthest = _FARTHEST[column.kind]
    if number is None or abs(number) > farthest:
        other = replace(style, decimal_mark="," if style.decimal_mark == "." else ".")
        second, second_finding = read_number(raw, other, "degrees") if isinstance(raw, str) else (None, None)
        if second is not None and abs(second) <= farthest:
            return second, second_finding
    if number is not None and abs(number) > farthest:
        return None, _refused(
            "out of range",
            column,
            raw,
            f"lies between -{farthest} and {farthest}",
            "Type degrees as a decimal number.",
        )
    return number, finding


def _text(column: Column, raw: Any) -> tuple[str | None, Finding | None]:
    text = text_of(raw)
    if len(text) > LONGEST_NAME and column.kind is Kind.NAME:
        return None, _refused(
            "long name",
            column,
            text[:50] + "…",
            f"takes at most {LONGEST_NAME} characters",
            "Shorten the name.",
        )
    return text or None, None


def _basis(column: Column, text: str, style: NumberStyle) -> tuple[str | None, Finding | None]:
    word = text.casefold().removeprefix("per ").removeprefix("/").removeprefix("a ").strip()
    if word in _LOAD_WORDS:
        return "load", None
    if word == "unit" or unit_of(word) == "unit" or same_unit(word, style.unit):
        return "unit", None
    if unit_of(word) is not None:
        return None, _refused(
            "other unit",
            column,
            text,
            f"is unit ({style.unit}) or load here",
            f"Give the rate per {style.unit}.",
        )
    return None, _refused(
        "not a basis", column, text, "takes unit or load", "Type unit, load, or leave it blank."
    )


def _date(column: Column, raw: Any) -> tuple[date | None, Finding | None]:
    if isinstance(raw, datetime):
        return raw.date(), None
    if isinstance(raw, date):
        return raw, None
    text = text_of(raw)
    for form in _DATE_FORMS:
        try:
            return datetime.strptime(text, form).date(), None
        except ValueError:
            continue
    return None, _refused(
        "not a date",
        column,
        text,
        "takes a day that can be read one way only",
        "Type it as year-month-day: 2026-03-31.",
    )


def _refused(rule: str, column: Column, raw: Any, takes: str, mend: str) -> Finding:
    text = text_of(raw)
    return Finding(Severity.STOPS, rule, f"'{text[:60]}': {column.heading} {takes}.", mend, read=text[:60])
