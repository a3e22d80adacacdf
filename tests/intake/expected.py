"""What must be understood of each messy file: the summary's beginning, and the findings by cell."""

EXPECTED = {
    "plain": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "grid": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "grid_the_other_way": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "grid_with_a_title_and_blank_corner": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "grid_closed_in_words": (
        "2 depots, 2 customers, 1 lane of 4; 100 t ordered, 200 t available",
        [
            ("check", "no lane reaches", "Customers", "A3"),
            ("check", "no lane leaves", "Depots", "A2"),
        ],
    ),
    "grid_with_totals": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "total left out", "Rates", "D1"),
        ],
    ),
    "grid_with_a_slip_in_a_name": (
        "2 depots, 2 customers, 2 lanes of 4 (4 rates); 100 t ordered, 200 t available",
        [
            ("check", "unknown name", "Rates", "C2"),
            ("check", "no lane reaches", "Customers", "A3"),
        ],
    ),
    "grid_with_text_in_a_cell": (
        "2 depots, 2 customers, 3 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "not a number", "Rates", "C2"),
        ],
    ),
    "grid_per_load": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "load size missing", "Rates", "B2"),
        ],
    ),
    "grid_with_a_note_column": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "cells left out", "Rates", "D1"),
        ],
    ),
    "grid_with_decimal_comma_texts": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "grid_of_ambiguous_texts": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "which mark", "Rates", "B2"),
        ],
    ),
    "other_words": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "units_in_headings": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "kilograms": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "unit converted", "Depots", "B1"),
        ],
    ),
    "pounds": (
        "2 depots, 2 customers, 4 lanes of 4; 0.680388555 t ordered, 200 t available",
        [
            ("note", "unit converted", "Customers", "B1"),
        ],
    ),
    "bare_tons": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "unclear unit", "Depots", "B1"),
        ],
    ),
    "pallets_and_tonnes": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "weight per pallet", "Depots", "B1"),
        ],
    ),
    "other_currency": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "column in other currency", "Rates", "C1"),
        ],
    ),
    "currency_from_the_heading": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "unit told", "", ""),
            ("note", "currency told", "", ""),
            ("note", "no rules", "", ""),
        ],
    ),
    "rates_per_load_in_the_heading": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "load size missing", "Rates", "C2"),
        ],
    ),
    "a_rate_heading_nobody_knows": (
        "2 depots, 2 customers, 0 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "missing rates", "Rates", "A1"),
        ],
    ),
    "titles_notes_and_totals": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "total left out", "Depots", "A6"),
            ("note", "remark left out", "Depots", "A8"),
        ],
    ),
    "total_that_differs": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "total differs", "Customers", "A4"),
        ],
    ),
    "total_without_a_name": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "total left out", "Customers", "A4"),
        ],
    ),
    "blank_rows_and_columns": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "two_tables_side_by_side": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "two_tables_that_touch": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "two_tables_below_each_other": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "all_on_one_sheet": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "merged_headings": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "hidden_sheet_and_rows": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "hidden sheet", "Customers", ""),
            ("note", "hidden rows", "Rates", "A3"),
        ],
    ),
    "error_cells": (
        "1 depot, 1 customer, 0 lanes of 1 (3 rates); 60 t ordered, 80 t available",
        [
            ("stops", "error cell", "Depots", "B2"),
            ("stops", "error cell", "Customers", "B3"),
            ("stops", "error cell", "Rates", "C4"),
            ("check", "no lane reaches", "Customers", "A2"),
            ("check", "no lane leaves", "Depots", "A3"),
        ],
    ),
    "formulas_without_results": (
        "2 depots, 2 customers, 3 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "formula without value", "Rates", "C2"),
            ("note", "total left out", "Depots", "A4"),
        ],
    ),
    "percent_as_shown": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "percent_as_a_fraction": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "small percent", "Rates", "D2"),
        ],
    ),
    "a_date_for_a_number": (
        "1 depot, 2 customers, 2 lanes of 2 (4 rates); 100 t ordered, 80 t available",
        [
            ("stops", "date for number", "Depots", "B2"),
        ],
    ),
    "yes_for_a_number": (
        "1 depot, 2 customers, 2 lanes of 2 (4 rates); 100 t ordered, 80 t available",
        [
            ("stops", "not a number", "Depots", "B2"),
        ],
    ),
    "numbers_as_people_type_them": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 2,200.5 t available",
        [],
    ),
    "a_bracketed_minus": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "credit if unsent", "Depots", "C2"),
        ],
    ),
    "negative_order": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "negative", "Customers", "B4"),
        ],
    ),
    "kilograms_in_one_cell": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "unit converted", "Customers", "B2"),
        ],
    ),
    "order_rows": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "order_rows_that_disagree": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "rows differ", "Customers", "C4"),
        ],
    ),
    "an_order_left_blank": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "no order", "Customers", "B4"),
        ],
    ),
    "names_in_other_spelling": (
        "2 depots, 2 customers, 3 lanes of 4 (4 rates); 100 t ordered, 200 t available",
        [
            ("check", "unknown name", "Rates", "A3"),
        ],
    ),
    "names_nearly_alike": (
        "2 depots, 3 customers, 4 lanes of 6; 105 t ordered, 200 t available",
        [
            ("check", "names nearly alike", "Customers", "A4"),
            ("check", "no lane reaches", "Customers", "A4"),
        ],
    ),
    "a_depot_twice": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "same depot twice", "Depots", "A4"),
        ],
    ),
    "a_depot_without_stock": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "figure missing", "Depots", "B4"),
        ],
    ),
    "rows_without_names": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "no name", "Depots", "A4"),
            ("stops", "no name", "Rates", "B6"),
        ],
    ),
    "hauliers_as_alternatives": (
        "2 depots, 2 customers, 2 lanes of 4 (4 rates); 100 t ordered, 200 t available",
        [
            ("check", "same lane twice", "Rates", "C5"),
        ],
    ),
    "limits_that_contradict": (
        "2 depots, 2 customers, 1 lane of 4 (2 rates); 100 t ordered, 200 t available",
        [
            ("stops", "at least over at most", "Rates", "D2"),
            ("stops", "closed with at least", "Rates", "D3"),
            ("check", "no lane reaches", "Customers", "A3"),
            ("check", "no lane leaves", "Depots", "A3"),
            ("check", "order beyond reach", "Customers", "B2"),
        ],
    ),
    "loads_without_a_load_size": (
        "2 depots, 2 customers, 2 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "load size missing", "Rates", "D2"),
            ("stops", "load size missing", "Rates", "E3"),
        ],
    ),
    "a_column_nobody_knows": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "which column", "Depots", "C1"),
        ],
    ),
    "a_heading_nobody_knows": (
        "0 depots, 2 customers, 0 lanes of 0 (4 rates); 100 t ordered, 0 t available",
        [
            ("stops", "missing depots", "Depots", "A1"),
        ],
    ),
    "cells_beside_the_table": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "cells left out", "Depots", "D2"),
        ],
    ),
    "a_plan_among_the_sheets": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("note", "plan left out", "Plan", ""),
        ],
    ),
    "a_sheet_of_something_else": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "sheet left out", "Sums", ""),
            ("note", "sheet left out", "Phone", ""),
        ],
    ),
    "rules_as_typed": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [],
    ),
    "rules_that_are_none": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "rule", "Rules", "B2"),
            ("stops", "negative", "Rules", "B3"),
            ("stops", "rule twice", "Rules", "A6"),
            ("check", "unknown rule", "Rules", "A4"),
        ],
    ),
    "places_out_of_range": (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available",
        [
            ("stops", "out of range", "Depots", "D2"),
            ("check", "half a place", "Depots", "C2"),
            ("check", "half a place", "Depots", "C3"),
        ],
    ),
    "text_files_with_semicolons": (
        "2 depots, 2 customers, 2 lanes of 4; 1,100.5 t ordered, 200.5 t available",
        [
            ("check", "order beyond reach", "orders", "B3"),
            ("note", "no rules", "", ""),
        ],
    ),
    "text_files_with_tabs": (
        "1 depot, 1 customer, 1 lane of 1 (2 rates); 60 t ordered, 120 t available",
        [
            ("check", "unknown name", "r", "B2"),
            ("note", "no rules", "", ""),
        ],
    ),
    "other_formats_at_once": (
        "2 depots, 2 customers, 1 lane of 4; 100 t ordered, 200 t available",
        [
            ("check", "no lane reaches", "C", "A3"),
            ("check", "no lane leaves", "D", "A3"),
            ("note", "no rules", "", ""),
        ],
    ),
    "a_sheet_per_depot": (
        "2 depots, 2 customers, 2 lanes of 4; 100 t ordered, 200 t available",
        [
            ("check", "no lane reaches", "Customers", "A3"),
        ],
    ),
    "two_products": (
        "0 depots, 0 customers, 0 lanes of 0; 0 t ordered, 0 t available",
        [
            ("stops", "several products", "", ""),
            ("note", "no rules", "", ""),
        ],
    ),
    "only_rates": (
        "0 depots, 0 customers, 0 lanes of 0 (4 rates); 0 t ordered, 0 t available",
        [
            ("stops", "no depots", "Depots", ""),
            ("stops", "no customers", "Customers", ""),
            ("note", "no rules", "", ""),
        ],
    ),
    "text_with_notes_below": (
        "1 depot, 0 customers, 0 lanes of 0; 0 t ordered, 120 t available",
        [
            ("stops", "not a number", "all", "B5"),
            ("stops", "no customers", "Customers", ""),
            ("stops", "no rates", "Rates", ""),
            ("note", "remark left out", "all", "A7"),
            ("note", "no rules", "", ""),
        ],
    ),
}
