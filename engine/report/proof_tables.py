"""The three tables of sheet *Proof*: depots, customers, rate rows.

Every line has a check: 0 is in order, 1 says that the line could improve the plan, 2 that it is outside
its limits. What a line's cost less prices means for its quantity is said in `engine.network.proof`.
"""

from collections.abc import Iterator, Sequence
from decimal import Decimal

import numpy as np

from engine.exact import canonical, to_decimal
from engine.figures import ANY_SINGLE_DEPOT
from engine.money import round_half_up
from engine.network.problem import UNLIMITED
from engine.planning.gone import cost_of, left, superseded
from engine.planning.model import NO_RATE, Model
from engine.planning.plan import Plan
from engine.report.figures_sheets import HOLD
from engine.report.lines import quantity_format
from engine.report.look import Style, number_format
from engine.report.proof_figures import ProofFigures, check_codes, forced, kept, kept_of_must, left_over
from engine.report.proof_layout import Layout, on_customers, on_depots, on_gone, on_rates, on_rules
from engine.report.sheet import Formula, Row, Value

MISSING, STAYS = "(goods that are missing)", "(goods that stay)"

DEPOT_HEADINGS = (
    "No.", "Depot", "Could send", "Sent", "Unsent", "Of it, must move", "Left over", "Price",
    "Charge if kept", "Charge less price", "Should move", "Check", "Gone", "Still to send", "Forced",
    "Before cost", "Before cost, kept",
)  # fmt: skip
GONE_HEADINGS = (
    "No.", "Depot", "Customer", "Haulier", "Send", "Paid per unit", *[None] * 6, "Exact cost", "Payable",
    None, None, "Depot no.", "Customer no.",
)  # fmt: skip
CUSTOMER_HEADINGS = (
    "No.", "Customer", "Whole order", "Received", "Short", None, "Left over", "Price",
    "Charge, short", "Charge less price", "Fixed share", "Check", "Gone", "Still to bring", "Forced",
    "Before cost", "Before cost, short",
)  # fmt: skip
RATE_HEADINGS = (
    "Rate row", "Depot", "Customer", "Haulier", "Send", "Rate with surcharge", "Depot price",
    "Customer price", "Rate less prices", "Limit below", "Limit above", "Check", "Exact cost",
    "Payable", "Forced", "Before cost", "Depot no.",
)  # fmt: skip


def depot_rows(plan: Plan, figures: ProofFigures, layout: Layout) -> Iterator[Row]:
    """What each depot sends and keeps, its price, and whether keeping less or more would pay."""
    model, q = plan.model, layout.places.quantity
    yield from _head("Depots", DEPOT_HEADINGS)
    styles = _styles(plan, layout, "n_qqqqqmmmqcqqtnn")
    unsent, must, over = kept(plan), kept_of_must(plan), left_over(plan, figures)[0]
    held, codes, gone = forced(model, figures), check_codes(plan, figures), left(plan.week)
    stays = layout.customers[1] + 1
    for i, name in enumerate(model.depots):
        r = layout.depots[0] + i
        rows = [int(row) for row in (model.stay_rows[i], model.must_row[i]) if row != NO_RATE]
        supply = int(model.problem.supply[i])
        should = int(model.stated_limits[1][rows[1]]) if len(rows) > 1 else 0
        free_aims, must_aims = f"(P{r}+$P${stays})", f"(Q{r}-P{r}-$P${stays})"
        free, bound = f"IF({free_aims}<>0,-{free_aims},J{r})", f"IF({must_aims}<>0,{must_aims},J{r})"
        check = (
            f"IF({free}>0,IF(ROUND(E{r}-F{r},{q})>0,1,0),IF({free}<0,IF(ROUND(E{r}-F{r}-N{r}+K{r},{q})<0,1,0),0))"
            f"+IF(K{r}>0,IF({bound}>0,IF(F{r}>0,1,0),IF({bound}<0,IF(ROUND(F{r}-K{r},{q})<0,1,0),0)),0)"
        )
        worth = f"IF({free}<0,J{r}*(N{r}-K{r}),0)+IF(K{r}>0,IF({bound}<0,J{r}*K{r},0),0)"
        values: list[Value] = [
            i + 1,
            name,
            _link(layout, f"N({on_depots('available', i)})", float(plan.week.depots[name].available)),
            _sent(layout, r, _quantity(model, supply - int(unsent[i]) - int(over[i]))),
            _quantity(model, int(unsent[i])),
            _quantity(model, int(must[i])),
            Formula(f"ROUND(N{r}-D{r}-E{r},{q})", _quantity(model, int(over[i]))),
            _money(model, int(figures.depot.money[i])),
            _link(layout, f"N({on_depots('charge_if_unsent', i)})", _money(model, int(model.money[rows[0]]))),
            Formula(
                f"ROUND(I{r}-H{r}-$H${stays},{layout.places.money})",
                _money(model, int(figures.money[rows[0]])),
            ),
            _link(layout, f"MAX(0,N({on_depots('must_move', i)})-M{r})", _quantity(model, should)),
            Formula(check, sum(int(codes[row]) for row in rows)),
            _has_gone(layout, "Q", r, gone.depot.get(name, Decimal(0))),
            Formula(f"MAX(0,C{r}-M{r})", _quantity(model, supply)),
            Formula(worth, _cost(model, sum(int(held[row]) * int(figures.money[row]) for row in rows))),
            int(figures.depot.aims[i]),
            figures.must_aim,
        ]
        yield Row(values, styles)
    yield _missing_row(plan, figures, layout, styles)
    yield Row([])


def _missing_row(plan: Plan, figures: ProofFigures, layout: Layout, styles: Sequence[Style]) -> Row:
    """The stand-in depot: where what is missing comes from."""
    model = plan.model
    r, stays = layout.depots[1] + 1, layout.customers[1] + 1
    ordered, short = int(model.problem.supply[-1]), sum(plan.flow.quantity[model.short_rows].tolist())
    aims = f"(P{r}+$P${stays})"
    joined = f"IF({aims}<>0,-{aims},-H{r}-H{stays})"
    values: list[Value] = [
        None,
        MISSING,
        _sum(layout.range("N", layout.customers), _quantity(model, ordered)),
        _sum(layout.range("E", layout.customers), _quantity(model, short)),
        *[None] * 3,
        _money(model, int(figures.depot.money[-1])),
        *[None] * 3,
        Formula(
            f"IF({joined}>0,IF(C{r}-D{r}>0,1,0),IF({joined}<0,1,0))",
            int(check_codes(plan, figures)[model.joining_row]),
        ),
        None,
        Formula(f"C{r}", _quantity(model, ordered)),
        None,
        int(figures.depot.aims[-1]),
    ]
    return Row(values, [style._replace(kind="quiet") for style in styles])


def customer_rows(plan: Plan, figures: ProofFigures, layout: Layout) -> Iterator[Row]:
    """What each customer gets and goes short of, its price, and whether more or less short would pay."""
    model, q = plan.model, layout.places.quantity
    yield from _head("Customers", CUSTOMER_HEADINGS)
    styles = _styles(plan, layout, "n_qqq_qmmmqcqqtnn")
    missing, over = layout.depots[1] + 1, left_over(plan, figures)[1]
    held, codes, gone = forced(model, figures), check_codes(plan, figures), left(plan.week)
    of_listed = model.problem.customer[layout.listed]
    firsts = np.searchsorted(of_listed, np.arange(len(model.customers) + 1))
    order_row = 0
    for j, (name, customer) in enumerate(plan.week.customers.items()):
        r, row = layout.customers[0] + j, int(model.short_rows[j])
        first, last = layout.rates[0] + int(firsts[j]), layout.rates[0] + int(firsts[j + 1]) - 1
        orders = max(1, len(customer.orders))
        ordered, short = int(model.problem.demand[j]), int(plan.flow.quantity[row])
        own, week = on_customers("charge_if_short", order_row), on_rules("charge_if_short")
        first_order, last_order = (on_customers("ordered", at) for at in (order_row, order_row + orders - 1))
        aims = f"(Q{r}-P{r}-$P${missing})"
        sign = f"IF({aims}<>0,{aims},J{r})"
        received = _quantity(model, ordered - short - int(over[j]))
        least, most = _limits(model, row)
        share = _quantity(model, short) if least or most is not None else None
        free = f"IF({sign}>0,IF(E{r}>0,1,0),IF({sign}<0,1,0))"
        values: list[Value] = [
            j + 1,
            name,
            _link(layout, f"SUM({first_order}:{last_order.split('!')[1]})", float(customer.ordered)),
            Formula(f"SUM(E{first}:E{last})", received) if last >= first else 0,
            _quantity(model, short),
            None,
            Formula(f"ROUND(N{r}-D{r}-E{r},{q})", _quantity(model, int(over[j]))),
            _money(model, int(figures.customer.money[j])),
            _link(layout, f'IF({own}="",N({week}),{own})', _money(model, int(model.money[row]))),
            Formula(
                f"ROUND(I{r}-H{r}-$H${missing},{layout.places.money})", _money(model, int(figures.money[row]))
            ),
            share,
            Formula(free if share is None else f"IF(ROUND(E{r}-K{r},{q})=0,0,2)", int(codes[row])),
            _has_gone(layout, "R", r, gone.customer.get(name, Decimal(0))),
            Formula(f"MAX(0,C{r}-M{r})", _quantity(model, ordered)),
            None
            if share is None
            else Formula(f"J{r}*K{r}", _cost(model, int(held[row]) * int(figures.money[row]))),
            int(figures.customer.aims[j]),
            int(figures.short_aim[j]),
        ]
        yield Row(values, styles)
        order_row += orders
    yield _stays_row(plan, figures, layout, styles)
    yield Row([])


def _stays_row(plan: Plan, figures: ProofFigures, layout: Layout, styles: Sequence[Style]) -> Row:
    """The stand-in customer: where what stays goes to."""
    model = plan.model
    available = int(model.problem.demand[-1])
    unsent = available - sum(plan.flow.quantity[figures.rows].tolist())
    values: list[Value] = [
        None,
        STAYS,
        _sum(layout.range("N", layout.depots), _quantity(model, available)),
        _sum(layout.range("E", layout.depots), _quantity(model, unsent)),
        *[None] * 3,
        _money(model, int(figures.customer.money[-1])),
        *[None] * 5,
        Formula(f"C{layout.customers[1] + 1}", _quantity(model, available)),
        None,
        int(figures.customer.aims[-1]),
    ]
    return Row(values, [style._replace(kind="quiet") for style in styles])


def gone_rows(plan: Plan, layout: Layout) -> Iterator[Row]:
    """What has gone, and what it costs; nothing where nothing has."""
    week = plan.week
    if not week.gone:
        return
    yield from _head("Gone", GONE_HEADINGS)
    styles = _styles(plan, layout, "n___qm______tp__nn")
    depots, customers = list(week.depots), list(week.customers)
    for place, one in enumerate(week.gone.values()):
        r, cost = layout.gone[0] + place, cost_of(one)
        yield Row(
            [
                place + 1,
                one.depot,
                one.customer,
                one.haulier,
                _link(layout, f"N({on_gone('quantity', place)})", float(one.quantity)),
                _link(layout, f"N({on_gone('rate', place)})", float(one.rate)),
                *[None] * 6,
                Formula(f"ROUND(E{r}*F{r},{layout.places.cost})", cost),
                Formula(f"ROUND(M{r},{layout.places.payable})", round_half_up(cost, layout.places.payable)),
                None,
                None,
                1 + depots.index(one.depot) if one.depot in week.depots else 0,
                1 + customers.index(one.customer) if one.customer in week.customers else 0,
            ],
            styles,
        )
    yield Row([])


def rate_rows(plan: Plan, figures: ProofFigures, layout: Layout) -> Iterator[Row]:
    """Every listed rate row: what goes on it, its rate less prices, and whether it could improve the plan."""
    model, problem, q, m = plan.model, plan.model.problem, layout.places.quantity, layout.places.money
    yield from _head("Rate rows" if layout.every_row else "Rate rows that are used", RATE_HEADINGS)
    styles = _styles(plan, layout, "n___qmmmmqqctptnn")
    flat, barred, held = plan.week.rates.flat, _barred(plan), forced(model, figures)
    replaced, used_up = superseded(flat), _gone_on_rows(plan)
    aims, codes = figures.aims_matter, check_codes(plan, figures)
    on_row, send = layout.on_plan("Rate row"), layout.on_plan("Send")
    for r, row in enumerate(layout.listed.tolist(), layout.rates[0]):
        position, i, j = int(model.rate_row[row]), int(problem.depot[row]), int(problem.customer[row])
        depot, customer, haulier = flat.named(position)
        used = int(plan.flow.quantity[row])
        least, most = _limits(model, row)
        sign = f"IF(P{r}<>0,P{r},I{r})" if aims else f"I{r}"
        depot_row, customer_row = layout.depots[0] + i, layout.customers[0] + j
        check = (
            f'IF(OR(ROUND(E{r}-J{r},{q})<0,IF(K{r}="",FALSE,ROUND(E{r}-K{r},{q})>0)),2,'
            f"IF({sign}>0,IF(ROUND(E{r}-J{r},{q})>0,1,0),"
            f'IF({sign}<0,IF(K{r}="",1,IF(ROUND(E{r}-K{r},{q})<0,1,0)),0)))'
        )
        cost = used * int(model.money[row])
        exact = Formula(f"ROUND(E{r}*F{r},{layout.places.cost})", _cost(model, cost)) if used else None
        limited = most is not None or least
        worth = f'IF({sign}>0,I{r}*J{r},IF({sign}<0,IF(K{r}="",0,I{r}*K{r}),0))'
        yield Row(
            [
                position + 1,
                depot,
                customer,
                haulier,
                Formula(f"SUMIF({on_row},A{r},{send})", _quantity(model, used)) if used else 0,
                _link(layout, _rate_formula(position, m), _money(model, int(model.money[row]))),
                Formula(f"$H${depot_row}", _money(model, int(figures.depot.money[i]))),
                Formula(f"$H${customer_row}", _money(model, int(figures.customer.money[j]))),
                Formula(f"ROUND(F{r}-G{r}-H{r},{m})", _money(model, int(figures.money[row]))),
                _link(
                    layout,
                    _least_formula(position, bool(replaced[position]), used_up.get(position)),
                    _quantity(model, least),
                ),
                _link(
                    layout,
                    _most_formula(
                        position, position in barred or bool(replaced[position]), used_up.get(position)
                    ),
                    "" if most is None else _quantity(model, most),
                ),
                Formula(check, int(codes[row])),
                exact,
                Formula(f"ROUND(M{r},{layout.places.payable})", _payable(layout, model, cost))
                if used
                else None,
                Formula(worth, _cost(model, int(held[row]) * int(figures.money[row]))) if limited else None,
                Formula(f"-$P${depot_row}-$P${customer_row}", int(figures.aims[row])) if aims else None,
                i + 1,
            ],
            styles,
        )


def _rate_formula(position: int, places: int) -> str:
    own = on_rates("Surcharge %", position)
    percent = f'IF({own}="",N({on_rules("fuel_surcharge")}),{own})'
    return f"ROUND({on_rates('Rate', position)}*(1+{percent}/100),{places})"


def _least_formula(position: int, replaced: bool, gone: Decimal | None) -> str:
    hold = on_rates(HOLD, position)
    open_row = "0" if replaced else f"N({on_rates('At least', position)})"
    limit = f'IF({hold}<>"",{hold},{open_row})'
    return limit if gone is None else f"MAX(0,{limit}-{canonical(gone)})"


def _most_formula(position: int, barred: bool, gone: Decimal | None) -> str:
    hold, most, closed = (on_rates(heading, position) for heading in (HOLD, "At most", "Closed"))
    open_row = "0" if barred else f'IF({closed}="yes",0,IF({most}="","",{most}))'
    limit = f'IF({hold}<>"",{hold},{open_row})'
    return limit if gone is None else f'IF({limit}="","",MAX(0,{limit}-{canonical(gone)}))'


def _gone_on_rows(plan: Plan) -> dict[int, Decimal]:
    """What has gone on the lane and by the haulier of a rate row, by the row's position.

    It uses up the limits of the first row of that kind that no later rate has replaced.
    """
    week = plan.week
    positions = (
        {int(number): position for position, number in enumerate(week.rates.ids_in_order)}
        if week.gone
        else {}
    )
    replaced, found = superseded(week.rates.flat), {}
    for lane, quantity in left(week).row.items():
        there = (positions[number] for number in week.rates.ids(*lane) if number in positions)
        first = next((position for position in there if not replaced[position]), None)
        if first is not None:
            found[first] = quantity
    return found


def _barred(plan: Plan) -> set[int]:
    """Positions of rate rows that a customer's one depot rules out."""
    week, flat = plan.week, plan.week.rates.flat
    named = {
        name: customer.one_depot
        for name, customer in week.customers.items()
        if customer.one_depot not in (None, ANY_SINGLE_DEPOT)
    }
    codes = [code for code, name in enumerate(flat.customer_names) if name in named]
    found = set()
    for position in np.flatnonzero(np.isin(flat.customer, codes)).tolist():
        depot, customer, _ = flat.named(position)
        if depot != named[customer]:
            found.add(position)
    return found


def _limits(model: Model, row: int) -> tuple[int, int | None]:
    least, most = (int(limits[row]) for limits in model.stated_limits)
    return least, None if most == UNLIMITED else most


def _head(name: str, headings: Sequence[str | None]) -> Iterator[Row]:
    yield Row([name, *[None] * (len(headings) - 1)], [Style("part")] * len(headings))
    words = {"Depot", "Customer", "Haulier"}
    styles = [
        Style("heading", align="left" if heading in words else "right", wrap=True) for heading in headings
    ]
    yield Row(headings, styles, height=30)


def _styles(plan: Plan, layout: Layout, kinds: str) -> list[Style]:
    """A style a column: n count, q quantity, m money per unit, t cost, p payable, c check, _ text."""
    formats = {
        "n": "0",
        "c": "0",
        "q": quantity_format(plan),
        "m": number_format(layout.places.money, always=2),
        "t": number_format(layout.places.cost, always=2),
        "p": number_format(layout.places.payable),
    }
    return [Style() if kind == "_" else Style("plain", formats[kind], "right") for kind in kinds]


def _link(layout: Layout, formula: str, value: float | str) -> Value:
    """A formula that points at another sheet, or a copy where the figures are too long for that."""
    return Formula(formula, value) if layout.linked else value


def _has_gone(layout: Layout, column: str, row: int, value: Decimal) -> Value:
    """What has gone from a depot or to a customer, by its number in the table of what has gone."""
    if layout.gone[1] < layout.gone[0]:
        return 0
    numbers, quantities = layout.range(column, layout.gone), layout.range("E", layout.gone)
    return Formula(f"SUMIF({numbers},A{row},{quantities})", float(value))


def _sent(layout: Layout, row: int, value: float) -> Value:
    if layout.rates[1] < layout.rates[0]:
        return 0
    numbers, quantities = layout.range("Q", layout.rates), layout.range("E", layout.rates)
    return Formula(f"SUMIF({numbers},A{row},{quantities})", value)  # by number: names may hold wildcards


def _sum(where: str, value: float) -> Formula:
    return Formula(f"SUM({where})", value)


def _quantity(model: Model, integer: int) -> float:
    return _float(integer, model.quantity_places)


def _money(model: Model, integer: int) -> float:
    return _float(integer, model.money_places)


def _cost(model: Model, integer: int) -> float:
    return _float(integer, model.quantity_places + model.money_places)


def _payable(layout: Layout, model: Model, cost: int) -> float:
    exact = to_decimal(cost, model.quantity_places + model.money_places)
    return float(round_half_up(exact, layout.places.payable))


def _float(integer: int, places: int) -> float:
    """The float nearest to a decimal of so many places."""
    power: int = 10**places
    return integer / power
