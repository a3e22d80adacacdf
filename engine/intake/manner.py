"""How the columns of an upload are read: unit, currency and decimal mark of each, and what was asked."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from decimal import Decimal
from fractions import Fraction
from typing import Any

from engine.columns import Column, Kind
from engine.findings import Finding, Severity
from engine.intake.answers import Answers
from engine.intake.cells import address
from engine.intake.decimal_marks import CALLED, mark_of, told_by, usual_mark
from engine.intake.fields import NUMBER_KINDS
from engine.intake.grids import Grid
from engine.intake.headings import Heading, column_of, heading_of
from engine.intake.numbers import NumberStyle, currency_beside
from engine.intake.pallets import PALLET, WEIGHT, ask_weight, needs_weight, weight_in_kg
from engine.intake.recognise import Table
from engine.intake.units import currencies_of, factor, same_unit, times, unclear_unit

Part = Table | Grid
MONEY = frozenset({Kind.RATE, Kind.CHARGE, Kind.PRICE})
GRID_RATE = column_of("rates", "rate")


@dataclass(frozen=True, eq=False)
class Manner:
    """The styles to read by: `base` for the week, `marks` and `units` where a column has its own."""

    base: NumberStyle
    answers: Answers
    marks: Mapping[tuple[int, str], str] = field(default_factory=dict)
    units: Mapping[tuple[int, str], str] = field(default_factory=dict)
    usual: str = "."

    def style(self, part: Part, name: str) -> NumberStyle:
        """How the cells of one field of a table are read."""
        key = id(part), name
        return replace(
            self.base,
            decimal_mark=self.marks.get(key, self.usual),
            unit=self.units.get(key, self.base.unit),
        )

    def factor(self, part: Part, name: str) -> Fraction | None:
        """What a column's figures are multiplied by to be in the week's unit, None where they are in it."""
        unit = self.units.get((id(part), name))
        if unit is None:
            return None
        column = GRID_RATE if isinstance(part, Grid) else column_of(part.kind, name)
        by = factor(unit, "km" if column.kind is Kind.DISTANCE else self.base.unit, self.base.pallet)
        if by is None or by == 1:
            return None
        return 1 / by if column.kind in MONEY else by


def manner_of(
    parts: Sequence[Part], stated: Mapping[str, str], answers: Answers, otherwise: str = "."
) -> tuple[Manner, list[Finding]]:
    """How an upload is read, and what has to be asked or said about it.

    parts: the tables and grids; stated: the unit and currency that *Rules* name, where it does;
    otherwise: the decimal mark where nothing tells of one
    """
    findings: list[Finding] = []
    headings = [
        (part, name, text, heading_of(text))
        for part in parts
        for name, text in _number_headings(part).items()
    ]
    unit = stated.get("unit") or _told_unit(headings, answers, findings)
    currency = stated.get("currency") or _told_currency(headings, parts, findings)
    pallet = (
        weight_in_kg(stated["pallet"], stated.get("pallet name", ""), unit) if "pallet" in stated else None
    )
    answered = answers.to(WEIGHT, PALLET)
    if pallet is None and answered is not None:
        pallet = weight_in_kg(answered, unit="t")
    base = NumberStyle(otherwise, unit, currency, pallet)
    units: dict[tuple[int, str], str] = {}
    for part, name, text, heading in headings:
        other = _checked(part, name, text, heading, base, answers, findings)
        if other:
            units[id(part), name] = other
    marks, usual = _marks(parts, answers, otherwise, findings)
    return Manner(replace(base, decimal_mark=usual), answers, marks, units, usual), findings


def in_words(marks: Mapping[tuple[int, str], str], usual: str) -> str:
    """The decimal marks that an upload was read by."""
    used = {*marks.values()} or {usual}
    return " and ".join(CALLED[mark] for mark in sorted(used, reverse=True))


def _number_headings(part: Part) -> dict[str, str]:
    if isinstance(part, Grid):
        return {"rate": part.title}
    return {
        name: part.headings[column]
        for name, column in part.columns.items()
        if column in part.headings and column_of(part.kind, name).kind in NUMBER_KINDS
    }


def _column(part: Part, name: str) -> Column:
    return GRID_RATE if isinstance(part, Grid) else column_of(part.kind, name)


_Headings = Sequence[tuple[Part, str, str, Heading]]


def _told_unit(headings: _Headings, answers: Answers, findings: list[Finding]) -> str:
    """The unit that the headings of quantities tell of, else those of rates, else t."""
    for wanted in (Kind.QUANTITY, Kind.RATE):
        told: list[str] = []
        for part, name, _, heading in headings:
            if _column(part, name).kind is wanted and name not in ("load_size", "hold"):
                unit = heading.unit or answers.to("unclear unit", heading.unclear) or ""
                if unit and unit not in told:
                    told.append(unit)
        if told:
            unit = "t" if "t" in told else told[0]
            findings.append(
                Finding(Severity.NOTE, "unit told", f"Quantities are in {unit}, as the headings say.")
            )
            return unit
    return "t"


def _told_currency(headings: _Headings, parts: Sequence[Part], findings: list[Finding]) -> str:
    """The currency that headings tell of, else the cells of money; EUR where neither does."""
    told = [heading.currency for *_, heading in headings if heading.currency] or list(_beside_cells(parts))
    if not told:
        return "EUR"
    sign, meant = told[0], currencies_of(told[0])
    severity = Severity.NOTE if len(meant) == 1 else Severity.CHECK
    findings.append(
        Finding(
            severity, "currency told", f"Amounts are in {meant[0]}, as '{sign}' beside them says.",
            "Name the currency on Rules if another is meant.", read=sign,
        )
    )  # fmt: skip
    return meant[0]


def _beside_cells(parts: Sequence[Part]) -> Iterator[str]:
    for part in parts:
        for name, cells in _number_cells(part).items():
            if _column(part, name).kind in MONEY:
                texts = list(dict.fromkeys(cell for cell in cells if type(cell) is str))
                yield from (sign for sign in map(currency_beside, texts[:200]) if sign)


def _checked(
    part: Part,
    name: str,
    text: str,
    heading: Heading,
    base: NumberStyle,
    answers: Answers,
    findings: list[Finding],
) -> str:
    """The column's own unit where it is not the week's; what does not fit the week is said."""
    column = _column(part, name)
    place = _heading_place(part, name)
    if heading.currency and base.currency.upper() not in currencies_of(heading.currency):
        findings.append(
            Finding(
                Severity.STOPS, "column in other currency",
                f"The heading '{text}' is in {heading.currency.upper()}, the week is in {base.currency}.",
                f"Give the amounts in {base.currency}, or set the week's currency on Rules.",
                *place, read=text,
            )
        )  # fmt: skip
    unit = heading.unit
    if heading.unclear:
        unit = answers.to("unclear unit", heading.unclear) or ""
        if not unit:
            findings.append(
                Finding(
                    Severity.STOPS, "unclear unit",
                    f"The heading '{text}': {heading.unclear} may mean "
                    f"{' or '.join(unclear_unit(heading.unclear))}.",
                    "Say which unit is meant.", *place, read=text,
                    subject=heading.unclear, options=unclear_unit(heading.unclear),
                )
            )  # fmt: skip
    if column.kind is Kind.DISTANCE:
        return "mile" if unit == "mile" or heading.words == "miles" else ""
    if not unit or same_unit(unit, base.unit) or column.kind not in _IN_UNITS:
        return ""
    by = factor(unit, base.unit, base.pallet)
    if by is None and needs_weight(unit, base.unit):
        what = f"The heading '{text}' is in {unit}s, the week is in {base.unit}"
        if unit != PALLET:
            what = f"The heading '{text}' is in {unit}, the week is in {base.unit}s"
        question = ask_weight(f"{what.removesuffix('ss')}; what a pallet weighs is not known.", text)
        findings.append(replace(question, file=place[0], sheet=place[1], cell=place[2]))
        return ""
    if by is not None and times(Decimal(1), by if column.kind is Kind.QUANTITY else 1 / by) is None:
        by = None
    if by is None:
        findings.append(
            Finding(
                Severity.STOPS, "column in other unit",
                f"The heading '{text}' is in {unit}, the week is in {base.unit}; that cannot be converted.",
                f"Give the column in {base.unit}.", *place, read=text,
            )
        )  # fmt: skip
        return ""
    findings.append(
        Finding(
            Severity.NOTE, "unit converted",
            f"'{text}' was turned from {unit} into {base.unit}: "
            f"{unit if unit[0].isdigit() else f'1 {unit}'} is {_fraction(by)} {base.unit}.",
            "", *place, read=text,
        )
    )  # fmt: skip
    return unit


_IN_UNITS = MONEY | {Kind.QUANTITY}


def _fraction(by: Fraction) -> str:
    return f"{float(by):.10g}"


def _heading_place(part: Part, name: str) -> tuple[str, str, str]:
    column = part.side if isinstance(part, Grid) else part.columns[name]
    return part.sheet.file, part.sheet.name, address(part.head, column)


def _marks(
    parts: Sequence[Part], answers: Answers, otherwise: str, findings: list[Finding]
) -> tuple[dict[tuple[int, str], str], str]:
    told = {
        (id(part), name): (part, name, cells, told_by(cells))
        for part in parts
        for name, cells in _number_cells(part).items()
    }
    marks: dict[tuple[int, str], str] = {}
    all_told = usual_mark((one[3] for one in told.values()), otherwise)
    for key, (part, name, cells, one) in told.items():
        file = part.sheet.file
        usual = usual_mark((t for p, _, _, t in told.values() if p.sheet.file == file), all_told)
        heading = _column(part, name).heading
        mark, position, question = mark_of(one, heading, cells, usual, answers)
        if mark != all_told or one.point or one.comma:
            marks[key] = mark
        if question is not None and position is not None and _column(part, name).kind not in _DEGREES:
            file, sheet, cell = _place_of(part, name, position)
            findings.append(replace(question, file=file, sheet=sheet, cell=cell))
    return marks, all_told


_DEGREES = frozenset({Kind.LATITUDE, Kind.LONGITUDE})


def _number_cells(part: Part) -> dict[str, Sequence[Any]]:
    if isinstance(part, Grid):
        return {"rate": part.cells} if part.has_text else {}
    return {
        name: part.cells(name) for name in part.columns if column_of(part.kind, name).kind in NUMBER_KINDS
    }


def _place_of(part: Part, name: str, position: int) -> tuple[str, str, str]:
    if isinstance(part, Grid):
        row, column = divmod(position, len(part.columns))
        cell = address(part.rows[row], part.columns[column])
    else:
        cell = address(part.head + 1 + position, part.columns[name])
    return part.sheet.file, part.sheet.name, cell
