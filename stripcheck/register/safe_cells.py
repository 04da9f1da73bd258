"""Counts what the parts of a workbook hold, element by element, so that no reader meets more than it can keep.

A reader keeps the cells of a sheet one by one, and then as a whole area, blank cells included; it copies a text that many
cells share into each of them. Both are counted here as they will be, and never too small: where a file leaves open what a
reader makes of it, the most is taken. Elements go by their local names, whatever their prefix.
"""

from __future__ import annotations

from array import array
from functools import cache
from typing import TYPE_CHECKING

from stripcheck.errors import InputError
from stripcheck.register.safe_limits import (
    MAX_CELLS,
    MAX_COLUMNS,
    MAX_DEPTH,
    MAX_ROWS,
    MAX_SHARED_TEXT,
    check_area,
    column_letters,
    damaged,
    whole_number,
)

if TYPE_CHECKING:
    from pyexpat import XMLParserType

_WITH_VALUE = frozenset(("s", "str", "inlineStr", "b", "e", "n", "d"))  # kinds of a cell that may have one without a <v>
_REPEATS = 10**9  # a program repeats blank cells to the edge of its sheet, which is far below this


class Tally:
    """What the parts of one workbook, ``name``, hold together.

    ``shared``: bytes of each shared text, in the order of their numbers. ``sheet_ids``, ``targets``: which part holds
    which sheet.
    """

    def __init__(self, name: str) -> None:
        self.name = name
        self.cells = self.repeated = 0
        self.shared: array[int] | None = None
        self.sheet_ids: list[str] = []
        self.targets: dict[str, str] = {}

    def add_area(self, part: str, rows: int, columns: int, cells: int) -> None:
        """Count the cells of a sheet: so many, within so many rows and columns from A1 on."""
        check_area(f'{self.name}, sheet in "{part}"', rows, columns)
        self.cells += max(cells, rows * columns)
        if self.cells > MAX_CELLS:
            raise InputError(f"{self.name}: the workbook has more than {MAX_CELLS:,} cells; divide it")

    def add_text(self, length: int) -> None:
        """Count the bytes of a text that a reader copies into a cell."""
        self.repeated += length
        if self.repeated > MAX_SHARED_TEXT:
            most = f"{MAX_SHARED_TEXT / 1e6:,.0f} MB"
            raise InputError(f"{self.name}: texts that come again and again make more than {most}; divide the workbook")


class Elements:
    """Any part: how deep its elements nest, and whether it is encrypted."""

    def __init__(self, tally: Tally, part: str, parser: XMLParserType) -> None:
        self.tally, self.part, self.parser = tally, part, parser
        self.depth = 0
        parser.StartElementHandler, parser.EndElementHandler = self.start, self.end

    def start(self, tag: str, given: dict[str, str]) -> None:
        """An element begins."""
        self.depth += 1
        if self.depth > MAX_DEPTH:
            raise self.fault(f"elements nest more than {MAX_DEPTH} deep")

    def end(self, tag: str) -> None:
        """An element ends."""
        self.depth -= 1

    def finish(self) -> None:
        """The part ends."""

    def fault(self, why: str) -> InputError:
        """What is said of this part."""
        return damaged(self.tally.name, f'part "{self.part}": {why}')


class SharedTexts(Elements):
    """The texts that cells of an .xlsx share."""

    def __init__(self, tally: Tally, part: str, parser: XMLParserType) -> None:
        super().__init__(tally, part, parser)
        if tally.shared is not None:
            raise self.fault("there is another one with shared texts")
        self.lengths = tally.shared = array("q")
        self.begin = 0

    def start(self, tag: str, given: dict[str, str]) -> None:
        super().start(tag, given)
        if local(tag) == "si":
            self.begin = self.parser.CurrentByteIndex

    def end(self, tag: str) -> None:
        super().end(tag)
        if local(tag) == "si":
            self.lengths.append(self.parser.CurrentByteIndex - self.begin)


class SheetCells(Elements):
    """The cells of an .xlsx, whose sheets may be kept in any part."""

    def __init__(self, tally: Tally, part: str, parser: XMLParserType) -> None:
        super().__init__(tally, part, parser)
        self.columns = _column_numbers()
        self.rows = self.row = 0  # how many so far, and the number of this one
        self.in_row = 0  # cells so far in this row
        self.at_row = self.at_column = 0  # of this cell
        self.waits = self.is_shared = False  # whether this cell may get a value yet, and whether that is the number of a text
        self.number: list[str] | None = None
        self.most_rows = self.most_columns = self.cells = 0

    def start(self, tag: str, given: dict[str, str]) -> None:
        self.depth += 1  # not by a call: there may be tens of millions of elements
        if self.depth > MAX_DEPTH:
            raise self.fault(f"elements nest more than {MAX_DEPTH} deep")
        if ":" in tag:
            tag = local(tag)
        if tag == "c":
            self._cell(given)
        elif self.waits and (tag == "v" or tag == "is"):
            if not self.is_shared:
                self._count()
            elif tag == "v":
                self.number = []
                self.parser.CharacterDataHandler = self.number.append
        elif tag == "row":
            self._row(given.get("r"))

    def end(self, tag: str) -> None:
        self.depth -= 1
        if self.number is not None:
            self._shared_text("".join(self.number))
            self.number = self.parser.CharacterDataHandler = None

    def finish(self) -> None:
        self.tally.add_area(self.part, self.most_rows, self.most_columns, self.cells)

    def _row(self, number: str | None) -> None:
        self.rows, self.in_row, self.at_column, self.waits = self.rows + 1, 0, 0, False
        self.row = self.row + 1 if number is None else whole_number(number, MAX_ROWS)
        if self.row < 1:
            raise self.fault(f'there is a row "{number}"')

    def _cell(self, given: dict[str, str]) -> None:
        self.in_row += 1
        place = given.get("r")
        if place is None:  # a reader counts on from what it saw before, this or that way
            self.at_row = max(self.row, self.rows, self.most_rows)
            self.at_column = max(self.in_row, self.at_column + 1)
        else:
            letters = place.rstrip("0123456789")
            self.at_column = self.columns.get(letters, 0)
            self.at_row = int(place[len(letters) :] or 0) if len(place) < 20 else 0
            if not (self.at_column and 0 < self.at_row <= MAX_ROWS):
                raise self.fault(f'there is a cell "{place}"')
        kind = given.get("t")
        self.waits, self.is_shared = True, kind == "s"
        if kind in _WITH_VALUE:
            self._count()

    def _count(self) -> None:
        self.cells += 1
        self.waits = self.is_shared  # counted once; but a text is told by a number that is still to come
        if self.at_row > self.most_rows:
            self.most_rows = self.at_row
        if self.at_column > self.most_columns:
            self.most_columns = self.at_column

    def _shared_text(self, number: str) -> None:
        shared = self.tally.shared or ()
        at = whole_number(number.strip(), len(shared) - 1)
        if at < 0:
            raise self.fault(f'cell {column_letters(self.at_column)}{self.at_row} shows a text that is not there')
        self.tally.add_text(shared[at])


class SheetList(SheetCells):
    """The list of sheets of an .xlsx, or the links from it to their parts."""

    def start(self, tag: str, given: dict[str, str]) -> None:
        super().start(tag, given)
        tag = local(tag)
        if tag == "sheet":
            self.tally.sheet_ids += [value for key, value in given.items() if local(key) == "id"]
        elif tag == "Relationship":
            self.tally.targets[given.get("Id", "")] = given.get("Target", "")


class OpenDocument(Elements):
    """The cells of an .ods, all of whose sheets are in one part, and where one stands for many by being repeated."""

    def __init__(self, tally: Tally, part: str, parser: XMLParserType) -> None:
        super().__init__(tally, part, parser)
        self.tables = 0  # that are open
        self.rows = self.rows_alike = 0  # above this row, and how often this row comes
        self.column = self.cells_alike = 0  # left of this cell, and how often this cell comes
        self.in_cell = self.has_value = False
        self.begin = self.spaces = 0  # of this cell's text
        self.in_row = self.text_in_row = 0  # cells with a value
        self.most_rows = self.most_columns = self.cells = 0

    def start(self, tag: str, given: dict[str, str]) -> None:
        super().start(tag, given)
        tag = local(tag)
        if tag in ("table-cell", "covered-table-cell"):
            self.in_cell, self.spaces, self.begin = True, 0, self.parser.CurrentByteIndex
            self.cells_alike = self._repeats(given, "number-columns-repeated")
            self.has_value = any("value" in key or "formula" in key for key in given)
        elif tag == "p" and self.in_cell:
            self.has_value = True
        elif tag == "s":
            self.spaces += self._repeats(given, "c")
            self.tally.add_text(self.spaces)
        elif tag == "table-row":
            self.rows_alike = self._repeats(given, "number-rows-repeated")
            self.column = self.in_row = self.text_in_row = 0
        elif tag == "table":
            self.tables += 1
            if self.tables > 1:
                raise self.fault("there is a table within a table")
            self.rows = self.most_rows = self.most_columns = self.cells = 0

    def end(self, tag: str) -> None:
        super().end(tag)
        tag = local(tag)
        if tag in ("table-cell", "covered-table-cell"):
            self._end_cell()
        elif tag == "table-row":
            if self.in_row:
                self.most_rows = self.rows + self.rows_alike
                self.cells += self.in_row * self.rows_alike
                self.tally.add_text(self.text_in_row * self.rows_alike)
            self.rows += self.rows_alike
        elif tag == "table":
            self.tables -= 1
            self.tally.add_area(self.part, self.most_rows, self.most_columns, self.cells)

    def _end_cell(self) -> None:
        if self.has_value:
            self.in_row += self.cells_alike
            if self.cells_alike > 1 or self.rows_alike > 1:
                self.text_in_row += self.cells_alike * (self.parser.CurrentByteIndex - self.begin + self.spaces)
            self.most_columns = max(self.most_columns, self.column + self.cells_alike)
        self.column += self.cells_alike
        self.in_cell = False

    def _repeats(self, given: dict[str, str], key: str) -> int:
        number = next((value for name, value in given.items() if local(name) == key), "1")
        repeats = whole_number(number, _REPEATS)
        if repeats < 0:
            raise self.fault(f'something is repeated "{number}" times')
        return repeats


@cache
def _column_numbers() -> dict[str, int]:
    return {column_letters(column): column for column in range(1, MAX_COLUMNS + 1)}


def local(name: str) -> str:
    """An element's or attribute's name without its prefix.

    >>> local("table:table-cell")
    'table-cell'
    """
    return name[name.rfind(":") + 1 :]
