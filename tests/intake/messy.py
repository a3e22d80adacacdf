"""Some sixty small messy files: how other people's spreadsheets look, and what must be understood of each.

    python tests/intake/messy.py FOLDER

writes them all to a folder, to look at them in a spreadsheet program.
"""

import datetime
import sys
from dataclasses import dataclass
from pathlib import Path

from tests.intake.books import ods, xlsb
from tests.intake.expected import EXPECTED
from tests.intake.sheets import CUSTOMERS, DEPOTS, RATES, RULES, plain, text_file, workbook


@dataclass(frozen=True)
class Messy:
    """Files, what is understood of them (the beginning of the summary), and the findings by cell."""

    name: str
    sources: tuple[tuple[str, bytes], ...]

    @property
    def understood(self):
        return EXPECTED[self.name][0]

    @property
    def findings(self):
        return {tuple(one) for one in EXPECTED[self.name][1]}


def book(name, prepare=None, **changed):
    return Messy(name, (workbook(plain(**changed), f"{name}.xlsx", prepare),))


def files(name, *sources):
    return Messy(name, sources)


def csv(title, text, encoding="utf-8"):
    return text_file(f"{title}.csv", text, encoding)


def merged_headings(book):
    sheet = book["Rates"]
    sheet.insert_rows(1)
    sheet["A1"], sheet["A2"], sheet["B1"], sheet["B2"] = "Depot", None, "Customer", None
    sheet["C1"], sheet["C2"], sheet["D1"], sheet["D2"], sheet["E2"] = (
        "Price",
        "Rate",
        "Limits",
        "At least",
        "At most",
    )
    sheet["E3"] = 50
    for area in ("A1:A2", "B1:B2", "D1:E1"):
        sheet.merge_cells(area)


def hidden(book):
    book["Customers"].sheet_state = "hidden"
    book["Rates"].row_dimensions[3].hidden = True
    book["Rates"].row_dimensions[4].hidden = True


def errors(book):
    for sheet, cell, error in (
        ("Depots", "B2", "#N/A"),
        ("Customers", "B3", "#VALUE!"),
        ("Rates", "C4", "#REF!"),
    ):
        book[sheet][cell] = error
        book[sheet][cell].data_type = "e"


def formulas(book):
    book["Rates"]["C2"] = "=C3*1.05"
    book["Depots"]["B4"] = "=SUM(B2:B3)"
    book["Depots"]["A4"] = "Total"


def shown_as_percent(book):
    book["Rates"]["D1"], book["Rates"]["D2"], book["Rates"]["D3"] = "Surcharge", 0.125, 4
    book["Rates"]["D2"].number_format = "0.0%"
    book["Rules"]["A5"], book["Rules"]["B5"] = "Fuel surcharge %", 0.07
    book["Rules"]["B5"].number_format = "0%"


GRID = [["EUR/t", "Aster", "Birch"], ["Northgate", 12.5, 13], ["Quarry", 9.75, 11]]
TALL = [["Customer", "Northgate", "Quarry"], ["Aster", 12.5, 9.75], ["Birch", 13, 11]]
DAY = datetime.date(2026, 12, 1)


def customers(*rows, more=()):
    return [["Customer", "Ordered", *more], *rows]


def rates(*rows, more=()):
    return [["Depot", "Customer", "Rate", *more], *rows]


CASES = [
    book("plain"),
    book("grid", Rates=GRID),
    book("grid_the_other_way", Rates=TALL),
    book(
        "grid_with_a_title_and_blank_corner",
        Rates=[["Haulage 2026"], [], ["", "", *GRID[0][1:]], *[["", *r] for r in GRID[1:]]],
    ),
    book("grid_closed_in_words", Rates=[GRID[0], ["Northgate", "x", "closed"], ["Quarry", 9.75, "n/a"]]),
    book(
        "grid_with_totals",
        Rates=[[*GRID[0], "Total"], [*GRID[1], 25.5], [*GRID[2], 20.75], ["Total", 22.25, 24, 46.25]],
    ),
    book("grid_with_a_slip_in_a_name", Rates=[["EUR/t", "Aster", "Brich"], *GRID[1:]]),
    book("grid_with_text_in_a_cell", Rates=[GRID[0], ["Northgate", 12.5, "ask Tom"], GRID[2]]),
    book("grid_per_load", Rates=[["EUR per load", "Aster", "Birch"], *GRID[1:]]),
    book("grid_with_a_note_column", Rates=[[*GRID[0], "Remarks"], [*GRID[1], "via ferry"], GRID[2]]),
    book(
        "grid_with_decimal_comma_texts",
        Rates=[GRID[0], ["Northgate", "12,5", "13"], ["Quarry", "9,75", "11"]],
    ),
    book("grid_of_ambiguous_texts", Rates=[GRID[0], ["Northgate", "1,250", "1,300"], ["Quarry", "9", "11"]]),
    book(
        "other_words",
        Depots=[["Loading point", "Stock on hand"], *DEPOTS[1:]],
        Customers=[["Consignee", "Demand"], *CUSTOMERS[1:]],
        Rates=[["From", "To", "Freight rate"], *RATES[1:]],
    ),
    book(
        "units_in_headings",
        Depots=[["Depot", "Available (t)"], *DEPOTS[1:]],
        Rates=[["Depot", "Customer", "Rate EUR/t"], *RATES[1:]],
    ),
    book("kilograms", Depots=[["Depot", "Available kg"], ["Northgate", 120000], ["Quarry", 80000]]),
    book("pounds", Customers=[["Customer", "Ordered (lbs)"], ["Aster", 1000], ["Birch", 500]]),
    book("bare_tons", Depots=[["Depot", "Available (tons)"], *DEPOTS[1:]]),
    book("pallets_and_tonnes", Depots=[["Depot", "Available (pallets)"], *DEPOTS[1:]]),
    book("other_currency", Rates=[["Depot", "Customer", "Rate USD/t"], *RATES[1:]]),
    book("currency_from_the_heading", Rules=None, Rates=[["Depot", "Customer", "Rate £/t"], *RATES[1:]]),
    book("rates_per_load_in_the_heading", Rates=[["Depot", "Customer", "Rate per load"], *RATES[1:]]),
    book("a_rate_heading_nobody_knows", Rates=[["Depot", "Customer", "What Tom said"], *RATES[1:]]),
    book(
        "titles_notes_and_totals",
        Depots=[["Week 49"], [], *DEPOTS, ["Total", 200], [], ["* Quarry closes on Friday"]],
    ),
    book("total_that_differs", Customers=[*CUSTOMERS, ["Total", 120]]),
    book("total_without_a_name", Customers=[*CUSTOMERS, ["", 100]]),
    book(
        "blank_rows_and_columns",
        Customers=[[], ["", "Customer", "", "Ordered"], [], ["", "Aster", "", 60], [], ["", "Birch", "", 40]],
    ),
    book(
        "two_tables_side_by_side",
        Depots=[
            ["Depot", "Available", "", "Customer", "Ordered"],
            ["Northgate", 120, "", "Aster", 60],
            ["Quarry", 80, "", "Birch", 40],
        ],
        Customers=None,
    ),
    book(
        "two_tables_that_touch",
        Depots=[
            ["Depot", "Available", "Customer", "Ordered"],
            ["Northgate", 120, "Aster", 60],
            ["Quarry", 80, "Birch", 40],
        ],
        Customers=None,
    ),
    book("two_tables_below_each_other", Depots=[*DEPOTS, [], *CUSTOMERS], Customers=None),
    book("all_on_one_sheet", Depots=[*DEPOTS, [], *CUSTOMERS, [], *RATES], Customers=None, Rates=None),
    book("merged_headings", merged_headings),
    book("hidden_sheet_and_rows", hidden),
    book("error_cells", errors),
    book("formulas_without_results", formulas),
    book("percent_as_shown", shown_as_percent),
    book(
        "percent_as_a_fraction",
        Rates=rates(["Northgate", "Aster", 12.5, 0.125], *RATES[2:], more=["Surcharge %"]),
    ),
    book("a_date_for_a_number", Depots=[DEPOTS[0], ["Northgate", DAY], DEPOTS[2]]),
    book("yes_for_a_number", Depots=[DEPOTS[0], ["Northgate", True], DEPOTS[2]]),
    book(
        "numbers_as_people_type_them",
        Depots=[DEPOTS[0], ["Northgate", "1,120.5 t"], ["Quarry", "1\u00a0080"]],
        Customers=[CUSTOMERS[0], ["Aster", "60 tonnes"], ["Birch", "40"]],
        Rates=[*RATES[:3], ["Quarry", "Aster", "€ 9.75"], ["Quarry", "Birch", "EUR 11/t"]],
    ),
    book(
        "a_bracketed_minus",
        Depots=[
            ["Depot", "Available", "Charge if unsent"],
            ["Northgate", 120, "(2.50)"],
            ["Quarry", 80, None],
        ],
    ),
    book("negative_order", Customers=[*CUSTOMERS, ["Aster", -5]]),
    book("kilograms_in_one_cell", Customers=[CUSTOMERS[0], ["Aster", "60000 kg"], ["Birch", 40]]),
    book(
        "order_rows",
        Customers=customers(
            ["Aster", 30, "A-1", "Mon"],
            ["Birch", 40, "B-1", DAY],
            ["ASTER", 30, "A-2", "Tue"],
            more=["Order no.", "Delivery day"],
        ),
    ),
    book(
        "order_rows_that_disagree",
        Customers=customers(["Aster", 30, "A"], ["Birch", 40, None], ["Aster", 30, "B"], more=["Priority"]),
    ),
    book("an_order_left_blank", Customers=[*CUSTOMERS, ["Aster", None]]),
    book(
        "names_in_other_spelling",
        Rates=[
            RATES[0],
            ["NORTHGATE", " aster", 12.5],
            ["North\u00a0gate", "Birch", 13],
            ["quarry ", "ASTER", 9.75],
            ["Quarry", "Birch", 11],
        ],
    ),
    book("names_nearly_alike", Customers=[*CUSTOMERS, ["Birch.", 5]]),
    book("a_depot_twice", Depots=[*DEPOTS, ["northgate", 30]]),
    book("a_depot_without_stock", Depots=[*DEPOTS, ["Mill", None]]),
    book("rows_without_names", Depots=[*DEPOTS, [None, 30]], Rates=[*RATES, ["Quarry", None, 3]]),
    book(
        "hauliers_as_alternatives",
        Rates=rates(
            ["Northgate", "Aster", 12.5, "Ore"],
            ["Northgate", "Aster", 12, "Pike"],
            ["Quarry", "Birch", 11, "Ore"],
            ["Quarry", "Birch", 11.5, "ore"],
            more=["Carrier"],
        ),
    ),
    book(
        "limits_that_contradict",
        Rates=rates(
            ["Northgate", "Aster", 12.5, 30, 20, None],
            ["Quarry", "Birch", 11, 5, None, "yes"],
            more=["Min", "Max", "Closed"],
        ),
    ),
    book(
        "loads_without_a_load_size",
        Rates=rates(
            ["Northgate", "Aster", 250, "load", None, None],
            ["Quarry", "Birch", 11, "t", 90, 40],
            more=["Per", "Trip minimum", "Fixed charge"],
        ),
    ),
    book(
        "a_column_nobody_knows",
        Depots=[["Depot", "Available", "Foreman"], ["Northgate", 120, "Tom"], ["Quarry", 80, "Ann"]],
    ),
    book(
        "a_heading_nobody_knows",
        Depots=[["Depot", "Free for us", "Must move"], ["Northgate", 120, 10], ["Quarry", 80, 5]],
    ),
    book(
        "cells_beside_the_table",
        Depots=[["Depot", "Available", "", ""], ["Northgate", 120, "", "call Tom"], ["Quarry", 80, "", ""]],
    ),
    book(
        "a_plan_among_the_sheets",
        Plan=[["Depot", "Customer", "Send", "Rate"], ["Northgate", "Aster", 60, 99]],
    ),
    book(
        "a_sheet_of_something_else",
        Phone=[["Tom", "0123 456"], ["Ann", "0123 457"]],
        Sums=[["a", 1, 2], ["b", 3, 4]],
    ),
    book(
        "rules_as_typed",
        Rules=[
            ["Setting", "Value"],
            ["Currency", "€"],
            ["Unit", "tonnes"],
            ["Diesel surcharge", "4.5 %"],
            ["When short", "Even-share"],
        ],
    ),
    book(
        "rules_that_are_none",
        Rules=[
            ["Rule", "Value"],
            ["When short", "toss"],
            ["Load size", -3],
            ["Moon", "full"],
            ["Unit", "t"],
            ["Unit", "kg"],
        ],
    ),
    book(
        "places_out_of_range",
        Depots=[
            ["Depot", "Available", "Lat", "Lon"],
            ["Northgate", 120, 57.1, 190],
            ["Quarry", 80, "57,2", None],
        ],
    ),
    files(
        "text_files_with_semicolons",
        csv("depots", "Depot;Available\nNorthgate;120,0\nQuarry;80,5\n"),
        csv("orders", "Customer;Ordered\nAster;60\nBirch;1.040,5\n"),
        csv("rates", "Depot;Customer;Rate\nNorthgate;Aster;12,5\nQuarry;Birch;11\n", "cp1252"),
    ),
    files(
        "text_files_with_tabs",
        text_file("d.txt", "Depot\tAvailable\nMühle\t120\n", "utf-16"),
        text_file("c.tsv", "Customer\tOrdered\nÉlan\t60\n", "cp1252"),
        text_file("r.txt", "Depot\tCustomer\tRate\nMu\u0308hle\tELAN\t12.5\nMÜHLE\tÉLAN\t12\n", "utf-8-sig"),
    ),
    files(
        "other_formats_at_once",
        ods({"D": DEPOTS}, "d.ods"),
        xlsb({"C": CUSTOMERS}, "c.xlsb"),
        csv("r", 'Depot,Customer,Rate\nNorthgate,Aster,"1,012.50"\n'),
    ),
    files(
        "a_sheet_per_depot",
        workbook(
            {
                "Depots": DEPOTS,
                "Customers": CUSTOMERS,
                "Northgate": [["Customer", "Rate"], ["Aster", 12.5]],
                "Rates Quarry": [["Customer", "Rate"], ["Birch", "x"], ["Aster", 9]],
                "Rules": RULES,
            }
        ),
    ),
    files(
        "two_products",
        workbook(
            {
                "Depots": [
                    ["Depot", "Product", "Available"],
                    ["Northgate", "Lime", 10],
                    ["Northgate", "Ash", 20],
                ],
                "Customers": CUSTOMERS,
                "Rates": RATES,
            }
        ),
    ),
    files("only_rates", workbook({"Rates": RATES})),
    files(
        "text_with_notes_below",
        csv(
            "all",
            "Weekly stock;;\n;;\nDepot;Available;Must move\nNorthgate;120;\nQuarry;viel;5\n"
            ";;\nas of Monday;;\n",
        ),
    ),
]


if __name__ == "__main__":
    folder = Path(sys.argv[1])
    folder.mkdir(parents=True, exist_ok=True)
    for case in CASES:
        for name, data in case.sources:
            (folder / (f"{case.name}_{name}" if len(case.sources) > 1 else name)).write_bytes(data)
