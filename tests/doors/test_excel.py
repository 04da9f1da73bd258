"""The Excel door on xlwings' own code for Windows, over a stand-in for pywin32.

Excel itself, the compiling of VBA, the start of Python by COM and the spilling of results are not tried here.
"""

from __future__ import annotations

import ast
import csv
import datetime as dt
import platform
import re
import subprocess
import sys
from collections.abc import Callable, Iterator
from decimal import Decimal
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import openpyxl
import pytest

from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.doors import excel_setup
from stripcheck.doors.call import call
from stripcheck.doors.functions import BY_NAME, FUNCTIONS, Function
from tests.doors.pywin32_stand_in import DOOR, MISSING, Cells, Workbook, vba_text, windows_xlwings
from tests.doors.random_cells import random_sets

ROOT = Path(__file__).parents[2]
TIGHT = 1e-9  # the same call is made in the end
NO_DIVISION, NOT_AVAILABLE, SPILL, UNHEARD_OF = -2146826281, -2146826246, -2146826243, -2146826198
Udf = Callable[..., Any]


@pytest.fixture(scope="module")
def windows() -> Iterator[SimpleNamespace]:
    with windows_xlwings() as running:
        yield running


@pytest.fixture(scope="module")
def book(windows: SimpleNamespace) -> Workbook:
    """A workbook into which the functions were imported."""
    workbook = Workbook()
    windows.xlwings.import_udfs(DOOR, workbook)
    return workbook


@pytest.fixture(scope="module")
def udf(windows: SimpleNamespace, book: Workbook) -> Udf:
    """Function that calls a function of the registry as Excel does: all arguments there, those left out as COM says it."""
    com, caller = windows.server.XLPython(), Cells((None,))

    def call_udf(name: str, *given: Any) -> Any:
        function = BY_NAME[name]
        whole = [*given, *[None] * (len(function.all_arguments) - len(given))]
        cells = [MISSING if cell is None else cell for cell in whole]
        return com.CallUDF(DOOR, function.full_name, cells, book, caller)

    return call_udf


def close(one: Any, other: Any) -> bool:
    if isinstance(one, float) and isinstance(other, float):
        return abs(one - other) <= TIGHT * max(abs(one), abs(other), 1e-3)
    return bool(one == other) and type(one) is type(other)


# --- registration


def test_every_function_is_registered_with_its_name_category_and_texts(book: Workbook) -> None:
    assert set(book.options) == {function.full_name for function in FUNCTIONS}
    for function in FUNCTIONS:
        options = book.options[function.full_name]
        assert options["Category"] == f"stripcheck: {function.category}"
        assert options["Description"] == function.described
        assert options["ArgumentDescriptions"] == [argument.help for argument in function.all_arguments]


def test_vba_has_every_function_with_its_arguments(book: Workbook) -> None:
    for function in FUNCTIONS:
        given = [argument.key if argument.required else f"Optional {argument.key}" for argument in function.all_arguments]
        assert f"Function {function.full_name}({', '.join(given)})\n" in book.vba
    assert book.vba.count("End Function") == len(FUNCTIONS)
    assert max(map(len, book.vba.splitlines())) < 1023  # what a line of VBA may hold


def test_the_vba_kept_in_the_project_is_current() -> None:
    kept = excel_setup.vba_text()
    now = vba_text()
    assert kept == now, "run python -m tests.doors.pywin32_stand_in stripcheck/doors/excel.bas"
    assert kept.isascii()


def test_the_stand_in_leaves_everything_as_it_was() -> None:
    before = {name: sys.modules.get(name) for name in ("xlwings", DOOR, "pythoncom")}
    with windows_xlwings() as inside:
        assert inside.xlwings.func is inside.udfs.xlfunc
        assert sys.platform != "win32"
    assert {name: sys.modules.get(name) for name in before} == before


def test_the_door_can_be_imported_where_excel_is_not() -> None:
    code = f"import {DOOR} as door; print(door.STRIP_SLOPE(2380.0, 2410.0, 620.0))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == str([[call(BY_NAME["SLOPE"], 2380, 2410, 620)]])


def test_only_the_door_imports_xlwings() -> None:
    sources = [path for path in (ROOT / "stripcheck").rglob("*.py") if "import xlwings" in path.read_text(encoding="utf-8")]
    assert [path.name for path in sources] == ["excel.py"]


# --- calls


@pytest.mark.parametrize("function", FUNCTIONS, ids=lambda function: function.name)
def test_every_example_as_a_constant_and_as_a_cell(function: Function, udf: Udf) -> None:
    expected = call(function, *function.example)
    given = [float(cell) if isinstance(cell, int) else cell for cell in function.example]
    assert close(udf(function.name, *given), expected)
    assert close(udf(function.name, *(Cells((cell,)) for cell in given)), expected)


@pytest.mark.parametrize("function", [f for f in FUNCTIONS if f.ask is None], ids=lambda function: function.name)
def test_random_arguments_as_scalars_and_as_ranges(function: Function, udf: Udf) -> None:
    rows = random_sets(function)
    for row in rows:
        assert close(udf(function.name, *row), call(function, *row)), row
    single = ("aircraft", "rules", "text", "flap")  # a flap belongs to its aircraft, and rows have several
    spread = [at for at, argument in enumerate(function.arguments) if argument.kind not in single]
    first = rows[0]
    columns = [[(row[at],) for row in rows] if at in spread and first[at] is not None else None for at in range(len(first))]
    given = [Cells(*column) if column else cell for column, cell in zip(columns, first, strict=True)]
    plain = [[list(row) for row in column] if column else cell for column, cell in zip(columns, first, strict=True)]
    for got, expected in zip(udf(function.name, *given), call(function, *plain), strict=True):
        assert close(got[0], expected[0])


@pytest.mark.parametrize("function", [f for f in FUNCTIONS if f.ask is not None], ids=lambda function: function.name)
def test_random_arguments_of_the_inverse_questions(function: Function, udf: Udf) -> None:
    for row in random_sets(function):
        assert close(udf(function.name, *row), call(function, *row)), row


def test_a_column_a_row_and_a_block_keep_their_shape(udf: Udf) -> None:
    column = udf("DENSITY_ALT", Cells((0.0,), (2400.0,), (5000.0,)), 1008.0, 31.0)
    assert [len(row) for row in column] == [1, 1, 1]
    row = udf("DENSITY_ALT", Cells((0.0, 2400.0, 5000.0)), 1008.0, 31.0)
    assert list(row) == [cells[0] for cells in column]  # xlwings hands a single row over as one
    block = udf("DENSITY_ALT", Cells((0.0,), (2400.0,), (5000.0,)), 1008.0, Cells((-10.0, 31.0)))
    assert [len(cells) for cells in block] == [2, 2, 2]
    assert [cells[1] for cells in block] == [cells[0] for cells in column]


def test_an_empty_cell_is_not_an_argument_left_out(udf: Udf) -> None:
    assert udf("DENSITY_ALT", 2400.0, 1008.0, 31.0) == udf("DENSITY_ALT", 2400.0, 1008.0, 31.0, 0.0)
    assert udf("DENSITY_ALT", 2400.0, 1008.0, 31.0, Cells((None,))) == "Humidity: the cell is empty"
    assert udf("DENSITY_ALT", Cells((2400.0,), (None,)), 1008.0, 31.0)[1][0] == "Elevation: the cell is empty"
    assert udf("DENSITY_ALT", Cells((None,)), 1008.0, 31.0) == "Elevation: the cell is empty"


@pytest.mark.parametrize(("code", "word"), [
    (NO_DIVISION, "#DIV/0!"), (NOT_AVAILABLE, "#N/A"), (SPILL, "#SPILL!"), (UNHEARD_OF, "#ERROR"),
])  # fmt: skip
def test_error_values_are_told_and_spoil_nothing_else(udf: Udf, code: int, word: str) -> None:
    said = f'Elevation: "{word}" is not a number; write for example "2300 ft"'
    assert udf("DENSITY_ALT", Cells((code,)), 1008.0, 31.0) == said
    assert udf("DENSITY_ALT", code, 1008.0, 31.0) == said
    column = udf("DENSITY_ALT", Cells((code,), (2400.0,)), 1008.0, 31.0)
    assert column[0][0] == said and isinstance(column[1][0], float)


@pytest.mark.parametrize("cell", [dt.datetime(2024, 5, 1), True, "rubbish", "2300 kg", np.bool_(True)])
def test_other_cells_are_told(udf: Udf, cell: Any) -> None:
    assert str(udf("DENSITY_ALT", Cells((cell,)), 1008.0, 31.0)).startswith("Elevation: ")


def test_a_cell_in_money_is_a_number(udf: Udf) -> None:
    assert udf("DENSITY_ALT", Cells((Decimal("2400"),)), 1008.0, 31.0) == udf("DENSITY_ALT", 2400.0, 1008.0, 31.0)


def test_what_goes_out_is_a_number_or_a_text(udf: Udf) -> None:
    for function in FUNCTIONS:
        assert type(udf(function.name, *function.example)) in (float, str)


def test_a_range_of_a_workbook_is_an_aircraft(udf: Udf, tmp_path: Path) -> None:
    path = tmp_path / "demo.xlsx"
    assert main(["demo", "-o", str(path), "--quiet"]) == 0
    sheet = openpyxl.load_workbook(path, data_only=True)["Aircraft"]
    rows = [tuple(row) for row in sheet.iter_rows(max_col=9, values_only=True)]
    plain = [list(row) for row in rows]
    for name in ("STALL_SPEED", "TAKEOFF_DIST"):
        cells = BY_NAME[name].example[1:]
        assert close(udf(name, Cells(*rows), *cells), call(BY_NAME[name], plain, *cells))


# --- stripcheck door excel


def test_the_files_for_excel_are_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = tmp_path / "new" / "excel"
    assert main(["door", "excel", str(folder)]) == 0
    said = capsys.readouterr().out
    assert "this is not Windows: nothing was imported" in said and CAUTION in said
    assert {path.name for path in folder.iterdir()} == {
        "stripcheck-functions.xlsx", "stripcheck-functions.bas", "xlwings.conf", "steps.txt"}  # fmt: skip
    assert (folder / "xlwings.conf").read_bytes() == b'"UDF MODULES","stripcheck.doors.excel"\r\n'
    module = (folder / "stripcheck-functions.bas").read_bytes()
    assert module.count(b"\r\n") == module.count(b"\n") and module.decode("ascii").replace("\r\n", "\n") == vba_text()
    steps = (folder / "steps.txt").read_text(encoding="utf-8")
    assert CAUTION in steps and "Trust access" in steps and "Import Functions" in steps


def test_the_workbook_has_every_function_beside_its_answer(tmp_path: Path) -> None:
    assert main(["door", "excel", str(tmp_path / "x")]) == 0
    book = openpyxl.load_workbook(tmp_path / "x" / "stripcheck-functions.xlsx")
    assert book.sheetnames == ["Start", "Functions", "xlwings.conf"]
    assert [[cell.value for cell in row] for row in book["xlwings.conf"].iter_rows()] == [["UDF MODULES", DOOR]]
    assert CAUTION in (book["Start"]["A2"].value, book["Functions"]["A1"].value)
    rows = list(book["Functions"].iter_rows(min_row=4))
    assert [row[0].value for row in rows] == [function.full_name for function in FUNCTIONS]
    for row, function in zip(rows, FUNCTIONS, strict=True):
        assert row[1].data_type == "s" and row[2].data_type == "f" and row[1].value == row[2].value
        expected = call(function, *function.example)
        assert close(row[3].value if function.unit is None else float(row[3].value), expected)
        assert row[5].value.startswith("=IF(")


def test_files_are_not_replaced_unasked(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "steps.txt").write_text("mine", encoding="utf-8")
    assert main(["door", "excel", str(tmp_path)]) == 2
    assert "is there already; --force replaces it" in capsys.readouterr().err
    assert [path.name for path in tmp_path.iterdir()] == ["steps.txt"]
    assert main(["door", "excel", str(tmp_path), "--force"]) == 0
    assert (tmp_path / "steps.txt").read_text(encoding="utf-8") != "mine"
    (tmp_path / "file").write_text("", encoding="utf-8")
    assert main(["door", "excel", str(tmp_path / "file")]) == 2


class Excel:
    """What of Excel the import calls, played."""

    def __init__(self, book: Workbook, trusted: bool = True) -> None:
        self.book, self.trusted, self.closed = book, trusted, False
        self.books = SimpleNamespace(open=self._open)

    def __enter__(self) -> Excel:
        return self

    def __exit__(self, *_: object) -> None:
        self.closed = True

    def _open(self, path: str) -> Any:
        if not self.trusted:
            raise OSError("Programmatic access to Visual Basic Project is not trusted")
        return SimpleNamespace(api=self.book, close=lambda: None)


@pytest.mark.parametrize("trusted", [True, False])
def test_on_windows_the_functions_are_imported(tmp_path: Path, windows: SimpleNamespace, monkeypatch: pytest.MonkeyPatch,
                                               capsys: pytest.CaptureFixture[str], trusted: bool) -> None:  # fmt: skip
    book = Workbook("stripcheck-functions.xlsx")
    excel = Excel(book, trusted)
    monkeypatch.setattr(platform, "system", lambda: "Windows")
    monkeypatch.setattr(windows.xlwings, "App", lambda visible, add_book: excel)
    assert main(["door", "excel", str(tmp_path)]) == 0
    said = capsys.readouterr().out
    assert excel.closed
    if trusted:
        assert book.vba == vba_text() and set(book.options) == {function.full_name for function in FUNCTIONS}
        assert [reference.Name for reference in book.VBProject.References] == ["xlwings"]
        assert book.saved == [(str(tmp_path / "stripcheck-functions.xlsm"), 52)]
        assert "stripcheck-functions.xlsm: the functions are in it" in said and "Excel itself was not there" in said
    else:
        assert "Excel did not take the functions" in said and "is not trusted" in said and "steps.txt" in said
    settings = (tmp_path / "xlwings.conf").read_text(encoding="utf-8").splitlines()
    assert settings[0] == f'"INTERPRETER_WIN","{sys.executable}"'


def test_the_formulas_of_the_page_work() -> None:
    page = (ROOT / "docs" / "excel.md").read_text(encoding="utf-8")
    assert f"> {CAUTION}" in page and "Not tried" in page
    formulas = re.findall(r"^\| `=STRIP_(\w+)\((.*?)\)` \|", page, re.MULTILINE)
    assert len(formulas) == 5
    for name, given in formulas:
        cells = [ast.literal_eval(cell) if cell else None for cell in next(csv.reader([given], quoting=csv.QUOTE_NONE))]
        assert isinstance(call(BY_NAME[name], *cells), float), (name, cells)
