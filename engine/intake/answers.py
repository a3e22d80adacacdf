"""What a desk has answered and accepted, so that next week does not ask again."""

import json
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from types import MappingProxyType

from engine.findings import Finding, Severity
from engine.intake.names import folded
from engine.intake.pallets import WEIGHT, weight_in_kg


@dataclass(frozen=True)
class Answers:
    """Answers by the rule and subject of the finding that asked, and the keys of accepted findings.

    Findings that can be answered carry `options`; the answer is one of them. The rules that ask:
    'which mark' (a column's decimal mark), 'which column' and 'missing …' (a heading nobody knows),
    'unknown name' (a name that is nearly another), 'same depot twice', 'unclear unit', 'several products',
    and 'weight per pallet', which is answered with a weight.
    """

    given: Mapping[tuple[str, str], str] = field(default_factory=lambda: MappingProxyType({}))
    accepted: frozenset[str] = frozenset()

    def to(self, rule: str, subject: str) -> str | None:
        """The answer to a question, None where there is none yet."""
        return self.given.get((rule, folded(subject)))

    def with_answer(self, finding: Finding, answer: str) -> "Answers":
        """These answers and one more.

        Raises:
            ValueError: the finding asks nothing, or the answer is none of its options.
        """
        if not finding.subject or (finding.options and answer not in finding.options):
            raise ValueError(f"'{answer}' is no answer to: {finding.message}")
        if finding.rule == WEIGHT and weight_in_kg(answer) is None:
            raise ValueError(f"'{answer}' is no weight: type it with its unit, 0.8 t for instance.")
        key = finding.rule, folded(finding.subject)
        return replace(self, given=MappingProxyType({**self.given, key: answer}))

    def with_accepted(self, finding: Finding) -> "Answers":
        """These answers, and that a finding to be checked is as it should be.

        Raises:
            ValueError: the finding is not one to be checked.
        """
        if finding.severity is not Severity.CHECK:
            raise ValueError(f"Only what is to be checked can be accepted, not: {finding.message}")
        return replace(self, accepted=self.accepted | {key_of(finding)})

    def parted(self, findings: Iterable[Finding]) -> tuple[list[Finding], list[Finding]]:
        """The findings that are still open, and those that were accepted."""
        still: list[Finding] = []
        accepted: list[Finding] = []
        for finding in findings:
            is_accepted = finding.severity is Severity.CHECK and key_of(finding) in self.accepted
            (accepted if is_accepted else still).append(finding)
        return still, accepted

    def as_json(self) -> str:
        """The answers as text to keep."""
        given = [[rule, subject, answer] for (rule, subject), answer in sorted(self.given.items())]
        return json.dumps({"given": given, "accepted": sorted(self.accepted)}, ensure_ascii=False)

    @classmethod
    def from_json(cls, text: str) -> "Answers":
        """The answers that `as_json` wrote.

        Raises:
            ValueError: the text is something else.
        """
        try:
            kept = json.loads(text)
            given = {(str(rule), str(subject)): str(answer) for rule, subject, answer in kept["given"]}
            return cls(MappingProxyType(given), frozenset(map(str, kept["accepted"])))
        except (KeyError, TypeError, ValueError) as error:
            raise ValueError("These are no answers that were kept earlier.") from error


def key_of(finding: Finding) -> str:
    """What an accepted finding is known by next week: its rule and what it says, wherever it stands then."""
    return f"{finding.rule}: {folded(finding.subject or finding.message)}"
