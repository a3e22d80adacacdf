"""A week whose every name tries to be something else: HTML, Markdown, a formula, SQL, a path, a command."""

import csv
import io

import engine
from engine.intake.reading import Reading

HIT = "window.attacked=1"
NAMES = (
    f"<script>{HIT}</script>",
    f"<img src=x onerror={HIT}>",
    '=HYPERLINK("http://elsewhere.test/","go")',
    "=cmd|' /C calc'!A0",
    "+1+1",
    "-2+3",
    "@SUM(A1)",
    "../../etc/passwd",
    "..\\..\\windows\\x",
    "**bold** _slant_ ~~out~~",
    "# a heading",
    "$x^2$",
    "$$x$$",
    ":material/home:",
    ":red[red]",
    ":tada:",
    "{{7*7}} ${7*7} #{7*7}",
    f"@@={HIT}",
    "@@#attacked",
    "{depot} {quantity}",
    "![i](http://elsewhere.test/i.png)",
    f"[l](javascript:{HIT})",
    "http://elsewhere.test/",
    "www.elsewhere.test",
    "someone@elsewhere.test",
    "`code`",
    "a | b",
    "&lt;b&gt; &amp;",
    "right\u202eto left\u202c",
    "\u200fmark\u200e",
    "zero\u200bwidth",
    "'); DROP TABLE weeks; --",
    '"; DELETE FROM weeks; --',
    "% _ \\",
    "datum.Depot",
    "constructor",
    "__proto__",
    "CON",
    "bell\x07",
    "null",
    "long" * 50,
)
DEPOTS = NAMES[:21]
CUSTOMERS = NAMES[21:]


def _csv(rows: list[list[str]]) -> bytes:
    held = io.StringIO()
    csv.writer(held).writerows(rows)
    return held.getvalue().encode()


def attack_week() -> Reading:
    """The week as its spreadsheets would bring it in: every name is a depot's or a customer's too."""
    depots = [["Depot", "Available", "Latitude", "Longitude"]]
    depots += [[name, "60", str(50 + n % 5), str(n % 7)] for n, name in enumerate(DEPOTS)]
    customers = [["Customer", "Ordered", "Order number", "Day", "Latitude", "Longitude"]]
    customers += [
        [name, "70", NAMES[n], NAMES[-1 - n][:30], str(51 + n % 4), str(n % 6)]
        for n, name in enumerate(CUSTOMERS)
    ]
    rates = [["Depot", "Customer", "Haulier", "Rate"]]
    rates += [
        [depot, customer, NAMES[(n + m) % len(NAMES)], str(5 + (3 * n + 7 * m) % 11)]
        for n, depot in enumerate(DEPOTS)
        for m, customer in enumerate(CUSTOMERS)
    ]
    rules = [["Rule", "Value"], ["Week", NAMES[0]], ["Unit", "t"], ["Currency", "EUR"]]
    tables = {"depots": depots, "customers": customers, "rates": rates, "rules": rules}
    return engine.read_week([(f"{name}.csv", _csv(rows)) for name, rows in tables.items()])
