"""The one reader of numbers: a cell of a workbook, of a text file, or typed in a grid, to an exact decimal.

Whatever a person may have typed around a number is understood or refused with a reason, never dropped.
One text can mean two numbers (1.234 is 1234 where a comma marks decimals): `NumberStyle` says which mark
is meant, and `mark_told_by` says what a column of cells tells about it.
"""

import math
import re
import unicodedata
from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from decimal import Decimal
from fractions import Fraction
from functools import lru_cache
from typing import Any, Literal

from engine.exact import canonical
from engine.findings import Finding, Severity
from engine.intake.units import currencies_of, factor, same_unit, times, unclear_unit, unit_of

MOST_DIGITS = 18
"""Significant digits that can still be computed with exactly."""

SHEET_DIGITS = 15
"""Significant digits that spreadsheets keep and show; what a computed cell holds beyond is noise."""

Expected = Literal["quantity", "money", "percent", "distance", "degrees", "number"]


@dataclass(frozen=True, slots=True)
class NumberStyle:
    """How numbers are typed: the decimal mark ('.' or ','), and the unit and currency they are in.

    pallet: what a pallet weighs in kg, where the desk has said so
    """

    decimal_mark: str = "."
    unit: str = "t"
    currency: str = "EUR"
    pallet: Fraction | None = None


class ErrorCell(str):
    """A cell that holds a spreadsheet's error, such as #N/A."""

    __slots__ = ()


class FormulaCell(str):
    """A cell with a formula whose result was never stored in the file."""

    __slots__ = ()


class PercentCell(float):
    """A workbook number shown as percent: 0.12 that the sheet shows as 12 %."""

    __slots__ = ()


@dataclass(frozen=True, slots=True)
class _Parts:
    core: str  # digits and separators only
    negative: bool
    before: str
    behind: str


_TO_PLAIN = {ord(c): " " for c in "\u00a0\u202f\u2009\u2007\u2002\u2003\u2006\u2008\u200a\u3000\t\r\n"}
_TO_PLAIN |= {ord(c): "-" for c in "\u2212\u2013\u2014\ufe63\uff0d\u2010\u2011"}
_TO_PLAIN |= {ord(c): "'" for c in "\u2019\u2018\u02bc`\u00b4\u2032"}
_DROPPED = dict.fromkeys(map(ord, "\u200b\u200c\u200d\u200e\u200f\ufeff\u00ad\u2060"))
_SHAPE = re.compile(r"(?P<before>[^\d.,]*)(?P<core>[.,]?\d[\d.,' ]*)(?P<behind>.*)", re.DOTALL | re.ASCII)
_EXPONENT = re.compile(r"[+-]?\d+([.,]\d*)?[eE][+-]?\d+", re.ASCII)
_DAY = re.compile(r"\d{1,4}([-/.])\d{1,2}\1\d{1,4}|\d{1,2}:\d{2}(:\d{2})?", re.ASCII)


def plain_text(text: str) -> str:
    """The text with every kind of space, minus and apostrophe made plain, and invisible marks dropped."""
    if not text.isprintable():
        text = text.translate(_DROPPED)
        text = "".join(c if c.isprintable() else _TO_PLAIN.get(ord(c), " ") for c in text)
    if text.isascii():
        return " ".join(text.split())
    text = text.translate(_TO_PLAIN | _DROPPED)
    if any(c.isdecimal() and not c.isascii() for c in text):
        text = "".join(str(unicodedata.decimal(c)) if c.isdecimal() else c for c in text)
    return " ".join(text.split())


def is_blank(raw: Any) -> bool:
    """Whether a cell holds nothing: empty, or only spaces."""
    return raw is None or raw == "" or (isinstance(raw, str) and not raw[0].isalnum() and not plain_text(raw))


def read_number(
    raw: Any, style: NumberStyle, expected: Expected = "number"
) -> tuple[Decimal | None, Finding | None]:
    """The number in a cell, and what there is to say about it.

    A blank cell gives (None, None). A finding with a number says how it was understood (a converted
    unit); a finding without one says why there is no number.

    raw: what the cell holds, a text, a workbook's number, or anything else that a cell can hold
    style: the decimal mark, unit and currency to read by
    expected: what the column is about; decides which words may stand beside the number
    """
    if is_blank(raw):
        return None, None
    if isinstance(raw, (ErrorCell, FormulaCell)):
        return None, spoilt(raw)
    if isinstance(raw, bool):
        return None, _refused("not a number", raw, "This cell holds yes or no where a number belongs.")
    if isinstance(raw, (date, datetime, time, timedelta)):
        return None, _refused(
            "date for number",
            raw,
            "A date or time stands where a number belongs.",
            "Type the number again and give the cell a number format.",
        )
    if isinstance(raw, int | float):
        return _from_workbook(raw, expected)
    if isinstance(raw, Decimal):
        return (raw, None) if raw.is_finite() else (None, _not_finite(raw))
    return _from_text(str(raw), style, expected)


def _from_workbook(raw: int | float, expected: Expected) -> tuple[Decimal | None, Finding | None]:
    if isinstance(raw, float) and not math.isfinite(raw):
        return None, _not_finite(raw)
    number = _tidy(Decimal(repr(float(raw)))) if isinstance(raw, float) else Decimal(raw)
    if isinstance(raw, PercentCell):
        if expected != "percent":
            return None, _refused(
                "percent for number",
                f"{canonical(number * 100)}%",
                "A percentage stands where a number belongs.",
            )
        return _shortened(_tidy(number * 100), raw)
    return _shortened(number, raw)


def _shortened(number: Decimal, raw: int | float) -> tuple[Decimal | None, Finding | None]:
    """The number at the digits a spreadsheet shows; the rest is what binary arithmetic left there."""
    digits = _significant(number)
    if number.adjusted() >= MOST_DIGITS:
        return None, _too_many_digits(raw)
    if isinstance(raw, int):
        return (number, None) if digits <= MOST_DIGITS else (None, _too_many_digits(raw))
    if digits <= SHEET_DIGITS:
        return number, None
    shown = _tidy(Decimal(f"{number:.{SHEET_DIGITS}g}"))
    return shown, Finding(
        Severity.NOTE,
        "digits beyond the sheet",
        f"The cell computes to {number}; it was read as {canonical(shown)}, the {SHEET_DIGITS} digits that "
        f"a spreadsheet shows.",
        read=str(number),
    )


def _from_text(text: str, style: NumberStyle, expected: Expected) -> tuple[Decimal | None, Finding | None]:
    parts = _parts(text)
    if parts is None:
        return None, _words(text)
    number = _value(parts.core, style.decimal_mark)
    if number is None:
        return None, _misfit(text, parts.core, style.decimal_mark)
    if _significant(number) > MOST_DIGITS or number.adjusted() >= MOST_DIGITS:
        return None, _too_many_digits(text)
    number = _tidy(-number if parts.negative else number)
    return _with_words(number, parts, text, style, expected)


@lru_cache(maxsize=65536)
def _parts(text: str) -> _Parts | None:
    """A text cut into the number and what stands around it; None where it is no number at all."""
    plain = plain_text(text)
    if plain.startswith("'"):
        plain = plain[1:].lstrip()  # the mark by which spreadsheets are told to keep a text
    match = _SHAPE.fullmatch(plain)
    if match is None or _EXPONENT.fullmatch(plain) or _DAY.fullmatch(plain):
        return None
    before, core, behind = match["before"], match["core"], match["behind"]
    core, tail = core.rstrip(" '"), core[len(core.rstrip(" '")) :]
    behind = (tail + behind).strip(" '")
    signs = (
        before.count("-") + before.count("(") + (behind[:1] == "-") + (behind[-1:] == "-" and behind != "-")
    )
    if signs > 1 or before.count("(") != behind.count(")") or before.count("+") > 1 - signs:
        return None
    before = before.translate({ord(c): None for c in "-+("}).strip()
    behind = behind.strip("-").replace(")", "").strip()
    if any(c.isdigit() for c in behind) and unit_of(behind.split("/")[-1].strip(" .")) is None:
        return None
    return _Parts(core, signs == 1, before, behind)


def _value(core: str, mark: str) -> Decimal | None:
    """The number that digits and separators make with this decimal mark; None where they do not fit it."""
    whole, found, fraction = core.partition(mark)
    if found and fraction and not fraction.isdigit():
        return None
    if not whole:
        return Decimal(f"0.{fraction}") if fraction else None
    if not whole.isdigit():
        whole = _ungrouped(whole)
        if not whole:
            return None
    return Decimal(f"{whole}.{fraction}" if fraction else whole)


def _ungrouped(whole: str) -> str:
    """The digits of a whole number without its thousands marks; empty where they are not set as such."""
    marks = {c for c in whole if not c.isdigit()}
    if len(marks) != 1:
        return ""
    groups = whole.split(marks.pop())
    if not 1 <= len(groups[0]) <= 3 or groups[0].startswith("0") or len(groups[-1]) != 3:
        return ""
    middle = {len(group) for group in groups[1:-1]}
    by_hundreds = middle == {2} and len(groups[0]) <= 2 and "," in whole  # 12,34,567 as written in India
    return "".join(groups) if middle <= {3} or by_hundreds else ""


def _tidy(number: Decimal) -> Decimal:
    """The same number without zeros at its end, without an exponent and without a negative zero."""
    return Decimal(canonical(number))


def _with_words(
    number: Decimal, parts: _Parts, text: str, style: NumberStyle, expected: Expected
) -> tuple[Decimal | None, Finding | None]:
    """The number in the light of the words that stand beside it."""
    first, *others = (word.strip() for word in re.split(r"/|\bper\b", parts.behind))
    unit = ""
    for place, word in enumerate((parts.before, first, *others)):
        currencies = currencies_of(word)
        if not word:
            continue
        if currencies:
            if expected not in ("money", "number"):
                return None, _refused("money for number", text, f"'{text}' is an amount of money.")
            if style.currency.upper() not in currencies:
                return None, _refused(
                    "other currency",
                    text,
                    f"'{text}' is in {word}, the week is in {style.currency}.",
                    f"Give the amount in {style.currency}, or set the week's currency on Rules.",
                )
        elif word == "%" and expected in ("percent", "number"):
            continue
        elif unclear_unit(word):
            return None, _unclear(text, word)
        elif (unit_of(word) or same_unit(word, style.unit)) and place != (1 if expected == "money" else 0):
            unit = unit_of(word) or word
        else:
            return None, _words(text)
    if not unit or expected == "number":
        return number, None
    return _in_unit(number, unit, text, style, expected)


def _in_unit(
    number: Decimal, unit: str, text: str, style: NumberStyle, expected: Expected
) -> tuple[Decimal | None, Finding | None]:
    wanted = {"quantity": style.unit, "money": style.unit, "distance": "km"}.get(expected, "")
    if not wanted or same_unit(unit, wanted) or unit == "unit" or (unit == "load" and expected == "money"):
        return (number, None) if wanted or unit in ("load", "unit") else (None, _words(text))
    by = factor(wanted, unit, style.pallet) if expected == "money" else factor(unit, wanted, style.pallet)
    converted = None if by is None else times(number, by)
    if by is None and "pallet" in (unit, unit_of(wanted)) and factor("kg", min(unit, wanted, key=_is_pallet)):
        return None, Finding(
            Severity.STOPS,
            "weight per pallet",
            f"'{text}' is in {unit}, this column is in {wanted}; what a pallet weighs is not known.",
            "Say what a pallet weighs, 0.8 t for instance, here or on Rules as Weight per pallet.",
            read=text,
            subject="pallet",
        )
    if by is None or converted is None or _significant(converted) > MOST_DIGITS:
        return None, _refused(
            "other unit",
            text,
            f"'{text}' is in {unit}, this column is in {wanted}.",
            f"Give the figure in {wanted}.",
        )
    return converted, Finding(
        Severity.NOTE, "unit converted", f"'{text}' was read as {canonical(converted)} {wanted}.", read=text
    )


def _is_pallet(unit: str) -> bool:
    return unit_of(unit) == "pallet"


def _significant(number: Decimal) -> int:
    return len(str(int("".join(map(str, number.as_tuple().digits)))).rstrip("0")) if number else 1


def mark_told_by(raw: Any) -> Literal[".", ",", "?", ""]:
    """The decimal mark that one cell tells of: '?' where both readings are possible and differ."""
    if not isinstance(raw, str) or isinstance(raw, (ErrorCell, FormulaCell)):
        return ""
    parts = _parts(raw)
    if parts is None:
        return ""
    point, comma = _value(parts.core, "."), _value(parts.core, ",")
    if point == comma:
        return ""
    if point is None:
        return ","
    return "." if comma is None else "?"


def both_readings(text: str) -> tuple[str, str]:
    """What a text means with a decimal point, and what with a decimal comma."""
    parts = _parts(text)
    values = [None if parts is None else _value(parts.core, mark) for mark in ".,"]
    first, second = ("" if value is None else canonical(value) for value in values)
    return first, second


def currency_beside(raw: Any) -> str:
    """The sign or code of a currency that stands beside a number in a text; empty where there is none."""
    parts = _parts(raw) if isinstance(raw, str) else None
    if parts is None:
        return ""
    words = (parts.before, *re.split(r"/|\bper\b", parts.behind))
    return next((word.strip() for word in words if currencies_of(word)), "")


def marks_told_by(cells: Iterable[Any]) -> tuple[dict[str, int], int | None]:
    """How many cells of a column tell of each mark, and where the first undecided one stands."""
    told = {".": 0, ",": 0, "?": 0}
    undecided = None
    for position, raw in enumerate(cells):
        mark = mark_told_by(raw) if isinstance(raw, str) else ""
        if mark:
            told[mark] += 1
            if mark == "?" and undecided is None:
                undecided = position
    return told, undecided


def _refused(rule: str, raw: Any, message: str, mend: str = "Type a number.") -> Finding:
    return Finding(Severity.STOPS, rule, message, mend, read=_shown(raw))


def _shown(raw: Any) -> str:
    text = str(raw)
    return text if len(text) <= 60 else text[:59] + "…"


def _words(text: str) -> Finding:
    plain = plain_text(text)
    if _DAY.fullmatch(plain):
        return _refused(
            "date for number", text, f"'{_shown(text)}' is a date or time; a number belongs here."
        )
    if _EXPONENT.fullmatch(plain):
        return _refused(
            "shortened number",
            text,
            f"'{_shown(text)}' is a number that a spreadsheet shortened; digits may be lost.",
            "Type the number in full.",
        )
    if plain.casefold().lstrip("+-") in ("nan", "inf", "infinity"):
        return _not_finite(text)
    digits = plain.translate({ord("O"): "0", ord("o"): "0", ord("l"): "1", ord("I"): "1"})
    if digits != plain and any(c.isdigit() for c in plain) and re.fullmatch(r"-?[\d.,]+", digits):
        return _refused(
            "not a number", text, f"'{_shown(text)}' has a letter among its digits.", f"Is {digits} meant?"
        )
    return _refused("not a number", text, f"'{_shown(text)}' is not a number.")


def _misfit(text: str, core: str, mark: str) -> Finding:
    called = {".": "point", ",": "comma"}
    other = "," if mark == "." else "."
    if _value(core, other) is not None:
        return _refused(
            "decimal mark",
            text,
            f"'{_shown(text)}' has a decimal {called[other]}; "
            f"numbers here are read with a decimal {called[mark]}.",
            f"Type it with a decimal {called[mark]}.",
        )
    return _refused("not a number", text, f"'{_shown(text)}' is not a number: its marks do not fit together.")


def _not_finite(raw: Any) -> Finding:
    return _refused("not a number", raw, f"'{raw}' is no number that can be planned with.")


def _too_many_digits(raw: Any) -> Finding:
    return _refused(
        "too many digits",
        raw,
        f"'{_shown(raw)}' has more than {MOST_DIGITS} significant digits.",
        "Round it, or use a larger unit.",
    )


def _unclear(text: str, word: str) -> Finding:
    meanings = " or ".join(unclear_unit(word))
    return Finding(
        Severity.STOPS,
        "unclear unit",
        f"'{text}': {word} may mean {meanings}.",
        "Say which unit is meant.",
        read=text,
    )


def spoilt(raw: str) -> Finding:
    """What to say of a cell that holds an error, or a formula without a stored result."""
    if isinstance(raw, ErrorCell):
        return Finding(
            Severity.STOPS,
            "error cell",
            f"The cell shows the error {raw} of a formula.",
            "Mend the formula, or type the figure.",
            read=str(raw),
        )
    return Finding(
        Severity.STOPS,
        "formula without value",
        "The cell has a formula whose result is not stored in the file.",
        "Open the file in a spreadsheet program, save it and upload it again, or type the figure.",
        read=str(raw),
    )
