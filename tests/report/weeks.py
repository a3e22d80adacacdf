"""Weeks to write workbooks of: one with every kind of figure, one whose every text means harm."""

from datetime import date
from decimal import Decimal as D

from engine.figures import Customer, Depot, Gone, Hold, Order, RateKey, RateRow, Rules
from engine.week import Week

HARM = (
    "=1+1",
    '=HYPERLINK("http://example.invalid","x")',
    "+1-2",
    "-1+2",
    "@SUM(1)",
    "\t=1+1",
    "\r=1+1",
    "\n=1+1",
    "' =1",
    '"=1',
    "=cmd|' /C calc'!A0",
    "<b>&amp;</b>]]>",
    "a\x00b\x1fc\ud800d\uffffe",
    "&D&T&P &[Date]",
    "{=SUM(A1)}",
    "_x003D_1",
    "x" * 40_000,
    "Ärger 数量 🚚",
    "../../etc/passwd",
    "C:\\NUL",
)
"""Texts that a program might take for a formula, a code, a tag or a path, or that a file cannot hold."""


def busy_week() -> Week:
    """Short of stock, with limits, closed rows, holds, must move, charges, several order rows."""
    depots = (
        Depot("Northgate", D("120.5"), must_move=D(60), charge_if_unsent=D("-0.25"), loads_a_day=D(8)),
        Depot("Quarry", D(90), charge_if_unsent=D("1.5"), latitude=D("-46.92"), longitude=D("-125.95")),
        Depot("Millrace", D(40), must_move=D(0)),
        Depot("Idle", D(30)),
    )
    customers = (
        Customer("Alder", (Order(D(30), "A-1", "Mon"), Order(D("25.25"), "A-2", "Wed")), D(50), priority="A"),
        Customer("Birch", (Order(D(80), "007", "2026-12-01"),), priority="B", one_depot="Quarry"),
        Customer("Cole", (Order(D(70), "12"),), D(20)),
        Customer("Dogwood", (Order(D(0)),)),
        Customer("Elm", (Order(D("60.125"), day="Fri"), Order(D(10), "E-2", "Fri")), priority="C"),
        Customer("Fern", (Order(D(12), "F-1"),), D(3), may_decline=True, smallest_drop=None),
        Customer("Gorse", (Order(D(5), "G-1"),), D(9)),
    )
    rates = (
        RateRow("Northgate", "Alder", D("7.335"), haulier="Oxcart", km=D("41.5")),
        RateRow("Northgate", "Alder", D("7.1"), haulier="Drayman", at_most=D("12.5")),
        RateRow("Northgate", "Cole", D("9.99"), haulier="Oxcart", surcharge=D(0)),
        RateRow(
            "Northgate", "Elm", D("11.05"), haulier="Drayman", at_least=D(5), valid_from=date(2026, 11, 30)
        ),
        RateRow("Northgate", "Elm", D("11.05"), haulier="Drayman"),
        RateRow("Northgate", "Birch", D(1), haulier="Oxcart"),
        RateRow("Quarry", "Birch", D("6.4")),
        RateRow("Quarry", "Cole", D("8.88"), haulier="Drayman"),
        RateRow("Quarry", "Elm", D("4.2"), haulier="Oxcart", closed=True),
        RateRow("Millrace", "Alder", D("12.345"), haulier="Packhorse", surcharge=D("2.75")),
        RateRow("Millrace", "Cole", D("10.5"), haulier="Packhorse"),
        RateRow("Millrace", "Fern", D("5.5"), haulier="Oxcart"),
        RateRow("Millrace", "Dogwood", D(2), haulier="Oxcart"),
    )
    holds = {
        RateKey("Quarry", "Cole", "Drayman"): Hold(D("7.5"), "promised on the telephone"),
        RateKey("Northgate", "Elm", "Drayman", 2): Hold(D(3), "=2+2"),
    }
    rules = Rules("Week 49", "t", "EUR", fuel_surcharge=D("6.5"), charge_if_short=D(35))
    return Week.of(depots, customers, rates, rules, holds)


def met_week() -> Week:
    """More stock than orders, nothing but the needed figures."""
    depots = (Depot("East", D(70)), Depot("West", D(60)))
    customers = (Customer("Near", (Order(D(50)),)), Customer("Far", (Order(D(60)),)))
    rates = (
        RateRow("East", "Near", D(4)),
        RateRow("East", "Far", D(9)),
        RateRow("West", "Near", D(6)),
        RateRow("West", "Far", D(7)),
    )
    return Week.of(depots, customers, rates, Rules(currency="JPY"))


def harmful_week() -> Week:
    """Every name, reason, number and day is one of `HARM`; short of stock, so that all of them are listed."""
    depots = tuple(Depot(f"{text}", D(10), charge_if_unsent=D(1)) for text in HARM)
    customers = tuple(Customer(text, (Order(D(11), text, text),)) for text in reversed(HARM))
    rates = tuple(
        RateRow(depot, customer, D(1 + abs(place - other)), haulier=HARM[(place + other) % len(HARM)])
        for place, depot in enumerate(HARM)
        for other, customer in enumerate(HARM)
        if abs(place - other) < 3
    )
    first = rates[0]
    holds = {RateKey(first.depot, first.customer, first.haulier): Hold(D(2), HARM[1])}
    return Week.of(depots, customers, rates, Rules("=WEEK()", "=t", "EUR"), holds)


def long_week() -> Week:
    """Quantities with more digits than a spreadsheet number keeps."""
    depots = (Depot("East", D("1234567890123.125")), Depot("West", D(60)))
    customers = (Customer("Near", (Order(D("1234567890100.375")),)),)
    rates = (RateRow("East", "Near", D("1.23")), RateRow("West", "Near", D(2)))
    return Week.of(depots, customers, rates)


def gone_week() -> Week:
    """The busy week on Wednesday: some has gone, and a haulier's earlier rate is replaced by a later one."""
    week = busy_week()
    gone = (
        Gone("L1", "Northgate", "Alder", D("12.25"), D("7.5"), "Drayman", date(2026, 12, 1)),
        Gone("L2", "Quarry", "Cole", D(5), D("9.4572"), "Drayman", date(2026, 12, 2)),
        Gone("=L3", "Millrace", "Elm", D(10), D(9)),
    )
    later = (
        RateRow("Quarry", "Alder", D(3), haulier="Oxcart", valid_from=date(2026, 1, 1)),
        RateRow("Quarry", "Alder", D(33), haulier="Oxcart", valid_from=date(2026, 2, 1)),
    )
    depots, customers = tuple(week.depots.values()), tuple(week.customers.values())
    return Week.of(depots, customers, (*week.rates, *later), week.rules, week.holds, gone)
