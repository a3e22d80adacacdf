"""Text made safe for cells, CSV files, file names and page headers."""

import re
from xml.etree import ElementTree

import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.report.text import (
    LONGEST_CELL,
    cell_text,
    csv_text,
    header_text,
    safe_file_name,
    starts_a_formula,
)
from tests.report.weeks import HARM

any_text = st.text(st.characters(), max_size=60)


@given(any_text)
def test_a_cell_text_is_always_xml_1_0(text: str) -> None:
    element = ElementTree.fromstring(b"<t>" + _escaped(cell_text(text)).encode() + b"</t>")
    assert (element.text or "") == cell_text(text)


def _escaped(text: str) -> str:
    return text.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;")


@given(
    st.text(st.characters(exclude_categories=("Cs", "Cc"), exclude_characters="\ufffe\uffff"), max_size=60)
)
def test_ordinary_text_is_left_alone(text: str) -> None:
    kept = "".join(
        character for character in text if ord(character) % 0x10000 < 0xFFFE or ord(character) > 0xFFFF
    )
    assert cell_text(kept) == kept


@pytest.mark.parametrize("text", ["x" * 32_768, "🚚" * 20_000, "a" + "🚚" * 16_384])
def test_a_text_too_long_for_a_cell_is_cut_and_shows_it(text: str) -> None:
    cut = cell_text(text)
    assert len(cut.encode("utf-16-le")) // 2 <= LONGEST_CELL  # characters as UTF-16 counts them
    assert cut.endswith("…")
    assert text.startswith(cut[:-1])


def test_a_text_that_just_fits_is_not_cut() -> None:
    assert cell_text("x" * 32_767) == "x" * 32_767


@pytest.mark.parametrize("text", [text for text in HARM if text[0] in "=+-@\t\r\n"])
def test_csv_text_that_a_program_may_take_for_a_formula_gets_an_apostrophe(text: str) -> None:
    assert starts_a_formula(text)
    assert csv_text(text) == "'" + text.replace("\r", "\n")


def test_csv_text_behind_blanks_is_no_formula_either() -> None:
    assert csv_text("  =1+1").startswith("'")
    assert csv_text("Quarry - west") == "Quarry - west"


@given(any_text, st.sets(st.text("abAB-19", min_size=1, max_size=4), max_size=6))
def test_a_file_name_is_plain_new_and_no_path(name: str, taken: set[str]) -> None:
    found = safe_file_name(name, taken)
    assert re.fullmatch(r"[A-Za-z0-9]([A-Za-z0-9_-]*)", found)
    assert found.casefold() not in {other.casefold() for other in taken}
    assert len(found) <= 90


@pytest.mark.parametrize(
    ("name", "found"),
    [
        ("Northgate", "Northgate"),
        ("../../etc/passwd", "etc-passwd"),
        ("C:\\NUL", "C-NUL"),
        ("nul", "nul-"),
        ("LPT1", "LPT1-"),
        ("Mühle & Söhne", "Muhle-Sohne"),
        ("数量", "depot"),
        ("", "depot"),
        ("...", "depot"),
    ],
)
def test_file_names(name: str, found: str) -> None:
    assert safe_file_name(name) == found


def test_names_that_differ_in_case_only_make_different_files() -> None:
    assert safe_file_name("ASH", taken=["Ash"]) == "ASH-2"
    assert safe_file_name("ash", taken=["Ash", "ASH-2"]) == "ash-3"


def test_a_page_header_shows_an_ampersand_and_no_code() -> None:
    assert header_text("Week 5 & 6") == " Week 5 && 6"
    assert header_text("&D&T") == " &&D&&T"
    assert len(header_text("x" * 500)) < 80
