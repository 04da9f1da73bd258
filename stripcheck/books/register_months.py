"""The sheet Months: each strip in each month of the climate, for one aeroplane, with seasonal closures."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from openpyxl.styles import Alignment
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import charts, common, register_climate
from stripcheck.books.register_best import CLOSED, Best
from stripcheck.books.register_columns import CLOSED as MARK
from stripcheck.books.register_columns import MONTHS, Key
from stripcheck.books.register_reading import Reading
from stripcheck.books.register_rows import Cell
from stripcheck.caution import CAUTION
from stripcheck.sheet import styles
from stripcheck.sheet.cases import FIRST_ROW as READING_ROW
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.sheet.summary import BOTH
from stripcheck.verdict import NOT_ASSESSED

SHEET = "Months"
HEADER_ROW, AIR_ROW, FIRST_ROW = 5, 6, 8
MAYBE_CLOSED = "closed?"
COLOURS = {**styles.BOTH_COLOURS, CLOSED: NOT_ASSESSED, MAYBE_CLOSED: NOT_ASSESSED}
CHART_ROWS, ONE_PAGE = 20, 40  # rows that the chart takes, and runways that go on one page
# what the chart counts, the words of the cells that it means, and how it is drawn
COUNTED = (
    ("in and out", BOTH[:1], charts.Look(charts.PALE)),
    ("in and out, marginal", BOTH[1:2], charts.Look("8A6A00", "wdUpDiag")),
    ("not in and out", BOTH[2:5], charts.Look(charts.RED)),
    ("not assessed", BOTH[5:], charts.Look("777777", "pct20")),
    ("closed", (CLOSED, MAYBE_CLOSED), charts.Look("595959")),
)


def write_months(pages: Pages, reading: Reading, best: Best, name: tuple[str, str], loading: Sequence[tuple[str, str]],
                 rows: Sequence[Mapping[Key, Cell]]) -> None:  # fmt: skip
    """The sheet; ``name`` and ``loading`` are formulas and values, ``rows`` the rows of the register, spare ones too."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    last = FIRST_ROW + reading.rows - 1
    pages.formula(sheet, "A1", f'"Through the year: "&{name[0]}', f"Through the year: {name[1]}")
    sheet["A1"].font = styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    joined = '&"; "&'.join(text for text, _ in loading)
    told = "; ".join(value for _, value in loading)
    rest = ". The climate's air and ground, the wind of the sheet Day; closures as the register has them."
    pages.formula(sheet, "A3", f'{joined}&"{rest}"', told + rest)
    sheet["A3"].font = styles.SMALL
    write_header(sheet, HEADER_ROW, ("Strip", "Name", "Runway", *MONTHS))
    for number, width in enumerate((10.0, 20.0, 9.0, *(11.0,) * 12), 1):
        sheet.column_dimensions[get_column_letter(number)].width = width
    _write_air(pages, sheet)
    found = [_write_row(pages, sheet, reading, best, runway, rows[runway]) for runway in range(reading.rows)]
    cells = f"D{FIRST_ROW}:O{last}"
    styles.colour_words(sheet, cells, COLOURS)
    end = _write_counts(pages, sheet, last, found)
    _draw(pages, sheet, last + 3, end)
    sheet.freeze_panes = f"D{FIRST_ROW}"
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")
    sheet.print_area = f"A1:O{end + CHART_ROWS}"
    if reading.rows <= ONE_PAGE:
        sheet.page_setup.fitToHeight = 1
    common.protect(sheet)


def _write_air(pages: Pages, sheet: Worksheet) -> None:
    """Each month's temperature and ground, from the sheet Climate."""
    for row, label, letter, shown in ((AIR_ROW, "Temperature", "B", '0.#" °C"'), (AIR_ROW + 1, "Ground", "C", "General")):
        sheet[f"A{row}"], sheet[f"A{row}"].font = label, styles.SMALL
        for number in range(1, 13):
            source = f"{register_climate.SHEET}!${letter}${register_climate.FIRST_ROW + number}"
            cell = sheet.cell(row, 3 + number)
            value = pages.book[register_climate.SHEET][f"{letter}{register_climate.FIRST_ROW + number}"].value
            pages.formula(sheet, cell.coordinate, f'IF({source}="","",{source})', "" if value is None else value)
            cell.font, cell.number_format, cell.alignment = styles.SMALL, shown, styles.CENTRE


def _write_row(pages: Pages, sheet: Worksheet, reading: Reading, best: Best, runway: int, row: Mapping[Key, Cell]) -> list[str]:
    at, of_reading = FIRST_ROW + runway, READING_ROW + runway
    for letter, key in zip("ABC", ("strip", "name", "runway"), strict=True):
        pages.formula(sheet, f"{letter}{at}", reading.at(key, of_reading), reading.values[key][runway])
        cell = sheet[f"{letter}{at}"]
        cell.font, cell.border, cell.alignment = styles.BODY, styles.LINE, styles.MIDDLE
    sheet[f"C{at}"].alignment = styles.CENTRE
    sheet.row_dimensions[at].height = 27
    words = []
    for month in range(1, 13):
        text, value = best.both(runway, month)
        mark = f"INDEX({reading.source.cells(('month', month))},{runway + 2})"
        closed = row.get(("month", month))
        value = value if closed is None else CLOSED if closed == MARK else MAYBE_CLOSED
        whole = f'IF(TRIM({mark})="",{text},IF(TRIM({mark})="{MARK}","{CLOSED}","{MAYBE_CLOSED}"))'
        cell = sheet.cell(at, 3 + month)
        whole, value = best.unless_closed(runway, whole, value)
        pages.formula(sheet, cell.coordinate, whole, value)
        cell.font, cell.border = styles.SMALL, styles.BOX
        cell.alignment = Alignment(horizontal="center", vertical="center", wrap_text=True)
        words.append(str(value))
    return words


def _write_counts(pages: Pages, sheet: Worksheet, last: int, found: Sequence[Sequence[str]]) -> int:
    """How many runways in each month, below the rows; returns the last row of these."""
    row = last + 2
    sheet[f"A{row}"], sheet[f"A{row}"].font = "Runways in each month", styles.HEADING
    for at, (label, words, *_) in enumerate(COUNTED, row + 1):
        sheet[f"A{at}"], sheet[f"A{at}"].font = label, styles.BODY
        for month in range(12):
            letter = get_column_letter(4 + month)
            text = "+".join(f'COUNTIF({letter}${FIRST_ROW}:{letter}${last},"{word}")' for word in _plain(words))
            count = sum(line[month] in words for line in found)
            pages.formula(sheet, f"{letter}{at}", text, count)
            sheet[f"{letter}{at}"].font, sheet[f"{letter}{at}"].alignment = styles.BODY, styles.CENTRE
    return row + len(COUNTED)


def _plain(words: Sequence[str]) -> list[str]:
    """Words for COUNTIF, in which a question mark stands for any letter unless it is told not to."""
    return [word.replace("?", "~?") for word in words]


def _draw(pages: Pages, sheet: Worksheet, first: int, last: int) -> None:
    rows = [charts.Row(label, f"{SHEET}!$D${row}:$O${row}", look) for row, (label, _, look) in enumerate(COUNTED, first)]
    months = f"{SHEET}!$D${HEADER_ROW}:$O${HEADER_ROW}"
    chart = charts.bars(pages, "Runways in and out, month by month", months, rows, ("Month", "Runways"), stacked=True)
    charts.place(sheet, chart, f"A{last + 2}:O{last + CHART_ROWS}")
