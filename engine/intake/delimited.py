"""Text files of cells: which encoding and which separator, and the rows of text they hold."""

import csv
import io

from engine.intake.refusal import Limits, not_a_spreadsheet, refused, too_large

SEPARATORS = (";", "\t", ",", "|")


def rows_of_text(data: bytes, name: str, limits: Limits) -> list[list[str]]:
    """The rows of a text file, each as long as the longest.

    Raises:
        Unreadable: it is no text, or holds more cells than the limit.
    """
    text = decoded(data, name)
    lines = text[:200_000].splitlines()
    separator = separator_of(lines)
    if lines and lines[0].casefold().startswith("sep=") and len(lines[0].strip()) == 5:
        separator, text = lines[0].strip()[4], text.split("\n", 1)[1] if "\n" in text else ""
        text = "\n" + text  # keeps the line numbers of the file
    csv.field_size_limit(1 << 20)
    rows: list[list[str]] = []
    cells = width = 0
    try:
        for row in csv.reader(io.StringIO(text, newline=""), delimiter=separator):
            rows.append(row)
            width = max(width, len(row))
            cells += len(row)
            if cells > limits.cells or width > 20_000:
                raise too_large(
                    name, f"The file holds more than {limits.cells} cells, or over 20000 columns."
                )
    except csv.Error as error:
        raise refused(
            "not a spreadsheet",
            f"The file cannot be read as a table: {error}, near line {len(rows) + 1}.",
            "Save the sheet as .xlsx or .csv again and upload that.",
            name,
        ) from error
    if width * len(rows) > limits.cells:
        raise too_large(name, "The file's rows are of very different lengths.")
    for row in rows:
        if len(row) < width:
            row.extend([""] * (width - len(row)))
    return rows


def decoded(data: bytes, name: str) -> str:
    """The text in a file: by its byte order mark, as UTF-16 or UTF-8 where it fits, else as cp1252."""
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        encodings = ["utf-16"]
    elif data.startswith(b"\xef\xbb\xbf"):
        encodings = ["utf-8-sig"]
    elif data[:4096].count(0) * 4 >= len(data[:4096]):
        encodings = ["utf-16-le" if data[1:2] == b"\x00" else "utf-16-be"]
    else:
        encodings = ["utf-8", "cp1252", "latin-1"]
    for encoding in encodings:
        try:
            text = data.decode(encoding)
        except UnicodeDecodeError:
            continue
        if "\x00" in text[:4096]:
            break
        return text
    raise not_a_spreadsheet(name)


def separator_of(lines: list[str]) -> str:
    """The separator that cuts most lines into the same number of cells; a comma where none does."""
    best = (0, 0, ",")
    sample = [line for line in lines if line.strip()][:200]
    for separator in SEPARATORS:
        counts = [len(row) for row in csv.reader(sample, delimiter=separator)]
        cut = [count for count in counts if count > 1]
        if not cut:
            continue
        usual = max(set(cut), key=lambda count: (cut.count(count), count))
        score = (cut.count(usual), usual, separator)
        if score[:2] > best[:2]:
            best = score
    return best[2]
