"""The sheet Fleet: each strip against each aeroplane on the standard day, in and out."""

from __future__ import annotations

import calendar
import datetime
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from openpyxl.styles import Alignment
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common
from stripcheck.books.register_best import CLOSED, WORDS, Best
from stripcheck.books.register_columns import HEADER_ROW as REGISTER_HEADER
from stripcheck.books.register_columns import SHEET as REGISTER
from stripcheck.books.register_reading import Reading
from stripcheck.books.register_sheet import COUNTED_ON, LIMIT
from stripcheck.caution import CAUTION
from stripcheck.sheet import styles
from stripcheck.sheet.cases import FIRST_ROW as READING_ROW
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.verdict import NOT_ASSESSED, SUITABLE

SHEET = "Fleet"
FACTS_ROW, PLANE_ROW, COUNT_ROW = 5, 4, 8
HEADER_ROW, FIRST_ROW = 17, 18
LEADING = (("Strip", 10.0), ("Name", 20.0), ("Runway", 9.0), ("Survey", 16.0))
PARTS = (
    ("both", "In and out", 14.0), ("in", "Land", 11.5), ("on", "on", 6.0), ("in_margin", "margin [m]", 9.0),
    ("out", "Take off", 11.5), ("by", "by", 6.0), ("out_margin", "margin [m]", 9.0), ("why", "What limits it", 44.0),
)  # fmt: skip
MONTH_DAYS = 30.4375
COLOURS = {**styles.BOTH_COLOURS, CLOSED: NOT_ASSESSED}


@dataclass(frozen=True)
class Plane:
    """One aeroplane of the fleet: its name, the cells of its loading, the loading as text, and its results."""

    name: str
    heading: tuple[str, str]  # formula and value of the name
    loading: Sequence[tuple[str, str]]  # formulas and values of two lines
    best: Best


def write_fleet(pages: Pages, reading: Reading, planes: Sequence[Plane], facts: Sequence[tuple[str, str, Any]],
                counted_on: datetime.date | None, survey_age: float) -> list[tuple[str, str]]:  # fmt: skip
    """The sheet; ``facts`` are label, formula and value of what the verdicts stand on. Returns the two sentences, formula and
    value, that the register says of itself."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    last = FIRST_ROW + reading.rows - 1
    sheet["A1"], sheet["A1"].font = "The fleet on the standard day", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    for row, (label, text, value) in enumerate(facts, FACTS_ROW):
        sheet[f"A{row}"], sheet[f"A{row}"].font = label, styles.SMALL
        pages.formula(sheet, f"B{row}", text, value)
        sheet[f"B{row}"].font, sheet[f"B{row}"].alignment = styles.BODY, styles.LEFT
    write_header(sheet, HEADER_ROW, tuple(title for title, _ in LEADING))
    sheet.row_dimensions[HEADER_ROW].height = 30
    for number, (_, width) in enumerate(LEADING, 1):
        sheet.column_dimensions[get_column_letter(number)].width = width
    surveys = _surveys(reading, counted_on or datetime.date.today(), survey_age)
    for runway in range(reading.rows):
        _write_leading(pages, sheet, reading, runway, surveys[runway])
    for number, plane in enumerate(planes):
        _write_plane(pages, sheet, reading, plane, len(LEADING) + 1 + number * len(PARTS), last)
    sentences = _sentences(reading, surveys, survey_age)
    for cell, (text, value) in zip(("A3", "C3"), _beyond(pages, reading), strict=False):
        pages.formula(sheet, cell, text, value)
        sheet[cell].font = styles.CAUTION_FONT
    styles.colour_words(sheet, f"D{FIRST_ROW}:D{last}", {"no survey date": NOT_ASSESSED})
    _colour_old(sheet, f"D{FIRST_ROW}:D{last}")
    sheet.freeze_panes = sheet.cell(FIRST_ROW, len(LEADING))
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet, f"{HEADER_ROW - 1}:{HEADER_ROW}")
    sheet.print_area = f"A1:{get_column_letter(len(LEADING) + len(planes) * len(PARTS))}{last}"
    common.protect(sheet)
    return sentences


def _colour_old(sheet: Worksheet, cells: str) -> None:
    from openpyxl.formatting.rule import FormulaRule
    from openpyxl.styles import Font, PatternFill

    first = cells.split(":")[0]
    rule = FormulaRule([f'LEFT(${first},3)="OLD"'], font=Font(bold=True), fill=PatternFill("solid", bgColor="F2B38C"))
    sheet.conditional_formatting.add(cells, rule)


def _write_leading(pages: Pages, sheet: Worksheet, reading: Reading, runway: int, survey: str) -> None:
    row, at = FIRST_ROW + runway, READING_ROW + runway
    for letter, key in zip("ABC", ("strip", "name", "runway"), strict=True):
        pages.formula(sheet, f"{letter}{row}", reading.at(key, at), reading.values[key][runway])
    pages.formula(sheet, f"D{row}", _survey_formula(reading, at), survey)
    for letter in "ABCD":
        cell = sheet[f"{letter}{row}"]
        cell.font, cell.border, cell.alignment = styles.BODY, styles.LINE, styles.MIDDLE
    sheet[f"C{row}"].alignment = styles.CENTRE
    sheet.row_dimensions[row].height = 27


def _survey_formula(reading: Reading, at: int) -> str:
    date, used = reading.at("survey_date", at), reading.at("used", at)
    limit = f"{REGISTER}!{LIMIT}"
    today = f"IF(ISNUMBER({REGISTER}!{COUNTED_ON}),{REGISTER}!{COUNTED_ON},TODAY())"
    old = f'IF({date}<EDATE({today},-{limit}),"OLD: "&INT(({today}-{date})/{MONTH_DAYS})&" months","")'
    known = f'IF({date}>{today},"date not yet come",IF(ISNUMBER({limit}),{old},""))'
    return f'IF({used},IF({date}="","no survey date",IF(ISNUMBER({date}),{known},"date not read")),"")'


def _surveys(reading: Reading, today: datetime.date, limit: float) -> list[str]:
    from openpyxl.utils.datetime import to_excel

    before = float(to_excel(_months_before(today, int(limit))))
    now = float(to_excel(today))
    words = []
    for used, date in zip(reading.values["used"], reading.values["survey_date"], strict=True):
        if not used:
            words.append("")
        elif date == "":
            words.append("no survey date")
        elif not isinstance(date, float):
            words.append("date not read")
        elif date > now:
            words.append("date not yet come")
        else:
            words.append(f"OLD: {int((now - date) / MONTH_DAYS)} months" if date < before else "")
    return words


def _months_before(day: datetime.date, months: int) -> datetime.date:
    """The same day so many months before, or the last one of a shorter month, as EDATE has it."""
    year, month = divmod(day.year * 12 + day.month - 1 - months, 12)
    return datetime.date(year, month + 1, min(day.day, calendar.monthrange(year, month + 1)[1]))


def _write_plane(pages: Pages, sheet: Worksheet, reading: Reading, plane: Plane, first: int, last: int) -> None:
    """The columns of one aeroplane, with its name, its loading and the counts above them."""
    letters = {key: get_column_letter(first + i) for i, (key, _, _) in enumerate(PARTS)}
    edge = letters["both"]
    for (key, _, width), letter in zip(PARTS, letters.values(), strict=True):
        sheet.column_dimensions[letter].width = width
        band = sheet[f"{letter}{HEADER_ROW - 1}"]
        band.fill = styles.BAND_FILL
    write_header(sheet, HEADER_ROW, tuple(title for _, title, _ in PARTS), first)
    for cell in (f"{edge}{PLANE_ROW}", f"{edge}{HEADER_ROW - 1}"):
        pages.formula(sheet, cell, *plane.heading)
        sheet[cell].font = styles.HEADING
    for row, (text, value) in enumerate(plane.loading, PLANE_ROW + 1):
        pages.formula(sheet, f"{edge}{row}", text, value)
        sheet[f"{edge}{row}"].font = styles.BODY
    words: list[str] = []
    for runway in range(reading.rows):
        words.append(_write_row(pages, sheet, plane.best, runway, letters))
    _write_counts(pages, sheet, letters, last, words)
    styles.colour_words(sheet, f"{edge}{FIRST_ROW}:{edge}{last}", COLOURS)
    for key in ("in", "out"):
        styles.colour_verdicts(sheet, f"{letters[key]}{FIRST_ROW}:{letters[key]}{last}")


def _write_counts(pages: Pages, sheet: Worksheet, letters: dict[str, str], last: int, words: Sequence[str]) -> None:
    edge, beside = letters["both"], letters["in"]
    for row, word in enumerate(WORDS, COUNT_ROW):
        sheet[f"{edge}{row}"], sheet[f"{edge}{row}"].font, sheet[f"{edge}{row}"].alignment = word, styles.BODY, styles.CENTRE
        text = f'COUNTIF(${edge}${FIRST_ROW}:${edge}${last},"{word}")'
        pages.formula(sheet, f"{beside}{row}", text, words.count(word))
        sheet[f"{beside}{row}"].font = styles.BODY
    write_header(sheet, COUNT_ROW - 1, ("In and out", "Runways"), sheet[f"{edge}1"].column)
    styles.colour_words(sheet, f"{edge}{COUNT_ROW}:{edge}{COUNT_ROW + len(WORDS) - 1}", COLOURS)


def _write_row(pages: Pages, sheet: Worksheet, best: Best, runway: int, letters: dict[str, str]) -> str:
    row = FIRST_ROW + runway
    text, both = best.unless_closed(runway, *best.both(runway))
    cells: dict[str, tuple[str, Any]] = {"both": (text, both)}
    for key, on, side in (("in", "on", "landing"), ("out", "by", "takeoff")):
        cells[key] = best.unless_closed(runway, *best.picked(side, "verdict", runway), "")
        cells[f"{key}_margin"] = best.unless_closed(runway, *best.picked(side, "margin", runway), "")
        cells[on] = best.unless_closed(runway, *best.direction(side, runway), "")
    cells["why"] = best.unless_closed(runway, *_why(best, runway), "")
    for key, letter in letters.items():
        pages.formula(sheet, f"{letter}{row}", *cells[key])
        cell = sheet[f"{letter}{row}"]
        cell.font, cell.border, cell.alignment = styles.BODY, styles.LINE, styles.CENTRE
        if key.endswith("_margin"):
            cell.number_format = "#,##0"
        elif key == "why":
            cell.font, cell.alignment = styles.SMALL, Alignment(wrap_text=True, vertical="center", indent=1)
        elif key == "both":
            cell.font = styles.BOLD
    return str(both)


def _why(best: Best, runway: int) -> tuple[str, str]:
    """What limits landing and take-off, where they are not suitable; said once where it is the same."""
    told = {}
    for side in ("landing", "takeoff"):
        told[side] = best.picked(side, "verdict", runway), best.picked(side, "reason", runway)
    (good_in, reason_in), (good_out, reason_out) = told["landing"], told["takeoff"]
    fit_in, fit_out = f'({good_in[0]})="{SUITABLE}"', f'({good_out[0]})="{SUITABLE}"'
    text = (
        f'IF(AND({fit_in},{fit_out}),"",IF({fit_in},"Out: "&{reason_out[0]},IF({fit_out},"In: "&{reason_in[0]},'
        f'IF(({reason_in[0]})=({reason_out[0]}),{reason_in[0]},"In: "&{reason_in[0]}&"; out: "&{reason_out[0]}))))'
    )
    if good_in[1] == good_out[1] == SUITABLE:
        return text, ""
    if good_in[1] == SUITABLE:
        return text, f"Out: {reason_out[1]}"
    if good_out[1] == SUITABLE:
        return text, f"In: {reason_in[1]}"
    same = reason_in[1].lower() == reason_out[1].lower()
    return text, reason_in[1] if same else f"In: {reason_in[1]}; out: {reason_out[1]}"


def _beyond(pages: Pages, reading: Reading) -> list[tuple[str, str]]:
    return [(f'IF({_many(reading)}>0,{REGISTER}!$E$4,"")', "")]


def _many(reading: Reading) -> str:
    """Formula: how many rows of the register are below those that are worked out, and hold a strip, a name or a length."""
    source, first = reading.source, reading.rows + 2
    parts = []
    for place in (("strip", 0), ("name", 0), ("runway", 0), ("length", 0)):
        cells = source.cells(place)
        parts.append(f'(INDEX({cells},{first}):INDEX({cells},ROWS({cells}))<>"")')
    return f"SUMPRODUCT(--({'+'.join(parts)}>0))"


def _sentences(reading: Reading, surveys: Sequence[str], limit: float) -> list[tuple[str, str]]:
    """What the register says of itself: surveys, and rows."""
    last = FIRST_ROW + reading.rows - 1
    survey = f"{SHEET}!$D${FIRST_ROW}:$D${last}"
    old, none = (f'COUNTIF({survey},"{word}")' for word in ("OLD*", "no survey date"))
    counts = sum(word.startswith("OLD") for word in surveys), surveys.count("no survey date")
    fault = f"'{reading_sheet(reading)}'!${reading.letters['fault']}${READING_ROW}:${reading.letters['fault']}${READING_ROW + reading.rows - 1}"
    faults = f'COUNTIF({fault},"?*")'
    bad = sum(text != "" for text in reading.values["fault"])
    one = (
        f'"Surveys: "&{old}&" old, "&{none}&" without a date. Rows that can\'t be read: "&{faults}&", told on the sheet Fleet."',
        f"Surveys: {counts[0]} old, {counts[1]} without a date. Rows that can't be read: {bad}, told on the sheet Fleet.",
    )
    used = f"{reading_sheet(reading)}!${reading.letters['used']}${READING_ROW}:${reading.letters['used']}${READING_ROW + reading.rows - 1}"
    number = sum(bool(value) for value in reading.values["used"])
    many = _many(reading)
    other = (
        f'IF({many}>0,"THE LAST "&{many}&" ROWS ARE NOT WORKED OUT: there is room for {reading.rows}. Make the workbook anew '
        f'with stripcheck register.",COUNTIF({used},TRUE)&" of {reading.rows} rows in use; add strips below the last one.")',
        f"{number} of {reading.rows} rows in use; add strips below the last one.",
    )
    return [one, other]


def reading_sheet(reading: Reading) -> str:
    return reading.at("fault", 1).split("!")[0]
