"""The desk's settings from the *Rules* sheet."""

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from engine.columns import Column
from engine.figures import WHEN_SHORT, Rules
from engine.findings import Finding, Severity
from engine.intake.answers import Answers
from engine.intake.build_lists import Built, Unused
from engine.intake.cells import address
from engine.intake.fields import NUMBER_KINDS, read_field, text_of
from engine.intake.headings import rule_of
from engine.intake.numbers import NumberStyle, is_blank
from engine.intake.pallets import is_weight_rule, not_a_weight, weight_in_kg
from engine.intake.places import Spot
from engine.intake.recognise import Table
from engine.intake.remarks import Counts, Remark, gathered
from engine.intake.units import currencies_of, plain_unit, unclear_unit


def stated_by(tables: Sequence[Table], answers: Answers) -> dict[str, str]:
    """The unit and currency that *Rules* name, as far as they are clear: what other figures are read by."""
    stated: dict[str, str] = {}
    for table in tables:
        for name, raw in zip(table.cells("rule"), table.cells("value"), strict=True):
            column = rule_of(text_of(name)) if not is_blank(name) and not is_blank(raw) else None
            if not is_blank(name) and not is_blank(raw) and is_weight_rule(text_of(name)):
                stated |= {"pallet": text_of(raw), "pallet name": text_of(name)}
            if column is None or column.field in stated:
                continue
            text = text_of(raw)
            if column.field == "unit":
                unit = answers.to("unclear unit", text) if unclear_unit(text) else plain_unit(text)
                if unit:
                    stated["unit"] = unit
            elif column.field == "currency":
                meant = currencies_of(text)
                if len(meant) == 1:
                    stated["currency"] = meant[0]
    return stated


def build_rules(tables: Sequence[Table], style: NumberStyle, answers: Answers) -> Built:
    """The rules; what *Rules* do not say takes its default, and the unit and currency as read by.

    style: its unit and currency are those that the other figures were read by
    """
    rules = Rules(unit=style.unit, currency=style.currency)
    findings: list[Finding] = []
    spots: dict[tuple[str, str], Spot] = {}
    unused: list[Unused] = []
    counts = Counts()
    if not tables:
        findings.append(
            Finding(
                Severity.NOTE, "no rules",
                f"There is no sheet Rules: quantities are in {rules.unit}, money in {rules.currency}, "
                "no surcharge, when short by charge.",
            )
        )  # fmt: skip
    for table in tables:
        remarks: list[Remark] = []
        read = 0
        for number in range(table.head + 1, table.end):
            row = table.sheet.rows[number]
            name, raw = row[table.columns["rule"]], row[table.columns["value"]]
            if is_blank(name) and is_blank(raw):
                continue
            read += 1
            column = rule_of(text_of(name)) if not is_blank(name) else None
            if column is None and not is_blank(name) and is_weight_rule(text_of(name)):
                if not is_blank(raw) and weight_in_kg(raw, text_of(name), style.unit) is None:
                    remarks.append(Remark(number, "value", not_a_weight(raw)))
            elif column is None and is_blank(raw):
                remarks.append(Remark(number, "rule", _note(text_of(name)), True))
            elif column is None:
                remarks.append(Remark(number, "rule", _unknown(text_of(name)), True))
            elif ("rules", column.field) in spots:
                remarks.append(Remark(number, "rule", _twice(column), True))
            else:
                spots["rules", column.field] = Spot(table.sheet, number, table.columns)
                value, finding = _value(column, raw, style, answers)
                if finding is not None:
                    remarks.append(Remark(number, "value", finding))
                    if finding.severity is Severity.STOPS:
                        unused.append(Unused("rules", {"value": text_of(raw)}, column.field))
                if value is not None:
                    rules = replace(rules, **{column.field: value})
        found, named = gathered(remarks, table.sheet, lambda remark, t=table: t.columns[remark.field])  # type: ignore[misc]
        findings.extend(found)
        counts = counts.plus(Counts(read, read - named, named))
    return Built((rules,), spots, tuple(findings), counts, tuple(unused))


def read_rule(column: Column, raw: Any, style: NumberStyle) -> tuple[Any, Finding | None]:
    """The value of one rule as typed, and what there is to say about it; blank gives (None, None)."""
    return _value(column, raw, style, Answers())


def _value(column: Column, raw: Any, style: NumberStyle, answers: Answers) -> tuple[Any, Finding | None]:
    if is_blank(raw):
        return None, None
    if column.field == "when_short":
        text = " ".join(text_of(raw).casefold().replace("-", " ").split())
        if text in WHEN_SHORT:
            return text, None
        return None, _no_rule(column, raw, f"takes {', '.join(WHEN_SHORT[:-1])} or {WHEN_SHORT[-1]}")
    if column.field == "currency":
        meant = currencies_of(text_of(raw))
        if len(meant) == 1:
            return meant[0], None
        text = text_of(raw).upper()
        if not meant and len(text) == 3 and text.isalpha() and text.isascii():
            return text, None
        return None, _no_rule(column, raw, "takes the three letters of a currency, such as EUR")
    if column.field == "unit":
        text = text_of(raw)
        meanings = unclear_unit(text)
        if meanings:
            answer = answers.to("unclear unit", text)
            if answer:
                return answer, None
            return None, Finding(
                Severity.STOPS, "unclear unit", f"Unit: {text} may mean {' or '.join(meanings)}.",
                "Say which unit is meant.", read=text, subject=text, options=meanings,
            )  # fmt: skip
        return plain_unit(text), None
    value, finding = read_field(column, raw, style)
    if column.field in ("load_size", "step", "days") and value is not None and value <= 0:
        return None, _no_rule(column, raw, "takes a number above 0")
    if column.kind in NUMBER_KINDS and finding is not None and value is None:
        return None, finding
    return value, finding


def _no_rule(column: Column, raw: Any, takes: str) -> Finding:
    text = text_of(raw)[:60]
    return Finding(
        Severity.STOPS, "rule", f"{column.heading} is '{text}', but {takes}.", "Type one of these.", read=text
    )


def _unknown(name: str) -> Finding:
    return Finding(
        Severity.CHECK, "unknown rule", f"'{name[:60]}' is no rule that is known; it was left out.",
        "Check the spelling, or clear the row.", read=name[:60],
    )  # fmt: skip


def _note(text: str) -> Finding:
    return Finding(
        Severity.NOTE,
        "remark left out",
        f"'{text[:60]}' was taken as a remark, not as a rule.",
        read=text[:60],
    )


def _twice(column: Column) -> Finding:
    return Finding(
        Severity.STOPS, "rule twice", f"The rule {column.heading} stands twice; the first one is used.",
        "Take one out.", read=column.heading,
    )  # fmt: skip


def rule_cell(spot: Spot) -> str:
    """The address of a rule's value."""
    return address(spot.row, spot.columns["value"])
