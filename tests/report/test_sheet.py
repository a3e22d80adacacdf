"""Rows as XML: values, formulas with results, dates, text."""

from datetime import date
from decimal import Decimal as D
from io import BytesIO
from pathlib import Path

import openpyxl
import pytest
import python_calamine
from hypothesis import given
from hypothesis import strategies as st

from engine.report.book import write_book
from engine.report.look import Style
from engine.report.sheet import MOST_ROWS, Formula, Row, Sheet, fits_a_number, render


def written(*rows: Row, name: str = "Sheet") -> BytesIO:
    held = BytesIO()
    write_book([Sheet(name, [12] * 4, rows, len(rows))], held, "test")
    return held


def test_a_formula_carries_its_result() -> None:
    held = written(Row([D(2), D("0.5"), Formula("A1*B1", D(1)), Formula('IF(A1<3,"a & b","")', "a & b")]))
    live = openpyxl.load_workbook(held)["Sheet"]
    shown = openpyxl.load_workbook(held, data_only=True)["Sheet"]
    assert [cell.value for cell in live[1]] == [2, 0.5, "=A1*B1", '=IF(A1<3,"a & b","")']
    assert [cell.value for cell in shown[1]] == [2, 0.5, 1, "a & b"]
    held.seek(0)
    assert python_calamine.CalamineWorkbook.from_filelike(held).get_sheet_by_index(0).to_python() == [
        [2.0, 0.5, 1.0, "a & b"]
    ]


@given(
    st.lists(
        st.decimals(allow_nan=False, allow_infinity=False, min_value=-(10**14), max_value=10**14), max_size=8
    )
)
def test_decimals_read_back_exactly_as_numbers_or_as_text(decimals: list[D]) -> None:
    held = written(Row(decimals), Row(["end"]))
    cells = openpyxl.load_workbook(held)["Sheet"][1][: len(decimals)]
    for decimal, cell in zip(decimals, cells, strict=True):
        assert isinstance(cell.value, str) != fits_a_number(decimal)
        assert D(str(cell.value)) == decimal
        if fits_a_number(decimal):
            assert D(repr(float(cell.value))) == decimal


@pytest.mark.parametrize(
    ("decimal", "fits"),
    [
        ("123456789012345", True),
        ("1234567890123456", False),
        ("0.1234567890123456", False),
        ("123456789012345000000", True),
        ("1.50000000000000000000", True),
        ("1E+400", False),
        ("0E-500", False),
    ],
)
def test_fifteen_digits_fit_a_number(decimal: str, fits: bool) -> None:
    assert fits_a_number(D(decimal)) is fits


def test_dates_are_dates_and_early_ones_text() -> None:
    row = Row([date(2026, 12, 1), date(1900, 3, 1), date(1900, 2, 28)], [Style("plain", "yyyy-mm-dd")] * 3)
    cells = openpyxl.load_workbook(written(row))["Sheet"][1]
    # days after 1899-12-30, the day before the first of the 1900 date system as used from March 1900 on
    assert cells[0].value.date() == date(2026, 12, 1)
    assert cells[1].value.date() == date(1900, 3, 1)
    assert cells[2].value == "1900-02-28"


def test_blanks_around_text_are_kept() -> None:
    cells = openpyxl.load_workbook(written(Row(["  a ", "\n", "b\nc", "<&>\"'"])))["Sheet"][1]
    assert [cell.value for cell in cells] == ["  a ", "\n", "b\nc", "<&>\"'"]


def test_more_rows_than_a_sheet_holds_are_refused() -> None:
    rows = (Row([]) for _ in range(MOST_ROWS + 1))
    with pytest.raises(ValueError, match="split the table"):
        for _ in render(rows, lambda _: 0):
            pass


def test_a_truth_value_or_a_list_is_refused() -> None:
    with pytest.raises(TypeError, match="yes in words"):
        list(render([Row([True])], lambda _: 0))
    with pytest.raises(TypeError, match="cannot hold list"):
        list(render([Row([[1]])], lambda _: 0))  # type: ignore[list-item]


def test_a_failed_write_leaves_the_earlier_file(tmp_path: Path) -> None:
    path = tmp_path / "plan.xlsx"
    path.write_bytes(b"earlier")
    with pytest.raises(TypeError):
        write_book([Sheet("Sheet", [10], [Row([object()])], 1)], path, "test")  # type: ignore[list-item]
    assert path.read_bytes() == b"earlier"
    assert [file.name for file in tmp_path.iterdir()] == ["plan.xlsx"]
