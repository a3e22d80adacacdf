"""How long a million lanes take to become a week, beside the time that the sheet reader alone takes.

python tests/speed_intake.py [lanes]
"""

import io
import os
import random
import resource
import statistics
import subprocess
import sys
import tempfile
import time
import zipfile
from pathlib import Path

import python_calamine

sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

from engine.intake.cells import column_letters
from engine.intake.reading import read_week
from engine.intake.refusal import Limits

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006"
LARGE = Limits(size=200 << 20)


def write_workbook(path, sheets):
    """A workbook of {title: rows} with texts in the shared table, as spreadsheet programs write it."""
    shared = {}
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED, compresslevel=6) as archive:
        for number, rows in enumerate(sheets.values(), start=1):
            width = max(len(row) for row in rows)
            letters = [column_letters(column) for column in range(width)]
            with archive.open(f"xl/worksheets/sheet{number}.xml", "w", force_zip64=True) as part:
                part.write(
                    f'<?xml version="1.0" encoding="UTF-8"?><worksheet xmlns="{MAIN}"><sheetData>'.encode()
                )
                for row_number, row in enumerate(rows, start=1):
                    cells = []
                    for letter, value in zip(letters, row, strict=False):
                        if value is None:
                            continue
                        if isinstance(value, str):
                            code = shared.setdefault(value, len(shared))
                            cells.append(f'<c r="{letter}{row_number}" t="s"><v>{code}</v></c>')
                        else:
                            cells.append(f'<c r="{letter}{row_number}"><v>{value!r}</v></c>')
                    part.write(f'<row r="{row_number}">{"".join(cells)}</row>'.encode())
                part.write(b"</sheetData></worksheet>")
        texts = "".join(f"<si><t>{text}</t></si>" for text in shared)
        archive.writestr("xl/sharedStrings.xml", f'<sst xmlns="{MAIN}">{texts}</sst>')
        titles = list(enumerate(sheets, start=1))
        archive.writestr(
            "xl/workbook.xml",
            f'<workbook xmlns="{MAIN}" xmlns:r="{OFFICE}"><sheets>'
            + "".join(f'<sheet name="{title}" sheetId="{n}" r:id="rId{n}"/>' for n, title in titles)
            + "</sheets></workbook>",
        )
        archive.writestr(
            "xl/_rels/workbook.xml.rels",
            f'<Relationships xmlns="{PACKAGE}/relationships">'
            + "".join(
                f'<Relationship Id="rId{n}" Type="{OFFICE}/worksheet" Target="worksheets/sheet{n}.xml"/>'
                for n, _ in titles
            )
            + f'<Relationship Id="rId0" Type="{OFFICE}/sharedStrings" Target="sharedStrings.xml"/>'
            "</Relationships>",
        )
        archive.writestr(
            "_rels/.rels",
            f'<Relationships xmlns="{PACKAGE}/relationships"><Relationship Id="r1" '
            f'Type="{OFFICE}/officeDocument" Target="xl/workbook.xml"/></Relationships>',
        )
        kind = "application/vnd.openxmlformats-officedocument.spreadsheetml"
        archive.writestr(
            "[Content_Types].xml",
            f'<Types xmlns="{PACKAGE}/content-types"><Default Extension="rels" '
            'ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
            f'<Default Extension="xml" ContentType="{kind}.worksheet+xml"/><Override '
            f'PartName="/xl/workbook.xml" ContentType="{kind}.sheet.main+xml"/><Override '
            f'PartName="/xl/sharedStrings.xml" ContentType="{kind}.sharedStrings+xml"/></Types>',
        )


def week_sheets(lanes, as_grid):
    """A week of 100 depots, rates as a grid or as a list."""
    draw = random.Random(7)
    depots = [f"Depot {n}" for n in range(1, 101)]
    customers = [f"Customer {n}" for n in range(1, lanes // 100 + 1)]
    sheets = {
        "Depots": [["Depot", "Available"], *([name, draw.randrange(1000, 9000)] for name in depots)],
        "Customers": [["Customer", "Ordered"], *([name, draw.randrange(1, 60)] for name in customers)],
    }
    rates = [[round(draw.uniform(4, 40), 2) for _ in depots] for _ in customers]
    if as_grid:
        sheets["Rates"] = [
            ["EUR/t", *depots],
            *([name, *row] for name, row in zip(customers, rates, strict=True)),
        ]
    else:
        sheets["Rates"] = [
            ["Depot", "Customer", "Rate"],
            *(
                [depot, customer, rate]
                for customer, row in zip(customers, rates, strict=True)
                for depot, rate in zip(depots, row, strict=True)
            ),
        ][:1_048_576]
    return sheets


def cells_alone(path):
    """The sheet reader alone: all cells handed over as Python values."""
    with python_calamine.CalamineWorkbook.from_path(path) as book:
        return [book.get_sheet_by_name(name).to_python(skip_empty_area=False) for name in book.sheet_names]


def peak(work, path):
    """Peak memory in MB of one run in a process of its own."""
    done = subprocess.run(
        [sys.executable, __file__, "--peak", work, str(path)],
        capture_output=True,
        text=True,
        check=True,
        env={**os.environ},
    )
    return int(done.stdout)


def peak_here():
    """Peak memory of this process in MB."""
    status = Path("/proc/self/status")
    if status.exists():  # what getrusage tells includes the process that started this one
        line = next(line for line in status.read_text().splitlines() if line.startswith("VmHWM"))
        return int(line.split()[1]) // 1024
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss // 1024


def seconds(function, *arguments, **options):
    start = time.process_time()
    kept = function(*arguments, **options)
    taken = time.process_time() - start
    del kept
    return taken


def measure(lanes=1_000_000, repeats=3, say=print):
    """Print medians of both in processor seconds, turn about, their ratio and the peaks: {layout: ratio}."""
    ratios = {}
    with tempfile.TemporaryDirectory() as folder:
        for layout in ("grid", "list"):
            path = Path(folder) / f"{layout}.xlsx"
            write_workbook(path, week_sheets(lanes, layout == "grid"))
            read_week(io.BytesIO(b"Depot,Available\nMill,1\n"))
            alone, whole = [], []
            for _ in range(repeats):
                alone.append(seconds(cells_alone, path))
                whole.append(seconds(read_week, path, limits=LARGE))
            first, second = statistics.median(alone), statistics.median(whole)
            ratios[layout] = second / first
            say(f"{lanes:,} lanes as a {layout} ({path.stat().st_size >> 20} MB): cells alone {first:.2f} s, "
                f"week {second:.2f} s, ratio {second / first:.2f}; peak memory {peak('cells', path)} MB and "
                f"{peak('week', path)} MB")  # fmt: skip
    return ratios


if __name__ == "__main__":
    if sys.argv[1:2] == ["--peak"]:
        result = cells_alone(sys.argv[3]) if sys.argv[2] == "cells" else read_week(sys.argv[3], limits=LARGE)
        sys.stdout.write(str(peak_here()))
    else:
        measure(int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000)
