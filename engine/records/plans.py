"""Plans as they were issued: numbered within their week, and never altered."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from decimal import Decimal
from types import MappingProxyType
from typing import Any

from sqlalchemy import Connection, RowMapping, Table, func, insert, select

from engine.exact import canonical, total_of
from engine.figures import RateKey
from engine.planning.plan import Plan, Shipment, Short, Unsent
from engine.records.bulk import insert_rows
from engine.records.decimals import Row, as_row, from_row, row_of, values_in
from engine.records.failures import Missing, reading, saving
from engine.records.journal import NO_SUCH_WEEK
from engine.records.opening import Records
from engine.records.schema import plans, shipments, short, unsent, weeks

COSTS = ("freight_payable", "short_cost", "unsent_cost", "opening_cost")
EXACT = ("freight_cost", "total_cost")


@dataclass(frozen=True, slots=True)
class Issued:
    """A plan as it was issued: `number` within its week, `version` of the week that it answers."""

    week_id: str
    number: int
    version: int
    issued: datetime
    who: str
    note: str
    status: str
    unit: str
    currency: str
    freight_payable: Decimal
    short_cost: Decimal
    unsent_cost: Decimal
    freight_cost: Decimal
    total_cost: Decimal
    lower_bound: Decimal
    shipments: tuple[Shipment, ...]
    short: tuple[Short, ...]
    unsent: tuple[Unsent, ...]
    opening_cost: Decimal

    @property
    def quantities(self) -> Mapping[RateKey, Decimal]:
        """What goes on each rate row, gone goods included: what later plans stay near to."""
        found: dict[RateKey, Decimal] = {}
        for shipment in self.shipments:
            found[shipment.key] = total_of((found.get(shipment.key, Decimal(0)), shipment.quantity))
        return MappingProxyType(found)


def issue_plan(
    records: Records, week_id: str, plan: Plan, version: int, who: str = "", note: str = ""
) -> Issued:
    """Freeze a plan under the next number of its week; when this returns, it is on disk.

    version: the version of the week that the plan answers

    Raises:
        Missing: there is no such week.
        NotSaved: it could not be written; nothing of it was.
        TooLarge: an amount has more digits than can be kept exactly.
    """
    with saving("the issued plan", records.where), records.write() as connection:
        # The row of the week is locked, so that two who issue at once get two numbers.
        there = select(weeks.c.id).where(weeks.c.id == week_id).with_for_update()
        if connection.execute(there).scalar() is None:
            raise Missing(NO_SUCH_WEEK)
        last = connection.execute(select(func.max(plans.c.number)).where(plans.c.week_id == week_id)).scalar()
        row = {
            "week_id": week_id,
            "number": (last or 0) + 1,
            "version": version,
            "issued": datetime.now(UTC),
            "who": who,
            "note": note,
            "status": plan.status,
            "unit": plan.week.rules.unit,
            "currency": plan.week.rules.currency,
            **as_row({name: getattr(plan, name) for name in COSTS}, COSTS),
            **{f"{name}_exact": canonical(getattr(plan, name)) for name in EXACT},
            "lower_bound_exact": canonical(plan.proof.lower_bound),
        }
        plan_id = connection.execute(insert(plans).values(row).returning(plans.c.id)).scalar_one()
        _store_lines(connection, plan_id, plan)
    return find_plan(records, week_id, row["number"])


def find_plan(records: Records, week_id: str, number: int | None = None) -> Issued:
    """An issued plan of a week, by its number or (None) the latest.

    Raises:
        Missing: no such plan was issued.
        NotSaved: the records cannot be read.
    """
    query = select(plans).where(plans.c.week_id == week_id)
    query = query.order_by(plans.c.number.desc()).limit(1)
    if number is not None:
        query = query.where(plans.c.number == number)
    with reading("the issued plan", records.where), records.read() as connection:
        head = connection.execute(query).mappings().one_or_none()
        if head is None:
            which = "No plan" if number is None else f"No plan number {number}"
            raise Missing(f"{which} of this week was issued.")
        return _issued(connection, head)


def latest_number(records: Records, week_id: str) -> int:
    """The number of the plan of a week that was issued last, 0 before the first."""
    query = select(func.max(plans.c.number)).where(plans.c.week_id == week_id)
    with reading("the issued plans", records.where), records.read() as connection:
        return connection.execute(query).scalar() or 0


def list_plans(records: Records, week_id: str) -> list[tuple[int, datetime, str, str]]:
    """Number, time, person and note of every plan issued of a week, in order."""
    query = select(plans.c.number, plans.c.issued, plans.c.who, plans.c.note)
    query = query.where(plans.c.week_id == week_id).order_by(plans.c.number)
    with reading("the issued plans", records.where), records.read() as connection:
        return [(row.number, _utc(row.issued), row.who, row.note) for row in connection.execute(query)]


def _store_lines(connection: Connection, plan_id: int, plan: Plan) -> None:
    lines: list[tuple[Table, list[Row]]] = [
        (shipments, [_shipment_row(one) for one in plan.shipments]),
        (short, [row_of(one) for one in plan.short]),
        (unsent, [row_of(one) for one in plan.unsent]),
    ]
    for table, rows in lines:
        insert_rows(
            connection, table, [{"plan_id": plan_id, "position": n, **row} for n, row in enumerate(rows)]
        )


def _shipment_row(shipment: Shipment) -> Row:
    plain = row_of(shipment, without=("key", "cost"))
    return {**shipment.key._asdict(), **plain, "cost_exact": canonical(shipment.cost)}


def _shipment(row: RowMapping) -> Shipment:
    key = RateKey(row["depot"], row["customer"], row["haulier"], row["number"])
    plain = values_in(row, Shipment, without=("key", "cost"))
    return Shipment(key=key, cost=Decimal(row["cost_exact"]), **plain)


def _issued(connection: Connection, head: RowMapping) -> Issued:
    def lines(table: Table) -> list[RowMapping]:
        query = select(table).where(table.c.plan_id == head["id"]).order_by(table.c.position)
        return list(connection.execute(query).mappings())

    plain: dict[str, Any] = {
        name: head[name]
        for name in ("week_id", "number", "version", "who", "note", "status", "unit", "currency")
    }
    plain |= {name: Decimal(head[f"{name}_exact"]) for name in (*EXACT, "lower_bound")}
    plain |= from_row(head, COSTS, COSTS)
    plain["opening_cost"] = plain["opening_cost"] or Decimal(0)
    return Issued(
        **plain,
        issued=_utc(head["issued"]),
        shipments=tuple(_shipment(row) for row in lines(shipments)),
        short=tuple(Short(**values_in(row, Short)) for row in lines(short)),
        unsent=tuple(Unsent(**values_in(row, Unsent)) for row in lines(unsent)),
    )


def _utc(moment: datetime) -> datetime:
    return moment if moment.tzinfo else moment.replace(tzinfo=UTC)
