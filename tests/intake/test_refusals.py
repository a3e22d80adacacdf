"""Files that are refused in one sentence, and text files in every usual encoding."""

import io
import struct
import zipfile
import zlib

import pytest

from engine.intake.cells import address, read_sheets
from engine.intake.reading import read_week
from engine.intake.refusal import Limits, Unreadable
from tests.intake.books import compound
from tests.intake.sheets import plain, with_part, workbook

NAME, GOOD = workbook(plain())
SHEET = "xl/worksheets/sheet1.xml"
COMPOUND = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"


def archive(**parts):
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as packed:
        for name, content in parts.items():
            packed.writestr(name, content)
    return stream.getvalue()


def understated():
    """A workbook whose archive says that a part is far smaller than what its stream unpacks to."""
    body = b"<worksheet/>" + b" " * 60_000_000
    _, data = with_part((NAME, GOOD), SHEET, b"<worksheet/>")
    small = zlib.compressobj(9, zlib.DEFLATED, -15)
    packed = small.compress(body) + small.flush()
    old = zipfile.ZipFile(io.BytesIO(data)).getinfo(SHEET)
    start = data.index(SHEET.encode()) + len(SHEET)
    stream = data[:start] + packed + data[start + old.compress_size :]
    shift = len(packed) - old.compress_size
    stream = stream.replace(
        struct.pack("<III", old.CRC, old.compress_size, old.file_size),
        struct.pack("<III", old.CRC, len(packed), old.file_size),
    )
    moved = bytearray(stream)
    place = moved.index(b"PK\x01\x02")
    while moved[place : place + 4] == b"PK\x01\x02":
        (offset,) = struct.unpack_from("<I", moved, place + 42)
        if offset > old.header_offset:
            struct.pack_into("<I", moved, place + 42, offset + shift)
        place += 46 + sum(struct.unpack_from("<HHH", moved, place + 28))
    (directory,) = struct.unpack_from("<I", moved, place + 16)
    struct.pack_into("<I", moved, place + 16, directory + shift)
    return bytes(moved)


REFUSED = [
    ("week.xlsx", b"", "empty file"),
    ("week.csv", b"   \n", "empty file"),
    ("week.xlsx", b"Depot,Available\nNorthgate,120\n", "not a spreadsheet"),
    ("week.xlsx", GOOD[: len(GOOD) // 2], "damaged file"),
    ("week.xlsx", GOOD[:-30], "damaged file"),
    ("week.csv", GOOD, "wrong ending"),
    ("notes.pdf", b"%PDF-1.7 and more", "not a spreadsheet"),
    ("picture.csv", b"\x89PNG\r\n\x1a\n" + bytes(50), "not a spreadsheet"),
    ("book.zip", archive(readme="hello"), "not a spreadsheet"),
    ("week.xls", COMPOUND + bytes(2000), "damaged file"),
    ("bomb.xlsx", archive(**{SHEET: b"0" * 100_000_000}), "too large"),
    ("bomb.xlsx", understated(), "damaged file"),
    ("week.xlsx", with_part((NAME, GOOD), SHEET, b"<worksheet><sheetData>")[1], "damaged file"),
    ("secret.xlsx", compound({"EncryptionInfo": b"4", "EncryptedPackage": b"?" * 5000}), "password"),
    ("secret.xls", compound({"Workbook": struct.pack("<HHHHHH", 0x809, 4, 0x600, 5, 0x2F, 0)}), "password"),
    ("letter.doc", compound({"WordDocument": b"Dear Tom"}), "damaged file"),
    (
        "laughs.xlsx",
        with_part((NAME, GOOD), "xl/workbook.xml", lambda old: b"<!DOCTYPE x [<!ENTITY a 'b'>]>" + old)[1],
        "entities in the file",
    ),
    (
        "sparse.xlsx",
        with_part(
            (NAME, GOOD),
            SHEET,
            b'<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetData>'
            b'<row r="1"><c r="A1"><v>1</v></c></row><row r="900000"><c r="XFD900000"><v>1</v></c></row>'
            b"</sheetData></worksheet>",
        )[1],
        "too large",
    ),
]


@pytest.mark.parametrize(("name", "data", "rule"), REFUSED)
def test_refused_in_one_sentence(name, data, rule):
    with pytest.raises(Unreadable) as caught:
        read_week((name, data))
    finding = caught.value.finding
    assert finding.rule == rule
    assert finding.file == name
    assert finding.message.endswith(".")
    assert finding.mend
    assert "\n" not in str(caught.value)


def test_over_the_size_limit():
    with pytest.raises(Unreadable, match="larger than 1 MB"):
        read_week((NAME, GOOD), limits=Limits(size=1000))


def test_a_million_blank_formatted_rows_are_nothing():
    rows = b"".join(b'<row r="%d" s="1"><c r="A%d" s="1"/></row>' % (n, n) for n in range(4, 200_000))
    source = with_part((NAME, GOOD), SHEET, lambda old: old.replace(b"</sheetData>", rows + b"</sheetData>"))
    reading = read_week(source)
    assert list(reading.week.depots) == ["Northgate", "Quarry"]


TEXT = "Depot;Available\nMühle;120,5\nQuarry;80\n"


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "cp1252"])
@pytest.mark.parametrize("separator", [";", "\t"])
def test_encodings_and_separators(encoding, separator):
    (sheet,) = read_sheets(("depots.csv", TEXT.replace(";", separator).encode(encoding)))
    assert sheet.rows == [["Depot", "Available"], ["Mühle", "120,5"], ["Quarry", "80"]]


def test_commas_quotes_and_a_separator_line():
    (sheet,) = read_sheets(("d.csv", b'sep=,\n"Depot","Note"\r\n"Mill, old","say ""no"""\r\n'))
    assert sheet.rows[1:] == [["Depot", "Note"], ["Mill, old", 'say "no"']]


def test_addresses():
    assert [address(0, 0), address(1, 25), address(9, 26), address(0, 16383)] == ["A1", "Z2", "AA10", "XFD1"]
