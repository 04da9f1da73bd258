"""The pages Aircraft, Day, Rules and Manual of a filled workbook, read as they stand now.

A value is found by the name of its cell, wherever a user's own rows have moved it, and whatever its label says. Columns stay
where they are: where one was inserted, or a row or a name is gone, a page is refused.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from functools import cached_property
from typing import Any

from openpyxl.utils import column_index_from_string

from stripcheck.chain import Input
from stripcheck.day import KINDS as DAY_KINDS
from stripcheck.day import KINDS_SHOWN, LIMITS
from stripcheck.doors.aircraft import CLIMB_SPEED, Aeroplane, aeroplane_of, rules_of
from stripcheck.doors.range_tables import is_number, sides_told
from stripcheck.errors import InputError
from stripcheck.inputs import CARD, CONSTANT_SPEED, DAY, FIXED_PITCH, POWER_LIMIT, REACH, RULES, manual_inputs
from stripcheck.sheet import method
from stripcheck.sheet.labels import FLAP_HEADER, TABLES
from stripcheck.sheet.manual_again import repeated_cells, write_again
from stripcheck.sheet.package import Package, cell_of
from stripcheck.sheet.pages import GROUND_COLUMNS
from stripcheck.sheet.raw_sheet import RawCell, Value
from stripcheck.speeds import greatest_lift_coefficient
from stripcheck.surface import CONDITIONS
from stripcheck.units import from_si, tidy, to_si

TITLES = {"card": "Aircraft", "day": "Day", "rules": "Rules"}
MANUAL = "Manual"
LABEL, VALUE, SI = 1, 2, 4  # columns of a page
WIDE = len(FLAP_HEADER)
FLAPS = ("takeoff_flap", "landing_flap")
MASSES = ("mass_takeoff", "mass_landing")
NO_RESULT = "is a formula without a result; open the workbook in a spreadsheet program, save it there, and refresh it again"
_CARD = (*CARD, *FIXED_PITCH, *CONSTANT_SPEED, POWER_LIMIT, *REACH.values(), *manual_inputs("takeoff"),
         *manual_inputs("landing"), CLIMB_SPEED)  # fmt: skip
_OF_TABLES = ("flap_least", "flap_most", "reference_rolling", "reference_braking")  # follow from tables, under other labels
_ON_PAGE = {title: [item for item in items if item.kind != "range" and item.key not in _OF_TABLES]
            for title, items in (("Aircraft", _CARD), ("Day", DAY), ("Rules", RULES))}  # fmt: skip
_RANGES = {"flap_deflections": ("Aircraft", 4), "flap_drags": ("Aircraft", 8), "flap_lifts": ("Aircraft", 9),
           **{key: ("Rules", column_index_from_string(letter)) for key, letter in GROUND_COLUMNS.items()}}  # fmt: skip
_FROM_MANUAL = re.compile(r"IF\(ISNUMBER\(\$?Manual[!.]\$?([A-Z]+)\$?(\d+)\),[^,]*,\"(.*)\"\)")


class ValuePages:
    """The pages as they stand, with what a command gives in place of what is typed there.

    Once `aeroplane` was asked for, ``aircraft`` has the rows of that sheet as they count, and ``figures`` what its cells that
    repeat the sheet Manual show now, by row and column.
    Raises InputError for a page that can't be read any more.
    """

    def __init__(self, package: Package) -> None:
        self.package = package
        titles = (*TITLES.values(), MANUAL, method.SHEET)
        self.raw = {title: package.sheet(title) for title in titles if title in package.sheets}
        self.given: dict[str, dict[tuple[int, int], Value]] = {title: {} for title in self.raw}
        self.told: set[str] = set()  # inputs that were given, though they may be the same
        self.doubts: list[str] = []
        self.aircraft: list[list[Any]] = []
        self.figures: dict[tuple[int, int], Value] = {}
        for name, (title, column) in _RANGES.items():
            place = cell_of(package.names.get(name, "").split(":")[0])
            if place is None:
                raise self.without_name(name)
            if (place[0], place[2]) != (title, column):
                raise self._moved(title)

    def put(self, title: str, row: int, column: int, value: Value) -> None:
        """A value that goes before the one that stands there."""
        self.given[title][row, column] = value

    def value(self, title: str, row: int, column: int) -> Value:
        """The value of a cell, given or as it stands."""
        return self.given[title].get((row, column), self.raw[title].value(row, column))

    def title(self, title: str) -> str:
        """What stands as the title of a page: the first text of its first column."""
        values = (self.value(title, row.number, LABEL) for row in self.raw[title].rows)
        return next((value for value in values if isinstance(value, str) and value), "")

    @cached_property
    def live(self) -> bool:
        """Whether the pages have formulas; a workbook that was filled with values has none, but those of a user's."""
        rows = [row for item in _ON_PAGE["Day"] if item.kind == "number" and (row := self._named_row("Day", item)) is not None]
        cells = [self.raw["Day"].cell(row, SI) for row in rows]
        return 2 * sum(cell is not None and cell.live for cell in cells) > len(cells)

    def row_of(self, item: Input) -> int:
        """The row of an input on its page. Raises InputError where it is gone."""
        title = TITLES[item.where]
        row = self._named_row(title, item)
        if row is not None:
            return row
        if any(self.value(title, row.number, LABEL) == item.label for row in self.raw[title].rows):
            raise self.without_name(item.key)
        raise InputError(f'{self.package.path}: the sheet "{title}" has lost its row "{item.label}"; put it back')

    def _named_row(self, title: str, item: Input) -> int | None:
        place = cell_of(self.package.names.get(item.key, ""))
        if place is None or place[0] != title:
            return None
        if place[2] != (SI if item.kind == "number" else VALUE):
            raise self._moved(title)
        return place[1]

    def without_name(self, name: str) -> InputError:
        return InputError(f'{self.package.path}: the name "{name}", which the formulas read, is gone; put it back')

    def _moved(self, title: str) -> InputError:
        return InputError(f'{self.package.path}: columns of the sheet "{title}" were moved; move them back, and keep '
                          "your own to the right of them")  # fmt: skip

    def rows(self, title: str) -> list[list[Any]]:
        """The cells A to I of a page, row by row from row 1, with the labels that belong there.

        A number in SI is left out where it follows from the one typed beside it.
        """
        raw = self.raw[title]
        rows: list[list[Any]] = [[None] * WIDE for _ in range(max(raw.by_number, default=0))]
        for row in raw.rows:
            for column, cell in row.cells.items():
                if column <= WIDE:
                    rows[row.number - 1][column - 1] = self._read(row.number, cell)
        for (number, column), value in self.given[title].items():
            if column <= WIDE:
                rows[number - 1][column - 1] = value
                self.figures |= {(number, column): value} if title == "Aircraft" and (number, column) in self.figures else {}
        self._put_labels(title, rows)
        return rows

    def _read(self, row: int, cell: RawCell) -> Value:
        """A cell; what it reads from the sheet Manual is read from there anew."""
        match = _FROM_MANUAL.fullmatch(cell.formula or "") if cell.live else None
        if match is None or MANUAL not in self.raw:
            return cell.value
        figure = self.value(MANUAL, int(match[2]), column_index_from_string(match[1]))
        self.figures[row, cell.column] = figure if is_number(figure) else match[3]
        return self.figures[row, cell.column]

    def _put_labels(self, title: str, rows: list[list[Any]]) -> None:
        named = {row: item for item in _ON_PAGE[title] if (row := self._named_row(title, item)) is not None}
        labels = {item.label for item in named.values()}
        for number, cells in enumerate(rows, 1):
            item = named.get(number)
            if item is None:
                cells[0] = None if cells[0] in labels else cells[0]  # a user's own, of the same words
                continue
            cells[0] = item.label
            if item.kind == "number" and self._follows(title, number):
                cells[SI - 1] = None

    def _follows(self, title: str, row: int, column: int = SI) -> bool:
        """Whether a number in SI follows from the typed one; one that was typed over its formula counts itself."""
        cell = self.raw[title].cell(row, column)
        return not self.live or (cell is not None and cell.live)

    # --- what the pages tell

    def aeroplane(self) -> Aeroplane:
        """The aeroplane of the sheet Aircraft."""
        for item in CARD:
            if item in _ON_PAGE["Aircraft"]:
                self.row_of(item)
        rows = self.rows("Aircraft")
        self._check_results("Aircraft", rows)
        self._work_out_flaps(rows)
        if self.sides(rows):
            self._take_figures(rows)
        self.aircraft = rows
        return aeroplane_of(rows)

    def sides(self, rows: Sequence[Sequence[Any]]) -> list[str]:
        """The sides that have tables of the manual, by the rows of the sheet Aircraft."""
        told = next((row[1] for row in rows if row[0] == TABLES), None)
        return sides_told(told) if told is not None else []

    def _take_figures(self, rows: list[list[Any]]) -> None:
        """In a workbook of values, figures typed on the sheet Manual go into the rows that repeat them."""
        if MANUAL not in self.raw:
            raise InputError(f'{self.package.path}: the sheet "{MANUAL}" is gone, which this aeroplane needs; put it back')
        if self.live:
            return
        again = write_again(rows, self.sides(rows), len(aeroplane_of(rows).flaps))
        if any(not self.package.is_named(name, cells) for name, cells in again.names.items()):
            raise InputError(f'{self.package.path}: rows or columns of the sheet "{MANUAL}" were moved; move them back')
        for (number, column), there in repeated_cells(again, rows):
            before, figure = rows[number - 1][column - 1], self.value(MANUAL, *there)
            if is_number(figure):
                rows[number - 1][column - 1] = self.figures[number, column] = figure
            elif is_number(before):
                raise InputError(
                    f'{self.package.path}: a figure on the sheet "{MANUAL}" is gone, {rows[number - 1][0]}, and in a workbook '
                    "of values nothing can stand for it; put it back, or fill a new one"
                )

    def _work_out_flaps(self, rows: list[list[Any]]) -> None:
        area = next((row[1] for row in rows if row[0] == "Wing area"), None)
        start = next((i for i, row in enumerate(rows) if tuple(row[:2]) == FLAP_HEADER[:2]), len(rows))
        for number, row in enumerate(rows[start + 1 :], start + 2):
            if row[0] in (None, "") or not is_number(row[1]):
                break
            if self._follows("Aircraft", number):
                row[3] = float(to_si(row[1], "°"))
            if self._follows("Aircraft", number, 9):
                known = all(map(is_number, (row[5], row[6], area)))
                row[8] = float(greatest_lift_coefficient(to_si(row[5], "kt"), row[6], area)) if known else None

    def rules(self) -> dict[str, Any]:
        """The values of the sheet Rules."""
        for item in _ON_PAGE["Rules"]:
            self.row_of(item)
        rows = self.rows("Rules")
        self._check_results("Rules", rows)
        return rules_of(rows)

    def day(self) -> dict[str, Any]:
        """The values of the sheet Day by chain key, SI."""
        values: dict[str, Any] = {}
        for item in DAY:
            row = self.row_of(item)
            if item.kind == "choice":
                typed = str(self.value("Day", row, VALUE) or "").lower()
                values[item.key] = CONDITIONS.index(typed) if typed in CONDITIONS else -2
            else:
                values[item.key] = self._number(item, row)
                self._doubt_day(item.key, item.label, values[item.key])
        return values

    def _doubt_day(self, key: str, label: str, value: float) -> None:
        low, high = LIMITS[key]
        if value < low or value > high:
            unit = KINDS_SHOWN[DAY_KINDS[key]]
            shown, least, most = (f"{tidy(from_si(number, unit)):.5g}" for number in (value, low, high))
            self.doubts.append(f"sheet Day, {label}: {shown} is not credible; {least} to {most} {unit} is expected")

    def loading(self, aeroplane: Aeroplane) -> dict[str, Any]:
        """Mass and flap of the sheet Aircraft by chain key, SI."""
        items: Mapping[str, Any] = aeroplane.chain.by_key
        values: dict[str, Any] = {key: self._number(items[key], self.row_of(items[key])) for key in MASSES}
        by_name = {flap.name: flap.deflection for flap in aeroplane.flaps}
        for key in FLAPS:
            row = self.row_of(items[key])
            typed = self.value("Aircraft", row, VALUE)
            name = f"{typed:g}" if isinstance(typed, float) else str(typed or "")
            values[key] = by_name.get(name, math.nan)
            if name and name not in by_name:
                self.doubts.append(f'sheet Aircraft, {items[key].label}: there is no flap setting "{name}"')
        return values

    def _number(self, item: Input, row: int) -> float:
        """A number in SI; NaN where there is none."""
        title = TITLES[item.where]
        if not self._follows(title, row) and (row, VALUE) not in self.given[title]:
            value = self.value(title, row, SI)  # typed over the formula, and so what the strips' formulas read
            return float(value) if isinstance(value, float) else math.nan
        value = self.value(title, row, VALUE)
        if is_number(value):
            return float(to_si(float(value or 0.0), item.unit))
        self._check_result(title, row)
        if value not in (None, ""):
            self.doubts.append(f'sheet {title}, {item.label}: "{value}" is no number and does not count')
        return math.nan

    def _check_results(self, title: str, rows: list[list[Any]]) -> None:
        for number in range(1, len(rows) + 1):
            self._check_result(title, number)

    def _check_result(self, title: str, row: int) -> None:
        """Raise InputError for a formula of a user's where a value is typed, of which no program has told the result yet."""
        cell = self.raw[title].cell(row, VALUE)
        if cell is not None and cell.live and cell.value is None and (row, VALUE) not in self.given[title]:
            text = cell.formula or ""
            if not text.startswith(("IF(ISNUMBER(D", "IF(D")) and not _FROM_MANUAL.fullmatch(text):
                label = self.value(title, row, LABEL)
                raise InputError(f"{self.package.path}: sheet {title}, row {row}, {label}: {NO_RESULT}")
