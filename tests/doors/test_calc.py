"""The door into Calc: every function in a real LibreOffice gives what Python gives, and says the same about bad input.

Expected values are those of ``stripcheck.doors.call``, whose equations are checked elsewhere; they are worked out by
another Python with another release of NumPy than LibreOffice's. Error codes are from LibreOffice's own help page.
"""

from __future__ import annotations

import ast
import json
import os
import random
import subprocess
import sys
import types
import warnings
import xml.etree.ElementTree as ElementTree
import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
import openpyxl
import pytest

from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.doors.calc import install
from stripcheck.doors.calc.extension import PACKAGE, build, calc_name, package_files, types_idl, wizard_texts
from stripcheck.doors.call import call, prepared
from stripcheck.doors.functions import BY_NAME, FUNCTIONS, LIMITS, VERDICTS, Argument, Function
from tests.calc_extension import formula, typed, unpacked, write_book
from tests.doors.random_cells import SLOW_SETS, random_sets
from tests.office import Book, Office, find_uno_python, require_office

RELATIVE = 1e-9
# LibreOffice's Python has other releases of NumPy and pint, whose results differ in the last digits; where an aeroplane
# hardly climbs, as in some of the random calls, the distance magnifies that many thousand times. What the random cells show
# is compared with this Python at 1e-8, and with that other one at 1e-9.
RANDOM = 1e-8
IN_THE_OTHER_PYTHON = """
import json
import random
from stripcheck.doors.call import call
from stripcheck.doors.functions import FUNCTIONS
from tests.doors.random_cells import random_sets
print(json.dumps([call(function, *arguments) for function in FUNCTIONS for arguments in random_sets(function)]))
"""
EMPTY_TEXT = "J1"  # a cell with a formula that gives ""
BLANK_CELL = "J2"
DIVISION = "#ERR:532"
BAD_PARAMETERS = "#ERR:504"
DENSITY, SLOPE, MARGIN, VERDICT = (BY_NAME[name] for name in ("DENSITY_ALT", "SLOPE", "TAKEOFF_MARGIN", "TAKEOFF_VERDICT"))
REASON, CONVERT = BY_NAME["TAKEOFF_REASON"], BY_NAME["CONVERT"]
FITS = VERDICT.example


class Case(NamedTuple):
    """A formula, and what must stand in its cell."""

    group: str
    formula: str
    expected: Any


def literal(group: str, function: Function, *arguments: Any) -> Case:
    """A call with its values typed into the formula."""
    return Case(group, formula(function, *map(typed, arguments)), call(function, *arguments))


# --- what is put into the book

def random_cases() -> list[Case]:
    """Random calls of every function, aeroplane and rule set, with units and without, which every door is tried with."""
    return [literal("random", function, *arguments) for function in FUNCTIONS for arguments in random_sets(function)]


def cases() -> list[Case]:
    """Everything that stands in column A."""
    dry = DENSITY.example
    return [
        *(literal("example", function, *function.example) for function in FUNCTIONS),
        *random_cases(),
        # left out, in the middle and at the end
        Case("left out", formula(DENSITY, "2400", "1008", "31", "", typed("m")), call(DENSITY, *dry, None, "m")),
        Case("left out", formula(DENSITY, "2400", "1008", "31", "40"), call(DENSITY, *dry, 40)),
        Case("left out", formula(VERDICT, *map(typed, FITS), "", "5"), call(VERDICT, *FITS, None, 5)),
        Case("left out", formula(DENSITY, "2400"), call(DENSITY, 2400)),
        Case("left out", formula(DENSITY), call(DENSITY)),
        # a cell with an empty text in place of a needed value, and of one that may be left out
        Case("empty", formula(DENSITY, EMPTY_TEXT, "1008", "31"), call(DENSITY, "", 1008, 31)),
        Case("empty", formula(DENSITY, "2400", "1008", "31", EMPTY_TEXT), call(DENSITY, 2400, 1008, 31, "")),
        # Calc hands a blank cell over as 0, and as blank only where it is a range
        Case("empty", formula(DENSITY, BLANK_CELL, "1008", "31"), call(DENSITY, 0, 1008, 31)),
        Case("empty", formula(DENSITY, f"{BLANK_CELL}:{BLANK_CELL}", "1008", "31"), call(DENSITY, [[""]], 1008, 31)),
        Case("empty", formula(DENSITY, "IF(ISBLANK(J2),\"\",J2)", "1008", "31"), call(DENSITY, "", 1008, 31)),
        # bad input
        literal("bad", DENSITY, "high", 1008, 31),
        literal("bad", DENSITY, 2400, 700, 31),
        literal("bad", DENSITY, 2400, 1008, "31 kg"),
        literal("bad", DENSITY, 2400, 1008, 31, None, "kg"),
        literal("bad", SLOPE, 2380, 2410, 0),
        literal("bad", VERDICT, *FITS[:2], "45", *FITS[3:]),
        literal("bad", VERDICT, "no-such-card", *FITS[1:]),
        literal("bad", VERDICT, *FITS[:8], "lava", *FITS[9:]),
        literal("bad", VERDICT, *FITS[:9], "no-such-rules"),
        literal("bad", CONVERT, 1, "ft", "kg"),
        # errors of cells are Calc's own, and so is one value too many
        Case("error", formula(DENSITY, "1/0", "1008", "31"), DIVISION),
        Case("error", formula(DENSITY, "K1", "1008", "31"), DIVISION),
        Case("error", formula(DENSITY, "K1:K2", "1008", "31"), BAD_PARAMETERS),
        Case("error", formula(SLOPE, "1", "2", "3", typed("%"), "5"), BAD_PARAMETERS),
        # texts with units
        literal("units", DENSITY, "2400 ft", "29.77 inHg", "88 °F"),
        literal("units", DENSITY, "731.52 metres", "1,008 hPa", "304.15 K", "40 %", "m"),
        literal("units", SLOPE, "2380 feet", "2410 feet", "0.62 km"),
        literal("units", MARGIN, FITS[0], "2,200 lb", *FITS[2:], None, "-5 mph", "ft"),
        # inside other formulas: a text must be equal to the same text, and to no other
        Case("inside", f"=IF({formula(VERDICT, *map(typed, FITS))[1:]}=\"{call(VERDICT, *FITS)}\",1,2)", 1.0),
        Case("inside", f"=IF({formula(VERDICT, *map(typed, FITS))[1:]}=\"unsuitable\",1,2)", 2.0),
        Case("inside", f"={formula(VERDICT, *map(typed, FITS))[1:]}={formula(REASON, *map(typed, FITS))[1:]}", 0.0),
        Case("inside", f"=ROUND({formula(DENSITY, *map(typed, dry))[1:]}/100,0)*100", round(call(DENSITY, *dry), -2)),
        Case("inside", f"=ISNUMBER({formula(DENSITY)[1:]})", 0.0),
        Case("inside", f"=SUM({formula(DENSITY, 'F1:F3', '1008', '31')[1:]})",
             sum(call(DENSITY, height, 1008, 31) for height in COLUMNS["F"][:3])),
        Case("inside", "=strip.slope(2380,2410,620)", call(SLOPE, 2380, 2410, 620)),
    ]  # fmt: skip


# columns of values for the ranges, with a text that has a unit, a bad one, and a blank
COLUMNS: dict[str, list[Any]] = {
    "F": [0.0, 1200.5, 8000, "731 m", "high", None],
    "G": [1013.25, 29.92, 990, 1008, 1008, 1008],
    "H": [1000, 900, 800, "2,100 lb", "heavy", None],
}


def matrices() -> dict[str, tuple[str, list[list[Any]]]]:
    """Formulas over a range, by the area that they fill, with what must stand there."""
    columns = {key: [["" if value is None else value] for value in values] for key, values in COLUMNS.items()}
    card, beyond, more = typed(FITS[0]), FITS[2:], [typed(value) for value in FITS[2:]]
    across = [[500.0, 800.0, 1100.0]]
    return {
        "L1:L6": (formula(DENSITY, "F1:F6", "G1:G6", "31"), call(DENSITY, columns["F"], columns["G"], 31)),
        "M1:M6": (formula(DENSITY, "F1:F6", "1008", "31", "", typed("m")), call(DENSITY, columns["F"], 1008, 31, None, "m")),
        "N1:N6": (formula(VERDICT, card, "H1:H6", *more), call(VERDICT, FITS[0], columns["H"], *beyond)),
        "O1:O6": (formula(MARGIN, card, "H1:H6", *more), call(MARGIN, FITS[0], columns["H"], *beyond)),
        # a column against a row fills a table
        "P1:R6": (formula(VERDICT, card, "H1:H6", more[0], "{500,800,1100}", *more[2:]),
                  call(VERDICT, FITS[0], columns["H"], FITS[2], across, *FITS[4:])),
    }  # fmt: skip


# --- the office

@pytest.fixture(scope="module")
def calc(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Office]:
    """A LibreOffice with the extension."""
    require_office()
    with Office(unpacked(tmp_path_factory.mktemp("calc"))) as running:
        yield running


@pytest.fixture(scope="module")
def column() -> list[Case]:
    return cases()


@pytest.fixture(scope="module")
def written(column: list[Case], tmp_path_factory: pytest.TempPathFactory) -> Path:
    cells = {f"A{row}": case.formula for row, case in enumerate(column, 1)}
    cells |= {f"{key}{row}": value for key, values in COLUMNS.items() for row, value in enumerate(values, 1)}
    cells |= {EMPTY_TEXT: '=""', "K1": "=1/0", "K2": 5}
    filled = {area: text for area, (text, _) in matrices().items()}
    return write_book(tmp_path_factory.mktemp("book") / "cells.xlsx", cells, filled)


@pytest.fixture(scope="module")
def book(calc: Office, written: Path) -> Iterator[Book]:
    with calc.open(written) as opened:
        opened.recalculate()
        yield opened


@pytest.fixture(scope="module")
def shown(book: Book, column: list[Case]) -> list[Any]:
    return [row[0] for row in book.values("S", f"A1:A{len(column)}")]


def equal(got: Any, expected: Any, scale: float = 1.0, relative: float = RELATIVE) -> bool:
    """The same text, or the same number, to ``relative`` of itself or of ``scale``, whichever is more."""
    if isinstance(expected, str) or isinstance(got, str):
        return bool(got == expected)
    return bool(got == pytest.approx(expected, rel=relative, abs=relative * scale))


def scale_of(text: str) -> float:
    """What a formula's number is compared with at the least; of what is left of two lengths, its own size says nothing."""
    return 1000.0 if "_MARGIN(" in text or "OVER_OBSTACLE(" in text else 1.0


def differences(shown: list[Any], column: list[Case], group: str) -> list[str]:
    of_group = [(got, case) for got, case in zip(shown, column, strict=True) if case.group == group]
    assert of_group
    return [f"{case.formula}: {got!r}, not {case.expected!r}" for got, case in of_group
            if not equal(got, case.expected, scale_of(case.formula), RANDOM if group == "random" else RELATIVE)]  # fmt: skip


@pytest.mark.parametrize("group", ["example", "random", "left out", "empty", "bad", "error", "units", "inside"])
def test_cells_show_what_python_gives(shown: list[Any], column: list[Case], group: str) -> None:
    assert differences(shown, column, group) == []


def test_the_random_calls_are_hundreds_of_every_function_and_mostly_have_a_result(column: list[Case]) -> None:
    drawn = [case for case in column if case.group == "random"]
    assert len(drawn) >= 500
    for function in FUNCTIONS:
        results = [case.expected for case in drawn if f"={calc_name(function)}(" in case.formula]
        assert len(results) >= SLOW_SETS
        assert function.ask or function.unit is None or any(isinstance(result, float) for result in results), function.name
    assert sum(isinstance(case.expected, float) for case in drawn) > 0.5 * len(drawn)


def test_the_random_calls_show_what_libreoffice_s_own_python_gives(shown: list[Any], column: list[Case]) -> None:
    python = find_uno_python("import uno, numpy, pint")
    assert python is not None
    told = subprocess.run([str(python), "-c", IN_THE_OTHER_PYTHON], cwd=Path(__file__).parents[2], env={"LC_ALL": "C.UTF-8"},
                          capture_output=True, text=True, check=True).stdout  # fmt: skip
    drawn = [(got, case) for got, case in zip(shown, column, strict=True) if case.group == "random"]
    assert [f"{case.formula}: {got!r}, not {expected!r}" for (got, case), expected in zip(drawn, json.loads(told), strict=True)
            if not equal(got, expected, scale_of(case.formula))] == []  # fmt: skip


def check_matrices(book: Book) -> None:
    for area, (text, expected) in matrices().items():
        rows = book.values("S", area)
        assert len(rows) == len(expected)
        for got_row, expected_row in zip(rows, expected, strict=True):
            assert len(got_row) == len(expected_row)
            for got, wanted in zip(got_row, expected_row, strict=True):
                assert equal(got, wanted, scale_of(text)), f"{area}: {got!r}, not {wanted!r}"


def test_one_formula_over_a_range_fills_a_column_or_a_table(book: Book) -> None:
    check_matrices(book)


def test_texts_of_a_range_are_equal_to_the_same_text_only(calc: Office, tmp_path: Path) -> None:
    """Calc takes texts in rows of the type ``any`` for equal to each other and to nothing else."""
    expected = [row[0] for row in call(VERDICT, FITS[0], [["700"], ["1050"], ["1110"]], *FITS[2:])]
    assert len(set(expected)) == 3
    cells = {"A1": 700, "A2": 1050, "A3": 1110, "D1": "=B1=B3", "D2": '=COUNTIF(B1:B3,"marginal")', "D3": '=B1="suitable"'}
    matrix = {"B1:B3": formula(VERDICT, typed(FITS[0]), "A1:A3", *map(typed, FITS[2:]))}
    with calc.open(write_book(tmp_path / "texts.xlsx", cells, matrix)) as opened:
        opened.recalculate()
        assert [row[0] for row in opened.values("S", "B1:B3")] == expected
        assert [row[0] for row in opened.values("S", "D1:D3")] == [0.0, 1.0, 1.0]


@pytest.mark.parametrize("ending", [".xlsx", ".ods"])
def test_saved_and_opened_again_the_formulas_still_calculate(
    calc: Office, book: Book, column: list[Case], tmp_path: Path, ending: str
) -> None:
    path = tmp_path / f"saved{ending}"
    book.save_as(path)
    with calc.open(path) as opened:
        opened.recalculate()
        shown = [row[0] for row in opened.values("S", f"A1:A{len(column)}")]
        for group in dict.fromkeys(case.group for case in column):
            assert differences(shown, column, group) == []
        check_matrices(opened)
        opened.set("S", {"F1": 3000.0})
        assert equal(opened.value("S", "L1"), call(DENSITY, 3000.0, 1013.25, 31))


def test_the_name_in_an_xlsx_file_is_the_name_on_the_screen(book: Book, column: list[Case], tmp_path: Path) -> None:
    book.save_as(tmp_path / "saved.xlsx")
    sheet = openpyxl.load_workbook(tmp_path / "saved.xlsx")["S"]
    for row, function in enumerate(FUNCTIONS, 1):
        assert str(sheet[f"A{row}"].value).startswith(f"={calc_name(function)}(")


def test_the_aircraft_and_rules_sheets_of_a_filled_workbook_are_arguments(calc: Office, tmp_path: Path) -> None:
    assert main(["demo", "-o", str(tmp_path / "demo.xlsx"), "--quiet"]) == 0
    filled = openpyxl.load_workbook(tmp_path / "demo.xlsx")
    sheet = filled.create_sheet("S")
    last = filled["Aircraft"].max_row
    aircraft, rules = f"Aircraft!A1:I{last}", "Rules!A1:F70"
    sheet["A1"] = formula(MARGIN, aircraft, *map(typed, FITS[1:-1]), rules)
    sheet["A2"] = formula(VERDICT, aircraft, *map(typed, FITS[1:-1]), rules)
    filled.save(tmp_path / "demo.xlsx")
    with calc.open(tmp_path / "demo.xlsx") as opened:
        opened.recalculate()
        got = [row[0] for row in opened.values("S", "A1:A2")]
        rows, rule_rows = opened.values("Aircraft", f"A1:I{last}"), opened.values("Rules", "A1:F70")
    expected = [call(function, rows, *FITS[1:-1], rule_rows) for function in (MARGIN, VERDICT)]
    assert isinstance(expected[0], float)
    assert equal(got[0], expected[0], scale_of(calc_name(MARGIN) + "("))
    assert got[1] == expected[1]
    assert equal(got[0], call(MARGIN, *FITS), scale_of(calc_name(MARGIN) + "("))  # the manual's tables are in the range


def test_the_function_wizard_shows_the_registry(calc: Office) -> None:
    told = calc.wizard("STRIP.")
    assert sorted(told) == sorted(map(calc_name, FUNCTIONS))
    for function in FUNCTIONS:
        shown = told[calc_name(function)]
        assert shown["description"].startswith(function.described)
        assert (CAUTION in shown["description"]) == (function.category in (VERDICTS, LIMITS))
        assert shown["arguments"] == [[argument.name, argument.help, True] for argument in function.all_arguments]


# --- where something is missing

def test_without_numpy_the_cell_says_what_to_do(tmp_path: Path) -> None:
    require_office()
    cells = {"A1": formula(DENSITY, "2400", "1008", "31"), "A2": formula(VERDICT, *map(typed, FITS))}
    path = write_book(tmp_path / "cells.xlsx", cells, {"B1:B2": formula(DENSITY, "C1:C2", "1008", "31")})
    folder = unpacked(tmp_path, "import sys\nsys.modules['numpy'] = None\n")
    with Office(folder) as office, office.open(path) as opened:
        opened.recalculate()
        texts = {text for row in opened.values("S", "A1:B2") for text in row}
    assert len(texts) == 1
    assert "need NumPy" in str(min(map(str, texts))) and "python3-numpy" in str(min(map(str, texts)))


@pytest.fixture
def component(monkeypatch: pytest.MonkeyPatch) -> Iterator[Any]:
    """addin.py as a module, with bare stand-ins for LibreOffice's own modules."""
    class Base:
        pass

    class Helper:
        def addImplementation(self, *_: Any) -> None:
            pass

    for name, content in {"unohelper": {"Base": Base, "ImplementationHelper": Helper}, "com": {}, "com.sun": {},
                          "com.sun.star": {}, "com.sun.star.lang": {"XServiceInfo": type("XServiceInfo", (), {})},
                          "striptypes": {"XFunctions": type("XFunctions", (), {})}}.items():  # fmt: skip
        module = types.ModuleType(name)
        vars(module).update(content)
        monkeypatch.setitem(sys.modules, name, module)
    made = types.ModuleType("addin")
    source = (PACKAGE / "doors" / "calc" / "addin.py").read_text(encoding="utf-8")
    exec(compile(source, "addin.py", "exec"), vars(made))
    with warnings.catch_warnings():  # the component silences NumPy's for its own process
        yield made


def test_an_old_python_is_named(component: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    assert component.missing() == ""
    monkeypatch.setattr(sys, "version_info", (3, 8, 10))
    assert "need Python 3.11 or later, and this LibreOffice has Python 3.8" in component.missing()
    ((sentence,),) = component.Component(None).DENSITY_ALT(2400.0, 1008.0, 31.0, None, None)
    assert sentence == component.missing()


def test_the_component_reads_in_an_old_python() -> None:
    """Syntax only: f-strings and newer signs would stop it before it can say anything."""
    source = (PACKAGE / "doors" / "calc" / "addin.py").read_text(encoding="utf-8")
    ast.parse(source, feature_version=(3, 7))


def test_a_defect_shows_words_and_not_a_bare_error(component: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_: Any) -> Any:
        raise ZeroDivisionError("by nothing")

    method = component.answering(broken)
    assert method(1.0) == (("stripcheck could not work this out: ZeroDivisionError by nothing",),)
    monkeypatch.setattr(component, "functions", broken)
    ((sentence,),) = component.Component(None).SLOPE(1.0)
    assert sentence == "STRIP functions could not start: ZeroDivisionError by nothing; is NumPy up to date?"


def test_other_attributes_are_not_functions(component: Any) -> None:
    with pytest.raises(AttributeError):
        _ = component.Component(None).getTypes


# --- numbers alone are faster, and the same

@pytest.mark.parametrize("function", [function for function in FUNCTIONS if function.compute], ids=lambda f: f.name)
def test_prepared_is_call(function: Function) -> None:
    pick = random.Random(7)
    quick = prepared(function)
    whole = len(function.all_arguments)
    extremes = (None, "", True, 0.0, -1e9, 1e308, float("inf"), float("nan"), 29.92, 1013.25, "2300 ft", [[1.0], [2.0]], 31)
    for _ in range(200):
        given = [pick.choice(extremes) if pick.random() < 0.3 else pick.uniform(0.0, 1050.0) for _ in range(whole)]
        if function.unit and pick.random() < 0.7:
            given[-1] = None
        with np.errstate(all="ignore"):
            got = quick(*given)
        np.testing.assert_equal(type(got), type(call(function, *given)))
        if isinstance(got, float):
            assert got == pytest.approx(call(function, *given), rel=1e-12, nan_ok=True)
        else:
            assert got == call(function, *given)


# --- the file

def test_the_extension_holds_what_the_functions_need_and_no_more(tmp_path: Path) -> None:
    with zipfile.ZipFile(build(tmp_path / "a.oxt")) as archive:
        names = archive.namelist()
        archive.extractall(tmp_path / "a")
    assert "pythonpath/stripcheck/cards/ridge-runner.toml" in names
    assert "pythonpath/stripcheck/rules/part-cat-b.toml" in names
    left_out = ("scenario", "sheet/stream", "/cli.py", "/excel", "/lambda")
    assert not [name for name in names for part in left_out if part in name]
    slow = ("openpyxl", "xlwings", "pint", "tqdm", "python_calamine")
    run = ("import sys; from stripcheck.doors.call import call; from stripcheck.doors.functions import FUNCTIONS\n"
           "for function in FUNCTIONS:\n"
           "    if function.name != 'CONVERT': call(function, *function.example)\n"
           "import stripcheck; print(stripcheck.__file__)\n"
           f"print([name for name in {slow} if name in sys.modules])")  # fmt: skip
    python = find_uno_python()
    assert python is not None
    said = subprocess.run([str(python), "-c", run], env={"PYTHONPATH": str(tmp_path / "a" / "pythonpath"), "LC_ALL": "C.UTF-8"},
                          cwd=tmp_path, capture_output=True, text=True, check=True).stdout.splitlines()  # fmt: skip
    assert said == [str(tmp_path / "a" / "pythonpath" / "stripcheck" / "__init__.py"), "[]"]
    assert all(file.is_file() for file in package_files())


def test_the_same_package_makes_the_same_file(tmp_path: Path) -> None:
    one, other = build(tmp_path / "a.oxt"), build(tmp_path / "b.oxt")
    assert one.read_bytes() == other.read_bytes()


def test_types_and_wizard_texts_are_the_registry() -> None:
    lines = [line.strip() for line in types_idl().splitlines() if "[in]" in line or "()" in line]
    assert len(lines) == len(FUNCTIONS)
    root = ElementTree.fromstring(wizard_texts())
    name = "{http://openoffice.org/2001/registry}name"
    (functions,) = [node for node in root.iter("node") if node.get(name) == "AddInFunctions"]
    assert [node.get(name) for node in functions] == [function.name for function in FUNCTIONS]
    for line, node, function in zip(lines, functions, FUNCTIONS, strict=True):
        keys = [argument.key.upper() for argument in function.all_arguments]
        kind = "string" if function.unit is None else "any"
        assert line == f"sequence< sequence<{kind}> > {function.name}({', '.join(f'[in] any {key}' for key in keys)});"
        (parameters,) = [part for part in node if part.get(name) == "Parameters"]
        assert [part.get(name) for part in parameters] == keys
        texts = {prop.get(name): prop[0].text for prop in node if prop.tag == "prop"}
        assert texts["DisplayName"] == texts["CompatibilityName"] == calc_name(function)


def test_texts_are_safe_in_xml() -> None:
    odd = Function("ODD", VERDICTS, 'Less < more & "so"', (Argument("a", "A > b", "number", "<none>"),), "", (1,))
    root = ElementTree.fromstring(wizard_texts([odd]))
    assert f'Less < more & "so" {CAUTION}' in [value.text for value in root.iter("value")]


# --- the command

def test_the_command_makes_the_file_and_says_how_to_install_it(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "mine.oxt"
    assert main(["door", "calc", "-o", str(path)]) == 0
    said = capsys.readouterr().out
    assert f"{path}: the extension for LibreOffice Calc, with {len(FUNCTIONS)} functions" in said
    assert "Extension Manager" in said and "=STRIP.DENSITY_ALT(2400;1008;31)" in said and CAUTION in said
    assert main(["door", "calc", "-o", str(path)]) == 2
    assert "add --force to replace it" in capsys.readouterr().err
    assert main(["door", "calc", "-o", str(path), "--force"]) == 0
    assert main(["door", "calc", "-o", str(tmp_path / "mine.zip")]) == 2
    assert "must end in .oxt" in capsys.readouterr().err
    assert main(["door", "calc", "-o", str(tmp_path / "nowhere" / "mine.oxt")]) == 2
    assert "the folder does not exist" in capsys.readouterr().err


@pytest.fixture
def tool(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A stand-in for LibreOffice's tool, for an ordinary user: it writes down what it is called with."""
    path = tmp_path / "unopkg"
    monkeypatch.setattr(install, "find_tool", lambda: path)
    monkeypatch.setattr("os.geteuid", lambda: 1000, raising=False)
    return path


def stand_in(path: Path, says: str, code: int) -> None:
    path.write_text(f'#!/bin/sh\necho "$@" "$PYTHONPATH" > "{path}.log"\necho "{says}" >&2\nexit {code}\n')
    path.chmod(0o755)


def test_install_calls_the_tool_without_this_python(
    tool: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    stand_in(tool, "", 0)
    monkeypatch.setenv("PYTHONPATH", "/strange")
    path = tmp_path / "mine.oxt"
    assert main(["door", "calc", "-o", str(path), "--install"]) == 0
    assert Path(f"{tool}.log").read_text().strip() == f"add -f {path}"
    assert "Installed for you" in capsys.readouterr().out


@pytest.mark.parametrize(("says", "expected"), [
    ("ERROR: unopkg cannot be started. The lock file indicates it is already running.", "LibreOffice is open: close all its"),
    ("ERROR: something else", "LibreOffice did not take the extension (something else)"),
    ("", "LibreOffice did not take the extension (no reason given)"),
])  # fmt: skip
def test_what_the_tool_refuses_is_said_in_a_sentence(
    tool: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str], says: str, expected: str
) -> None:
    stand_in(tool, says, 1)
    assert main(["door", "calc", "-o", str(tmp_path / "mine.oxt"), "--install"]) == 2
    said = capsys.readouterr().err
    assert expected in said and "mine.oxt is written: run this again with --force, or, in LibreOffice" in said


def test_root_and_a_missing_office_are_told_before_anything_is_written(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    command = ["door", "calc", "-o", str(tmp_path / "mine.oxt"), "--install"]
    monkeypatch.setattr(install, "find_tool", lambda: tmp_path / "unopkg")
    monkeypatch.setattr("os.geteuid", lambda: 0, raising=False)
    assert main(command) == 2
    assert "LibreOffice installs nothing as root: run this as the user who opens Calc" in capsys.readouterr().err
    monkeypatch.setattr(install, "find_tool", lambda: None)
    assert main(command) == 2
    assert "LibreOffice was not found" in capsys.readouterr().err
    assert not (tmp_path / "mine.oxt").exists()


def test_the_tool_of_this_machine_takes_the_extension_or_refuses_root(tmp_path: Path) -> None:
    """The real tool, with a profile of its own; of root it takes nothing, as the command says beforehand."""
    require_office()
    found = install.find_tool()
    assert found is not None and found.is_file()
    path = build(tmp_path / "mine.oxt")
    profile = f"-env:UserInstallation={(tmp_path / 'profile').as_uri()}"
    command = [str(found), "add", "-f", profile, str(path)]
    done = subprocess.run(command, stdin=subprocess.DEVNULL, capture_output=True, text=True)
    refused = done.returncode == 1 and "as root" in done.stdout + done.stderr
    assert refused if os.geteuid() == 0 else done.returncode == 0, done.stderr
