"""The shipments on sheet *Proof* of a plan with whole loads: a line each, worked out again by formulas."""

from decimal import Decimal

from engine.exact import canonical
from engine.money import round_half_up
from engine.planning.gone import left
from engine.planning.plan import Plan
from engine.report.figures_sheets import HOLD
from engine.report.lines import Line
from engine.report.proof_layout import Places, on_gone, on_hauliers, on_rates, on_rules
from engine.report.sheet import Formula, Value

SHIPMENT_HEADINGS = (
    "Rate row", "Depot", "Customer", "Haulier", "Send", "Rate with surcharge", "Charge per use", "Per",
    "Load size", "Trip minimum", "Loads", "Customer no.", "Exact cost", "Payable", "Depot no.", "Outside",
)  # fmt: skip


def link(linked: bool, formula: str, value: float | str) -> Value:
    """A formula that points at another sheet, or a copy where the figures are too long for that."""
    return Formula(formula, value) if linked else value


def shipment_cells(
    plan: Plan, line: Line, r: int, on_plan: int, letters: dict[str, str], linked: bool, places: Places,
    drop: str | None,
) -> list[Value]:  # fmt: skip
    """The cells of a shipment in sheet row `r`, whose line on *Plan* is in row `on_plan`.

    letters: of the columns of *Plan*, by heading; drop: the cell of the customer's smallest drop
    """
    shipment, week = line.shipment, plan.week
    depots, customers = list(week.depots), list(week.customers)
    send = Formula(f"N(Plan!${letters['Send']}${on_plan})", float(shipment.quantity))
    numbers = (
        depots.index(shipment.depot) + 1 if shipment.depot in week.depots else None,
        customers.index(shipment.customer) + 1 if shipment.customer in week.customers else None,
    )
    names: list[Value] = [line.rate_row, shipment.depot, shipment.customer, shipment.haulier, send]
    cost = float(round_half_up(shipment.cost, places.cost))
    payable = Formula(f"ROUND(ROUND(M{r},{places.cost}),{places.payable})", float(shipment.payable))
    if shipment.gone:
        rate = link(
            linked, f"N({on_gone('rate', list(week.gone).index(shipment.gone))})", float(shipment.rate)
        )
        rest: list[Value] = [rate, None, "gone", None, None, 0, numbers[1]]
        return [*names, *rest, Formula(f"E{r}*F{r}", cost), payable, numbers[0], 0]
    position = (line.rate_row or 1) - 1
    own, general = on_rates("Surcharge %", position), on_rules("fuel_surcharge")
    rate = link(
        linked,
        f'N({on_rates("Rate", position)})*(1+IF({own}="",N({general}),{own})/100)',
        float(shipment.rate),
    )
    trip = _trip_minimum(plan, line)
    once = shipment.once or Decimal(0)
    charged = once if shipment.once is not None else None
    size = shipment.load_size
    by_trip = f"(K{r}-1)*MAX(F{r}*I{r},J{r})+MAX(F{r}*(E{r}-(K{r}-1)*I{r}),J{r})"
    formula = f'IF(E{r}=0,0,IF(H{r}="load",K{r}*MAX(F{r},J{r}),IF(J{r}>0,{by_trip},E{r}*F{r}))+N(G{r}))'
    return [
        *names,
        rate,
        None if charged is None else link(linked, f"N({on_rates('Charge per use', position)})", float(once)),
        shipment.per,
        None if size is None else link(linked, _size(plan, line, position), float(size)),
        link(linked, f"N({on_rates('Trip minimum', position)})", float(trip)) if trip else 0,
        0 if size is None else Formula(f"ROUNDUP(ROUND(E{r}/I{r},9),0)", shipment.loads or 0),
        numbers[1],
        Formula(formula, cost),
        payable,
        numbers[0],
        Formula(_outside(plan, line, r, position, drop), 0) if linked else 0,
    ]


def _size(plan: Plan, line: Line, position: int) -> str:
    """The row's own load size, else the haulier's, else the week's."""
    own, general = on_rates("Load size", position), on_rules("load_size")
    haulier = line.shipment.haulier or ""
    names = list(plan.week.hauliers)
    if haulier in names:
        theirs = on_hauliers("load_size", names.index(haulier))
        general = f'IF({theirs}<>"",{theirs},{general})'
    return f'IF({own}<>"",{own},{general})'


def _outside(plan: Plan, line: Line, r: int, position: int, drop: str | None) -> str:
    """1 where the whole week's quantity on the row breaks a limit, a hold or the smallest drop; else 0."""
    gone = left(plan.week).row.get(line.shipment.key[:3]) if line.shipment.key.number == 1 else None
    sent = f"(E{r}+{canonical(gone)})" if gone else f"E{r}"
    least, most = on_rates("At least", position), on_rates("At most", position)
    closed, hold = on_rates("Closed", position), on_rates(HOLD, position)
    limits = f'{sent}<N({least}),AND({most}<>"",{sent}>N({most})),AND({closed}="yes",E{r}>0)'
    if drop is not None:
        limits += f",AND(E{r}>0,{sent}<{drop})"
    return f'IF({hold}<>"",IF(ROUND({sent}-N({hold}),9)=0,0,1),IF(OR({limits}),1,0))'


def _trip_minimum(plan: Plan, line: Line) -> Decimal:
    number = plan.week.rates.find(line.shipment.key)
    row = None if number is None else plan.week.rates.row(number)
    return (row.trip_minimum if row is not None else None) or Decimal(0)
