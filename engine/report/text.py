"""Text that people typed, made safe for the place it is written to: a cell, a CSV file, a file name.

Nothing here changes what the text says to a reader; it only keeps a program from taking it for a
command.
"""

import re
import unicodedata
from collections.abc import Iterable

LONGEST_CELL = 32_767
"""Characters that a spreadsheet cell can hold (Office Open XML workbooks; ECMA-376 leaves it to the program,
the usual programs stop here)."""

LONGEST_FILE_NAME = 80

_NOT_IN_XML = re.compile("[^\t\n\x20-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
_STARTS_A_FORMULA = ("=", "+", "-", "@", "\t", "\r", "\n", "＝", "＋", "－", "＠")
_RESERVED = re.compile(r"(con|prn|aux|nul|com\d|lpt\d)", re.IGNORECASE)


def cell_text(text: str) -> str:
    """`text` as a cell can hold it: characters that XML forbids become U+FFFD, what is too long is cut.

    XML 1.0 (W3C), production 2, says which characters are allowed; a carriage return would come back
    as a line feed, so it is written as one.
    """
    text = _clean(text)
    return text if _length(text) <= LONGEST_CELL else _cut(text, LONGEST_CELL - 1) + "…"


def starts_a_formula(text: str) -> bool:
    """Whether a spreadsheet program might take `text` for a formula when it is typed or imported."""
    return text.startswith(_STARTS_A_FORMULA)


def csv_text(text: str) -> str:
    """`text` for a CSV file: with an apostrophe before whatever might be taken for a formula.

    A CSV file has no types, so the text itself has to say that it is text (OWASP, CSV injection).
    """
    text = _clean(text)
    return f"'{text}" if starts_a_formula(text.lstrip(" \u00a0")) else text


def safe_file_name(name: str, taken: Iterable[str] = (), fallback: str = "depot") -> str:
    """A file name for a depot or the like, without ending: ASCII letters, digits, '-' and '_' only.

    It is never a path, never empty, never a device name, and differs from all names in `taken` even
    where a file system ignores case.
    """
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode("ascii")
    stem = re.sub(r"[^A-Za-z0-9]+", "-", plain).strip("-")[:LONGEST_FILE_NAME].strip("-") or fallback
    if _RESERVED.fullmatch(stem):
        stem += "-"
    used = {other.casefold() for other in taken}
    found, count = stem, 1
    while found.casefold() in used:
        count += 1
        found = f"{stem}-{count}"
    return found


def header_text(text: str) -> str:
    """`text` for the header or footer of a printed page, where '&' starts a code.

    A digit right after the font size code would be read as part of it, so a blank goes first.
    """
    short = cell_text(text).replace("\n", " ")
    short = short if len(short) <= 60 else short[:59] + "…"
    return " " + short.replace("&", "&&")


def _clean(text: str) -> str:
    return _NOT_IN_XML.sub("\ufffd", text.replace("\r\n", "\n").replace("\r", "\n"))


def _length(text: str) -> int:
    """Characters as spreadsheet programs count them: those outside the basic plane count twice."""
    return len(text) + sum(character > "\uffff" for character in text)


def _cut(text: str, length: int) -> str:
    while _length(text) > length:
        text = text[: -max(1, (_length(text) - length + 1) // 2)]
    return text
