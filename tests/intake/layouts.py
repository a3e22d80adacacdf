"""A week written as other people's spreadsheets might have it: any layout, format, locale and mess."""

from decimal import Decimal

from hypothesis import strategies as st

from engine.exact import canonical
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.week import Week
from tests.intake.books import ods, xlsb
from tests.intake.sheets import text_file, workbook

HEADINGS = {
    "name": ["Depot", "DEPOT", "From", "Loading point", "Warehouse:"],
    "available": ["Available", "Stock", "Available (t)", "available, t", "Qty available", "On hand [t]"],
    "must_move": ["Must move", "Must go"],
    "charge_if_unsent": ["Charge if unsent", "Storage charge EUR/t"],
    "customer": ["Customer", "Ship-to", "Consignee", "Delivery point", "CUSTOMER NAME"],
    "ordered": ["Ordered", "Demand", "Qty (t)", "Order quantity", "Requirement in t"],
    "priority": ["Priority", "Prio"],
    "number": ["Order number", "Order No.", "PO number"],
    "day": ["Day", "Delivery day"],
    "charge_if_short": ["Charge if short", "Penalty"],
    "rate": ["Rate", "Rate EUR/t", "Freight rate (EUR/t)", "Price", "Tariff €/t"],
    "haulier": ["Haulier", "Carrier", "Transport company"],
    "at_most": ["At most", "Max", "Weekly limit"],
    "closed": ["Closed", "Lane closed"],
    "km": ["Km", "Distance (km)"],
}
DEPOT_NAMES = ["Northgate", "Quarry", "Mühle 2", "Old Mill", "St. Ann's", "Kø", "12"]
CUSTOMER_NAMES = [
    "Aster",
    "Birch & Co",
    "Cole/Dale",
    "Élan",
    "Fern 7",
    "Garner",
    "Ħal",
    "Iris",
    "Juniper Yard",
]

numbers = st.decimals(min_value=1, max_value=9999, places=2).map(lambda number: Decimal(canonical(number)))
quantities = numbers | st.integers(0, 5000).map(Decimal)


@st.composite
def weeks(draw):
    """A small week without a fault."""
    depots = tuple(
        Depot(name, draw(quantities), draw(st.none() | st.just(Decimal(0))), draw(st.none() | numbers))
        for name in draw(st.lists(st.sampled_from(DEPOT_NAMES), min_size=2, max_size=4, unique=True))
    )
    customers = tuple(
        Customer(
            name,
            tuple(
                Order(
                    draw(quantities),
                    draw(st.none() | st.just(f"A-{n}")),
                    draw(st.sampled_from([None, "Mon"])),
                )
                for n in range(draw(st.integers(1, 2)))
            ),
            charge_if_short=draw(st.none() | numbers),
            priority=draw(st.sampled_from([None, "A", "B", "C"])),
        )
        for name in draw(st.lists(st.sampled_from(CUSTOMER_NAMES), min_size=2, max_size=5, unique=True))
    )
    plain = draw(st.booleans())
    rows = []
    for depot in depots:
        for customer in customers:
            for haulier in (
                [None] if plain else draw(st.sampled_from([[], [None], ["Ore"], ["Ore", "Pike & Sons"]]))
            ):
                more = (
                    {}
                    if plain
                    else {
                        "haulier": haulier,
                        "at_most": draw(st.none() | quantities),
                        "closed": draw(st.booleans()),
                        "km": draw(st.none() | numbers),
                    }
                )
                if draw(st.integers(0, 3)):
                    rows.append(RateRow(depot.name, customer.name, draw(numbers), **more))
    rows = rows or [RateRow(depots[0].name, customers[0].name, Decimal(3))]
    return Week.of(depots, customers, tuple(rows), Rules(week="Week 49"))


class Layout:
    """How one week is written down, drawn choice by choice."""

    def __init__(self, draw):
        self.draw = draw
        self.kind = draw(st.sampled_from(["xlsx", "ods", "xlsb", "csv"]))
        self.mark = draw(st.sampled_from(".,"))
        self.as_text = self.kind == "csv" or draw(st.booleans())
        self.group = draw(st.sampled_from(["", "\u00a0", "'", "," if self.mark == "." else "."]))
        self.grid = draw(st.booleans())

    def one(self, *options):
        return self.draw(st.sampled_from(options))

    def number(self, value):
        if value is None:
            return self.one("", None, " ") if self.kind != "csv" else ""
        if not self.as_text or (self.kind != "csv" and self.one(0, 0, 1)):
            return float(value)
        whole, _, fraction = canonical(value).partition(".")
        if self.group and len(whole) > 3:
            whole = whole[:-3] + self.group + whole[-3:]
        return whole + (self.mark + fraction if fraction else "")

    def text(self, value):
        if value is None:
            return ""
        return self.one(value, value, f" {value}", f"{value}\u00a0")

    def name(self, value):
        """A name in a rate row or a heading of a grid: case and spaces are free."""
        return self.one(
            value, value.upper() if value.upper().lower() == value.lower() else value, f"  {value} "
        )

    def heading(self, field):
        return self.one(*HEADINGS[field])

    def table(self, headings, rows, total=None, note=True):
        """The rows of a sheet, shifted, with a title above, a total and a remark below."""
        right, title = self.one(0, 0, 2), self.one([], [["Figures of the desk"]], [["Week 49"], []])
        body = [headings, *rows]
        if self.one(True, False) and len(rows) > 1:
            body.insert(2, [""] * len(headings))
        if total is not None and self.one(True, False):
            body.append([self.one("Total", "TOTAL", "Sum"), total] + [""] * (len(headings) - 2))
        if note and self.one(True, False, False):
            body += [[""] * len(headings), ["* subject to change"] + [""] * (len(headings) - 1)]
        return title + [[""] * right + row for row in body]


def columns(layout, records, fields, always):
    """The fields to write: those always needed, and those that any record has."""
    return [f for f in fields if f in always or any(getattr(r, f) is not None for r in records)]


@st.composite
def written(draw):
    """A week, the sources that it was written to, and the decimal mark in them."""
    week = draw(weeks())
    layout = Layout(draw)
    sheets = {
        layout.one("Depots", "Stock", "Sheet 1"): _depots(layout, week),
        layout.one("Customers", "Orders wk 49", "Sheet 2"): _customers(layout, week),
        layout.one("Rates", "Haulage", "Sheet 3"): _rates(layout, week),
        "Settings": layout.table(
            [layout.one("Rule", "Setting"), "Value"], [["Week", "Week 49"], ["Unit", "t"]]
        ),
    }
    order = draw(st.permutations(list(sheets)))
    sheets = {title: sheets[title] for title in order}
    if layout.kind == "csv":
        encoding, separator = draw(st.sampled_from([("utf-8", ";"), ("utf-8-sig", "\t"), ("utf-16", ";")]))
        return week, [
            text_file(f"{title}.csv", _lines(rows, separator), encoding) for title, rows in sheets.items()
        ], layout.mark  # fmt: skip
    write = {"xlsx": workbook, "ods": ods, "xlsb": xlsb}[layout.kind]
    return week, [write(sheets)], layout.mark


def _lines(rows, separator):
    return "\n".join(separator.join(map(_csv, row)) for row in _even(rows))


def _csv(cell):
    return "" if cell is None else str(cell)


def _even(rows):
    width = max(map(len, rows))
    return [row + [""] * (width - len(row)) for row in rows]


def _depots(layout, week):
    records = list(week.depots.values())
    fields = columns(
        layout, records, ("name", "available", "must_move", "charge_if_unsent"), ("name", "available")
    )
    rows = [[layout.text(r.name)] + [layout.number(getattr(r, f)) for f in fields[1:]] for r in records]
    total = layout.number(sum((r.available for r in records), Decimal(0)))
    return layout.table([layout.heading(f) for f in fields], rows, total)


def _customers(layout, week):
    rows = []
    for customer in week.customers.values():
        for place, order in enumerate(customer.orders):
            first = place == 0 or layout.one(True, False)
            priority = customer.priority or ""
            rows.append([
                layout.text(customer.name) if place == 0 else layout.name(customer.name),
                layout.number(order.quantity),
                layout.text(order.number),
                layout.text(order.day),
                layout.one(priority, priority.lower()) if first else "",
                layout.number(customer.charge_if_short if first else None),
            ])  # fmt: skip
    fields = ("customer", "ordered", "number", "day", "priority", "charge_if_short")
    total = layout.number(sum((c.ordered for c in week.customers.values()), Decimal(0)))
    return layout.table([layout.heading(f) for f in fields], rows, total)


def _rates(layout, week):
    rows = list(week.rates)
    if layout.grid and all(r == RateRow(r.depot, r.customer, r.rate) for r in rows):
        return _grid(layout, week, rows)
    fields = ("depot", "customer", "rate", "haulier", "at_most", "closed", "km")
    body = [
        [
            layout.name(r.depot), layout.name(r.customer), layout.number(r.rate), layout.text(r.haulier),
            layout.number(r.at_most), layout.one("yes", "x", "Closed") if r.closed else layout.one("", "no"),
            layout.number(r.km),
        ]
        for r in rows
    ]  # fmt: skip
    return layout.table([layout.heading("name" if f == "depot" else f) for f in fields], body)


def _grid(layout, week, rows):
    rates = {(r.depot, r.customer): r.rate for r in rows}
    depots, customers = list(week.depots), list(week.customers)
    down, across = (depots, customers) if layout.one(True, False) else (customers, depots)
    body = []
    for name in down:
        cells = []
        for other in across:
            lane = (name, other) if down is depots else (other, name)
            cells.append(
                layout.number(rates[lane]) if lane in rates else layout.one("", "-", "x", "n/a", "closed")
            )
        body.append([layout.name(name), *cells])
    corner = layout.one("", "EUR/t", "Depot" if down is depots else "Customer")
    return layout.table([corner, *map(layout.name, across)], body, note=False)
