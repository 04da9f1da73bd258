"""The Manual sheet: the flight manual's own tables, to be typed over, and the tables for the mass and flap of the day.

Formulas elsewhere read the tables of the day by name. Each of their cells is linear between the pages below for the mass
of the day; a hole of the manual's is carried by the model, and the edges beside each line tell where that begins.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from openpyxl.formatting.rule import Rule
from openpyxl.styles import PatternFill
from openpyxl.styles.differential import DifferentialStyle
from openpyxl.utils import column_index_from_string, get_column_letter
from openpyxl.worksheet.pagebreak import Break
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck import interpolation
from stripcheck.book_tables import NOWHERE, BookTables
from stripcheck.card import Card
from stripcheck.caution import CAUTION
from stripcheck.inputs import SIDE_WORDS
from stripcheck.interpolation import FAR, HAIR
from stripcheck.sheet import labels, styles
from stripcheck.sheet.cell import Cell, formula, reference, where
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.pages import Pages, write_header, write_heading
from stripcheck.units import UNITS, from_si, tidy, to_si

SHEET = "Manual"
FIGURES = labels.FIGURES
IN_SI = {"m": "m", "ft/min": "m/s"}  # the tables as loaded are in SI
FIRST = 3  # column of the first temperature: the altitude and its SI value stand before it
LEGENDS = (
    "Yellow cells are the manual's; type over them as they are printed, and leave a hole blank. Grey cells are not the "
    "manual's: the model carries the nearest figure on, and what needs them is beyond the book, at best marginal.",
    "As loaded: for the mass and flap on the sheet Aircraft, linear between the pages below. The formulas of the strips read "
    "these by name; those on grey are not the manual's.",
)
AS_ROWS = "Figures of the manual, as the sheet Manual has them (rows folded below)"
AS_ROWS_LEGEND = (
    "Read by functions that are given this sheet as their aircraft. Type over figures on the sheet Manual, not here. "
    f'"{labels.CARRIED.strip()}" behind a figure: the manual has none there, the model carries the nearest on.'
)


def write_manual(pages: Pages, card: Card, values: Mapping[str, Any], title: str = SHEET) -> Worksheet | None:
    """The sheet, or None for a card without tables. ``values`` are the steps that are the same for all strips, SI."""
    if not card.tables:
        return None
    sheet: Worksheet = pages.book.create_sheet(title)
    sheet.sheet_view.showGridLines = False
    sheet["A1"], sheet["A1"].font = f"{card.name}: the flight manual's tables", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    for line, legend in enumerate(LEGENDS, 3):
        sheet[f"A{line}"], sheet[f"A{line}"].font = legend, styles.SMALL
    sheet.column_dimensions["A"].width, sheet.column_dimensions["B"].width = 24, 13
    for number, side in enumerate(_sides(pages, sheet, card, values)):
        if number:
            sheet.row_breaks.append(Break(id=side.row - 1))  # each side begins a page of the print
        side.write()
    for column in range(FIRST, sheet.max_column + 1):
        sheet.column_dimensions[get_column_letter(column)].width = 10.5
    sheet.freeze_panes = "B5"
    styles.set_print(sheet, portrait=False)
    return sheet


def write_as_rows(pages: Pages, aircraft: Worksheet, card: Card, values: Mapping[str, Any]) -> None:
    """The manual's figures as rows at the end of the sheet Aircraft, live from the sheet Manual, for who reads it as a range.

    Folded, and outside what is printed; a row by the aeroplane's other facts tells how far the range goes.
    """
    if not card.tables:
        return
    last = aircraft.max_row
    aircraft.print_area = f"A1:I{last}"
    heading = last + 2
    write_heading(aircraft, heading, AS_ROWS)
    aircraft[f"A{heading + 1}"], aircraft[f"A{heading + 1}"].font = AS_ROWS_LEGEND, styles.SMALL
    row = heading + 2
    for side in _sides(pages, pages.book[SHEET], card, values):
        row = side.write_as_rows(aircraft, row)
    aircraft.row_dimensions.group(heading + 1, row - 1, outline_level=1, hidden=True)
    aircraft.row_dimensions[heading].collapsed = True
    aircraft.sheet_properties.outlinePr.summaryBelow = False
    told = next(cell.row for cell in aircraft["A"] if cell.value == labels.TABLES)
    note = aircraft[f"E{told}"]
    note.value = f"As a range for the functions: {aircraft.title}!A1:I{row - 1}, with the folded rows at the end"
    note.font, note.alignment = styles.SMALL, styles.INDENT


def _as_typed(value: float, unit: str) -> float:
    """The number that a cell shows for a value [SI]: without the noise of a conversion, unless it is none."""
    plain = tidy(from_si(value, unit))
    return plain if abs(to_si(plain, unit) - value) <= 1e-14 * abs(value) else float(from_si(value, unit))


def _sides(pages: Pages, sheet: Worksheet, card: Card, values: Mapping[str, Any]) -> list[_Side]:
    """The sides, one below the other."""
    sides: list[_Side] = []
    for tables in card.tables.values():
        row = sides[-1].next_row if sides else 6
        sides.append(_Side(pages, sheet, card, tables, values, row))
    return sides


class _Side:
    """The tables of one side on the sheet, from a row on; all its blocks use the same columns."""

    def __init__(self, pages: Pages, sheet: Worksheet, card: Card, tables: BookTables, values: Mapping[str, Any],
                 row: int) -> None:  # fmt: skip
        self.pages, self.sheet, self.card, self.tables, self.row = pages, sheet, card, tables, row
        self.mass, self.flap = (float(np.ravel(values[f"{tables.side}_book_{key}"])[0]) for key in ("mass", "flap"))
        wide = len(tables.temperatures)
        self.columns = {figure: FIRST + i * (wide + 1) for i, figure in enumerate(tables.filled)}
        self.edges = [get_column_letter(FIRST + len(tables.filled) * (wide + 1) + i) for i in range(3)]
        self.temperatures = [f"{self._letter(figure, j)}${row + 1}" for figure in list(tables.filled)[:1] for j in range(wide)]
        pages_array = np.array(tables.pages)
        self.weights = interpolation.page_weight(
            self.mass, self.flap, pages_array[:, 1], pages_array[:, 0], tables.below(), tables.above()
        )
        lines = len(tables.altitudes)
        self.page_rows = [row + lines + 5 + i * (lines + 3) for i in range(len(tables.pages))]
        self.settings_row = self.page_rows[-1] + lines + 4
        self.next_row = self.settings_row + len(card.flaps) + 2

    def write(self) -> None:
        """All blocks."""
        for number, row in enumerate(self.page_rows):
            self._page(row, number)
        self._today(self.page_rows)
        self._settings(self.settings_row)

    def write_as_rows(self, aircraft: Worksheet, row: int) -> int:
        """The same as rows of labels and values on another sheet; returns the next free row."""
        side, tables = self.tables.side, self.tables
        rows: list[tuple[str, str, list[Any]]] = [
            (labels.table_row(side, "figures"), "of the manual", [FIGURES[figure][0].lower() for figure in tables.printed]),
            (labels.table_row(side, "pages"), "how many", [len(tables.pages)]),
            (labels.table_row(side, "temperatures"), "°C", [self._live(at) for at in self._temperature_cells()]),
            (labels.table_row(side, "pressure altitudes"), "ft",
             [self._live(f"A{self.row + 3 + i}") for i in range(len(tables.altitudes))]),
        ]  # fmt: skip
        for i, flap in enumerate(self.card.flaps, 1):
            cells = [self._live(f"{letter}{self.settings_row + i}") for letter in "BCD"]
            rows.append((labels.table_row(side, f"setting {i}"), f"flap {flap.name}; tables [rad], from, to [kg]", cells))
        for number in range(len(tables.pages)):
            rows += self._page_as_rows(number)
        for label, rest, cells in rows:
            row = self._write_row(aircraft, row, label + labels.REST + rest, cells)
        return row

    def _page_as_rows(self, number: int) -> list[tuple[str, str, list[Any]]]:
        """Label, what the reader is told, and cells, of a page and each of its lines."""
        side, tables = self.tables.side, self.tables
        deflection, mass = tables.pages[number]
        told = f"{self._page_name(number)}; mass [kg], flap [rad]"
        rows: list[tuple[str, str, list[Any]]] = [(labels.table_row(side, f"page {number + 1}"), told, [mass, deflection])]
        for figure in tables.filled:
            for i, altitude in enumerate(tables.altitudes):
                label = labels.figure_row(side, figure, number + 1, i + 1)
                cells = [self._used(figure, number, i, j) for j in range(len(tables.temperatures))]
                rows.append((label, f"{from_si(altitude, 'ft'):,.0f} ft", cells))
        return rows

    def _write_row(self, aircraft: Worksheet, row: int, label: str, cells: list[Any]) -> int:
        """Values, and formulas with the value that they have now, beside a label; as many rows as they need."""
        for start in range(0, len(cells), labels.VALUES_IN_ROW):
            aircraft[f"A{row}"], aircraft[f"A{row}"].font = label, styles.SMALL
            for column, value in enumerate(cells[start : start + labels.VALUES_IN_ROW], labels.FIRST_VALUE):
                cell = aircraft.cell(row, column)
                if isinstance(value, tuple):
                    self.pages.formula(aircraft, cell.coordinate, *value)
                else:
                    cell.value = value
                cell.font = styles.SMALL
            row += 1
        return row

    def _live(self, cell: str) -> tuple[str, Any]:
        """A number of the sheet by formula; a blank is neither 0 nor the end of the row."""
        there = f"{SHEET}!{cell}"
        return f'IF(ISNUMBER({there}),{there},"no number")', self.sheet[cell].value

    def _used(self, figure: str, number: int, line: int, column: int) -> tuple[str, Any]:
        """The figure of a page that is used: the one that stands there, or else the carried one, as a text."""
        there = f"{self._letter(figure, column)}{self.page_rows[number] + 2 + line}"
        carried = f"{self._carried(figure, (number, line, column)):.15g}{labels.CARRIED}"
        value = self.sheet[there].value
        return f'IF(ISNUMBER({SHEET}!{there}),{SHEET}!{there},"{carried}")', carried if value is None else value

    def _temperature_cells(self) -> list[str]:
        first = next(iter(self.tables.filled))
        return [f"{self._letter(first, j)}{self.row + 2}" for j in range(len(self.tables.temperatures))]

    def _page_name(self, number: int) -> str:
        deflection, mass = self.tables.pages[number]
        name = next(flap.name for flap in self.card.flaps if flap.deflection == deflection)
        return f"flap {name}, {mass:,.0f} kg"

    def _letter(self, figure: str, column: int) -> str:
        return str(get_column_letter(self.columns[figure] + column))

    def _put(self, cell: str, text: str, value: Any, number_format: str) -> None:
        self.pages.formula(self.sheet, cell, text, value)
        self.sheet[cell].font, self.sheet[cell].number_format = styles.SMALL, number_format

    def _name(self, key: str, cells: str) -> None:
        name = f"{self.tables.side}_{key}"
        self.pages.places[name] = Place(self.pages.name(name, self.sheet, cells))

    def _headers(self, row: int, title: str, title_row: int, last: str) -> None:
        """Titles of the figures in a row, in SI where that is not ``row``; temperatures below ``row``, and altitudes below
        them; ``last`` column's title."""
        for figure in self.tables.filled:
            cell = self.sheet[f"{self._letter(figure, 0)}{title_row}"]
            words, unit = FIGURES[figure]
            cell.value, cell.font = f"{words} [{unit if title_row == row else IN_SI[unit]}]", styles.BOLD
        write_header(self.sheet, row + 1, ("Pressure altitude [ft]", title))
        for figure in self.tables.filled:
            for j, temperature in enumerate(self.tables.temperatures):
                cell = self.sheet[f"{self._letter(figure, j)}{row + 1}"]
                cell.value, cell.number_format = tidy(round(from_si(temperature, "°C"), 6)), '0.##" °C"'
                cell.font, cell.fill, cell.alignment = styles.HEADER, styles.HEADER_FILL, styles.CENTRE
        for edge, letter in zip(("Hottest [K]", "Coldest [K]", last), self.edges, strict=True):
            write_header(self.sheet, row + 1, (edge,), column_index_from_string(letter))
        for i, altitude in enumerate(self.tables.altitudes, row + 2):
            cell = self.sheet[f"A{i}"]
            cell.value, cell.font, cell.number_format = _as_typed(altitude, "ft"), styles.BODY, "#,##0"

    def _page(self, row: int, number: int) -> None:
        """One page of the manual, with its weight for the mass and flap of the day."""
        tables, sheet = self.tables, self.sheet
        deflection, mass = tables.pages[number]
        sheet[f"A{row}"], sheet[f"A{row}"].font = f"Page: {self._page_name(number)}", styles.BOLD
        self._headers(row, "Weight now", row, "To [K]")
        loaded = Cell(f"{self.pages.prefix}{tables.side}_book_mass")
        weight = interpolation.page_weight(
            loaded, Cell(f"{self.pages.prefix}{tables.side}_book_flap"), mass, deflection, float(tables.below()[number]),
            float(tables.above()[number]),
        )  # fmt: skip
        known = where(np.isfinite(loaded), weight, 0.0)  # without a mass and flap nothing reads the tables
        self._put(f"B{row + 2}", formula(known), self.weights[number], "0.000")
        for i in range(len(tables.altitudes)):
            for figure in tables.filled:
                for j in range(len(tables.temperatures)):
                    self._figure(f"{self._letter(figure, j)}{row + 2 + i}", figure, (number, i, j))
            self._page_edges(row + 2 + i, number, i)

    def _figure(self, cell: str, figure: str, place: tuple[int, int, int]) -> None:
        """A figure to type over: the manual's on yellow; blank on grey where the manual has none."""
        value = self.tables.printed[figure][place] if figure in self.tables.printed else np.nan
        target = self.sheet[cell]
        target.value = _as_typed(value, FIGURES[figure][1]) if np.isfinite(value) else None
        target.fill = styles.INPUT_FILL if np.isfinite(value) else styles.BAND_FILL
        target.border, target.protection, target.font = styles.BOX, styles.UNLOCKED, styles.BODY
        target.number_format = "#,##0.##"

    def _page_edges(self, row: int, number: int, line: int) -> None:
        """Hottest and coldest temperature of a line at which all the figures stand, there or harder: higher or heavier.

        The third column reaches as far as the figures themselves; above the last line with any, that line's edge holds.
        """
        there = [self._all_there(row, j) for j in range(len(self.temperatures))]
        hot, cold, reach = (f"{letter}{row}" for letter in self.edges)
        lines = len(self.tables.altitudes)
        terms = [f"IF({known},{at},{NOWHERE:g})" for known, at in zip(there, self.temperatures, strict=True)]
        terms += [f"{self.edges[2]}{row + 1}"] if line + 1 < lines else []
        terms += [f"{self.edges[2]}{row + (other - number) * (lines + 3)}" for other in self.tables.heavier(number)[:1]]
        self._put(reach, f"MAX({','.join(terms)})", self.tables.reach()[number][line], "0.00")
        before = f"IF({reach}>{NOWHERE:g},{reach},{self.edges[0]}{row - 1})" if line else reach
        self._put(hot, before, self.tables.edge(hot=True)[number][line], "0.00")
        terms = [f"IF({known},{at},{FAR:.0f})" for known, at in zip(there, self.temperatures, strict=True)]
        self._put(cold, f"MIN({','.join(terms)},{hot})", self.tables.edge(hot=False)[number][line], "0.00")

    def _all_there(self, row: int, column: int) -> str:
        cells = [f"ISNUMBER({self._letter(figure, column)}{row})" for figure in self.tables.printed]
        return f"AND({','.join(cells)})"

    def _today(self, page_rows: list[int]) -> None:
        """The tables for the mass and flap of the day, which the formulas of the strips read by name."""
        tables, first, last = self.tables, self.row + 3, self.row + 2 + len(self.tables.altitudes)
        word = SIDE_WORDS[tables.side]
        write_heading(self.sheet, self.row, f"{word}, as loaded")
        self._headers(self.row + 1, "In SI [m]", self.row, "Top [m]")
        for j, temperature in enumerate(tables.temperatures):
            letter = self._letter(next(iter(tables.filled)), j)
            text = formula(reference(f"{letter}{self.row + 2}", "°C"))
            self._put(f"{letter}{self.row + 1}", text, temperature, '0.00" K"')
        for i, altitude in enumerate(tables.altitudes, first):
            self._put(f"B{i}", formula(reference(f"A{i}", "ft")), altitude, "0.0")
        for figure, grid in tables.filled.items():
            now = np.tensordot(self.weights, grid, 1)
            for i in range(len(tables.altitudes)):
                for j in range(len(tables.temperatures)):
                    cell = f"{self._letter(figure, j)}{first + i}"
                    self._put(cell, self._now(figure, i, j, page_rows), now[i, j], "#,##0.00")
            start, end = (f"{self._letter(figure, j)}" for j in (0, len(tables.temperatures) - 1))
            self._name(f"{figure}_table", f"{start}{first}:{end}{last}")
            self._grey_beyond(f"{start}{first}:{end}{last}", f"{start}${self.row + 2}", first)
        for key, letter, least, hot in (("hottest", self.edges[0], "MIN", True), ("coldest", self.edges[1], "MAX", False)):
            for i in range(len(tables.altitudes)):
                far = FAR if hot else -FAR
                rows = [row + 2 for row in page_rows]
                terms = [f"IF($B${row}>{HAIR:.6f},{letter}{row + i},{far:.0f})" for row in rows]
                counting = tables.edge(hot)[:, i][self.weights > HAIR]
                value = counting.min() if hot else counting.max()
                self._put(f"{letter}{first + i}", f"{least}({','.join(terms)})", value, "0.00")
            self._name(key, f"{letter}{first}:{letter}{last}")
        self._highest(first, page_rows)
        self._name("altitudes", f"B{first}:B{last}")
        row = self.row + 1
        self._name("temperatures", f"{self.temperatures[0].replace('$', '')}:{self.temperatures[-1].split('$')[0]}{row}")

    def _grey_beyond(self, cells: str, temperature: str, first: int) -> None:
        """Grey for the figures, as loaded, that the manual does not print: hotter or colder than the edges of their line."""
        hot, cold = (f"${letter}{first}" for letter in self.edges[:2])
        at = f"{temperature}+{to_si(0.0, '°C'):g}"
        grey = DifferentialStyle(fill=PatternFill("solid", bgColor=styles.BAND_FILL.fgColor))
        rule = Rule(type="expression", dxf=grey, formula=[f"OR({at}>{hot}+0.01,{at}<{cold}-0.01)"])
        self.sheet.conditional_formatting.add(cells, rule)

    def _highest(self, first: int, page_rows: list[int]) -> None:
        """The highest line of the pages that count: of each page the last one to which its figures reach."""
        letter, tops = self.edges[2], []
        lines = range(len(self.tables.altitudes))
        for row in page_rows:
            terms = [f"IF({letter}{row + 2 + i}>{NOWHERE:g},$B${first + i},$B${first})" for i in lines]
            tops.append(f"IF($B${row + 2}>{HAIR:.6f},MAX({','.join(terms)}),{FAR:.0f})")
        value = self.tables.highest()[self.weights > HAIR].min()
        self._put(f"{letter}{first}", f"MIN({','.join(tops)})", value, "0.0")
        self._name("highest", f"{letter}{first}")

    def _now(self, figure: str, line: int, column: int, page_rows: list[int]) -> str:
        """One figure for the day: the pages by their weights, a figure that is not there as its neighbours tell."""
        factor = UNITS[FIGURES[figure][1]].factor
        terms = []
        for number, row in enumerate(page_rows):
            cell = f"{self._letter(figure, column)}{row + 2 + line}"
            terms.append(f"$B${row + 2}*IF(ISNUMBER({cell}),{cell},{self._carried(figure, (number, line, column)):.15g})")
        whole = "+".join(terms)
        return whole if factor == 1.0 else f"({whole})*{factor:.15g}"

    def _carried(self, figure: str, place: tuple[int, int, int]) -> float:
        """What stands for a figure of a page, in its unit, where its cell has none."""
        printed = self.tables.printed.get(figure)
        there = printed is not None and np.isfinite(printed[place])
        return float(from_si((self.tables.spare if there else self.tables.filled)[figure][place], FIGURES[figure][1]))

    def _settings(self, row: int) -> None:
        """Which tables stand for each flap setting of the card."""
        sheet, flaps = self.sheet, self.card.flaps
        values = self.tables.values(flaps)
        write_header(sheet, row, ("Flap setting", "Tables [rad]", "From [kg]", "To [kg]"))
        first, last = row + 1, row + len(flaps)
        for i, flap in enumerate(flaps):
            sheet[f"A{first + i}"], sheet[f"A{first + i}"].font = flap.name, styles.BODY
            sheet[f"A{first + i}"].number_format = "@"
        for letter, key in (("B", "book_flaps"), ("C", "least_masses"), ("D", "most_masses")):
            for i, value in enumerate(values[f"{self.tables.side}_{key}"]):
                cell = sheet[f"{letter}{first + i}"]
                cell.value, cell.font, cell.number_format = float(value), styles.SMALL, "0.0000" if letter == "B" else "#,##0"
            self._name(key, f"{letter}{first}:{letter}{last}")
