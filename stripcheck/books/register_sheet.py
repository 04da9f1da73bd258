"""The sheet Register: the database itself, every cell of its user's to type over, rows and columns free to insert.

Nothing in a row is a formula: rows are sorted, inserted and deleted as in any list, and the other sheets follow. What is
wrong with a row is said beside it by colours, and in words on the sheet Fleet.
"""

from __future__ import annotations

import datetime
from collections.abc import Sequence

from openpyxl.formatting.rule import FormulaRule
from openpyxl.styles import Font, PatternFill, Protection
from openpyxl.styles.numbers import NumberFormat
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.dimensions import ColumnDimension
from openpyxl.worksheet.pagebreak import Break, ColBreak
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common
from stripcheck.books.register_columns import BAND_ROW, CLOSED, FIRST_ROW, HEADER_ROW, LEAST_LAST, SHEET, UNSURE, spare_rows
from stripcheck.books.register_columns import RegisterColumn as Column
from stripcheck.books.register_reading import Source
from stripcheck.books.register_rows import Rows
from stripcheck.caution import CAUTION
from stripcheck.register.runways import PERCENT_CELLS_BELOW
from stripcheck.sheet import styles
from stripcheck.sheet.pages import Pages, note
from stripcheck.surface import CONDITIONS, SURFACES

LIMIT, COUNTED_ON = "$C$3", "$C$4"  # age of a survey in months, and the day on which ages are counted
OLD = "OLD"
SAID = ("$E$3", "$E$4")  # cells of sentences on the whole register
SURVEY_AGE = 60  # months, where nobody says otherwise
MOST_SURVEY_AGE = 600
MOST_TEXT = 2000
PRINT_SCALE = 64  # percent, at which the widest band fits on a page
_EXCEL_COLUMNS = 16384

_LOCKED = Protection(locked=True)
_OWN = PatternFill("solid", fgColor="FFFFFF")
_DOUBT = PatternFill("solid", bgColor="F6D77A")
_DARK = PatternFill("solid", bgColor="595959")
_OLD = PatternFill("solid", bgColor="F2B38C")
HOW = "A row for each runway. Type over anything; insert, delete and sort rows; add columns of your own; keep these headers."


def write_register(pages: Pages, rows: Rows, survey_age: float, counted_on: datetime.date | None) -> Source:
    """Write the sheet; returns where its columns stand. Its sentences come later (`say`)."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    count = len(rows.rows) + spare_rows(len(rows.rows))
    last = max(LEAST_LAST, FIRST_ROW + 3 * count)
    letters = {column.place: get_column_letter(number) for number, column in enumerate(rows.columns, 1)}
    source = Source(rows.columns, letters, last)
    _unlock_all(sheet, rows)
    _write_head(sheet, len(rows.columns) + len(rows.carried), survey_age, counted_on)
    for number, column in enumerate(rows.columns, 1):
        _write_header(sheet, number, column.header, column.help, column.band, _band_before(rows.columns, number))
        _write_cells(sheet, number, column, [row.get(column.place) for row in rows.rows], count)
        _validate(sheet, column, letters, last)
    for number, (header, cells) in enumerate(rows.carried, len(rows.columns) + 1):
        first = number == len(rows.columns) + 1
        _write_header(sheet, number, header, "", "Your own" if first else "", "")
        _write_carried(sheet, number, cells, count)
    _colour(sheet, letters, last)
    sheet.auto_filter.ref = f"A{HEADER_ROW}:{get_column_letter(len(rows.columns) + len(rows.carried))}{FIRST_ROW + count - 1}"
    sheet.freeze_panes = sheet.cell(FIRST_ROW, 4)
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet, f"{BAND_ROW}:{HEADER_ROW}", "A:C")
    sheet.print_area = f"A1:{get_column_letter(len(rows.columns) + len(rows.carried))}{FIRST_ROW + count - 1}"
    _break_pages(sheet, rows)
    common.protect(sheet, rows_and_columns=True)
    sheet.protection.insertHyperlinks = False  # False: allowed
    return source


def _break_pages(sheet: Worksheet, rows: Rows) -> None:
    """Pages of the print that hold whole bands of columns."""
    sheet.sheet_properties.pageSetUpPr.fitToPage = False
    sheet.page_setup.scale = PRINT_SCALE
    sheet.col_breaks = ColBreak()
    for band in ("How high and how steep", "Obstacles", "Survey and notes"):
        first = next(number for number, column in enumerate(rows.columns) if column.band == band)
        sheet.col_breaks.append(Break(id=first))


def say(pages: Pages, sentences: Sequence[tuple[str, str]]) -> None:
    """Sentences on the whole register, as formulas with the text that they have now, at its top."""
    sheet = pages.book[SHEET]
    for place, (text, value) in zip(SAID, sentences, strict=True):
        cell = place.replace("$", "")
        pages.formula(sheet, cell, text, value)
        sheet[cell].font, sheet[cell].protection = styles.BOLD, _LOCKED


def _unlock_all(sheet: Worksheet, rows: Rows) -> None:
    """Columns free to type in all the way down, so that rows and columns can be deleted and typed in anywhere."""
    longest = [max(len(str(cell)) for cell in (header, *cells)) for header, cells in rows.carried]
    widths = [column.width for column in rows.columns] + [min(max(14.0, 1.15 * length), 40.0) for length in longest]
    for number, width in enumerate(widths, 1):
        dimension = sheet.column_dimensions[get_column_letter(number)]
        dimension.width, dimension.protection, dimension.font = width, styles.UNLOCKED, styles.BODY
    letter = get_column_letter(len(widths) + 1)
    rest = ColumnDimension(sheet, index=letter, min=len(widths) + 1, max=_EXCEL_COLUMNS, width=14)
    rest.protection, rest.font = styles.UNLOCKED, styles.BODY
    sheet.column_dimensions[letter] = rest


def _write_head(sheet: Worksheet, width: int, survey_age: float, counted_on: datetime.date | None) -> None:
    for row in range(1, HEADER_ROW):
        for number in range(1, width + 1):
            sheet.cell(row, number).protection = _LOCKED
    sheet["A1"], sheet["A1"].font = "Strip register", styles.TITLE
    styles.write_caution(sheet, "E1", CAUTION)
    sheet["E2"], sheet["E2"].font = HOW, styles.SMALL
    for row, label in ((3, "Surveys are old after"), (4, "Ages counted on")):
        sheet[f"A{row}"], sheet[f"A{row}"].font = label, styles.BODY
    common.input_cell(sheet, "C3", survey_age, '0" months"')
    common.input_cell(sheet, "C4", counted_on, "yyyy-mm-dd")
    sheet["D4"], sheet["D4"].font = "blank: today", styles.SMALL
    common.expect_number(sheet, "C3", "Age of a survey", 1, MOST_SURVEY_AGE, "months")
    _date(sheet, "C4", "Day on which ages are counted")


def _band_before(columns: Sequence[Column], number: int) -> str:
    return columns[number - 2].band if number > 1 else ""


def _write_header(sheet: Worksheet, number: int, header: str, help_text: str, band: str, before: str) -> None:
    top, cell = sheet.cell(BAND_ROW, number), sheet.cell(HEADER_ROW, number, header)
    top.fill, top.font, top.protection = styles.BAND_FILL, styles.BOLD, _LOCKED
    if band != before:
        top.value = band
    cell.font, cell.fill, cell.alignment, cell.protection = styles.HEADER, styles.HEADER_FILL, styles.CENTRE, styles.UNLOCKED
    cell.data_type = "s"
    if help_text:
        cell.comment = note(help_text, 260, 90)
    sheet.row_dimensions[HEADER_ROW].height = 44


_FORMATS = {"number": "#,##0.###", "date": "yyyy-mm-dd", "text": "@", "runway": "@", "end": "@", "profile": "@"}


def _write_cells(sheet: Worksheet, number: int, column: Column, cells: Sequence[object], count: int) -> None:
    shown = "#,##0.000000" if column.key in ("latitude", "longitude") else _FORMATS.get(column.kind, "General")
    middle = column.kind in ("runway", "end", "month", "yes or no", "choice", "date")
    for at in range(count):
        cell = sheet.cell(FIRST_ROW + at, number)
        value = cells[at] if at < len(cells) else None
        cell.value, cell.number_format, cell.font = value, shown, styles.BODY
        if isinstance(value, str):
            cell.data_type, cell.quotePrefix = "s", value.startswith(("=", "+", "-", "@"))
        cell.fill, cell.border, cell.protection = styles.INPUT_FILL, styles.BOX, styles.UNLOCKED
        cell.alignment = styles.CENTRE if middle else styles.MIDDLE


def _write_carried(sheet: Worksheet, number: int, cells: Sequence[object], count: int) -> None:
    for at in range(count):
        cell = sheet.cell(FIRST_ROW + at, number)
        value = cells[at] if at < len(cells) else None
        if isinstance(value, str):
            cell.value = value or None
            if value:
                cell.data_type, cell.quotePrefix = "s", value.startswith(("=", "+", "-", "@"))
        else:
            cell.value = value
        cell.font, cell.fill, cell.border, cell.protection = styles.BODY, _OWN, styles.LINE, styles.UNLOCKED


def _validate(sheet: Worksheet, column: Column, letters: dict[tuple[str, int], str], last: int) -> None:
    letter = letters[column.place]
    cells, first = f"{letter}{FIRST_ROW}:{letter}{last}", f"{letter}{FIRST_ROW}"
    if column.kind == "number" and column.key in ("slope", "local_slope"):
        low, high = column.limits
        small = 100.0 * PERCENT_CELLS_BELOW
        test = f"AND(ISNUMBER({first}),{first}>={low:g},{first}<={high:g},OR({first}=0,ABS({first})>={small:g}))"
        told = f"Type percent as a plain number: 2 for 2 %. From {low:g} to {high:g}; less than {small:g} only if meant so."
        _custom(sheet, cells, column.header, test, told, "warning")
    elif column.kind == "number":
        low, high = column.limits
        common.expect_number(sheet, cells, column.header, low, high, column.unit)
    elif column.kind in ("choice", "yes or no", "month"):
        words = {"surface": SURFACES, "condition": CONDITIONS, "month": (CLOSED, UNSURE)}.get(column.key, ("yes", "no"))
        _list(sheet, cells, column.header, words)
    elif column.kind == "date":
        _date(sheet, cells, column.header)
    elif column.kind == "runway":
        _custom(sheet, cells, column.header, f'AND(ISTEXT({first}),LEN({first})<=9,ISNUMBER(FIND("/",{first})))',
                "Both ends are expected, such as 09/27.")  # fmt: skip
    elif column.kind == "end":
        runway = f"${letters['runway', 0]}{FIRST_ROW}"
        ends = f'LEFT({runway},FIND("/",{runway})-1),MID({runway},FIND("/",{runway})+1,9)'.split(",MID")
        one, other = ends[0], "MID" + ends[1]
        _custom(sheet, cells, column.header, f"IFERROR(OR(UPPER({first})={one},UPPER({first})={other}),FALSE)",
                "One end of the runway is expected, such as 09; blank where both ways are open.")  # fmt: skip
    elif column.kind == "profile":
        _custom(sheet, cells, column.header, f'AND(ISTEXT({first}),ISNUMBER(FIND(":",{first})))',
                "Points distance:height from end 1 are expected, such as 0:0, 200:3.5, 450:12.")  # fmt: skip
    else:
        check = DataValidation(type="textLength", operator="lessThanOrEqual", formula1=str(MOST_TEXT), allow_blank=True,
                               showErrorMessage=True)  # fmt: skip
        check.errorTitle, check.error = column.header[:31], f"{column.header}: at most {MOST_TEXT:,} characters."
        check.add(cells)
        sheet.add_data_validation(check)


def _custom(sheet: Worksheet, cells: str, what: str, test: str, message: str, style: str = "stop") -> None:
    check = DataValidation(type="custom", formula1=test, allow_blank=True, showErrorMessage=True, errorStyle=style)
    check.errorTitle, check.error = what[:31], message
    check.add(cells)
    sheet.add_data_validation(check)


def _list(sheet: Worksheet, cells: str, what: str, words: Sequence[str]) -> None:
    check = DataValidation(type="list", formula1=f'"{",".join(words)}"', allow_blank=True, showErrorMessage=True)
    check.errorTitle, check.error = what[:31], f"Choose from the list ({', '.join(words)}), or leave the cell blank."
    check.add(cells)
    sheet.add_data_validation(check)


def _date(sheet: Worksheet, cells: str, what: str) -> None:
    check = DataValidation(type="date", operator="between", formula1="18264", formula2="73415", allow_blank=True,
                           showErrorMessage=True)  # fmt: skip
    check.errorTitle, check.error = what[:31], f"{what}: a date is expected, such as 2025-04-30 (1950 to 2100)."
    check.add(cells)
    sheet.add_data_validation(check)


def _colour(sheet: Worksheet, letters: dict[tuple[str, int], str], last: int) -> None:
    """Colours for what is old, closed or can't be read; an old survey says so in its own cell, too."""
    survey, closed = letters["survey_date", 0], letters["closed", 0]
    used = f'$A{FIRST_ROW}&$B{FIRST_ROW}<>""'
    today = f"IF(ISNUMBER({COUNTED_ON}),{COUNTED_ON},TODAY())"
    cell = f"${survey}{FIRST_ROW}"
    cells = f"{survey}{FIRST_ROW}:{survey}{last}"
    old = FormulaRule([f"IF(AND(ISNUMBER({cell}),ISNUMBER({LIMIT})),{cell}<EDATE({today},-{LIMIT}),FALSE)"],
                      font=Font(bold=True), fill=_OLD)  # fmt: skip
    old.dxf.numFmt = NumberFormat(numFmtId=200, formatCode=f'"{OLD} "yyyy\\-mm\\-dd')
    sheet.conditional_formatting.add(cells, old)
    ahead = FormulaRule([f"IF(ISNUMBER({cell}),{cell}>{today},FALSE)"], fill=_DOUBT)
    sheet.conditional_formatting.add(cells, ahead)
    sheet.conditional_formatting.add(cells, FormulaRule([f"AND({used},NOT(ISNUMBER({cell})))"], fill=_DOUBT))
    for key, words in (("surface", SURFACES), ("condition", CONDITIONS)):
        letter = letters[key, 0]
        one = f"${letter}{FIRST_ROW}"
        listed = ",".join(f'{one}<>"{word}"' for word in words)
        strange = FormulaRule([f'AND({one}<>"",{listed})'], fill=_DOUBT)
        sheet.conditional_formatting.add(f"{letter}{FIRST_ROW}:{letter}{last}", strange)
    for number in range(1, 13):
        letter = letters["month", number]
        one, column = f"${letter}{FIRST_ROW}", f"{letter}{FIRST_ROW}:{letter}{last}"
        shut = FormulaRule([f'{one}="{CLOSED}"'], font=Font(color="FFFFFF", bold=True), fill=_DARK)
        sheet.conditional_formatting.add(column, shut)
        sheet.conditional_formatting.add(column, FormulaRule([f'AND({one}<>"",{one}<>"{CLOSED}")'], fill=_DOUBT))
    grey = FormulaRule([f'${closed}{FIRST_ROW}="yes"'], font=Font(color="808080", strike=True))
    sheet.conditional_formatting.add(f"A{FIRST_ROW}:C{last}", grey)
    twelve = FormulaRule([f'${closed}{FIRST_ROW}="yes"'], font=Font(bold=True))
    sheet.conditional_formatting.add(f"{closed}{FIRST_ROW}:{closed}{last}", twelve)
