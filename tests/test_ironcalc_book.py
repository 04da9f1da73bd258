"""The second spreadsheet engine, and the functions that our workbooks may use, in both engines.

Expected values are plain arithmetic or Python's own `math`, at 1e-12 relative.
"""

from __future__ import annotations

import math
from pathlib import Path

import openpyxl
import pytest
from openpyxl.workbook.defined_name import DefinedName

from tests.ironcalc_book import Book
from tests.office import Office

# Beside A1:B3 = 2.5 gravel, 3 grass, 4 sand; C1 blank; BASE is the name of A2.
FORMULAS: dict[str, float | str] = {
    "SUMPRODUCT({1,2,3}/(A1+{1,2,3}^2))": 1 / 3.5 + 2 / 6.5 + 3 / 11.5,
    "SUMPRODUCT({0.5,0.25}*SQRT(A1+{1,2}))": 0.5 * math.sqrt(3.5) + 0.25 * math.sqrt(4.5),
    "SUMPRODUCT(EXP(-A1*{1,2}))": math.exp(-2.5) + math.exp(-5),
    "SUMPRODUCT(({1,2,3}>1)*ABS({-1,-2,-3}))": 5,
    "IF(A1>1,2,3)": 2,
    "IF(ISNUMBER(C1),1,\"\")": "",
    "INDEX(A1:B3,2,1)": 3,
    "INDEX(A1:A3,MATCH(\"GRAVEL\",B1:B3,0))": 2.5,
    "MATCH(3.5,A1:A3,1)": 2,
    "CHOOSE(2,\"a\",\"b\")": "b",
    "ABS(-A1)": 2.5,
    "SQRT(A1)": math.sqrt(2.5),
    "EXP(A1)": math.exp(2.5),
    "LN(A1)": math.log(2.5),
    "SIN(A1)": math.sin(2.5),
    "COS(A1)": math.cos(2.5),
    "ATAN(A1)": math.atan(2.5),
    "ATAN2(1,2)": math.atan2(2, 1),
    "RADIANS(180)": math.pi,
    "MIN(A1:A3)": 2.5,
    "MAX(A1,7)": 7,
    "AND(A1>1,A2>1)": 1,
    "OR(A1>100,A2>100)": 0,
    "NOT(A1>1)": 0,
    "PI()": math.pi,
    "COUNTIF(B1:B3,\"gravel\")": 1,
    "BASE*2": 6,
    "(-A1)^2": 6.25,
    "A1^(1/3)": 2.5 ** (1 / 3),
    "MOD(-90,360)": 270,
}


@pytest.fixture
def book_of_formulas(tmp_path: Path) -> Path:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for row in ([2.5, "gravel"], [3, "grass"], [4, "sand"]):
        sheet.append(row)
    book.defined_names["BASE"] = DefinedName("BASE", attr_text="Sheet!$A$2")
    for row, formula in enumerate(FORMULAS, 1):
        sheet.cell(row, 5).value = f"={formula}"
    sheet["F1"], sheet["F2"] = "=1/0", "=A1+1"
    path = tmp_path / "formulas.xlsx"
    book.save(path)
    return path


def test_the_functions_of_our_workbooks_in_both_engines(office: Office, book_of_formulas: Path) -> None:
    second = Book(book_of_formulas)
    second.recalculate()
    with office.open(book_of_formulas) as first:
        first.recalculate()
        for engine in (first, second):
            got = [row[0] for row in engine.values("Sheet", f"E1:E{len(FORMULAS)}")]
            for formula, value in zip(FORMULAS, got, strict=True):
                expected = FORMULAS[formula]
                wanted = expected if isinstance(expected, str) else pytest.approx(expected, rel=1e-12)
                assert value == wanted, (type(engine), formula)


def test_set_cells_errors_texts_and_blanks(book_of_formulas: Path) -> None:
    book = Book(book_of_formulas)
    assert book.sheets() == ["Sheet"]
    book.set("Sheet", {"A1": 10, "B1": "=1+1", "B2": "12", "B3": None})
    assert book.values("Sheet", "A1:B3") == [[10.0, "=1+1"], [3.0, "12"], [4.0, None]]
    assert book.values("Sheet", "F1:F3") == [["#ERR:#DIV/0!"], [11.0], [None]]
    with pytest.raises(ValueError, match="not an area"):
        book.values("Sheet", "A:B")
    with pytest.raises(ValueError, match="Nowhere"):
        book.value("Nowhere", "A1")
