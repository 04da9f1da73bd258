"""How long the LibreOffice fixture takes on a book of the size that the tests use.

The limit is common practice, no source: some ten times what a machine of two cores took.
"""

from __future__ import annotations

from pathlib import Path

import openpyxl
from openpyxl.utils import get_column_letter
from pytest_benchmark.fixture import BenchmarkFixture

from tests.office import Office

ROWS, COLUMNS = 2_000, 100
MOST_SECONDS = 5.0


def test_read_200_000_cells(office: Office, tmp_path: Path, benchmark: BenchmarkFixture) -> None:
    written = openpyxl.Workbook(write_only=True)
    sheet = written.create_sheet("Big")
    for row in range(1, ROWS + 1):
        sheet.append([row, *(f"=A{row}+{column}" for column in range(1, COLUMNS))])
    written.save(tmp_path / "big.xlsx")
    with office.open(tmp_path / "big.xlsx") as book:
        area = f"A1:{get_column_letter(COLUMNS)}{ROWS}"
        rows = benchmark.pedantic(book.values, args=("Big", area), rounds=3)
    assert rows == [[float(row + column) for column in range(COLUMNS)] for row in range(1, ROWS + 1)]
    # pytest-xdist switches the clock off, as timings side by side mean nothing.
    assert benchmark.disabled or benchmark.stats.stats.median < MOST_SECONDS
