"""The columns that say how a shipment is loaded and charged: loads, how full, by the load, due once."""

from engine.planning.fills import fill_of
from engine.planning.plan import Plan
from engine.report.lines import Line, ListColumn
from engine.report.look import number_format, places_of


def filled(line: Line) -> str | None:
    """'3 full + 1 at 62 %'; None where nothing says what a load is, and for what has gone."""
    shipment = line.shipment
    fill = None if shipment.gone else fill_of(shipment.quantity, shipment.load_size)
    return None if fill is None else fill.words()


def loads_columns() -> list[ListColumn]:
    """How many loads, and how full."""
    return [
        ListColumn("Loads", 8, lambda line: line.shipment.loads, "0"),
        ListColumn("Filled", 18, filled),
    ]


def per_columns(plan: Plan) -> list[ListColumn]:
    """What the rate is charged by, and what is due once; nothing for a plan without whole loads."""
    if plan.whole is None:
        return []
    once = [shipment.once for shipment in plan.shipments]
    columns = [ListColumn("Per", 7, lambda line: line.shipment.per)]
    if any(once):
        number = number_format(places_of(once), always=2)
        columns.append(ListColumn("Charge per use", 12, lambda line: line.shipment.once, number))
    return columns
