"""What a desk has answered to questions about its figures, so that next week does not ask again."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from engine.findings import Finding
from engine.intake.names import folded


@dataclass(frozen=True)
class Answers:
    """Answers by the rule and subject of the finding that asked.

    Findings that can be answered carry `options`; the answer is one of them. The rules that ask:
    'which mark' (a column's decimal mark), 'which column' (a heading nobody knows), 'which name' (a
    name that is nearly another), 'same depot twice', 'unclear unit', 'which way round' (a grid).
    """

    given: Mapping[tuple[str, str], str] = field(default_factory=lambda: MappingProxyType({}))

    def to(self, rule: str, subject: str) -> str | None:
        """The answer to a question, None where there is none yet."""
        return self.given.get((rule, folded(subject)))

    def with_answer(self, finding: Finding, answer: str) -> "Answers":
        """These answers and one more.

        Raises:
            ValueError: the finding asks nothing.
        """
        if not finding.subject:
            raise ValueError(f"The remark '{finding.rule}' asks no question that could be answered.")
        key = finding.rule, folded(finding.subject)
        return Answers(MappingProxyType({**self.given, key: answer}))
