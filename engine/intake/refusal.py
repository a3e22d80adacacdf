"""Files that are not read at all: what is refused, in one sentence, before much time or memory is spent."""

import io
import zipfile
import zlib
from dataclasses import dataclass
from typing import BinaryIO

from engine.findings import Finding, Severity

SHEET_ENDINGS = frozenset({".xlsx", ".xlsm", ".xlsb", ".xls", ".ods"})
TEXT_ENDINGS = frozenset({".csv", ".tsv", ".txt", ".tab"})
READABLE = ".xlsx, .xlsm, .xlsb, .xls, .ods, .csv, .tsv or .txt"

MEGABYTE = 1 << 20
_CONTAINER = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"  # the compound file of .xls and of password protection
_MOST_MEMBERS = 5000
_LARGE_AREA = 2_000_000
_MOST_BLANK = 50
_SMALL_MEMBER = 8 * MEGABYTE
"""Below this a member is harmless however well it packs."""


@dataclass(frozen=True, slots=True)
class Limits:
    """What a file may cost.

    size: bytes of the file itself; unpacked: bytes of a workbook's parts together; ratio: how many times
    a large part may be smaller when packed; cells: cells in the used area of one sheet; files: how many at
    once, and all_files: their bytes together.
    """

    size: int = 20 * MEGABYTE
    unpacked: int = 800 * MEGABYTE
    ratio: int = 200
    cells: int = 40_000_000
    files: int = 40
    all_files: int = 100 * MEGABYTE


class Unreadable(ValueError):
    """A file that cannot be read as figures; `finding` says why and what to do."""

    def __init__(self, finding: Finding) -> None:
        place = f"{finding.place}: " if finding.place else ""
        super().__init__(place + finding.message)
        self.finding = finding


def refused(rule: str, message: str, mend: str, file: str = "") -> Unreadable:
    """The refusal of a file, with what to do about it."""
    return Unreadable(Finding(Severity.STOPS, rule, message, mend, file))


def kind_of(data: bytes, name: str) -> str:
    """What a file is by its first bytes: 'zip', 'xls' or 'text'; its name's ending must agree.

    Raises:
        Unreadable: it is empty, or is none of these.
    """
    ending = ending_of(name)
    if not data.strip(b"\x00 \t\r\n\xef\xbb\xbf"):
        raise refused("empty file", "The file is empty.", "Save the spreadsheet again and upload it.", name)
    if data.startswith(b"PK\x03\x04") or data.startswith(b"PK\x05\x06"):
        if ending in TEXT_ENDINGS:
            raise _wrong_ending(name, "a workbook or an archive")
        return "zip"
    if data.startswith(_CONTAINER):
        if ending in TEXT_ENDINGS:
            raise _wrong_ending(name, "a workbook")
        return "xls"
    if ending in SHEET_ENDINGS:
        raise refused(
            "not a spreadsheet",
            f"The file is called {ending}, but what is inside is no workbook, or only a part of one.",
            "Open it in a spreadsheet program, save it as .xlsx and upload that.",
            name,
        )
    start = data[:4096]
    if start[:4] in (b"%PDF", b"\x89PNG", b"\xff\xd8\xff\xe0", b"GIF8", b"Rar!", b"7z\xbc\xaf", b"\x7fELF"):
        raise not_a_spreadsheet(name)
    zeros = start.count(0)
    if zeros and not start.startswith((b"\xff\xfe", b"\xfe\xff")) and zeros * 4 < len(start):
        raise not_a_spreadsheet(name)
    return "text"


def ending_of(name: str) -> str:
    """The ending of a file's name with its dot, in small letters; empty where there is none."""
    _, dot, ending = name.rpartition(".")
    return f".{ending.strip().casefold()}" if dot else ""


def not_a_spreadsheet(name: str) -> Unreadable:
    """The refusal of something that holds no sheets."""
    return refused("not a spreadsheet", "The file is not a spreadsheet.", f"Upload {READABLE}.", name)


def damaged(name: str) -> Unreadable:
    """The refusal of a workbook that is cut short or broken inside."""
    return refused(
        "damaged file",
        "The file is damaged or was cut short, and cannot be read whole.",
        "Open it in a spreadsheet program, save it again and upload that.",
        name,
    )


def too_large(name: str, message: str) -> Unreadable:
    """The refusal of a file that would cost too much."""
    return refused("too large", message, "Take out what is not needed, or raise the limit.", name)


def check_area(rows: int, columns: int, cells: int, sheet: str, name: str, limits: Limits) -> None:
    """Refuse a sheet whose used area is larger than the limit, or huge and nearly all of it blank.

    Raises:
        Unreadable: it is.
    """
    area = rows * columns
    if area > limits.cells or (area > _LARGE_AREA and area > _MOST_BLANK * cells):
        raise too_large(
            name,
            f"The used area of sheet '{sheet}' is {rows} rows by {columns} columns with {cells} cells in it.",
        )


def protected(name: str) -> Unreadable:
    """The refusal of a file that only opens with a password."""
    return refused(
        "password",
        "The workbook is protected by a password.",
        "Save it without a password and upload that.",
        name,
    )


def read_whole(stream: BinaryIO, name: str, limits: Limits) -> bytes:
    """All bytes of a file, no more than the limit.

    Raises:
        Unreadable: it is larger.
    """
    data = stream.read(limits.size + 1)
    if len(data) > limits.size:
        raise too_large(name, f"The file is larger than {limits.size // MEGABYTE or 1} MB.")
    return data


def unpacked(data: bytes, name: str, limits: Limits) -> dict[str, bytes]:
    """The parts of a workbook that is a zip archive, each unpacked no further than the limits allow.

    The sizes that an archive states are not trusted: unpacking stops where a part exceeds them.

    Raises:
        Unreadable: damaged, protected, or much larger unpacked than its size lets expect.
    """
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            members = archive.infolist()
            _check_stated(members, name, limits)
            parts: dict[str, bytes] = {}
            left = limits.unpacked
            for member in members:
                if member.filename in parts:
                    raise damaged(name)
                part = _inflated(data, member, name) if _of_interest(member) else b""
                left -= len(part)
                if left < 0:
                    raise too_large(name, "The workbook is far larger inside than its size lets expect.")
                parts[member.filename] = part
            return parts
    # zipfile says NotImplementedError of a way of packing that it does not know
    except (zipfile.BadZipFile, zlib.error, NotImplementedError, EOFError, OSError, ValueError) as error:
        if isinstance(error, Unreadable):
            raise
        raise damaged(name) from error


def _of_interest(member: zipfile.ZipInfo) -> bool:
    """Parts that a reader of cells opens; pictures and macros stay packed."""
    return not member.is_dir() and member.filename.casefold().endswith((".xml", ".rels", ".bin"))


def _check_stated(members: list[zipfile.ZipInfo], name: str, limits: Limits) -> None:
    if len(members) > _MOST_MEMBERS:
        raise too_large(name, f"The workbook has {len(members)} parts inside.")
    if any(member.flag_bits & 1 for member in members):
        raise protected(name)
    if sum(member.file_size for member in members) > limits.unpacked:
        raise too_large(name, "The workbook is far larger inside than its size lets expect.")
    for member in members:
        if member.file_size > _SMALL_MEMBER and member.file_size > limits.ratio * max(
            1, member.compress_size
        ):
            raise too_large(name, f"A part of the workbook unpacks to {limits.ratio} times its size or more.")


def _inflated(data: bytes, member: zipfile.ZipInfo, name: str) -> bytes:
    """One part, unpacked here so that an archive which understates its sizes is found out."""
    head = data[member.header_offset : member.header_offset + 30]
    if len(head) < 30 or not head.startswith(b"PK\x03\x04"):
        raise damaged(name)
    start = (
        member.header_offset
        + 30
        + int.from_bytes(head[26:28], "little")
        + int.from_bytes(head[28:30], "little")
    )
    packed = memoryview(data)[start : start + member.compress_size]
    if member.compress_type == zipfile.ZIP_STORED:
        part = bytes(packed)
    elif member.compress_type == zipfile.ZIP_DEFLATED:
        inflater = zlib.decompressobj(-15)
        part = inflater.decompress(packed, member.file_size + 1)
        if not inflater.eof and len(part) == member.file_size:
            inflater.decompress(inflater.unconsumed_tail, 1)
        if not inflater.eof:
            raise damaged(name)
    else:
        raise damaged(name)
    if len(part) != member.file_size:
        raise damaged(name)
    return part


def _wrong_ending(name: str, what: str) -> Unreadable:
    return refused(
        "wrong ending",
        f"The file is called {ending_of(name)}, but what is inside is {what}.",
        "Upload it under its own name.",
        name,
    )
