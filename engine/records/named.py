"""A week of the records as somebody names it in a command: by its id or name, a plan by its number."""

from dataclasses import dataclass

from sqlalchemy import func, select

from engine.records.failures import Missing, reading
from engine.records.opening import Records
from engine.records.plans import Issued, find_plan, list_plans
from engine.records.schema import weeks
from engine.records.weeks import Listed, Opened, listed_in, open_week

MOST_SAID = 8


@dataclass(frozen=True)
class Named:
    """A week, and its plan as it was issued where a plan was named."""

    opened: Opened
    issued: Issued | None = None


def find_named(records: Records, said: str) -> Named:
    """The week, or the issued plan of it, that `said` names: "Week 6", "Week 6#2" for its plan 2, or an id.

    Names may be in capitals or not. A name that stands for several weeks is not guessed at.

    Raises:
        Missing: nothing goes by that name, or several weeks do; the message says which.
        NotSaved: the records cannot be read.
    """
    found = _weeks(records, said)
    name, mark, number = said.rpartition("#")
    plan = None
    if not found and mark and number.strip().isascii() and number.strip().isdigit():
        found, plan = _weeks(records, name), int(number)
    if not found:
        raise Missing(f"No week goes by the name or id '{said}' (the records are {records.where}).")
    if len(found) > 1:
        listed = "; ".join(f"{one.id}, opened {_when(one)}" for one in found[:MOST_SAID])
        more = f"; and {len(found) - MOST_SAID} more" if len(found) > MOST_SAID else ""
        raise Missing(f"{len(found)} weeks are named '{found[0].name}': give the id of one. {listed}{more}.")
    opened = open_week(records, found[0].id)
    if plan is None:
        return Named(opened)
    if plan not in [one[0] for one in list_plans(records, opened.listed.id)]:
        raise Missing(f"No plan {plan} of '{opened.listed.name}' was issued.")
    return Named(opened, find_plan(records, opened.listed.id, plan))


def _when(week: Listed) -> str:
    return f"{week.created.astimezone():%d %b %Y %H:%M}"


def _weeks(records: Records, said: str) -> list[Listed]:
    """The weeks of this id, else those of this name that are not archived, the latest first."""
    by_id = select(weeks).where(weeks.c.id == said)
    by_name = select(weeks).where(
        func.lower(weeks.c.name) == said.strip().lower(), weeks.c.archived.is_(None)
    )
    with reading("the week", records.where), records.read() as connection:
        for query in (by_id, by_name.order_by(weeks.c.created.desc(), weeks.c.id)):
            found = [listed_in(row) for row in connection.execute(query).mappings()]
            if found:
                return found
    return []
