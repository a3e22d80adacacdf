"""What the latest plan of each week adds up to."""

from collections.abc import Collection
from dataclasses import dataclass
from decimal import Decimal

from sqlalchemy import insert, select, update

from engine.exact import total_of
from engine.planning.plan import Plan
from engine.records.decimals import as_row, from_row
from engine.records.failures import reading, saving
from engine.records.opening import Records
from engine.records.schema import totals, weeks
from engine.records.weeks import DESK, Listed, listed_in, of_desk

SUMS = ("ordered", "delivered", "short", "unsent", "freight_payable")


@dataclass(frozen=True, slots=True)
class WeekTotals:
    """A week and its sums: quantities in the week's unit, money in its currency."""

    week: Listed
    status: str
    ordered: Decimal
    delivered: Decimal
    short: Decimal
    unsent: Decimal
    freight_payable: Decimal


def note_totals(records: Records, week_id: str, version: int, plan: Plan) -> None:
    """Keep what the plan of a week at a version adds up to, unless a later version's is there already.

    Raises:
        NotSaved: it could not be written.
    """
    sums = {
        "ordered": total_of(customer.ordered for customer in plan.week.customers.values()),
        "delivered": total_of(shipment.quantity for shipment in plan.shipments),
        "short": total_of(one.quantity for one in plan.short),
        "unsent": total_of(one.quantity for one in plan.unsent),
        "freight_payable": plan.freight_payable,
    }
    row = {"week_id": week_id, "version": version, "status": plan.status, **as_row(sums, SUMS)}
    with saving("the totals of the week", records.where), records.write() as connection:
        # The row of the week is locked first, so that of two plans the later version's stays.
        connection.execute(select(weeks.c.id).where(weeks.c.id == week_id).with_for_update())
        kept = connection.execute(select(totals.c.version).where(totals.c.week_id == week_id)).scalar()
        if kept is None:
            connection.execute(insert(totals).values(row))
        elif kept <= version:
            connection.execute(update(totals).where(totals.c.week_id == week_id).values(row))


def totals_by_week(
    records: Records, desk: str | Collection[str] | None = DESK, limit: int = 60
) -> list[WeekTotals]:
    """The totals of the latest weeks that were planned and are not archived, earliest first."""
    latest = (
        select(weeks)
        .where(of_desk(desk), weeks.c.archived.is_(None), weeks.c.id.in_(select(totals.c.week_id)))
        .order_by(weeks.c.created.desc(), weeks.c.id)
        .limit(limit)
    )
    with reading("the totals", records.where), records.read() as connection:
        listed = [listed_in(row) for row in connection.execute(latest).mappings()]
        query = select(totals).where(totals.c.week_id.in_([week.id for week in listed]))
        sums = {row["week_id"]: row for row in connection.execute(query).mappings()}
        return [
            WeekTotals(week, sums[week.id]["status"], **from_row(sums[week.id], SUMS, SUMS))
            for week in reversed(listed)
        ]
