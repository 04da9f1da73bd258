"""A workbook in which the changes that another list would make to a register are looked through and accepted, row by row."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import NamedTuple

import numpy as np
from openpyxl import Workbook
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.caution import CAUTION
from stripcheck.errors import InputError
from stripcheck.register.merge import Merge
from stripcheck.register.read_table import HEADER_WITHIN, check_file, workbook_sheets
from stripcheck.register.values import as_text, as_written, is_blank, read_yes
from stripcheck.sheet import styles
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.sheet.stream import Column, NumberColumn, Table, TextColumn, write_book

SHEET = "Review"
HEADER_ROW, FIRST_ROW = 6, 7
TITLES = ("Kind", "Strip", "Runway", "Row", "Column", "Old", "New", "Verdicts", "Remark", "Accept", "Key")
WIDTHS = (10, 13, 11, 7, 30, 30, 46, 40, 40, 10, 10)
WRAPPED = ("Column", "Old", "New", "Verdicts", "Remark")
ACCEPT, KEY = TITLES.index("Accept") + 1, TITLES.index("Key") + 1
FINGERPRINT_ROW = 1


class Line(NamedTuple):
    """A row of the review: the texts of its columns, the row in the register (None for a new runway), and the change's key."""

    kind: str
    strip: str
    runway: str
    row: int | None
    column: str
    old: str
    new: str
    verdicts: str
    remark: str
    key: str


def write_review(merge: Merge, lines: Sequence[Line], path: Path, sources: str, verdicts: str) -> list[str]:
    """Write the review, whole or not at all; returns what had to be cut, one sentence each.

    ``sources``: which lists were compared; ``verdicts``: for what aeroplane and day verdicts were compared, or that they
    were not. Raises InputError where it can't be written.
    """
    book = Workbook()
    book.remove(book.active)
    book.properties.title = "Review of a merge"
    sheet: Worksheet = book.create_sheet(SHEET)
    made = Pages(book)
    sheet["A1"], sheet["A1"].font = "Changes to be accepted", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    how = 'Choose "yes" in the column Accept for what shall be merged, save, and give this file with --accept-from. Blank: no.'
    for number, text in enumerate((sources, verdicts, how), 3):
        sheet.cell(number, 1, text).font = styles.BODY
        sheet.cell(number, 1).quotePrefix = True
    sheet.cell(FINGERPRINT_ROW, KEY, merge.fingerprint)
    write_header(sheet, HEADER_ROW, TITLES)
    last = FIRST_ROW + max(len(lines), 1) - 1
    for number, (title, width) in enumerate(zip(TITLES, WIDTHS, strict=True), 1):
        sheet.column_dimensions[get_column_letter(number)].width = width
        cell = sheet.cell(FIRST_ROW, number)
        cell.font, cell.alignment = styles.BODY, styles.INDENT_WRAP if title in WRAPPED else styles.INDENT
        cell.quotePrefix = title not in ("Row", "Accept")
    answer = sheet.cell(FIRST_ROW, ACCEPT)
    answer.fill, answer.border = styles.INPUT_FILL, styles.BOX
    sheet.column_dimensions[get_column_letter(KEY)].hidden = True
    choice = DataValidation(type="list", formula1='"yes,no"', allow_blank=True, showErrorMessage=True)
    choice.errorTitle, choice.error = "Accept", 'Write "yes" or "no", or leave it blank.'
    choice.add(f"{get_column_letter(ACCEPT)}{FIRST_ROW}:{get_column_letter(ACCEPT)}{last}")
    sheet.add_data_validation(choice)
    sheet.freeze_panes = f"D{FIRST_ROW}"
    sheet.auto_filter.ref = f"A{HEADER_ROW}:{get_column_letter(KEY)}{last}"
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")
    return write_book(made.book, {SHEET: _table(lines)}, path)


def _table(lines: Sequence[Line]) -> Table:
    rows = np.array([np.nan if line.row is None else line.row for line in lines], dtype=float)
    columns: list[Column] = [TextColumn([line[at] for line in lines]) for at in range(9)]
    columns[3] = NumberColumn(rows)
    columns += [TextColumn([""] * len(lines)), TextColumn([line.key for line in lines])]
    if not lines:
        columns = [TextColumn([""]) for _ in TITLES]
    tallest = None
    for at, title in enumerate(TITLES[:9]):
        if title in WRAPPED and lines:
            heights = styles.heights_for([str(line[at]) for line in lines], WIDTHS[at])
            tallest = heights if tallest is None else tallest if heights is None else np.fmax(tallest, heights)
    return Table(FIRST_ROW, columns, tallest)


def read_review(path: Path, merge: Merge) -> set[str]:
    """The keys of the changes that are marked yes.

    Raises InputError for a file that is no review, a review of other lists or of lists that have changed since, and a mark
    that is neither yes nor no.
    """
    if path.suffix.lower() != ".xlsx":
        raise InputError(f"{path}: a review is an .xlsx file that --review wrote")
    check_file(path, "review")
    rows = next((rows for name, rows in workbook_sheets(path, None) if name == SHEET), [])
    found = next((at for at, row in enumerate(rows[:HEADER_WITHIN]) if {"Accept", "Key"} <= {*map(as_written, row)}), None)
    if found is None:
        raise InputError(f'{path}: this is no review of a merge: it has no sheet "{SHEET}" with the columns Accept and Key')
    titles = [as_written(cell) for cell in rows[found]]
    answer, key = titles.index("Accept"), titles.index("Key")
    if merge.fingerprint not in (as_written(cell) for row in rows[:found] for cell in row):
        raise InputError(f"{path}: this review is of other lists, or one has changed since; write a new one with --review")
    marks: dict[str, bool | None] = {}
    for number, row in enumerate(rows[found + 1 :], found + 2):
        mark = _mark(path, number, row[answer] if answer < len(row) else "")
        name = as_text(row[key]) if key < len(row) else ""
        if mark is None and (not name or name in marks):
            continue
        if not name or marks.get(name, mark) != mark:
            raise InputError(f"{path} row {number}: it can't be told which change is meant; write a new review with --review")
        marks[name] = mark
    known = {change.key: change for change in merge.changes}
    accepted = {name for name, mark in marks.items() if mark}
    strange = next((name for name in accepted if name not in known), None)
    if strange is not None:
        raise InputError(f"{path}: a row that is marked yes is none of the changes; write a new review with --review")
    return accepted


def _mark(path: Path, number: int, cell: object) -> bool | None:
    if is_blank(cell):
        return None
    try:
        return read_yes(cell)
    except InputError:
        raise InputError(f'{path} row {number}: "{as_text(cell)}" in the column Accept is neither yes nor no') from None


