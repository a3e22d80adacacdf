"""What an old binary workbook (.xls) says beside its values: errors, percent formats, hidden rows, its reach.

The container is read by [MS-CFB], the records by [MS-XLS] sections 2.3 and 2.4. Only what is needed is
looked at; a file that breaks off simply yields fewer marks.
"""

import struct
from collections.abc import Iterator

from engine.intake.marks_xlsb import ERROR_TEXTS
from engine.intake.workbook_marks import Marks, Outline

_END_OF_CHAIN = 0xFFFFFFFA
_SHEET, _ROW, _BOOL_OR_ERROR, _FORMULA, _FORMAT, _XF, _EOF = 0x85, 0x208, 0x205, 0x06, 0x41E, 0xE0, 0x0A
_NUMBER, _RK, _MANY_RK, _LABEL, _LABEL_SHARED, _PASSWORD = 0x203, 0x27E, 0xBD, 0x204, 0xFD, 0x2F
_PERCENT_FORMATS = frozenset({9, 10})


def xls_marks(data: bytes) -> dict[str, tuple[Marks, Outline]]:
    """Marks and outline of each sheet, by the sheet's name; empty where the file is none of this kind.

    Raises:
        IndexError, struct.error: a record is cut short, or rows stand out of order.
    """
    book = _stream(data, ("Workbook", "Book"))
    percent_formats = set(_PERCENT_FORMATS)
    percent_styles: set[int] = set()
    sheets: list[tuple[str, int]] = []
    styles = 0
    for kind, body in _records(book, 0):
        if kind == _SHEET and len(body) >= 8:
            sheets.append((_short_text(body, 6), struct.unpack_from("<I", body)[0]))
        elif kind == _FORMAT and len(body) > 5 and b"%" in body[5:]:
            percent_formats.add(struct.unpack_from("<H", body)[0])
        elif kind == _XF and len(body) >= 4:
            if struct.unpack_from("<H", body, 2)[0] in percent_formats:
                percent_styles.add(styles)
            styles += 1
        elif kind == _EOF:
            break
    return {title: _sheet(book, start, percent_styles) for title, start in sheets}


def is_encrypted(data: bytes) -> bool:
    """Whether the workbook only opens with a password."""
    if _stream(data, ("EncryptedPackage",)):
        return True
    return any(kind == _PASSWORD for kind, _ in _first(_records(_stream(data, ("Workbook", "Book")), 0), 20))


def _first(records: Iterator[tuple[int, bytes]], count: int) -> Iterator[tuple[int, bytes]]:
    for _, record in zip(range(count), records, strict=False):
        yield record


def _sheet(book: bytes, start: int, percent_styles: set[int]) -> tuple[Marks, Outline]:
    errors: dict[tuple[int, int], str] = {}
    percent: set[tuple[int, int]] = set()
    hidden: set[int] = set()
    rows = columns = cells = depth = 0
    for kind, body in _records(book, start):
        if kind == 0x809:  # the beginning of a sheet, or of a chart within it
            depth += 1
        elif kind == _EOF:
            depth -= 1
            if depth <= 0:
                break
        if kind == _ROW and len(body) >= 16:
            if body[12] & 0x20:  # fDyZero: the row is not shown
                hidden.add(struct.unpack_from("<H", body)[0])
        elif (
            kind in (_BOOL_OR_ERROR, _FORMULA, _NUMBER, _RK, _MANY_RK, _LABEL, _LABEL_SHARED)
            and len(body) >= 6
        ):
            row, column, style = struct.unpack_from("<HHH", body)
            if row < rows - 1:
                raise IndexError("rows out of order")
            width = max(1, (len(body) - 6) // 6) if kind == _MANY_RK else 1
            rows, columns, cells = max(rows, row + 1), max(columns, column + width), cells + width
            if kind == _BOOL_OR_ERROR and len(body) >= 8 and body[7]:
                errors[row, column] = ERROR_TEXTS.get(body[6], "an error")
            elif kind == _FORMULA and len(body) >= 14 and body[6] == 2 and body[12:14] == b"\xff\xff":
                errors[row, column] = ERROR_TEXTS.get(body[8], "an error")
            elif kind in (_NUMBER, _RK, _FORMULA) and style in percent_styles:
                percent.add((row, column))
            elif kind == _MANY_RK:
                for place in range(width):
                    (one,) = (
                        struct.unpack_from("<H", body, 4 + 6 * place) if len(body) >= 6 + 6 * place else (0,)
                    )
                    if one in percent_styles:
                        percent.add((row, column + place))
    marks = Marks(errors, {}, frozenset(percent), frozenset(hidden))
    return marks, Outline(rows, columns, cells, bool(errors), False)


def _records(book: bytes, at: int) -> Iterator[tuple[int, bytes]]:
    while at + 4 <= len(book):
        kind, size = struct.unpack_from("<HH", book, at)
        yield kind, book[at + 4 : at + 4 + size]
        at += 4 + size


def _short_text(body: bytes, at: int) -> str:
    length, wide = body[at], body[at + 1] & 1
    raw = body[at + 2 : at + 2 + length * (2 if wide else 1)]
    return raw.decode("utf-16-le" if wide else "latin-1", "replace")


def _stream(data: bytes, names: tuple[str, ...]) -> bytes:
    """The content of the first of these streams in a compound file; empty where there is none."""
    if len(data) < 512 or data[30:34] not in (b"\x09\x00\x06\x00", b"\x0c\x00\x06\x00"):
        return b""
    sector, mini = 1 << data[30], 1 << data[32]
    directory, _, cutoff, small_table = struct.unpack_from("<IIII", data, 48)
    table_sectors = [s for s in struct.unpack_from("<109I", data, 76) if s < _END_OF_CHAIN]
    (more,) = struct.unpack_from("<I", data, 68)
    while more < _END_OF_CHAIN and len(table_sectors) * sector < len(data) + sector:
        block = data[(more + 1) * sector : (more + 2) * sector]
        if len(block) < sector:
            break
        words = struct.unpack(f"<{sector // 4}I", block)
        table_sectors += [s for s in words[:-1] if s < _END_OF_CHAIN]
        more = words[-1]
    table: list[int] = []
    for number in table_sectors:
        block = data[(number + 1) * sector : (number + 2) * sector]
        table += struct.unpack(f"<{len(block) // 4}I", block[: len(block) // 4 * 4])
    entries = _chain(data, table, directory, sector, sector)
    root = b""
    for at in range(0, len(entries) - 127, 128):
        entry = entries[at : at + 128]
        length = struct.unpack_from("<H", entry, 64)[0]
        name = entry[: max(0, min(length, 64) - 2)].decode("utf-16-le", "replace")
        start, size = struct.unpack_from("<II", entry, 116)
        if entry[66] == 5:
            root = _chain(data, table, start, sector, sector)
        elif name in names and entry[66] == 2:
            if size >= cutoff:
                return _chain(data, table, start, sector, sector)[:size]
            short = _chain(data, table, small_table, sector, sector)
            small = list(struct.unpack(f"<{len(short) // 4}I", short[: len(short) // 4 * 4]))
            return _chain(root, small, start, mini, 0)[:size]
    return b""


def _chain(data: bytes, table: list[int], start: int, size: int, head: int) -> bytes:
    """The sectors that follow each other from `start`; a chain that runs in a circle is cut."""
    blocks: list[bytes] = []
    number = start
    while number < len(table) and len(blocks) <= len(table):
        blocks.append(data[head + number * size : head + (number + 1) * size])
        number = table[number]
    return b"".join(blocks)
