"""Sheet *Proof* of a plan with whole loads: loads, costs and payable amounts worked out again.

Nothing on a sheet can prove that no other plan with whole loads costs less; the bound is stated as it was
proved. What the sheet proves live is that this plan keeps every limit and costs what *Plan* and *Costs* say.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from decimal import Decimal

from engine.exact import total_of
from engine.figures import ANY_SINGLE_DEPOT
from engine.planning.fills import vehicles
from engine.planning.plan import Plan
from engine.report.figures_sheets import all_fit
from engine.report.lines import Line, quantity_format
from engine.report.load_proof_rows import SHIPMENT_HEADINGS, link, shipment_cells
from engine.report.look import DEEP, Style, number_format
from engine.report.proof_layout import Places, on_customers, on_depots, on_hauliers, on_rules, places_of_plan
from engine.report.sheet import Formula, Row, Sheet, Value

KEPT = "The plan keeps every limit and adds up; how far from the least cost it may be stands below"
BROKEN = "Warning: the plan does not keep these figures, see the checks marked NO"

_WIDTHS = (8, 22, 22, 16, 13, 13, 9, 11, 12, 12, 9, 14, 15, 14, 10, 10)
_FIRST_CHECK = 6
_CHECKS = 13
DEPOT_HEADINGS = (
    "No.", "Depot", "Could send", "Sent", "Unsent", "Left over", "Loads", "May leave", "Over",
    "Opening charge", "Opened", "Charge",
)  # fmt: skip
CUSTOMER_HEADINGS = (
    "No.", "Customer", "Whole order", "Received", "Short", "Left over", "Smallest drop", "One depot",
    "Depots",
)  # fmt: skip
HAULIER_HEADINGS = ("No.", "Haulier", "At most", "Carries", "Over")


@dataclass(frozen=True, slots=True)
class Layout:
    """First and last sheet row of each table (an empty one has last < first), and how figures are shown."""

    depots: tuple[int, int]
    customers: tuple[int, int]
    hauliers: tuple[int, int]
    shipments: tuple[int, int]
    linked: bool
    plan: dict[str, str]
    places: Places

    def of(self, column: str, table: tuple[int, int]) -> str:
        return f"${column}${table[0]}:${column}${max(table)}"

    def on_plan(self, heading: str) -> str:
        column, (first, last) = self.plan[heading], self.shipments
        return f"Plan!${column}$2:${column}${max(2, 2 + last - first)}"


def load_proof_sheet(
    plan: Plan, lines: Sequence[Line], plan_letters: dict[str, str], costs: dict[str, str], header: str
) -> Sheet:
    """Sheet *Proof*, with formulas that carry today's results.

    plan_letters: the letter of each column of *Plan*, by its heading; costs: cells of *Costs*
    """
    layout = _layout(plan, lines, plan_letters)
    rows = [
        *_top(plan),
        *_checks(plan, lines, layout, costs),
        Row([]),
        *_depots(plan, layout),
        *_customers(plan, lines, layout),
        *_hauliers(plan, lines, layout),
        *_shipments(plan, lines, layout),
    ]
    return Sheet("Proof", _WIDTHS, rows, length=len(rows), frozen="A4", header=header, tab=DEEP)


def _layout(plan: Plan, lines: Sequence[Line], letters: dict[str, str]) -> Layout:
    week = plan.week
    first = _FIRST_CHECK + _CHECKS + 3  # a gap, the name of the table, its headings
    tables = []
    for count in (len(week.depots), len(week.customers), len(week.hauliers), len(lines)):
        tables.append((first, first + count - 1))
        first += count + 3
    depots, customers, hauliers, shipments = tables
    return Layout(depots, customers, hauliers, shipments, all_fit(week), letters, places_of_plan(plan))


def _top(plan: Plan) -> list[Row]:
    rules, quiet = plan.week.rules, [Style("quiet")]
    last = _FIRST_CHECK + _CHECKS - 1
    verdict = Formula(f'IF(COUNTIF(H{_FIRST_CHECK}:H{last},"yes")={_CHECKS},"{KEPT}","{BROKEN}")', KEPT)
    right = Style("heading", align="right")
    return [
        Row([f"Proof of the plan for {rules.week}"], [Style("title")], height=26),
        Row(
            [
                f"Money in {rules.currency}, quantities in {rules.unit}. The figures below point at Plan, "
                "Depots, Customers, Hauliers, Rates and Rules: edit those and look here."
            ],
            quiet,
        ),
        Row([None, verdict, *[None] * 6], [Style(), *[Style("good")] * 7], height=22),
        Row(
            [
                "No plan costs less than the lower bound on Costs: that was proved in whole numbers while "
                "the plan was searched for, and is no matter of a few formulas."
            ],
            quiet,
        ),
        Row(
            [None, "Check", None, None, "Here", "Should be", "Difference", "In order"],
            [Style(), *[Style("heading")] * 3, *[right] * 4],
        ),
    ]


def _checks(plan: Plan, lines: Sequence[Line], layout: Layout, costs: dict[str, str]) -> Iterator[Row]:
    d, c, h, s = layout.depots, layout.customers, layout.hauliers, layout.shipments
    places = layout.places
    zero = Decimal(0)
    freight = total_of(line.shipment.cost for line in lines)
    payable = total_of(line.shipment.payable for line in lines)
    charges = total_of((plan.short_cost, plan.unsent_cost))
    loads = Decimal(sum(line.shipment.loads or 0 for line in lines))
    sent = total_of(line.shipment.quantity for line in lines)
    opened = f"SUM({layout.of('L', d)})"

    def none_in(column: str, table: tuple[int, int]) -> str:
        return "0" if table[1] < table[0] else f'COUNTIF({layout.of(column, table)},"<>0")'

    found: list[tuple[str, str, str, Decimal, Decimal, int]] = [
        ("Depots whose quantities do not add up", none_in("F", d), "0", zero, zero, 0),
        ("Customers whose quantities do not add up", none_in("F", c), "0", zero, zero, 0),
        ("Depots with more loads than may leave", none_in("I", d), "0", zero, zero, 0),
        (
            "Customers of one depot that get from more",
            "0" if c[1] < c[0] else f'COUNTIFS({layout.of("H", c)},"yes",{layout.of("I", c)},">1")',
            "0",
            zero,
            zero,
            0,
        ),
        ("Hauliers that carry more than they can", none_in("E", h), "0", zero, zero, 0),
        ("Shipments outside limits or under the smallest drop", none_in("P", s), "0", zero, zero, 0),
        (
            "Quantity sent: here, and Plan",
            f"SUM({layout.of('E', s)})",
            f"SUM({layout.on_plan('Send')})",
            sent,
            sent,
            places.quantity,
        ),
        (
            "Loads: worked out here, and Plan",
            f"SUM({layout.of('K', s)})",
            f"SUM({layout.on_plan('Loads')})" if "Loads" in layout.plan else "0",
            loads,
            loads if "Loads" in layout.plan else zero,
            0,
        ),
        (
            "Exact freight: worked out here, and Plan",
            f"SUM({layout.of('M', s)})",
            f"SUM({layout.on_plan('Cost')})",
            freight,
            freight,
            places.total,
        ),
        (
            "Freight payable: each shipment rounded, and Plan",
            f"SUM({layout.of('N', s)})",
            f"SUM({layout.on_plan('Payable')})",
            payable,
            payable,
            places.payable,
        ),
        (
            "Freight payable: Plan, and Costs",
            f"SUM({layout.on_plan('Payable')})",
            costs["payable"],
            payable,
            plan.freight_payable,
            places.payable,
        ),
        (
            "Rounding: payable less exact, and Costs",
            f"SUM({layout.of('N', s)})-SUM({layout.of('M', s)})",
            costs["rounding"],
            total_of((payable, -freight)),
            plan.proof.rounding,
            places.total,
        ),
        (
            "All costs: freight, opening, charges; and Costs",
            f"SUM({layout.of('M', s)})+{opened}+{costs['short']}+{costs['unsent']}",
            costs["total"],
            total_of((freight, plan.opening_cost, charges)),
            plan.total_cost,
            places.total,
        ),
    ]
    for r, (about, here, should, is_here, is_should, shown) in enumerate(found, _FIRST_CHECK):
        number = Style("plain", number_format(shown, always=2 if shown else 0), "right")
        difference = total_of((is_here, -is_should))
        yield Row(
            [
                None, about, None, None,
                Formula(here, is_here),
                0 if should == "0" else Formula(should, is_should),
                Formula(f"ROUND(E{r}-F{r},{shown})", difference),
                Formula(f'IF(G{r}=0,"yes","NO")', "yes" if not difference else "NO"),
            ],
            [Style(), Style(), Style(), Style(), number, number, number, Style(align="right")],
        )  # fmt: skip


def _depots(plan: Plan, layout: Layout) -> Iterator[Row]:
    """What each depot sends, keeps and loads, and whether it is opened."""
    yield from head("Depots", DEPOT_HEADINGS)
    week, q, s = plan.week, layout.places.quantity, layout.shipments
    styles = _styles(plan, layout, "n_qqqqnnntnt")
    kept = {one.depot: one.quantity for one in plan.unsent}
    opened = {one.depot: one.charge for one in plan.openings}
    days = on_rules("days")
    fleet = {one.depot: (one.most, one.gone) for one in vehicles(plan)}
    for i, (name, depot) in enumerate(week.depots.items()):
        r, theirs = layout.depots[0] + i, [one for one in plan.shipments if one.depot == name]
        sent = total_of(one.quantity for one in theirs)
        loads = sum(one.loads or 0 for one in theirs)
        most, loads_of_gone = fleet[name]
        may: Value = None
        if most is not None:
            may = link(
                layout.linked,
                f'MAX(0,{on_depots("loads_a_day", i)}*IF({days}="",5,{days})-{loads_of_gone})',
                float(max(0, most - loads_of_gone)),
            )
        unsent = kept.get(name, Decimal(0))
        over = total_of((depot.available, -sent, -unsent)) if sent <= depot.available else Decimal(0)
        numbers = layout.of("O", s)
        values: list[Value] = [
            i + 1,
            name,
            link(layout.linked, f"N({on_depots('available', i)})", float(depot.available)),
            Formula(f"SUMIF({numbers},A{r},{layout.of('E', s)})", float(sent)),
            float(unsent),
            Formula(f"ROUND(MAX(0,C{r}-D{r})-E{r},{q})", float(over)),
            Formula(f"SUMIF({numbers},A{r},{layout.of('K', s)})", loads),
            may,
            0 if may is None else Formula(f"MAX(0,G{r}-H{r})", 0),
            link(layout.linked, f"N({on_depots('opening_charge', i)})", float(depot.opening_charge or 0)),
            Formula(f"IF(D{r}>0,1,0)", int(bool(sent))),
            Formula(f"J{r}*K{r}", float(opened.get(name, Decimal(0)))),
        ]
        yield Row(values, styles)
    yield Row([])


def _customers(plan: Plan, lines: Sequence[Line], layout: Layout) -> Iterator[Row]:
    yield from head("Customers", CUSTOMER_HEADINGS)
    week, q, s = plan.week, layout.places.quantity, layout.shipments
    styles = _styles(plan, layout, "n_qqqqq_n")
    short = {one.customer: one.quantity for one in plan.short}
    order_row = 0
    for j, (name, customer) in enumerate(week.customers.items()):
        r = layout.customers[0] + j
        theirs = [line.shipment for line in lines if line.shipment.customer == name]
        received = total_of(one.quantity for one in theirs)
        missing = short.get(name, Decimal(0))
        orders = max(1, len(customer.orders))
        first, last = (on_customers("ordered", at) for at in (order_row, order_row + orders - 1))
        several = (
            f"SUMPRODUCT(--(SUMIFS({layout.of('E', s)},{layout.of('L', s)},A{r},{layout.of('O', s)},"
            f"{layout.of('A', layout.depots)})>0))"
        )
        single = customer.one_depot == ANY_SINGLE_DEPOT
        values: list[Value] = [
            j + 1,
            name,
            link(layout.linked, f"SUM({first}:{last.split('!')[1]})", float(customer.ordered)),
            Formula(f"SUMIF({layout.of('L', s)},A{r},{layout.of('E', s)})", float(received)),
            float(missing),
            Formula(f"ROUND(MAX(0,C{r}-D{r})-E{r},{q})", 0),
            link(
                layout.linked,
                f"N({on_customers('smallest_drop', order_row)})",
                float(customer.smallest_drop or 0),
            ),
            "yes" if single else None,
            Formula(several, len({one.depot for one in theirs})) if single and theirs else None,
        ]
        yield Row(values, styles)
        order_row += orders
    yield Row([])


def _hauliers(plan: Plan, lines: Sequence[Line], layout: Layout) -> Iterator[Row]:
    yield from head("Hauliers", HAULIER_HEADINGS)
    styles, s = _styles(plan, layout, "n_qqq"), layout.shipments
    for number, (name, haulier) in enumerate(plan.week.hauliers.items()):
        r = layout.hauliers[0] + number
        carries = total_of(line.shipment.quantity for line in lines if line.shipment.haulier == name)
        most = haulier.at_most
        cell = on_hauliers("at_most", number)
        yield Row(
            [
                number + 1,
                name,
                None if most is None else link(layout.linked, f"N({cell})", float(most)),
                Formula(f"SUMPRODUCT(({layout.of('D', s)}=B{r})*{layout.of('E', s)})", float(carries)),
                0 if most is None else Formula(f"MAX(0,ROUND(D{r}-C{r},{layout.places.quantity}))", 0),
            ],
            styles,
        )
    yield Row([])


def _shipments(plan: Plan, lines: Sequence[Line], layout: Layout) -> Iterator[Row]:
    yield from head("Shipments", SHIPMENT_HEADINGS)
    styles = _styles(plan, layout, "n___qmt_qtnntpnn")
    drops = {name: f"$G${layout.customers[0] + j}" for j, name in enumerate(plan.week.customers)}
    for place, line in enumerate(lines):
        yield Row(
            shipment_cells(
                plan,
                line,
                layout.shipments[0] + place,
                2 + place,
                layout.plan,
                layout.linked,
                layout.places,
                drops.get(line.shipment.customer),
            ),
            styles,
        )


def head(name: str, headings: Sequence[str]) -> Iterator[Row]:
    """The name of a table, and its headings."""
    yield Row([name, *[None] * (len(headings) - 1)], [Style("part")] * len(headings))
    words = {"Depot", "Customer", "Haulier"}
    yield Row(
        headings,
        [Style("heading", align="left" if one in words else "right", wrap=True) for one in headings],
        height=30,
    )


def _styles(plan: Plan, layout: Layout, kinds: str) -> list[Style]:
    """A style a column: n count, q quantity, m rate, t cost, p payable, _ text."""
    formats = {
        "n": "0",
        "q": quantity_format(plan),
        "m": number_format(layout.places.money, always=2),
        "t": number_format(layout.places.cost, always=2),
        "p": number_format(layout.places.payable),
    }
    return [Style() if kind == "_" else Style("plain", formats[kind], "right") for kind in kinds]
