"""A second, independent spreadsheet engine for the tests: the `ironcalc` package, which knows LET and LAMBDA.

It shares no code with LibreOffice (`tests/office.py`); a `Book` here answers the same questions in the same
way, so that one check can be put to both. What version 0.9 can't do, found by trying:

- a defined name that stands for a constant or an array constant gives #NAME? (references and LAMBDA work);
- a table reference (`Table[Column]`) of an openpyxl-written book did not resolve;
- IF over an array constant outside an array formula gives #VALUE!;
- TEXT rounds a half to even ("1,234" for 1234.5), LINEST gives #REF!;
- ATAN2(0,0) is #DIV/0!, where LibreOffice says 0;
- an empty cell that has a style is read as the number 0: such cells are taken out of a copy before it is loaded.
"""

from __future__ import annotations

import re
import tempfile
import zipfile
from collections.abc import Mapping
from pathlib import Path

import ironcalc
from openpyxl.utils import range_boundaries

Value = float | str | None


_EMPTY_CELL = re.compile(rb'<c r="[A-Z]+[0-9]+"[^>]*/>|<c r="[A-Z]+[0-9]+"[^>]*></c>')


def _without_empty_cells(path: Path, copy: Path) -> None:
    """Copy a book without the cells that hold nothing but a style."""
    with zipfile.ZipFile(path) as source, zipfile.ZipFile(copy, "w", zipfile.ZIP_DEFLATED) as target:
        for part in source.namelist():
            data = source.read(part)
            target.writestr(part, _EMPTY_CELL.sub(b"", data) if part.startswith("xl/worksheets/sheet") else data)


class Book:
    """One .xlsx file, loaded with its cached values. Nothing is calculated until `recalculate`."""

    def __init__(self, path: Path | str) -> None:
        with tempfile.TemporaryDirectory() as folder:
            copy = Path(folder) / "copy.xlsx"
            _without_empty_cells(Path(path), copy)
            self._model = ironcalc.load_from_xlsx(str(copy), "en", "UTC")

    def sheets(self) -> list[str]:
        """Return the names of the sheets, in order."""
        return [sheet["name"] for sheet in self._model.get_worksheets_properties()]

    def recalculate(self) -> None:
        """Calculate every formula afresh."""
        self._model.evaluate()

    def values(self, sheet: str, area: str) -> list[list[Value]]:
        """Return the rows of an area such as "A1:C20".

        A number is a float (and so are TRUE 1.0 and FALSE 0.0), text is str, a blank cell is None, an error
        is "#ERR:" and its name, such as "#ERR:#DIV/0!".
        """
        number = self.sheets().index(sheet)
        left, top, right, bottom = range_boundaries(area)
        if left is None or top is None or right is None or bottom is None:
            raise ValueError(f"{area!r} is not an area with corners such as A1:C20")
        return [
            [self._value(number, row, column) for column in range(left, right + 1)]
            for row in range(top, bottom + 1)
        ]

    def value(self, sheet: str, cell: str) -> Value:
        """Return the value of one cell, as `values` does."""
        return self.values(sheet, cell)[0][0]

    def set(self, sheet: str, cells: Mapping[str, Value]) -> None:
        """Type numbers and texts into cells, None clears one, and calculate what depends on them.

        Text stays text, even when it looks like a number or a formula.
        """
        number = self.sheets().index(sheet)
        for name, value in cells.items():
            column, row, *_ = range_boundaries(name)
            if value is None:
                self._model.clear_cell_contents(number, row, column)
            elif isinstance(value, str):
                self._model.update_cell_with_text(number, row, column, value)
            else:
                self._model.update_cell_with_number(number, row, column, float(value))
        self._model.evaluate()

    def _value(self, sheet: int, row: int, column: int) -> Value:
        value = self._model.get_cell_value(sheet, row, column)
        if isinstance(value, bool):
            return float(value)
        is_error = self._model.get_cell_type(sheet, row, column) == ironcalc.CellType.ErrorValue
        return f"#ERR:{value}" if is_error else value
