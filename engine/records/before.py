"""What a week is compared with at first: the week before it."""

from sqlalchemy import select

from engine.records.failures import reading
from engine.records.opening import Records
from engine.records.schema import weeks
from engine.records.weeks import Listed, listed_in


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
