"""The page of a what-if: inputs at the left, results at the right, verdicts by mass and temperature below them."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from openpyxl.formatting.rule import FormulaRule
from openpyxl.styles import Alignment, Font, PatternFill
from openpyxl.utils import column_index_from_string, get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common as book
from stripcheck.books.whatif_cases import MASSES, WARMER, rows_of
from stripcheck.books.whatif_inputs import SIDES, YES_OR_NO, Entry
from stripcheck.books.whatif_layout import (
    BEST_ROW,
    HEADER_ROWS,
    MASS_LETTER,
    MATRIX_LETTERS,
    MATRIX_ROW,
    SIDE_LETTER,
    TABLES,
    WORDS,
    Layout,
)
from stripcheck.books.whatif_tables import names
from stripcheck.caution import CAUTION
from stripcheck.sheet import styles, summary
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.cell import Cell, formula
from stripcheck.sheet.pages import Pages, choice, write_header
from stripcheck.verdict import NOT_ASSESSED

LAST_ROW = 41
ROW_HEIGHT = 17.5
RESULT_ROW = 6
RESULTS = ("verdict", "reason", "", "", "margin", "required", "distance", "available", "headwind", "crosswind", "better")
LABELS = {
    "verdict": "Verdict", "reason": "Why", "margin": "Margin", "required": "Required, factors included",
    "distance": "Distance without factors", "available": "Available", "headwind": "Headwind (-: tailwind)",
    "crosswind": "Crosswind", "better": "Better way today",
}  # fmt: skip
WAYS = {"landing": "Better way in", "takeoff": "Better way out"}
SPEEDS = {
    "landing": (("Stall", "stall_landing"), ("Approach", "approach_eas"), ("Touchdown", "touchdown_eas")),
    "takeoff": (("Stall", "stall_takeoff"), ("Lift-off", "lift_off_eas"), ("At 50 ft", "screen_eas")),
}
COLUMNS = {("landing", 1): ("H", "I"), ("landing", 2): ("J", "K"), ("takeoff", 1): ("L", "M"), ("takeoff", 2): ("N", "O")}
WIDTHS = {"A": 21.0, "B": 9.0, "C": 9.0, "D": 5.0, "E": 31.0, "F": 2.0, "G": 22.0} | dict.fromkeys("HIJKLMNO", 9.3)
TODAY_FILL = PatternFill("solid", fgColor="FFE08A", bgColor="FFE08A")
SMALL_FONT = Font(name="Calibri", size=9)
HEADER_SMALL = Font(name="Calibri", size=9, color="FFFFFF")


def shown(cases: Cases, key: str, row: int) -> Any:
    """What a cell of the cases shows now."""
    column = cases.table.columns[column_index_from_string(cases.letters[key]) - 1]
    value = column.values[row]
    return "" if value is None or value != value else value


def link(pages: Pages, sheet: Worksheet, cell: str, cases: Cases, key: str, row: int, number_format: str = "") -> None:
    """A cell that shows one of the cases."""
    pages.formula(sheet, cell, cases.cell(key, row), shown(cases, key, row))
    sheet[cell].font, sheet[cell].alignment = styles.BODY, styles.CENTRE
    if number_format:
        sheet[cell].number_format = number_format


# --- the inputs


def write_inputs(pages: Pages, sheet: Worksheet, layout: Layout) -> None:
    """Title, caution and the yellow cells."""
    sheet["A1"], sheet["A1"].font = f"What if? {layout.start.title}", styles.TITLE
    sheet["G1"], sheet["G1"].font = layout.card.name, styles.HEADING
    styles.write_caution(sheet, "A2", CAUTION)
    sheet["G3"], sheet["G3"].font = f"Rules: {layout.rules.title}", styles.SMALL
    sheet["A3"] = "Change a yellow cell, and everything follows, charts included. The rest is locked, without a password."
    sheet["A3"].font = styles.SMALL
    for letter, width in WIDTHS.items():
        sheet.column_dimensions[letter].width = width
    sheet.sheet_view.showGridLines = False
    for title, row in (("Strip", HEADER_ROWS["strip"]), ("Day", HEADER_ROWS["day"]), ("Loading", HEADER_ROWS["loading"])):
        write_header(sheet, row, (title, "Value" if row > 4 else "", "", "Unit", "What it means"))
        if row > HEADER_ROWS["strip"]:
            sheet.merge_cells(f"B{row}:C{row}")
    for way, letter in ((1, "B"), (2, "C")):
        pages.formula(sheet, f"{letter}{HEADER_ROWS['strip']}", f'"on "&{layout.name(way)}', f"on {names(layout)[way - 1]}")
    for entry in layout.entries:
        _input(pages, sheet, layout, entry)


def _input(pages: Pages, sheet: Worksheet, layout: Layout, entry: Entry) -> None:
    """A row: label, one yellow cell or two, unit, and what it means or what is wrong with it."""
    row = layout.rows[entry.key]
    sheet[f"A{row}"], sheet[f"A{row}"].font, sheet[f"A{row}"].border = entry.label, styles.BODY, styles.LINE
    sheet[f"D{row}"], sheet[f"D{row}"].font, sheet[f"D{row}"].alignment = entry.unit, styles.SMALL, styles.INDENT
    number_format = "@" if entry.kind in ("name", "flap") else "General"
    for way, letter in ((1, "B"), (2, "C")) if entry.both and not entry.turned else ((1, "B"),):
        value = layout.value(entry.key, way)
        book.input_cell(sheet, f"{letter}{row}", None if value == "" else value, number_format)
        sheet[f"{letter}{row}"].alignment = styles.CENTRE
        if isinstance(value, str) and value:
            sheet[f"{letter}{row}"].data_type = "s"
    if entry.turned:
        first = f"B{row}"
        turn = f'MOD({first}+180,360)' if entry.key == "heading" else f"-{first}"
        pages.formula(sheet, f"C{row}", f'IF(ISNUMBER({first}),{turn},"")', layout.value(entry.key, 2))
        sheet[f"C{row}"].font, sheet[f"C{row}"].alignment, sheet[f"C{row}"].border = styles.BODY, styles.CENTRE, styles.BOX
        sheet[f"C{row}"].number_format = number_format
    cells = f"B{row}:C{row}" if entry.both and not entry.turned else f"B{row}"
    if not entry.both:
        sheet[f"C{row}"].border = styles.BOX
        sheet.merge_cells(f"B{row}:C{row}")
    _expect(pages, sheet, cells, layout, entry)
    checks = [f"{TABLES}!{layout.check(entry, way)}" for way in ((1, 2) if entry.both and not entry.turned else (1,))]
    if entry.kind in ("number", YES_OR_NO):
        said = f'IF({"&".join(checks)}<>"","{entry.expected}","{entry.meaning}")'
        pages.formula(sheet, f"E{row}", said, entry.meaning)
    else:
        sheet[f"E{row}"] = entry.meaning
    sheet[f"E{row}"].font, sheet[f"E{row}"].alignment = styles.SMALL, styles.INDENT
    wrong = FormulaRule(formula=[f'ISNUMBER(SEARCH("is expected",$E{row}))'], font=Font(bold=True, color="B3440B"))
    sheet.conditional_formatting.add(f"A{row}:E{row}", wrong)


def _expect(pages: Pages, sheet: Worksheet, cells: str, layout: Layout, entry: Entry) -> None:
    if entry.kind == "number":
        book.expect_number(sheet, cells, entry.label, *entry.shown_limits, entry.unit)
    elif entry.kind == "flap":
        side = entry.here[0]
        first = layout.flap_row[side]
        settings = f"E{first}:E{first + len(layout.flaps[side]) - 1}"
        choice(sheet, cells, pages.name(f"{side}_settings", pages.book[TABLES], settings), f"Choose {entry.meaning}.")
    elif entry.kind == YES_OR_NO:
        choice(sheet, cells, f'"{YES_OR_NO}"', "yes or no")
    elif entry.kind != "name":
        choice(sheet, cells, f'"{entry.kind}"', "Choose a word of the list, or leave the cell blank: not assessed.")


# --- the results


def write_results(pages: Pages, sheet: Worksheet, layout: Layout, cases: Mapping[str, Cases]) -> None:
    """Verdicts of today both ways, speeds, air, and the two tables of verdicts."""
    _both(pages, sheet, layout, cases)
    write_header(sheet, RESULT_ROW, ("", *[""] * 8), 7)
    for i, words in enumerate(RESULTS, RESULT_ROW + 1):
        if words:
            sheet[f"G{i}"], sheet[f"G{i}"].font = LABELS[words], styles.BODY
            sheet[f"G{i}"].alignment = styles.MIDDLE
            if words == "reason":
                sheet.merge_cells(f"G{i}:G{i + 2}")
    for (side, way), (left, right) in COLUMNS.items():
        head = f"{left}{RESULT_ROW}"
        pages.formula(sheet, head, f'"{WORDS[side]} "&{layout.name(way)}', f"{WORDS[side]} {names(layout)[way - 1]}")
        sheet.merge_cells(f"{head}:{right}{RESULT_ROW}")
        _direction(pages, sheet, cases[side], side, way, left, right)
    _speeds(pages, sheet, cases)
    for side in SIDES:
        _matrix(pages, sheet, layout, cases[side], side)


def _direction(pages: Pages, sheet: Worksheet, cases: Cases, side: str, way: int, left: str, right: str) -> None:
    """The results of one direction."""
    keys = {"available": "landing_available" if side == "landing" else "tora", "headwind": "headwind", "crosswind": "crosswind"}
    formats = {"margin": '+#,##0" m";-#,##0" m";0" m"', "headwind": '0.0" kt"', "crosswind": '0.0" kt"'}
    for row, name in enumerate(RESULTS, RESULT_ROW + 1):
        if not name:
            continue
        cell, last = f"{left}{row}", row + 2 if name == "reason" else row
        if name == "better":
            letter = SIDE_LETTER[side]
            best = f"{TABLES}!${letter}${BEST_ROW}"
            verdict = f"{left}{RESULT_ROW + 1}"
            now = Layout.best(cases, side) == way and shown(cases, f"{side}_verdict", way - 1) != NOT_ASSESSED
            text = f'IF(AND({best}={way},{verdict}<>"{NOT_ASSESSED}"),"better","")'
            pages.formula(sheet, cell, text, "better" if now else "")
            sheet[cell].font, sheet[cell].alignment = styles.BOLD, styles.CENTRE
        else:
            link(pages, sheet, cell, cases, keys.get(name, f"{side}_{name}"), way - 1, formats.get(name, '#,##0" m"'))
        for at in range(row, last + 1):
            for letter in (left, right):
                sheet[f"{letter}{at}"].border = styles.BOX
        sheet.merge_cells(f"{cell}:{right}{last}")
        if name == "verdict":
            sheet[cell].font = styles.BOLD
            styles.colour_verdicts(sheet, cell)
        elif name == "reason":
            sheet[cell].font = styles.SMALL


def _both(pages: Pages, sheet: Worksheet, layout: Layout, cases: Mapping[str, Cases]) -> None:
    """Whether one gets in, and out again, and by which directions."""
    rows = {side: Layout.best(cases[side], side) - 1 for side in SIDES}
    verdicts = {}
    for side in SIDES:
        letter = SIDE_LETTER[side]
        verdicts[side] = f"INDEX({cases[side].range(f'{side}_verdict', 0, 1)},{TABLES}!${letter}${BEST_ROW})"
    now = {side: str(shown(cases[side], f"{side}_verdict", rows[side])) for side in SIDES}
    ranks = [Cell(f"MATCH({verdicts[side]},{summary.RANK_LIST},0)", depth=2) for side in SIDES]
    words = ",".join(f'"{word}"' for word in summary.BOTH)
    text = f"CHOOSE({formula(summary.in_and_out(*ranks))},{words})"
    number = int(summary.in_and_out(*(summary.RANKS.index(now[side]) + 1 for side in SIDES)))
    pages.formula(sheet, "G4", text, summary.BOTH[number - 1])
    sheet.merge_cells("G4:O4")
    sheet["G4"].font, sheet["G4"].alignment = Font(name="Calibri", size=14, bold=True), styles.CENTRE
    sheet.row_dimensions[4].height = 21
    styles.colour_words(sheet, "G4:O4", styles.BOTH_COLOURS)
    best = {side: layout.best_name(side) for side in SIDES}
    called = {side: names(layout)[rows[side]] for side in SIDES}
    parts = [f'"{words}: "&{best[side]}&", "&{verdicts[side]}' for side, words in WAYS.items()]
    said = f'{parts[0]}&". "&{parts[1]}&"."'
    now_said = [f"{words}: {called[side]}, {now[side]}." for side, words in WAYS.items()]
    pages.formula(sheet, "G5", said, " ".join(now_said))
    sheet.merge_cells("G5:O5")
    sheet["G5"].font, sheet["G5"].alignment = styles.BOLD, styles.CENTRE


def _speeds(pages: Pages, sheet: Worksheet, cases: Mapping[str, Cases]) -> None:
    """Speeds to fly, and the air at the strip."""
    row = RESULT_ROW + len(RESULTS) + 1
    write_header(sheet, row, ("Speeds to fly, EAS", *[""] * 8), 7)
    sheet[f"G{row}"].alignment = Alignment(horizontal="left", vertical="center")
    for side, first in (("landing", 8), ("takeoff", 12)):
        for i, (words, key) in enumerate(SPEEDS[side]):
            letter = get_column_letter(first + i)
            sheet[f"{letter}{row}"], sheet[f"{letter}{row}"].font = words, HEADER_SMALL
            link(pages, sheet, f"{letter}{row + 1}", cases[side], key, 0, '0" kt"')
            sheet[f"{letter}{row + 1}"].border = styles.BOX
    sheet[f"G{row + 1}"], sheet[f"G{row + 1}"].font = "with today's masses and flaps", styles.BODY
    for label, key, at, cell in (("Pressure altitude", "pressure_altitude", f"G{row + 2}", f"H{row + 2}"),
                                 ("Density altitude", "density_altitude", f"J{row + 2}", f"L{row + 2}")):  # fmt: skip
        sheet[at], sheet[at].font = label, styles.BODY
        link(pages, sheet, cell, cases["landing"], key, 0, '#,##0" ft"')
        right = get_column_letter(column_index_from_string(cell[0]) + 1)
        sheet.merge_cells(f"{cell}:{right}{row + 2}")


def _matrix(pages: Pages, sheet: Worksheet, layout: Layout, cases: Cases, side: str) -> None:
    """Verdicts by mass and temperature, for the direction that is the better one today."""
    row, (first, _) = MATRIX_ROW[side], rows_of("table", len(layout.flaps[side]))
    way = names(layout)[Layout.best(cases, side) - 1]
    what = {"landing": "Landing", "takeoff": "Take-off"}[side]
    rest = f": verdict by {what.lower()} mass and temperature"
    pages.formula(sheet, f"G{row - 1}", f'"{WORDS[side]} "&{layout.best_name(side)}&"{rest}"', f"{WORDS[side]} {way}{rest}")
    sheet[f"G{row - 1}"].font = styles.HEADING
    write_header(sheet, row, ("Mass", *[""] * len(WARMER)), 7)
    today = layout.cell("temperature")
    for letter, change, value in zip(MATRIX_LETTERS, WARMER, layout.temperatures(), strict=True):
        pages.formula(sheet, f"{letter}{row}", f'IF(ISNUMBER({today}),{today}{change:+g},"")', value)
        sheet[f"{letter}{row}"].number_format = '0.0" °C"'
    facts = {key: layout.fact(key, side) for key in ("greatest", "empty", "step", "held", "row")}
    for i, mass in enumerate(layout.masses(side)):
        at = row + 1 + i
        lighter = f"{facts['held']}+({facts['row']}-{i})*{facts['step']}"
        text = f'IF(ISNUMBER({facts["held"]}),{facts["greatest"]},"")' if i == 0 else (
            f'IF(ISNUMBER({facts["held"]}),IF({lighter}>={facts["empty"]},{lighter},""),"")')  # fmt: skip
        pages.formula(sheet, f"{MASS_LETTER}{at}", text, mass)
        cell = sheet[f"{MASS_LETTER}{at}"]
        cell.font, cell.number_format, cell.alignment, cell.border = styles.BODY, '#,##0" kg"', styles.CENTRE, styles.BOX
        for j, letter in enumerate(MATRIX_LETTERS):
            case = first + i * len(WARMER) + j
            verdict = f"{side}_verdict"
            now = shown(cases, verdict, case) if mass != "" else ""
            pages.formula(sheet, f"{letter}{at}", f'IF(${MASS_LETTER}{at}="","",{cases.cell(verdict, case)})', now)
            one = sheet[f"{letter}{at}"]
            one.font, one.alignment, one.border = SMALL_FONT, styles.CENTRE, styles.BOX
    cells = f"{MATRIX_LETTERS[0]}{row + 1}:{MATRIX_LETTERS[-1]}{row + MASSES}"
    styles.colour_verdicts(sheet, cells)
    marked = FormulaRule(formula=[f"${MASS_LETTER}{row + 1}=$B${layout.rows[f'mass_{side}']}"], fill=TODAY_FILL,
                         font=Font(bold=True))  # fmt: skip
    sheet.conditional_formatting.add(f"{MASS_LETTER}{row + 1}:{MASS_LETTER}{row + MASSES}", marked)
    letter = MATRIX_LETTERS[WARMER.index(0.0)]
    sheet[f"{letter}{row}"].fill, sheet[f"{letter}{row}"].font = TODAY_FILL, styles.BOLD


def finish(sheet: Worksheet) -> None:
    """The legend, and one page of print."""
    row = MATRIX_ROW["takeoff"] + MASSES + 1
    for at in range(5, LAST_ROW + 1):
        sheet.row_dimensions[at].height = ROW_HEIGHT
    sheet[f"G{row}"] = (
        "Highlighted: today. First row: the greatest mass; the others go by 5 % of it from today's; temperatures by 5 K."
    )
    sheet[f"G{row}"].font = styles.SMALL
    styles.set_print(sheet)
    sheet.page_setup.fitToHeight = 1
    sheet.page_margins.left = sheet.page_margins.right = 0.3
    sheet.page_margins.top, sheet.page_margins.bottom, sheet.page_margins.footer = 0.3, 0.55, 0.3
    sheet.print_area = f"A1:O{LAST_ROW}"
    sheet.freeze_panes = "A4"


def told(layout: Layout, cases: Mapping[str, Cases]) -> list[str]:
    """The better way in and out now, a line each."""
    lines = []
    for side, words in (("landing", "Land on"), ("takeoff", "Take off on")):
        row = Layout.best(cases[side], side) - 1
        verdict, reason, margin = (shown(cases[side], f"{side}_{part}", row) for part in ("verdict", "reason", "margin"))
        metres = f", margin {margin:,.0f} m" if margin != "" else ""
        lines.append(f"{words} {names(layout)[row]}: {verdict}: {reason}{metres}")
    return lines
