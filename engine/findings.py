"""A finding: a remark on the figures that says where, what was read, which rule, and how to mend it."""

from collections.abc import Iterable
from dataclasses import dataclass
from enum import IntEnum


class Severity(IntEnum):
    """How much a finding matters; sorts with the gravest first."""

    STOPS = 0
    CHECK = 1
    NOTE = 2

    @property
    def word(self) -> str:
        return self.name.lower()


@dataclass(frozen=True, slots=True)
class Finding:
    """One remark.

    `sheet` and `cell` are empty where the remark is on no single cell. `message` is a whole sentence
    for a person; `rule` is a short fixed name that tests and answers can go by; `read` is what stood in
    the cell; `mend` says what to do. `rows` counts the sheet rows that the remark sets aside.
    Where it asks a question, `options` are the possible answers, and (`rule`, `subject`) is what an
    answer is remembered by.
    """

    severity: Severity
    rule: str
    message: str
    mend: str = ""
    file: str = ""
    sheet: str = ""
    cell: str = ""
    read: str = ""
    rows: int = 0
    subject: str = ""
    options: tuple[str, ...] = ()

    @property
    def place(self) -> str:
        """Where it is, for a person: file, sheet and cell as far as they are known."""
        where = " ".join(part for part in (self.sheet, self.cell) if part)
        return f"{self.file}: {where}" if self.file and where else self.file or where


def stops(findings: Iterable[Finding]) -> bool:
    """Whether any finding keeps the week from being planned."""
    return any(finding.severity is Severity.STOPS for finding in findings)


def by_gravity(findings: Iterable[Finding]) -> list[Finding]:
    """The findings, gravest first, otherwise in the order found."""
    return sorted(findings, key=lambda finding: finding.severity)
