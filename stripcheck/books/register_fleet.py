"""The sheet Fleet: each strip against each aeroplane on the standard day; first in a word each, then in and out in detail."""

from __future__ import annotations

import calendar
import datetime
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from openpyxl.formatting.rule import FormulaRule
from openpyxl.styles import Alignment, Font, PatternFill
from openpyxl.utils import get_column_letter
from openpyxl.utils.datetime import to_excel
from openpyxl.worksheet.pagebreak import Break, ColBreak
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common
from stripcheck.books.register_best import CLOSED, WORDS, Best
from stripcheck.books.register_columns import SHEET as REGISTER
from stripcheck.books.register_reading import SHEET as READING
from stripcheck.books.register_reading import Reading
from stripcheck.books.register_sheet import COUNTED_ON, LIMIT, OLD, SAID
from stripcheck.caution import CAUTION
from stripcheck.sheet import styles
from stripcheck.sheet.cases import FIRST_ROW as READING_ROW
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.verdict import NOT_ASSESSED, SUITABLE

SHEET = "Fleet"
FACTS_ROW, PLANE_ROW, COUNT_ROW, RULES_ROW = 5, 5, 9, 16
HEADER_ROW, FIRST_ROW = 18, 19
LEADING = (("Strip", 10.0), ("Name", 20.0), ("Runway", 9.0), ("Survey", 20.0))
MATRIX_WIDTH = 27.0
HALF_PAGE = 54.0  # width that the matrix has at the least, for what stands above it
PARTS = (
    ("strip", "Strip", 10.0), ("runway", "Runway", 9.0), ("in", "Land", 12.0), ("on", "on", 7.0),
    ("in_margin", "Margin [m]", 9.5), ("out", "Take off", 12.0), ("by", "by", 7.0), ("out_margin", "Margin [m]", 9.5),
    ("why", "What limits it", 48.0),
)  # fmt: skip
SIDES = (("in", "on", "landing"), ("out", "by", "takeoff"))
MONTH_DAYS = 30.4375
NO_DATE, NOT_READ, AHEAD = "no survey date", "date not read", "date not yet come"
COLOURS = {**styles.BOTH_COLOURS, CLOSED: NOT_ASSESSED}
PRINT_SCALE = 66  # percent, at which the columns of one aeroplane fit on a page


@dataclass(frozen=True)
class Plane:
    """One aeroplane of the fleet: formula and value of its name and of the two lines of its loading, and its results."""

    heading: tuple[str, str]
    loading: Sequence[tuple[str, str]]
    best: Best


def write_fleet(pages: Pages, reading: Reading, planes: Sequence[Plane], facts: Sequence[tuple[str, str, Any]],
                counted_on: datetime.date | None, survey_age: float) -> list[tuple[str, str]]:  # fmt: skip
    """The sheet; ``facts`` are label, formula and value of what the verdicts stand on, the rules last.

    Returns the two sentences, formula and value, that the register says of itself.
    """
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    last = FIRST_ROW + reading.rows - 1
    surveys = _surveys(reading, counted_on or datetime.date.today(), survey_age)
    _write_head(pages, sheet, facts)
    for runway in range(reading.rows):
        _write_leading(pages, sheet, reading, runway, surveys[runway])
    first = len(LEADING) + 1
    width = max(MATRIX_WIDTH, HALF_PAGE / len(planes))
    for number, plane in enumerate(planes):
        _write_words(pages, sheet, plane, first + number, last)
        sheet.column_dimensions[get_column_letter(first + number)].width = width
        _write_details(pages, sheet, plane, first + len(planes) + number * len(PARTS), last)
    _colour_surveys(sheet, f"D{FIRST_ROW}:D{last}")
    _set_up(sheet, len(planes), last)
    return _sentences(reading, surveys)


def _write_head(pages: Pages, sheet: Worksheet, facts: Sequence[tuple[str, str, Any]]) -> None:
    sheet["A1"], sheet["A1"].font = "The fleet on the standard day", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    too_many = f"{REGISTER}!{SAID[1]}"
    pages.formula(sheet, "A3", f'IF(LEFT({too_many},3)="THE",{too_many},"")', "")
    sheet["A3"].font = styles.CAUTION_FONT
    for row, (label, text, value) in zip((*range(FACTS_ROW, FACTS_ROW + len(facts) - 1), RULES_ROW), facts, strict=True):
        sheet[f"A{row}"], sheet[f"A{row}"].font = label, styles.SMALL
        pages.formula(sheet, f"B{row}", text, value)
        sheet[f"B{row}"].font, sheet[f"B{row}"].alignment = styles.BODY, styles.LEFT
    for row, word in enumerate(WORDS, COUNT_ROW):
        sheet[f"D{row}"], sheet[f"D{row}"].font, sheet[f"D{row}"].alignment = word, styles.BODY, styles.CENTRE
    styles.colour_words(sheet, f"D{COUNT_ROW}:D{COUNT_ROW + len(WORDS) - 1}", COLOURS)
    write_header(sheet, HEADER_ROW, tuple(title for title, _ in LEADING))
    sheet.row_dimensions[HEADER_ROW].height = 30
    for number, (_, width) in enumerate(LEADING, 1):
        sheet.column_dimensions[get_column_letter(number)].width = width
        sheet.cell(HEADER_ROW - 1, number).fill = styles.BAND_FILL


def _set_up(sheet: Worksheet, planes: int, last: int) -> None:
    """What is frozen, and the print: the words on one page, each aeroplane's details on one of its own."""
    sheet.freeze_panes = sheet.cell(FIRST_ROW, len(LEADING))
    sheet.sheet_view.showGridLines = False
    first = len(LEADING) + planes
    styles.set_print(sheet, f"{HEADER_ROW - 1}:{HEADER_ROW}")
    sheet.sheet_properties.pageSetUpPr.fitToPage = False
    sheet.page_setup.scale = PRINT_SCALE
    sheet.col_breaks = ColBreak()
    for number in range(planes):
        sheet.col_breaks.append(Break(id=first + number * len(PARTS)))
    sheet.print_area = f"A1:{get_column_letter(first + planes * len(PARTS))}{last}"
    common.protect(sheet)


def _write_leading(pages: Pages, sheet: Worksheet, reading: Reading, runway: int, survey: str) -> None:
    row, at = FIRST_ROW + runway, READING_ROW + runway
    for letter, key in zip("ABC", ("strip", "name", "runway"), strict=True):
        pages.formula(sheet, f"{letter}{row}", reading.at(key, at), reading.values[key][runway])
    pages.formula(sheet, f"D{row}", _survey_formula(reading, at), survey)
    for letter in "ABCD":
        cell = sheet[f"{letter}{row}"]
        cell.font, cell.border = styles.BODY, styles.LINE
        cell.alignment = styles.MIDDLE if letter in "AB" else styles.CENTRE
    sheet.row_dimensions[row].height = 27


def _survey_formula(reading: Reading, at: int) -> str:
    date, used = reading.at("survey_date", at), reading.at("used", at)
    limit, counted_on = f"{REGISTER}!{LIMIT}", f"{REGISTER}!{COUNTED_ON}"
    today = f"IF(ISNUMBER({counted_on}),{counted_on},TODAY())"
    old = f'IF({date}<EDATE({today},-{limit}),"{OLD}: "&INT(({today}-{date})/{MONTH_DAYS})&" months","")'
    known = f'IF({date}>{today},"{AHEAD}",IF(ISNUMBER({limit}),{old},""))'
    return f'IF({used},IF({date}="","{NO_DATE}",IF(ISNUMBER({date}),{known},"{NOT_READ}")),"")'


def _surveys(reading: Reading, today: datetime.date, limit: float) -> list[str]:
    """What is said of each runway's survey."""
    now, before = (float(to_excel(day)) for day in (today, _months_before(today, int(limit))))

    def said(date: Any) -> str:
        if not isinstance(date, float):
            return NO_DATE if date == "" else NOT_READ
        if date > now:
            return AHEAD
        return f"{OLD}: {int((now - date) / MONTH_DAYS)} months" if date < before else ""

    rows = zip(reading.values["used"], reading.values["survey_date"], strict=True)
    return [said(date) if used else "" for used, date in rows]


def _months_before(day: datetime.date, months: int) -> datetime.date:
    """The same day so many months before, or the last one of a shorter month, as EDATE has it."""
    year, month = divmod(day.year * 12 + day.month - 1 - months, 12)
    return datetime.date(year, month + 1, min(day.day, calendar.monthrange(year, month + 1)[1]))


def _colour_surveys(sheet: Worksheet, cells: str) -> None:
    first = cells.split(":")[0]
    old = FormulaRule([f'LEFT(${first},3)="{OLD}"'], font=Font(bold=True), fill=PatternFill("solid", bgColor="F2B38C"))
    other = FormulaRule([f'AND(${first}<>"",LEFT(${first},3)<>"{OLD}")'], fill=PatternFill("solid", bgColor="F6D77A"))
    sheet.conditional_formatting.add(cells, old)
    sheet.conditional_formatting.add(cells, other)


def _write_words(pages: Pages, sheet: Worksheet, plane: Plane, column: int, last: int) -> None:
    """One aeroplane's column of the matrix, with its loading and the counts above."""
    letter = get_column_letter(column)
    sheet.cell(HEADER_ROW - 1, column).fill = styles.BAND_FILL
    for row, (text, value) in zip((PLANE_ROW, PLANE_ROW + 1, PLANE_ROW + 2, HEADER_ROW),
                                  (plane.heading, *plane.loading, plane.heading), strict=True):  # fmt: skip
        pages.formula(sheet, f"{letter}{row}", text, value)
        sheet[f"{letter}{row}"].font, sheet[f"{letter}{row}"].alignment = styles.BODY, styles.CENTRE
    sheet[f"{letter}{PLANE_ROW}"].font = styles.BOLD
    sheet[f"{letter}{HEADER_ROW}"].font, sheet[f"{letter}{HEADER_ROW}"].fill = styles.HEADER, styles.HEADER_FILL
    best, words = plane.best, []
    for runway in range(best.reading.rows):
        cell = sheet[f"{letter}{FIRST_ROW + runway}"]
        text, word = best.unless_closed(runway, *best.both(runway))
        pages.formula(sheet, cell.coordinate, text, word)
        cell.font, cell.border, cell.alignment = styles.BOLD, styles.BOX, styles.CENTRE
        words.append(word)
    cells = f"{letter}{FIRST_ROW}:{letter}{last}"
    styles.colour_words(sheet, cells, COLOURS)
    for row, word in enumerate(WORDS, COUNT_ROW):
        pages.formula(sheet, f"{letter}{row}", f'COUNTIF({letter}${FIRST_ROW}:{letter}${last},"{word}")', words.count(word))
        sheet[f"{letter}{row}"].font, sheet[f"{letter}{row}"].alignment = styles.BODY, styles.CENTRE


def _write_details(pages: Pages, sheet: Worksheet, plane: Plane, first: int, last: int) -> None:
    """In and out of one aeroplane: verdict, direction and margin, and what limits it."""
    letters = {key: get_column_letter(first + i) for i, (key, _, _) in enumerate(PARTS)}
    for (_, _, width), letter in zip(PARTS, letters.values(), strict=True):
        sheet.column_dimensions[letter].width = width
        sheet[f"{letter}{HEADER_ROW - 1}"].fill = styles.BAND_FILL
    write_header(sheet, HEADER_ROW, tuple(title for _, title, _ in PARTS), first)
    edge = letters["strip"]  # each aeroplane has a page of its own
    styles.write_caution(sheet, f"{edge}2", CAUTION)
    lines = [(1, plane.heading, styles.TITLE), (HEADER_ROW - 1, plane.heading, styles.BOLD)]
    lines += [(row, line, styles.BODY) for row, line in enumerate(plane.loading, PLANE_ROW)]
    for row, (text, value), font in lines:
        pages.formula(sheet, f"{edge}{row}", text, value)
        sheet[f"{edge}{row}"].font = font
    for runway in range(plane.best.reading.rows):
        _write_detail(pages, sheet, plane.best, runway, letters)
    for key in ("in", "out"):
        styles.colour_verdicts(sheet, f"{letters[key]}{FIRST_ROW}:{letters[key]}{last}")


def _write_detail(pages: Pages, sheet: Worksheet, best: Best, runway: int, letters: dict[str, str]) -> None:
    row = FIRST_ROW + runway
    cells: dict[str, tuple[str, Any]] = {"why": _why(best, runway)}
    for key, on, side in SIDES:
        cells[key] = best.picked(side, "verdict", runway)
        cells[f"{key}_margin"] = best.picked(side, "margin", runway)
        text, value = best.direction(side, runway)
        cells[on] = f'IF({letters[key]}{row}="{NOT_ASSESSED}","",{text})', "" if cells[key][1] == NOT_ASSESSED else value
    of_reading = best.reading
    for key, letter in letters.items():
        if key in cells:
            text, value = best.unless_closed(runway, *cells[key], "")
        else:
            text, value = of_reading.at(key, READING_ROW + runway), of_reading.values[key][runway]
        pages.formula(sheet, f"{letter}{row}", text, value)
        cell = sheet[f"{letter}{row}"]
        cell.font, cell.border, cell.alignment = styles.BODY, styles.LINE, styles.CENTRE
        if key.endswith("_margin"):
            cell.number_format = "#,##0"
        elif key == "strip":
            cell.alignment = styles.MIDDLE
        elif key == "why":
            cell.font, cell.alignment = styles.SMALL, Alignment(wrap_text=True, vertical="center", indent=1)


def _why(best: Best, runway: int) -> tuple[str, str]:
    """What limits landing and take-off, where they are not suitable; said once where it is the same."""
    (verdict_in, fit_in), (verdict_out, fit_out) = (best.picked(side, "verdict", runway) for _, _, side in SIDES)
    (reason_in, why_in), (reason_out, why_out) = (best.picked(side, "reason", runway) for _, _, side in SIDES)
    good_in, good_out = f'{verdict_in}="{SUITABLE}"', f'{verdict_out}="{SUITABLE}"'
    both = f'IF({reason_in}={reason_out},{reason_in},"In: "&{reason_in}&"; out: "&{reason_out})'
    text = f'IF(AND({good_in},{good_out}),"",IF({good_in},"Out: "&{reason_out},IF({good_out},"In: "&{reason_in},{both})))'
    if fit_in == SUITABLE:
        return text, "" if fit_out == SUITABLE else f"Out: {why_out}"
    if fit_out == SUITABLE:
        return text, f"In: {why_in}"
    return text, why_in if why_in.lower() == why_out.lower() else f"In: {why_in}; out: {why_out}"


def _too_many(reading: Reading) -> str:
    """Formula: how many rows of the register are below those that are worked out, and hold a strip, a name or a length."""
    source, first = reading.source, reading.rows + 2
    parts = []
    for place in (("strip", 0), ("name", 0), ("runway", 0), ("length", 0)):
        cells = source.cells(place)
        parts.append(f'(INDEX({cells},{first}):INDEX({cells},ROWS({cells}))<>"")')
    return f"SUMPRODUCT(--({'+'.join(parts)}>0))"


def _sentences(reading: Reading, surveys: Sequence[str]) -> list[tuple[str, str]]:
    """What the register says of itself: surveys, and rows."""
    survey = f"{SHEET}!$D${FIRST_ROW}:$D${FIRST_ROW + reading.rows - 1}"
    used, fault = (
        f"{READING}!${reading.letters[key]}${READING_ROW}:${reading.letters[key]}${READING_ROW + reading.rows - 1}"
        for key in ("used", "fault")
    )
    counts = (f'COUNTIF({survey},"{OLD}*")', f'COUNTIF({survey},"{NO_DATE}")', f'COUNTIF({fault},"?*")')
    numbers = (sum(word.startswith(OLD) for word in surveys), surveys.count(NO_DATE), sum(map(bool, reading.values["fault"])))
    words = ("Surveys: ", " old, ", " without a date. Rows that can't be read: ")
    end = " (the sheet Fleet tells why)."
    of_surveys = (
        "&".join(f'"{word}"&{count}' for word, count in zip(words, counts, strict=True)) + f'&"{end}"',
        "".join(f"{word}{number}" for word, number in zip(words, numbers, strict=True)) + end,
    )
    many, room = _too_many(reading), f"of {reading.rows} rows that are worked out are in use; add strips below the last one."
    beyond = (
        f'"THE LAST "&{many}&" ROWS ARE NOT WORKED OUT: there is room for {reading.rows}. Make the workbook anew with '
        f'stripcheck register."'
    )
    number = sum(bool(value) for value in reading.values["used"])
    return [of_surveys, (f'IF({many}>0,{beyond},COUNTIF({used},TRUE)&" {room}")', f"{number} {room}")]
