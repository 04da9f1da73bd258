"""The sheet Tables of a what-if: the checks of its inputs, the facts that other sheets read, and what the charts draw."""

from __future__ import annotations

from collections.abc import Mapping
from math import floor

from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books.whatif_inputs import SIDES, YES_OR_NO, Entry
from stripcheck.books.whatif_layout import (
    BEST_ROW,
    CHECK_ROW,
    FACT_ROW,
    FACTS,
    FAULT_ROW,
    MASS_SHARE,
    NAME_ROW,
    ROUND_TO,
    SIDE_LETTER,
    Layout,
)
from stripcheck.caution import CAUTION
from stripcheck.sheet import styles
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.pages import Pages, write_header

LABELS = {"landing": "Landing", "takeoff": "Take-off"}


def write_checks(pages: Pages, sheet: Worksheet, layout: Layout) -> None:
    """Headings, the checks of the inputs, and the faults that follow from them."""
    sheet["A1"], sheet["A1"].font = "What the other sheets read: checks of the inputs, and what the charts draw", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    sheet["A3"], sheet["A3"].font = "All of it follows from the page What if; there is nothing to type here.", styles.SMALL
    for letter, width in zip("ABCDEFGHIJK", (38, 16, 16, 3, 30, 21, 22, 22, 22, 16, 26), strict=True):
        sheet.column_dimensions[letter].width = width
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet)
    sheet.page_setup.fitToHeight = 1
    write_header(sheet, CHECK_ROW - 1, ("Input: what is wrong with it", "Direction 1", "Direction 2"))
    for row, entry in enumerate(layout.entries, CHECK_ROW):
        label(sheet, f"A{row}", entry.label)
        for way in (1, 2) if entry.both and not entry.turned else (1,):
            write(pages, sheet, layout.check(entry, way), _check(entry, layout.cell(entry.key, way)), "")
    write_header(sheet, FAULT_ROW - 1, ("What is wrong with all that it reads", "Direction 1", "Direction 2"))
    for row, side in enumerate(SIDES, FAULT_ROW):
        label(sheet, f"A{row}", LABELS[side])
        for way, letter in ((1, "B"), (2, "C")):
            write(pages, sheet, f"{letter}{row}", f"TRIM({_faults(layout, side, way)})", "")
    _write_names(pages, sheet, layout)
    _write_facts(pages, sheet, layout)


def label(sheet: Worksheet, cell: str, text: str) -> None:
    """A label of a row."""
    sheet[cell], sheet[cell].font, sheet[cell].border = text, styles.BODY, styles.LINE


def write(pages: Pages, sheet: Worksheet, cell: str, text: str, value: object, number_format: str = "") -> None:
    """A formula with the value that it has now, plain to look at."""
    pages.formula(sheet, cell, text, value)
    sheet[cell].font, sheet[cell].border = styles.BODY, styles.LINE
    if number_format:
        sheet[cell].number_format = number_format


def _check(entry: Entry, cell: str) -> str:
    """What is wrong with an input, "" where nothing is."""
    if entry.kind not in ("number", YES_OR_NO):
        return '""'
    said = f'"{entry.complaint}. "'
    if entry.kind == YES_OR_NO:
        return f'IF(OR({cell}="",{cell}="yes",{cell}="no"),"",{said})'
    low, high = entry.shown_limits
    return f'IF({cell}="","",IF(ISNUMBER({cell}),IF(AND({cell}>={low},{cell}<={high}),"",{said}),{said}))'


def _faults(layout: Layout, side: str, way: int) -> str:
    """The checks of all inputs that a side reads in a direction, one after another."""
    cells = []
    for entry in layout.entries:
        for seen, own in ((entry.here, True), (entry.there, False)):
            if side in seen and (entry.kind == "number" or entry.kind == YES_OR_NO):
                at = (way if own else 3 - way) if entry.both and not entry.turned else 1
                cells.append(layout.check(entry, at))
    return "&".join(cells)


def _write_names(pages: Pages, sheet: Worksheet, layout: Layout) -> None:
    """Names of the directions: as given, else from the headings."""
    write_header(sheet, NAME_ROW - 1, ("Directions", "Direction 1", "Direction 2"))
    label(sheet, f"A{NAME_ROW}", "Name")
    for way, letter in ((1, "B"), (2, "C")):
        name, heading = layout.cell("name", way), layout.cell("heading")
        turned = "" if way == 1 else "+18"
        tens = f'TEXT(MOD(INT({heading}/10+0.5)-1{turned},36)+1,"00")'
        text = f'IF({name}<>"",{name}&"",IF(ISNUMBER({heading}),{tens},"{"AB"[way - 1]}"))'
        write(pages, sheet, f"{letter}{NAME_ROW}", text, names(layout)[way - 1])
        sheet[f"{letter}{NAME_ROW}"].alignment = styles.RIGHT


def names(layout: Layout) -> tuple[str, str]:
    """The names of the two directions as they are now."""
    heading = layout.value("heading")
    found = []
    for way in (1, 2):
        tens = (floor(heading / 10.0 + 0.5) - 1 + 18 * (way - 1)) % 36 + 1 if isinstance(heading, float) else 0
        found.append(str(layout.value("name", way)) or (f"{tens:02d}" if tens else "AB"[way - 1]))
    return found[0], found[1]


def _write_facts(pages: Pages, sheet: Worksheet, layout: Layout) -> None:
    """What the table of masses begins with, and the deflection of the flap."""
    write_header(sheet, BEST_ROW - 1, ("Facts", "Landing", "Take-off"))
    for i, words in enumerate(FACTS.values()):
        label(sheet, f"A{FACT_ROW + i}", words)
    for side in SIDES:
        cells = {key: layout.fact(key, side).partition("!")[2].replace("$", "") for key in FACTS}
        greatest, empty, step, held = (cells[key] for key in ("greatest", "empty", "step", "held"))
        today = layout.cell(f"mass_{side}")
        card = pages.value_cells[f"max_{side}_mass"]
        write(pages, sheet, greatest, f'IF(ISNUMBER({card}),{card},"")', layout.greatest(side), "#,##0")
        sheet[empty], sheet[empty].font, sheet[empty].border = layout.empty, styles.BODY, styles.LINE
        sheet[empty].number_format = "#,##0"
        rounded = f"INT({greatest}*{MASS_SHARE}/{ROUND_TO:g}+0.5)*{ROUND_TO:g}"
        stepping = f"IF(ISNUMBER({greatest}),MAX({ROUND_TO:g},{rounded}),{ROUND_TO:g})"
        write(pages, sheet, step, stepping, layout.mass_step(side), "#,##0")
        write(pages, sheet, held, f'IF(ISNUMBER({today}),MIN({today},{greatest}),"")', layout.mass_held(side), "#,##0")
        above = f"INT(({greatest}-{held})/{step}-0.01)"  # whole steps between today's and the greatest
        row = f"IF(COUNT({held},{greatest})=2,IF({held}>={greatest},0,1+MIN(1,MAX(0,{above}))),0)"
        write(pages, sheet, cells["row"], row, float(layout.mass_row(side)), "0")
        flap = layout.cell(f"{side}_flap")
        first, last = layout.flap_row[side], layout.flap_row[side] + len(layout.flaps[side]) - 1
        found = f'IFERROR(INDEX(F{first}:F{last},MATCH({flap}&"",E{first}:E{last},0)),"")'
        write(pages, sheet, cells["deflection"], found, layout.deflection(str(layout.value(f"{side}_flap"))), "0.0")


def write_directions(pages: Pages, sheet: Worksheet, layout: Layout, cases: Mapping[str, Cases]) -> None:
    """The better direction of each side, and its name."""
    label(sheet, f"A{BEST_ROW}", "Better direction today")
    label(sheet, f"A{BEST_ROW + 1}", "Its name")
    for side in SIDES:
        scores = cases[side].range(f"{side}_score", 0, 1)
        best, letter = layout.best(cases[side], side), SIDE_LETTER[side]
        write(pages, sheet, f"{letter}{BEST_ROW}", f"MATCH(MAX({scores}),{scores},0)", float(best), "0")
        both = f"$B${NAME_ROW}:$C${NAME_ROW}"
        write(pages, sheet, f"{letter}{BEST_ROW + 1}", f"INDEX({both},{letter}{BEST_ROW})", names(layout)[best - 1])
        sheet[f"{letter}{BEST_ROW + 1}"].alignment = styles.RIGHT
