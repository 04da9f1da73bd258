"""What the trip, the register and the what-if share: input cells with their limits, protection, and how a book is saved.

A book is openpyxl's, with native formulas and charts; the sheets of cases (`stripcheck.sheet.cases`) are streamed into it.
"""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import Any

from openpyxl import Workbook
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.errors import InputError
from stripcheck.sheet import styles
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.pages import Pages
from stripcheck.sheet.stream import write_book

SMALLEST = 9  # level of deflate: these books are small, and are sent around


def start_book(title: str) -> Pages:
    """A book without sheets."""
    book = Workbook()
    book.remove(book.active)
    book.properties.creator, book.properties.title = "stripcheck", title
    return Pages(book)


def input_cell(sheet: Worksheet, cell: str, value: Any, number_format: str = "General") -> None:
    """A cell to be typed into: yellow, boxed, not locked."""
    target = sheet[cell]
    target.value, target.number_format, target.font = value, number_format, styles.BODY
    target.fill, target.border, target.protection = styles.INPUT_FILL, styles.BOX, styles.UNLOCKED


def expect_number(sheet: Worksheet, cells: str, what: str, low: float, high: float, unit: str) -> None:
    """A number between limits in these cells, in the unit shown beside; else a message says so, and nothing is taken."""
    check = DataValidation(type="decimal", operator="between", allow_blank=True, showErrorMessage=True)
    check.formula1, check.formula2 = f"{low:.15g}", f"{high:.15g}"
    between = f"{low:,.6g} to {high:,.6g} {unit}".strip()
    check.errorTitle, check.error = what[:31], f"{what}: {between} is expected, as a plain number."
    check.add(cells)
    sheet.add_data_validation(check)


def protect(sheet: Worksheet, rows_and_columns: bool = False) -> None:
    """Lock what is not an input, without a password; widths, heights, sorting and filters stay free.

    ``rows_and_columns``: rows and columns may also be inserted and deleted.
    """
    guard = sheet.protection
    guard.sheet = True
    guard.formatColumns = guard.formatRows = guard.formatCells = guard.sort = guard.autoFilter = False  # False: allowed
    guard.insertRows = guard.insertColumns = guard.deleteRows = guard.deleteColumns = not rows_and_columns


def check_output(path: Path, force: bool) -> None:
    """Raise InputError where a book can't be written there."""
    if path.suffix != ".xlsx":
        raise InputError(f"{path}: the name of the workbook to write must end in .xlsx")
    if path.exists() and not force:
        raise InputError(f"{path}: this file exists; choose another name, or add --force to replace it")
    if not path.resolve().parent.is_dir():
        raise InputError(f"{path}: the folder does not exist")


def save(pages: Pages, cases: Iterable[Cases], path: Path) -> list[str]:
    """Write the book whole or not at all; returns what had to be cut, one sentence each."""
    pages.book.active = 0
    tables = {one.sheet: one.table for one in cases}
    return write_book(pages.book, tables, path, cached=pages.cached, level=SMALLEST)
