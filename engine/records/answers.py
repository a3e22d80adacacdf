"""What a desk has answered and accepted about its figures, kept from week to week."""

from datetime import UTC, datetime
from types import MappingProxyType

from sqlalchemy import delete, select
from sqlalchemy.dialects import postgresql, sqlite

from engine.intake.answers import Answers
from engine.records.failures import reading, saving
from engine.records.opening import Records
from engine.records.schema import answers
from engine.records.weeks import DESK

ACCEPTED = "accepted"
"""The rule under which accepted findings stand in the table; their subject is the key of the finding."""


def load_answers(records: Records, desk: str = DESK) -> Answers:
    """Everything the desk has answered and accepted so far."""
    query = select(answers).where(answers.c.desk == desk)
    with reading("the desk's answers", records.where), records.read() as connection:
        rows = connection.execute(query).all()
    given = {(row.rule, row.subject): row.answer for row in rows if row.rule != ACCEPTED}
    return Answers(MappingProxyType(given), frozenset(row.subject for row in rows if row.rule == ACCEPTED))


def save_answers(records: Records, now: Answers, before: Answers | None = None, desk: str = DESK) -> None:
    """Remember what was answered or accepted, or taken back, since `before`.

    Only the difference is written, so that two people who answer at once do not forget each other's.

    Raises:
        NotSaved: it could not be written.
    """
    new, old = _rows(now), _rows(before or Answers())
    with saving("the desk's answers", records.where), records.write() as connection:
        dialect = postgresql if connection.dialect.name == "postgresql" else sqlite
        for rule, subject in old.keys() - new.keys():
            found = answers.c.desk == desk, answers.c.rule == rule, answers.c.subject == subject
            connection.execute(delete(answers).where(*found))
        for (rule, subject), answer in sorted(new.items()):
            if old.get((rule, subject)) == answer:
                continue
            said = {"answer": answer, "given": datetime.now(UTC)}
            row = {"desk": desk, "rule": rule, "subject": subject, **said}
            key = ["desk", "rule", "subject"]
            put = dialect.insert(answers).values(row)
            connection.execute(put.on_conflict_do_update(index_elements=key, set_=said))


def _rows(kept: Answers) -> dict[tuple[str, str], str]:
    return {**kept.given, **{(ACCEPTED, key): "yes" for key in kept.accepted}}
