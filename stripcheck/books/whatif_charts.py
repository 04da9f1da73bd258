"""The charts of a what-if, and the tables that they draw on the sheet Tables."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import charts, whatif_fall
from stripcheck.books.charts import BLACK, DARK, MIDDLE, PALE, RED, Look, Row
from stripcheck.books.whatif_cases import SWEEP, rows_of
from stripcheck.books.whatif_inputs import SIDES, Value
from stripcheck.books.whatif_layout import BEST_ROW, SIDE_LETTER, TABLES, WORDS, Layout
from stripcheck.books.whatif_page import LAST_ROW, ROW_HEIGHT, shown
from stripcheck.books.whatif_tables import LABELS, label, names, write
from stripcheck.caution import CAUTION
from stripcheck.sheet import styles
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.pages import Pages, write_header

METRES = '#,##0" m"'
AVAILABLE = {"landing": "landing_available", "takeoff": "tora"}
CURVE_LETTERS = {"landing": ("F", "G", "H"), "takeoff": ("I", "J", "K")}  # required, drawn at, drawn
WAYS_ROW = 6  # of the sheet Tables: required and available by direction
BOTH_SIDES = tuple((side, way) for side in SIDES for way in (1, 2))
NEEDED, PLAIN, THERE = Look(DARK), Look(MIDDLE, "wdUpDiag"), Look(PALE)
CURVES = {"landing": Look(DARK, marker="circle"), "takeoff": Look(RED, marker="square")}
LINES = {"landing": Look(DARK, dash="sysDash"), "takeoff": Look(RED, dash="lgDash")}


def write_charts(pages: Pages, page: Worksheet, sheet: Worksheet, tables: Worksheet, layout: Layout,
                 cases: Mapping[str, Cases]) -> None:  # fmt: skip
    """All charts: the main one on the page, the others on the sheet Charts, with the tables that they draw."""
    sheet["A1"], sheet["A1"].font = f"What if? {layout.start.title}: charts", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    for letter, width in zip("ABCDEFGHIJKLM", (14, 22, 22, 10, 10, 10, 2, 14, 22, 22, 10, 10, 10), strict=True):
        sheet.column_dimensions[letter].width = width
    sheet.sheet_view.showGridLines = False
    charts.place(page, _ways(pages, tables, layout, cases), f"A31:E{LAST_ROW}")
    charts.place(sheet, _flaps(pages, tables, layout, cases["landing"], "landing"), "A4:C17")
    charts.place(sheet, _temperature(pages, tables, layout, cases), "D4:I17")
    charts.place(sheet, _flaps(pages, tables, layout, cases["takeoff"], "takeoff"), "J4:M17")
    for side, cells in (("landing", "A18:F31"), ("takeoff", "H18:M31")):
        charts.place(sheet, whatif_fall.write_fall(pages, sheet, tables, layout, cases[side], side), cells)
    last = whatif_fall.write_legend(sheet)
    for row in range(4, last + 1):
        sheet.row_dimensions[row].height = ROW_HEIGHT
    styles.set_print(sheet)
    sheet.page_setup.fitToHeight = 1
    sheet.page_margins.left = sheet.page_margins.right = 0.3
    sheet.page_margins.top, sheet.page_margins.bottom, sheet.page_margins.footer = 0.3, 0.55, 0.3
    sheet.print_area = f"A1:M{last}"


def _span(letter: str, first: int, count: int) -> str:
    """Cells of the sheet Tables, one below the other."""
    return f"{TABLES}!${letter}${first}:${letter}${first + count - 1}"


def _number(value: object) -> float | None:
    return float(value) if isinstance(value, int | float) else None


# --- required and available by direction


def _ways(pages: Pages, sheet: Worksheet, layout: Layout, cases: Mapping[str, Cases]) -> Any:
    write_header(sheet, WAYS_ROW - 1, ("By direction", "Required [m]", "Without factors [m]", "Available [m]"), 5)
    for row, (side, way) in enumerate(BOTH_SIDES, WAYS_ROW):
        one, verdict = cases[side], f"{side}_verdict"
        text = f'"{WORDS[side]} "&{layout.name(way)}&": "&{one.cell(verdict, way - 1)}'
        now = f"{WORDS[side]} {names(layout)[way - 1]}: {shown(one, verdict, way - 1)}"
        write(pages, sheet, f"E{row}", text, now)
        for letter, key in zip("FGH", (f"{side}_required", f"{side}_distance", AVAILABLE[side]), strict=True):
            write(pages, sheet, f"{letter}{row}", one.cell(key, way - 1), shown(one, key, way - 1), METRES)
    cells = {letter: _span(letter, WAYS_ROW, len(BOTH_SIDES)) for letter in "EFGH"}
    rows = [Row("Required, factors included", cells["F"], NEEDED, labels="outside"),
            Row("Distance without factors", cells["G"], PLAIN, labels="outside"),
            Row("Available", cells["H"], THERE, labels="outside")]  # fmt: skip
    return charts.bars(pages, "Length required and length available", cells["E"], rows, ("Direction and verdict", "Length [m]"))


# --- by flap setting


def _flaps(pages: Pages, sheet: Worksheet, layout: Layout, cases: Cases, side: str) -> Any:
    """Required length by flap setting, in the better direction, with the length there is as a line."""
    settings, first = layout.flaps[side], layout.flap_row[side]
    write_header(sheet, first - 1, (f"{LABELS[side]}, flap", "Deflection [°]", "Required [m]", "Margin [m]", "Verdict",
                                    "Available [m]", "Shown"), 5)  # fmt: skip
    start = rows_of("flaps", len(settings))[0]
    for i, name in enumerate(settings):
        row = first + i
        now = {key: shown(cases, key, start + i) for key in (f"{side}_required", f"{side}_margin", f"{side}_verdict",
                                                              AVAILABLE[side])}  # fmt: skip
        for letter, (key, value) in zip("GHIJ", now.items(), strict=True):
            write(pages, sheet, f"{letter}{row}", cases.cell(key, start + i), value, "General" if letter == "I" else METRES)
        sheet[f"I{row}"].alignment = styles.CENTRE
        write(pages, sheet, f"K{row}", f'E{row}&": "&I{row}', f"{name}: {now[f'{side}_verdict']}")
    styles.colour_verdicts(sheet, f"I{first}:I{first + len(settings) - 1}")
    cells = {letter: _span(letter, first, len(settings)) for letter in "GJK"}
    look = NEEDED if side == "landing" else Look(RED)
    rows = [Row("Required, factors included", cells["G"], look, labels="inside")]
    lines = [Row("Available", cells["J"], Look(BLACK, dash="dash"))]
    axis = ("Flap setting and verdict", "Length [m]")
    return charts.bars(pages, f"{LABELS[side]} by flap setting", cells["K"], rows, axis, lines=lines)


def write_settings(pages: Pages, sheet: Worksheet, layout: Layout) -> None:
    """Names and deflections of the settings that the card allows, which the cases read."""
    area = pages.book.defined_names["flap_names"].attr_text
    degrees = area.replace("$A$", "$B$")
    for side in SIDES:
        for i, name in enumerate(layout.flaps[side]):
            row = layout.flap_row[side] + i
            label(sheet, f"E{row}", name)
            sheet[f"E{row}"].number_format, sheet[f"E{row}"].data_type = "@", "s"
            text = f'IFERROR(INDEX({degrees},MATCH(E{row}&"",flap_names,0)),"")'
            write(pages, sheet, f"F{row}", text, layout.deflection(name), "0.0")


# --- over the temperature


def _temperature(pages: Pages, sheet: Worksheet, layout: Layout, cases: Mapping[str, Cases]) -> Any:
    """Required length over the temperature, the lengths there are, and today.

    A point without a figure is drawn on its neighbour, since a chart would take a blank for 0.
    """
    first, count = layout.sweep_row, len(SWEEP)
    last, today = first + count - 1, layout.cell("temperature")
    write_header(sheet, first - 1, ("Temperature [°C]", "Landing required [m]", "drawn at [°C]", "drawn [m]",
                                    "Take-off required [m]", "drawn at [°C]", "drawn [m]"), 5)  # fmt: skip
    temperatures = layout.temperatures(SWEEP)
    for i, (change, value) in enumerate(zip(SWEEP, temperatures, strict=True)):
        write(pages, sheet, f"E{first + i}", f'IF(ISNUMBER({today}),{today}{change:+g},"")', value, "0.0")
    for side, (figure, across, up) in CURVE_LETTERS.items():
        start = rows_of("sweep", len(layout.flaps[side]))[0]
        required = _required(layout, cases[side], side)
        at = _drawn(required)
        found = f"{figure}{first}:{figure}{last}"
        place = f"{count + 1}-SUMPRODUCT(MAX(ISNUMBER({found})*({count + 1}-(ROW({found})-{first - 1}))))"
        for i, one in enumerate(required):
            row = first + i
            write(pages, sheet, f"{figure}{row}", cases[side].cell(f"{side}_required", start + i), "" if one is None else one,
                  METRES)  # fmt: skip
            for letter, own in ((across, "E"), (up, figure)):
                before = f"{letter}{row - 1}" if i else f"IF(COUNT({found})=0,0,INDEX({own}{first}:{own}{last},{place}))"
                place_now, source = at[i], temperatures if own == "E" else required
                now = 0.0 if place_now is None else source[place_now]
                write(pages, sheet, f"{letter}{row}", f"IF(ISNUMBER({figure}{row}),{own}{row},{before})", now, "0.0")
    _lines(pages, sheet, layout, cases, temperatures)
    ends = _span("E", last + 3, 2)
    rows = [
        *(Row(f"{LABELS[side]}, required", _span(up, first, count), CURVES[side], _span(across, first, count))
          for side, (_, across, up) in CURVE_LETTERS.items()),
        *(Row(f"{LABELS[side]}, available", _span(letter, last + 3, 2), LINES[side], ends)
          for side, letter in (("landing", "F"), ("takeoff", "G"))),
        Row("Today", _span("I", last + 3, 2), Look(BLACK, dash="sysDot"), _span("H", last + 3, 2)),
    ]  # fmt: skip
    return charts.points(pages, "Length required over the temperature, better direction", rows,
                         ("Temperature [°C]", "Length [m]"))  # fmt: skip


def _required(layout: Layout, cases: Cases, side: str) -> list[float | None]:
    """What each temperature of the curve requires now."""
    first, last = rows_of("sweep", len(layout.flaps[side]))
    return [_number(shown(cases, f"{side}_required", row)) for row in range(first, last + 1)]


def _drawn(required: Sequence[float | None]) -> list[int | None]:
    """Which figure each point is drawn at: its own, else the one before it, else the first there is."""
    known = [i for i, one in enumerate(required) if one is not None]
    return [max((k for k in known if k <= i), default=known[0] if known else None) for i in range(len(required))]


def _lines(pages: Pages, sheet: Worksheet, layout: Layout, cases: Mapping[str, Cases], temperatures: Sequence[Value]) -> None:
    """Ends of the lines: what is available, and today's temperature."""
    first, count = layout.sweep_row, len(SWEEP)
    last, row = first + count - 1, first + count + 2
    titles = ("Temperature [°C]", "Landing available [m]", "Take-off available [m]", "Today [°C]", "Line [m]")
    write_header(sheet, row - 1, titles, 5)
    numbers = [one for one in temperatures if isinstance(one, float)]
    now = layout.value("temperature")
    available = {side: _number(shown(cases[side], AVAILABLE[side], Layout.best(cases[side], side) - 1)) for side in SIDES}
    known = [*available.values(), *(one for side in SIDES for one in _required(layout, cases[side], side))]
    drawn = [one for one in known if one is not None]
    for i, ending in enumerate(("MIN", "MAX")):
        at = row + i
        write(pages, sheet, f"E{at}", f"{ending}(E{first}:E{last})", (min, max)[i](numbers, default=0.0), "0.0")
        for side, letter in (("landing", "F"), ("takeoff", "G")):
            cells = cases[side].range(AVAILABLE[side], 0, 1)
            found = f"INDEX({cells},{TABLES}!${SIDE_LETTER[side]}${BEST_ROW})"
            write(pages, sheet, f"{letter}{at}", f"IF(ISNUMBER({found}),{found},0)", available[side] or 0.0, METRES)
        today = layout.cell("temperature")
        write(pages, sheet, f"H{at}", f"IF(ISNUMBER({today}),{today},0)", now if isinstance(now, float) else 0.0, "0.0")
        greatest = f"MAX(F{first}:F{last},I{first}:I{last},F{row}:G{row})"
        write(pages, sheet, f"I{at}", greatest if i else "0", max(drawn, default=0.0) if i else 0.0, METRES)
