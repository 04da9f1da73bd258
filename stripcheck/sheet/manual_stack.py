"""The Manual sheet of a workbook whose rows differ in mass and flap: the manual's pages in one stack, for all of them.

Not to be typed over: the edges of what the manual prints are worked out from the card. The sheet of a filled workbook
(`manual_tables`) is for one mass and flap, and can be.
"""

from __future__ import annotations

import numpy as np
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.book_tables import BookTables
from stripcheck.card import Card
from stripcheck.caution import CAUTION
from stripcheck.inputs import SIDE_WORDS
from stripcheck.sheet import styles
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.manual_tables import FIGURES, SHEET
from stripcheck.sheet.pages import Pages, write_header, write_heading
from stripcheck.units import from_si, tidy

LEGEND = (
    "As the aircraft card has them, in SI: change the card and make the workbook anew to change them. Grey figures are not "
    "the manual's: the model carries the nearest figure on, and what needs them is beyond the book, at best marginal."
)
# columns before the figures: key of the chain or "", title, number format
LEADING = (
    ("", "Flap", "@"),
    ("page_mass", "Mass [kg]", "#,##0"),
    ("altitudes", "Pressure altitude [m]", "#,##0.0"),
    ("page_flap", "Flap [rad]", "0.0000"),
    ("page_below", "Page below [kg]", "#,##0"),
    ("page_above", "Page above [kg]", "#,##0"),
    ("lines", "Line", "0"),
    ("hottest", "Hottest [K]", "0.00"),
    ("coldest", "Coldest [K]", "0.00"),
    ("highest", "Highest [m]", "#,##0.0"),
)


def write_stack(pages: Pages, card: Card, title: str = SHEET) -> Worksheet | None:
    """The sheet, or None for a card without tables."""
    if not card.tables:
        return None
    sheet: Worksheet = pages.book.create_sheet(title)
    sheet.sheet_view.showGridLines = False
    sheet["A1"], sheet["A1"].font = f"{card.name}: the flight manual's tables", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    sheet["A3"], sheet["A3"].font = LEGEND, styles.SMALL
    row = 5
    for tables in card.tables.values():
        row = _write_side(pages, sheet, card, tables, row) + 2
    for number in range(1, sheet.max_column + 1):
        sheet.column_dimensions[get_column_letter(number)].width = 11
    sheet.freeze_panes = "A5"
    styles.set_print(sheet, portrait=False)
    return sheet


def _write_side(pages: Pages, sheet: Worksheet, card: Card, tables: BookTables, row: int) -> int:
    """One side's stack and its table of flap settings; returns the next free row."""
    count, lines, wide = len(tables.pages), len(tables.altitudes), len(tables.temperatures)
    write_heading(sheet, row, f"{SIDE_WORDS[tables.side]}, at the temperatures below")
    write_header(sheet, row + 2, tuple(title for _, title, _ in LEADING))
    sheet.row_dimensions[row + 2].height = 30
    first, last = row + 3, row + 2 + count * lines
    for number, (key, _, shown) in enumerate(LEADING, 1):
        letter = get_column_letter(number)
        for at, value in enumerate(_leading(card, tables, key), first):
            cell = sheet[f"{letter}{at}"]
            cell.value, cell.number_format, cell.font = value, shown, styles.BODY
        if key:
            end = first + lines - 1 if key == "altitudes" else last
            _name(pages, sheet, tables.side, key, f"{letter}{first}:{letter}{end}")
    start = len(LEADING) + 1
    for figure, grid in tables.filled.items():
        _write_figure(pages, sheet, tables, figure, grid, start, row)
        start += wide + 1
    first_letter, last_letter = (get_column_letter(len(LEADING) + i) for i in (1, wide))
    for key, at in (("temperatures", row + 1), ("columns", row)):
        _name(pages, sheet, tables.side, key, f"{first_letter}{at}:{last_letter}{at}")
    return _write_settings(pages, sheet, card, tables, last + 2)


def _leading(card: Card, tables: BookTables, key: str) -> list[object]:
    """Values of a leading column, a line of a page each."""
    lines = len(tables.altitudes)
    if key == "":
        names = {flap.deflection: flap.name for flap in card.flaps}
        return [names[flap] for flap, _ in tables.pages for _ in range(lines)]
    if key == "altitudes":
        return [float(altitude) for _ in tables.pages for altitude in tables.altitudes]
    if key == "lines":
        return [line for _ in tables.pages for line in range(lines)]
    values = tables.values(card.flaps)[f"{tables.side}_{key}"].reshape(len(tables.pages), -1)
    return np.broadcast_to(values, (len(tables.pages), lines)).ravel().tolist()


def _write_figure(pages: Pages, sheet: Worksheet, tables: BookTables, figure: str, grid: np.ndarray, start: int,
                  row: int) -> None:  # fmt: skip
    """One figure of the stack in SI, the temperatures over its columns, and above these their numbers."""
    lines = len(tables.altitudes)
    words, _ = FIGURES[figure]
    unit = "m/s" if figure == "rate" else "m"
    for j, temperature in enumerate(tables.temperatures):
        letter = get_column_letter(start + j)
        sheet[f"{letter}{row}"], sheet[f"{letter}{row + 1}"] = j, float(temperature)
        sheet[f"{letter}{row}"].font, sheet[f"{letter}{row + 1}"].font = styles.SMALL, styles.SMALL
        sheet[f"{letter}{row + 1}"].number_format = '0.00" K"'
        write_header(sheet, row + 2, (f"{words} [{unit}], {tidy(round(from_si(temperature, '°C'), 6)):g} °C",), start + j)
        printed = tables.printed.get(figure, np.full(grid.shape, np.nan))[:, :, j].ravel()
        for at, value in enumerate(grid[:, :, j].ravel(), row + 3):
            cell = sheet[f"{letter}{at}"]
            cell.value, cell.number_format, cell.font = float(value), "#,##0.00", styles.BODY
            if np.isnan(printed[at - row - 3]):
                cell.fill = styles.BAND_FILL
    first, last = row + 3, row + 2 + len(tables.pages) * lines
    letters = [get_column_letter(start + j) for j in (0, len(tables.temperatures) - 1)]
    _name(pages, sheet, tables.side, f"{figure}_table", f"{letters[0]}{first}:{letters[1]}{last}")


def _write_settings(pages: Pages, sheet: Worksheet, card: Card, tables: BookTables, row: int) -> int:
    """Which tables stand for each flap setting of the card; returns the next free row."""
    write_header(sheet, row, ("Setting", "Flap of the tables [rad]", "Least mass [kg]", "Greatest mass [kg]"))
    sheet.row_dimensions[row].height = 30
    values = tables.values(card.flaps)
    for at, flap in enumerate(card.flaps, row + 1):
        sheet[f"A{at}"], sheet[f"A{at}"].number_format, sheet[f"A{at}"].font = flap.name, "@", styles.BODY
    last = row + len(card.flaps)
    for letter, key in (("B", "book_flaps"), ("C", "least_masses"), ("D", "most_masses")):
        for at, value in enumerate(values[f"{tables.side}_{key}"], row + 1):
            cell = sheet[f"{letter}{at}"]
            cell.value, cell.font, cell.number_format = float(value), styles.BODY, "0.0000" if letter == "B" else "#,##0"
        _name(pages, sheet, tables.side, key, f"{letter}{row + 1}:{letter}{last}")
    return last + 1


def _name(pages: Pages, sheet: Worksheet, side: str, key: str, cells: str) -> None:
    name = f"{side}_{key}"
    pages.places[name] = Place(pages.name(name, sheet, cells))
