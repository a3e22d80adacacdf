"""What a desk has answered to questions about its figures, kept from week to week."""

from datetime import UTC, datetime

from sqlalchemy import delete, select
from sqlalchemy.dialects import postgresql, sqlite

from engine.intake.answers import Answers
from engine.records.failures import reading, saving
from engine.records.opening import Records
from engine.records.schema import answers
from engine.records.weeks import DESK


def load_answers(records: Records, desk: str = DESK) -> Answers:
    """Everything the desk has answered so far."""
    query = select(answers).where(answers.c.desk == desk)
    with reading("the desk's answers", records.where), records.read() as connection:
        return Answers({(row.rule, row.subject): row.answer for row in connection.execute(query)})


def save_answer(records: Records, rule: str, subject: str, answer: str, desk: str = DESK) -> None:
    """Remember an answer; it replaces an earlier one to the same question.

    rule, subject: as `Answers.given` has them, the subject folded

    Raises:
        NotSaved: it could not be written.
    """
    row = {
        "desk": desk, "rule": rule, "subject": subject, "answer": answer, "given": datetime.now(UTC),
    }  # fmt: skip
    with saving(f"the answer '{answer}'", records.where), records.write() as connection:
        dialect = postgresql if connection.dialect.name == "postgresql" else sqlite
        connection.execute(
            dialect.insert(answers)
            .values(row)
            .on_conflict_do_update(
                index_elements=["desk", "rule", "subject"],
                set_={"answer": answer, "given": row["given"]},
            )
        )


def forget_answer(records: Records, rule: str, subject: str, desk: str = DESK) -> None:
    """Let a question be asked again."""
    with saving("that the answer is forgotten", records.where), records.write() as connection:
        connection.execute(
            delete(answers).where(
                answers.c.desk == desk, answers.c.rule == rule, answers.c.subject == subject
            )
        )
