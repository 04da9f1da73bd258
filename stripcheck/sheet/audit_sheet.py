"""The workbook of an audit: every finding with a link to its cell, the kinds with their counts, and a copy of the list.

Where the list is an .xlsx, the links lead to that file, by a path from the workbook's own folder; else to the copy.
"""

from __future__ import annotations

import os
from pathlib import Path
from urllib.parse import quote

import numpy as np
from openpyxl import Workbook
from openpyxl.styles import Font
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.hyperlink import Hyperlink
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.caution import CAUTION
from stripcheck.register.audit import Audit, Finding
from stripcheck.register.audit_kinds import DOUBTFUL, LOOK, MEANINGS, UNUSABLE
from stripcheck.sheet import styles
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.sheet.stream import MAX_ROWS, Column, NumberColumn, Table, TextColumn, write_book
from stripcheck.verdict import MARGINAL, NOT_ASSESSED
from stripcheck.verdict import UNSUITABLE as RED

SHEET, KIND_SHEET, LIST_SHEET = "Audit", "Kinds", "List"
HEADER_ROW, FIRST_ROW = 4, 5
TITLES = ("Row", "Strip", "Runway", "Column", "Cell", "Severity", "Kind", "What is wrong", "Suggested correction")
WIDTHS = (8, 14, 12, 26, 9, 14, 36, 80, 60)
LINK_COLUMN = 5
MOST_LINKS = 65_530  # links that a sheet may hold (from memory: Excel's limits); the worst findings come first
LINKABLE = (".xlsx", ".xlsm")
LINK = Font(name="Calibri", size=10, color="0563C1", underline="single")
COLOURS = {UNUSABLE: RED, DOUBTFUL: MARGINAL, LOOK: NOT_ASSESSED}


def cell_name(finding: Finding) -> str:
    """The cell that a finding is about, such as "F12"; "" where it is a matter of the whole row."""
    return f"{get_column_letter(finding.place)}{finding.row}" if finding.place else ""


def write_sheets(audit: Audit, path: Path) -> list[str]:
    """Write the workbook, whole or not at all; returns what had to be cut, one sentence each.

    Raises InputError where it can't be written, or the list is longer than a sheet.
    """
    book = Workbook()
    book.remove(book.active)
    book.properties.title = "Audit of a runway list"
    made = Pages(book)
    outside = audit.source.suffix.lower() in LINKABLE
    _findings_skeleton(made, audit)
    links = _places(audit, outside)
    if links:
        cell = book[SHEET].cell(FIRST_ROW, LINK_COLUMN)
        target = _target(audit.source, path) if outside else None
        cell.hyperlink = Hyperlink(ref=cell.coordinate, location=links[0], target=target)
        cell.font = LINK
    _write_kinds(made, audit)
    tables = {SHEET: _findings_table(audit, links)}
    if not outside:
        tables[LIST_SHEET] = _copy(book, audit)
    return write_book(book, tables, path)


def _findings_skeleton(made: Pages, audit: Audit) -> None:
    sheet: Worksheet = made.book.create_sheet(SHEET)
    sheet["A1"], sheet["A1"].font = "Audit", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    rows = len({finding.row for finding in audit.findings})
    text = (f"{audit.rows_read:,} runways read from {audit.source.name}, {audit.left_out:,} left out; {len(audit.findings):,} "
            f"findings in {rows:,} rows. Nothing was changed.")  # fmt: skip
    sheet["A3"], sheet["A3"].font = text, styles.BODY
    write_header(sheet, HEADER_ROW, TITLES)
    for number, width in enumerate(WIDTHS, 1):
        sheet.column_dimensions[get_column_letter(number)].width = width
        cell = sheet.cell(FIRST_ROW, number)
        cell.font, cell.alignment = styles.BODY, styles.INDENT_WRAP if number >= len(WIDTHS) - 1 else styles.INDENT
        cell.quotePrefix = number > 1
    last = FIRST_ROW + max(len(audit.findings), 1) - 1
    sheet.freeze_panes = f"A{FIRST_ROW}"
    sheet.auto_filter.ref = f"A{HEADER_ROW}:{get_column_letter(len(TITLES))}{last}"
    styles.colour_words(sheet, f"F{FIRST_ROW}:F{last}", COLOURS)
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")


def _target(source: Path, path: Path) -> str:
    """Address of the list as seen from the folder of the workbook; on another drive the whole path."""
    try:
        found = os.path.relpath(source.resolve(), path.resolve().parent)
    except ValueError:
        return source.resolve().as_uri()
    return quote(Path(found).as_posix())


def _places(audit: Audit, outside: bool) -> list[str]:
    """Where the link of each finding leads: to its cell, or to the first cell of its row."""
    name = audit.sheet if outside else LIST_SHEET
    quoted = "'" + name.replace("'", "''") + "'"
    return [f"{quoted}!{cell_name(finding) or f'A{finding.row}'}" for finding in audit.findings[:MOST_LINKS]]


def _findings_table(audit: Audit, links: list[str]) -> Table:
    found = audit.findings
    columns: list[Column] = [NumberColumn(np.array([finding.row for finding in found], dtype=float))]
    names = [cell_name(finding) or f"row {finding.row}" for finding in found]
    texts = (
        [finding.strip for finding in found], [finding.runway for finding in found], [finding.column for finding in found],
        names, [finding.kind.severity for finding in found], [finding.kind.name for finding in found],
        [finding.what for finding in found], [finding.fix for finding in found],
    )  # fmt: skip
    heights = styles.heights_for([finding.what for finding in found], WIDTHS[-2])
    return Table(FIRST_ROW, columns + [TextColumn(column) for column in texts], heights, links)


def _write_kinds(made: Pages, audit: Audit) -> None:
    sheet: Worksheet = made.book.create_sheet(KIND_SHEET)
    sheet["A1"], sheet["A1"].font = "What was found", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    write_header(sheet, HEADER_ROW, ("Severity", "Kind", "Findings", "Rows", "What it means"))
    row = HEADER_ROW
    for row, (kind, count) in enumerate(audit.counts, FIRST_ROW):
        rows = len({finding.row for finding in audit.findings if finding.kind is kind})
        for number, value in enumerate((kind.severity, kind.name, count, rows, kind.meaning), 1):
            cell = sheet.cell(row, number, value)
            cell.font, cell.alignment = styles.BODY, styles.INDENT
    styles.colour_words(sheet, f"A{FIRST_ROW}:A{max(row, FIRST_ROW)}", COLOURS)
    for number, (severity, meaning) in enumerate(MEANINGS.items(), row + 2):
        sheet.cell(number, 1, severity).font = styles.BOLD
        sheet.cell(number, 2, meaning).font = styles.BODY
    for letter, width in zip("ABCDE", (14, 44, 10, 10, 100), strict=True):
        sheet.column_dimensions[letter].width = width
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")


def _copy(book: Workbook, audit: Audit) -> Table:
    """A copy of the list, each cell where it stands in the file, as text or number and never as a formula."""
    sheet: Worksheet = book.create_sheet(LIST_SHEET)
    table = audit.table
    first, last = table.header_row, max(table.row_numbers)
    columns: list[list[object]] = [[None] * (min(last, MAX_ROWS) - first + 1) for _ in range(max(table.places))]
    for place, header, cells in zip(table.places, table.headers, table.cells, strict=True):
        column = columns[place - 1]
        column[0] = header
        for row, cell in zip(table.row_numbers, cells, strict=True):
            if row <= MAX_ROWS:
                column[row - first] = cell
        template = sheet.cell(first, place)
        template.font, template.quotePrefix = styles.BODY, True
    sheet.freeze_panes = f"A{first + 1}"
    return Table(first, [TextColumn(column) for column in columns])
