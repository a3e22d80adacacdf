"""Remarks on single cells gathered into findings: the first ones each by its cell, many alike as one."""

from collections.abc import Callable, Iterable
from dataclasses import replace
from typing import NamedTuple

from engine.findings import Finding
from engine.intake.cells import Sheet, address

MOST_ALIKE = 20
"""So many findings of one rule in one column are listed; the rest is counted in one more."""


class Remark(NamedTuple):
    """A finding on the cell of a field in a row of a table; `sets_aside`: the row is not used for it."""

    row: int
    field: str
    finding: Finding
    sets_aside: bool = False


class Counts(NamedTuple):
    """Rows below headings that hold anything: all of them are either used or named in findings."""

    read: int = 0
    used: int = 0
    named: int = 0

    def plus(self, other: "Counts") -> "Counts":
        return Counts(self.read + other.read, self.used + other.used, self.named + other.named)


def counted(number: int, word: str) -> str:
    """A number of things in words: 1 row, 2 rows."""
    return f"{number} {word}{'' if number == 1 else 's'}"


def gathered(
    remarks: Iterable[Remark], sheet: Sheet, column_of: Callable[[Remark], int]
) -> tuple[list[Finding], int]:
    """Findings with sheet and cell, and how many rows they set aside; a row is counted once."""
    claimed: set[int] = set()
    findings: list[Finding] = []
    alike: dict[tuple[str, str], list[Finding]] = {}
    for remark in sorted(remarks, key=lambda remark: remark.row):
        rows = int(remark.sets_aside and remark.row not in claimed)
        if rows:
            claimed.add(remark.row)
        key = remark.finding.rule, remark.field
        seen = alike.setdefault(key, [])
        if len(seen) < MOST_ALIKE:
            cell = address(remark.row, column_of(remark))
            finding = replace(remark.finding, file=sheet.file, sheet=sheet.name, cell=cell, rows=rows)
            findings.append(finding)
            seen.append(finding)
        elif len(seen) == MOST_ALIKE:
            more = replace(
                seen[-1], message="", cell=address(remark.row, column_of(remark)), rows=rows, read="1"
            )
            seen.append(more)
        else:
            last = seen[-1]
            seen[-1] = replace(last, rows=last.rows + rows, read=str(int(last.read) + 1))
    for seen in alike.values():
        if len(seen) > MOST_ALIKE:
            findings.append(_more(seen[-1], seen[0]))
    return findings, len(claimed)


def _more(rest: Finding, example: Finding) -> Finding:
    return replace(
        rest,
        message=f"{rest.read} more cells from {rest.cell} on are like {example.cell}: {example.message}",
        read="",
        subject="",
        options=(),
    )
