"""Compare a filled workbook, recalculated by a real program, with the values that it was written with."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.utils import range_boundaries

# relative to the number, or to 1 in the unit shown where it is smaller: the sine of 180 degrees is not 0 in floating point
TOLERANCE = 1e-9
HEADER_ROWS = {"Strips": 3, "Summary": 14, **dict.fromkeys(("Working", "Best", "Trials in", "Trials out"), 3)}
# a margin, and a height over an obstacle, is what is left of two lengths of up to some thousand metres, so that its own
# size says nothing
MARGIN_SCALE = 1000.0


def same(got: Any, expected: Any, scale: float = 1.0) -> bool:
    """Whether two cell values are equal: texts to the letter, numbers and truths within TOLERANCE."""
    got, expected = ("" if value is None else value for value in (got, expected))
    if isinstance(expected, bool | int | float) and isinstance(got, bool | int | float):
        return abs(float(got) - float(expected)) <= TOLERANCE * max(abs(float(expected)), scale)
    return bool(got == expected)


def scale_of(header: Any) -> float:
    """What a column's numbers are compared with at the least, by its header."""
    return MARGIN_SCALE if "margin" in str(header) or "over the obstacle" in str(header) else 1.0


def formula_cells(path: Path) -> dict[str, list[tuple[str, int, int, Any]]]:
    """Every formula cell of a workbook by sheet: coordinate, row, column and the value beside the formula."""
    formulas, values = openpyxl.load_workbook(path), openpyxl.load_workbook(path, data_only=True)
    return {
        sheet.title: [
            (cell.coordinate, cell.row, cell.column, values[sheet.title][cell.coordinate].value)
            for row in sheet.iter_rows()
            for cell in row
            if cell.data_type == "f"
        ]
        for sheet in formulas.worksheets
    }


def differences(book: Any, path: Path) -> tuple[int, list[str]]:
    """Number of formula cells, and a sentence for each whose recalculated value is not the one beside it."""
    count, found = 0, []
    sheets = openpyxl.load_workbook(path)
    sizes = {sheet.title: sheet.dimensions for sheet in sheets.worksheets}
    for title, cells in formula_cells(path).items():
        if not cells:
            continue
        left, top, *_ = range_boundaries(sizes[title])
        rows = book.values(title, sizes[title])
        for coordinate, row, column, expected in cells:
            count += 1
            got = rows[row - top][column - left]
            header = sheets[title].cell(HEADER_ROWS.get(title, 1), column).value
            if not same(got, expected, scale_of(header)):
                found.append(f"{title}!{coordinate}: {got!r}, not {expected!r}")
    return count, found
