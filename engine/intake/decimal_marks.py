"""The decimal mark of each column of numbers: told by the column itself, otherwise assumed and asked."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from engine.findings import Finding, Severity
from engine.intake.answers import Answers
from engine.intake.numbers import both_readings, marks_told_by

CALLED = {".": "decimal point", ",": "decimal comma"}
_MARK_OF = {word: mark for mark, word in CALLED.items()}


@dataclass(frozen=True, slots=True)
class Told:
    """What one column tells: cells for a point, cells for a comma, and the first cell that tells neither."""

    point: int
    comma: int
    undecided: int | None


def told_by(cells: Sequence[Any]) -> Told:
    """What a column of cells tells of its decimal mark; a workbook's own numbers tell nothing."""
    if set(map(type, cells)) <= {float, int}:
        return Told(0, 0, None)
    texts = list(dict.fromkeys(cell for cell in cells if type(cell) is str))
    told, undecided = marks_told_by(texts)
    return Told(told["."], told[","], None if undecided is None else cells.index(texts[undecided]))


def usual_mark(columns: Iterable[Told], otherwise: str) -> str:
    """The mark that the columns of a file tell of where they agree, else `otherwise`."""
    columns = list(columns)
    point, comma = sum(told.point for told in columns), sum(told.comma for told in columns)
    if point and not comma:
        return "."
    return "," if comma and not point else otherwise


def mark_of(
    told: Told, heading: str, cells: Sequence[Any], usual: str, answers: Answers
) -> tuple[str, int | None, Finding | None]:
    """The mark to read a column by, and where and what to ask when the column does not settle it."""
    if told.point != told.comma:
        return ("." if told.point > told.comma else ","), None, None
    answer = answers.to("which mark", heading)
    if answer in _MARK_OF:
        return _MARK_OF[answer], None, None
    if told.undecided is None:
        return usual, None, None
    text = str(cells[told.undecided])
    point, comma = both_readings(text)
    question = Finding(
        Severity.CHECK,
        "which mark",
        f"{heading}: '{text}' is {point} with a decimal point and {comma} with a decimal comma; "
        f"the column was read with a {CALLED[usual]}.",
        "Say which mark is meant.",
        read=text,
        subject=heading,
        options=tuple(_MARK_OF),
    )
    return usual, told.undecided, question
