"""What a pallet weighs on this desk: named on *Rules* or answered once, and asked where it is needed."""

import re
from fractions import Fraction

from engine.findings import Finding, Severity
from engine.intake.fields import text_of
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle, read_number
from engine.intake.units import factor, unit_of

WEIGHT, PALLET = "weight per pallet", "pallet"
MEND = "Say what a pallet weighs, 0.8 t for instance, here or on Rules as Weight per pallet."
_NAME = re.compile(
    r"(?:average |usual )?(?:weight (?:per|of a|of one|a) pallet|pallet weight|(?P<unit>\w+) per pallet)"
)


def is_weight_rule(name: str) -> bool:
    """Whether a name on *Rules* is that of the weight of a pallet."""
    return _named(name) is not None


def weight_in_kg(raw: object, name: str = "", unit: str = "t", decimal_mark: str = ".") -> Fraction | None:
    """What a pallet weighs in kg; None where the text is no weight above 0.

    name: what stands on *Rules*, which may name the unit; unit: the week's, meant where none is named
    """
    found = _named(name)
    named = unit_of(found["unit"] or "") if found else None
    in_brackets = re.search(r"[(\[]\s*(\w+)\s*[)\]]", name)
    if in_brackets:
        named = unit_of(in_brackets[1]) or named
    meant = named or (unit if factor(unit, "kg") is not None else "t")
    number, _ = read_number(raw, NumberStyle(decimal_mark, meant), "quantity")
    by = factor(meant, "kg")
    return None if number is None or by is None or number <= 0 else Fraction(number) * by


def ask_weight(what: str, read: str) -> Finding:
    """The question what a pallet weighs. what: the figures that are in pallets, or are not, as a sentence."""
    return Finding(Severity.STOPS, WEIGHT, what, MEND, read=read, subject=PALLET)


def not_a_weight(raw: object) -> Finding:
    """That a pallet's weight on *Rules* is none."""
    text = text_of(raw)[:60]
    return Finding(
        Severity.STOPS,
        "rule",
        f"Weight per pallet is '{text}', but takes a weight above 0.",
        "Type it with its unit, 0.8 t for instance.",
        read=text,
    )


def needs_weight(first: str, second: str) -> bool:
    """Whether only the weight of a pallet turns one unit into the other."""
    units = unit_of(first), unit_of(second)
    return PALLET in units and any(factor(unit or "", "kg") is not None for unit in units)


def _named(name: str) -> re.Match[str] | None:
    plain = re.sub(r"[(\[].*?[)\]]", " ", folded(name)).strip(" :.")
    found = _NAME.fullmatch(" ".join(plain.split()))
    if found and found["unit"] and factor(found["unit"], "kg") is None:
        return None
    return found
