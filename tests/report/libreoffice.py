"""LibreOffice, as the plain spreadsheet program that a workbook has to work in."""

import shutil
import subprocess
from collections.abc import Iterable
from pathlib import Path

import openpyxl
from openpyxl.workbook import Workbook


def calculated(files: Iterable[Path], folder: Path) -> dict[str, Workbook]:
    """The workbooks as LibreOffice saves them again, by file name, with the results of their formulas.

    It only calculates what has no stored result: a workbook has to be saved by openpyxl before.
    """
    program = shutil.which("soffice") or shutil.which("libreoffice")
    if program is None:
        raise RuntimeError("These tests need LibreOffice: install the package libreoffice-calc-nogui.")
    out = folder / "calculated"
    listed = [str(file) for file in files]
    done = subprocess.run(
        [
            program,
            f"-env:UserInstallation={(folder / 'profile').as_uri()}",
            "--headless",
            "--convert-to",
            "xlsx:Calc MS Excel 2007 XML",
            "--outdir",
            str(out),
            *listed,
        ],
        capture_output=True,
        text=True,
        check=False,
    )
    books = {Path(file).name: out / Path(file).name for file in listed}
    missing = [name for name, book in books.items() if not book.exists()]
    if missing:
        raise RuntimeError(f"LibreOffice did not write {missing}: {done.stdout} {done.stderr}")
    return {name: openpyxl.load_workbook(book, data_only=True) for name, book in books.items()}


def without_results(workbook: Path, copy: Path, edits: Iterable[tuple[str, str, object]] = ()) -> Path:
    """A copy of a workbook whose formulas have no stored results, with some cells edited first."""
    book = openpyxl.load_workbook(workbook)
    for sheet, cell, value in edits:
        book[sheet][cell].value = value
    book.save(copy)
    return copy
