"""Small workbooks in other formats than .xlsx, written part by part: OpenDocument and binary."""

import datetime
import io
import struct
import zipfile
from xml.sax.saxutils import escape, quoteattr

ERRORS = {
    "#NULL!": 0x00,
    "#DIV/0!": 0x07,
    "#VALUE!": 0x0F,
    "#REF!": 0x17,
    "#NAME?": 0x1D,
    "#NUM!": 0x24,
    "#N/A": 0x2A,
}


def ods(sheets, name="week.ods"):
    """(name, bytes) of an OpenDocument spreadsheet with these sheets: {title: rows}."""
    spaces = {
        "office": "urn:oasis:names:tc:opendocument:xmlns:office:1.0",
        "table": "urn:oasis:names:tc:opendocument:xmlns:table:1.0",
        "text": "urn:oasis:names:tc:opendocument:xmlns:text:1.0",
        "calcext": "urn:org:documentfoundation:names:experimental:calc:xmlns:calcext:1.0",
    }
    tables = "".join(
        f"<table:table table:name={quoteattr(title)}>"
        + "".join(f"<table:table-row>{''.join(map(_ods_cell, row))}</table:table-row>" for row in rows)
        + "</table:table>"
        for title, rows in sheets.items()
    )
    head = " ".join(f'xmlns:{prefix}="{space}"' for prefix, space in spaces.items())
    content = (
        f'<?xml version="1.0" encoding="UTF-8"?><office:document-content {head} office:version="1.3">'
        f"<office:body><office:spreadsheet>{tables}</office:spreadsheet></office:body></office:document-content>"
    )
    kind = "application/vnd.oasis.opendocument.spreadsheet"
    manifest = (
        '<manifest:manifest xmlns:manifest="urn:oasis:names:tc:opendocument:xmlns:manifest:1.0">'
        f'<manifest:file-entry manifest:full-path="/" manifest:media-type="{kind}"/></manifest:manifest>'
    )
    return name, _packed({"mimetype": kind, "content.xml": content, "META-INF/manifest.xml": manifest})


def _ods_cell(value):
    if value is None or value == "":
        return "<table:table-cell/>"
    if value in ERRORS:
        return (
            f'<table:table-cell table:formula="of:=x" office:value-type="string" calcext:value-type="error">'
            f"<text:p>{value}</text:p></table:table-cell>"
        )
    if isinstance(value, datetime.date):
        return f'<table:table-cell office:value-type="date" office:date-value="{value.isoformat()}"/>'
    if isinstance(value, str):
        text = escape(value)
        return f'<table:table-cell office:value-type="string"><text:p>{text}</text:p></table:table-cell>'
    return f'<table:table-cell office:value-type="float" office:value="{value!r}"/>'


def xlsb(sheets, name="week.xlsb"):
    """(name, bytes) of a binary workbook, by the record numbers of [MS-XLSB] section 2.3.

    A cell that is a pair is a number and its style: 1 and 2 show percent, 3 shows a mark that is only text.
    """
    kind = "application/vnd.ms-excel.sheet.binary.macroEnabled.main"
    office = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
    package = "http://schemas.openxmlformats.org/package/2006"
    numbered = list(enumerate(sheets.items(), start=1))
    parts = {
        "[Content_Types].xml": f'<Types xmlns="{package}/content-types"><Default Extension="rels" '
        'ContentType="application/vnd.openxmlformats-package.relationships+xml"/><Default Extension="bin" '
        f'ContentType="application/vnd.ms-excel.worksheet"/><Override PartName="/xl/workbook.bin" '
        f'ContentType="{kind}"/></Types>',
        "_rels/.rels": f'<Relationships xmlns="{package}/relationships"><Relationship Id="rId1" '
        f'Type="{office}/officeDocument" Target="xl/workbook.bin"/></Relationships>',
        "xl/_rels/workbook.bin.rels": f'<Relationships xmlns="{package}/relationships">'
        + "".join(
            f'<Relationship Id="rId{n}" Type="{office}/worksheet" Target="worksheets/sheet{n}.bin"/>'
            for n, _ in numbered
        )
        + "</Relationships>",
        "xl/workbook.bin": _record(131)
        + _record(143)
        + b"".join(
            _record(156, struct.pack("<II", 0, n) + _wide(f"rId{n}") + _wide(title))
            for n, (title, _) in numbered
        )
        + _record(144)
        + _record(132),
    }
    formats = _record(44, struct.pack("<H", 164) + _wide('0.0%" of fuel"')) + _record(
        44, struct.pack("<H", 165) + _wide('0" %"')
    )
    styles = b"".join(_record(47, struct.pack("<HH", 0, number) + bytes(12)) for number in (0, 10, 164, 165))
    formats = _record(615, struct.pack("<I", 2)) + formats + _record(616)
    parts["xl/styles.bin"] = formats + _record(617, struct.pack("<I", 4)) + styles + _record(618)
    for n, (_, rows) in numbered:
        parts[f"xl/worksheets/sheet{n}.bin"] = _binary_sheet(rows)
    return name, _packed(parts)


def _binary_sheet(rows):
    width = max(map(len, rows))
    body = [_record(129), _record(148, struct.pack("<IIII", 0, len(rows) - 1, 0, width - 1)), _record(145)]
    for number, row in enumerate(rows):
        body.append(_record(0, struct.pack("<IIHBBBI", number, 0, 300, 0, 0, 0, 0)))
        for column, value in enumerate(row):
            style = 0
            if isinstance(value, tuple):
                value, style = value
            head = struct.pack("<II", column, style)
            if value is None or value == "":
                continue
            if value in ERRORS:
                body.append(_record(3, head + bytes([ERRORS[value]])))
            elif isinstance(value, str):
                body.append(_record(6, head + _wide(value)))
            else:
                body.append(_record(5, head + struct.pack("<d", value)))
    return b"".join([*body, _record(146), _record(130)])


def _wide(text):
    return struct.pack("<I", len(text)) + text.encode("utf-16-le")


def _record(kind, data=b""):
    number = bytes([kind]) if kind < 128 else bytes([kind & 0x7F | 0x80, kind >> 7])
    size, length = len(data), b""
    while True:
        length += bytes([size & 0x7F | (0x80 if size > 0x7F else 0)])
        size >>= 7
        if not size:
            return number + length + data


def _packed(parts):
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as archive:
        for part, content in parts.items():
            archive.writestr(part, content)
    return stream.getvalue()


def compound(streams):
    """A compound file with these streams, by [MS-CFB]: sectors of 512 bytes, no short streams."""
    end, free, table_mark = 0xFFFFFFFE, 0xFFFFFFFF, 0xFFFFFFFD
    bodies = [content.ljust(max(4096, -(-len(content) // 512) * 512), b"\0") for content in streams.values()]
    table, starts = [table_mark, end], []  # sector 0 holds the table, sector 1 the directory
    for body in bodies:
        starts.append(len(table))
        count = len(body) // 512
        table += [*range(len(table) + 1, len(table) + count), end]
    entries = [_entry("Root Entry", 5, end, 0, child=1)]
    for number, (name, body) in enumerate(zip(streams, bodies, strict=True), start=1):
        right = number + 1 if number < len(bodies) else free
        entries.append(_entry(name, 2, starts[number - 1], len(body), right=right))
    head = bytes.fromhex("d0cf11e0a1b11ae1") + bytes(16)
    head += struct.pack("<HHHHH", 0x3E, 3, 0xFFFE, 9, 6) + bytes(10)
    head += struct.pack("<IIIIIIIII", 1, 1, 0, 4096, end, 0, end, 0, 0) + struct.pack("<I", free) * 108
    fat = struct.pack(f"<{len(table)}I", *table).ljust(512, b"\xff")
    return head.ljust(512, b"\xff") + fat + b"".join(entries).ljust(512, b"\0") + b"".join(bodies)


def _entry(name, kind, start, size, right=0xFFFFFFFF, child=0xFFFFFFFF):
    text = (name + "\0").encode("utf-16-le")
    links = struct.pack("<III", 0xFFFFFFFF, right, child)
    return (
        text.ljust(64, b"\0")
        + struct.pack("<HBB", len(text), kind, 1)
        + links
        + bytes(36)
        + struct.pack("<IQ", start, size)
    )
