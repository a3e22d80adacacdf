"""What a week is compared with: the week before it, and the rule that the desk usually goes by."""

from sqlalchemy import select

from engine.intake.answers import Answers
from engine.records.answers import load_answers, save_answers
from engine.records.failures import reading
from engine.records.opening import Records
from engine.records.schema import weeks
from engine.records.weeks import DESK, Listed, listed_in

USUAL_PLAN = "usual plan"
"""What the desk's answer goes by: how it would have planned without the tool."""


def week_before(records: Records, week_id: str) -> Listed | None:
    """The week of the same desk, unit and currency that was opened last before this one; None for none.

    Raises:
        NotSaved: the records cannot be read.
    """
    this = select(weeks).where(weeks.c.id == week_id)
    with reading("the week before", records.where), records.read() as connection:
        head = connection.execute(this).mappings().one_or_none()
        if head is None:
            return None
        query = (
            select(weeks)
            .where(weeks.c.id != week_id, weeks.c.archived.is_(None), weeks.c.created <= head["created"])
            .where(*(weeks.c[name] == head[name] for name in ("desk", "unit", "currency")))
            .order_by(weeks.c.created.desc(), weeks.c.id)
            .limit(1)
        )
        found = connection.execute(query).mappings().one_or_none()
    return None if found is None else listed_in(found)


def usual_rule(records: Records, desk: str = DESK) -> str:
    """The rule that the desk said it usually goes by, empty where it said nothing."""
    return load_answers(records, desk).to(USUAL_PLAN, "") or ""


def keep_usual_rule(records: Records, rule: str, desk: str = DESK) -> None:
    """Remember the rule that the desk usually goes by.

    Raises:
        NotSaved: it could not be written.
    """
    save_answers(records, Answers({(USUAL_PLAN, ""): rule}), Answers(), desk)
