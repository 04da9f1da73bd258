"""The LAMBDA names against Python's own call, recalculated by a spreadsheet engine that knows LET, LAMBDA and MAKEARRAY.

No Excel was at hand: that Excel takes the names, and fills ranges as that engine does, is expected from the file format and
the functions' descriptions, not seen.
"""

from __future__ import annotations

import hashlib
import math
import random
import re
import zipfile
from collections.abc import Sequence
from functools import cache
from itertools import chain
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import openpyxl
import pytest
from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName

from stripcheck.card import Card, load_card
from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.doors import lambda_book
from stripcheck.doors.aircraft import NO_REACH
from stripcheck.doors.call import EMPTY, WHOLE, call
from stripcheck.doors.functions import BY_NAME, FUNCTIONS, Argument, Function
from stripcheck.doors.lambdas import (
    MAX_COMMENT,
    MAX_PAIRS,
    NO_CORRECTIONS,
    NO_REACH_HERE,
    NO_TABLES,
    STEP,
    library,
    nesting,
    not_a_lambda,
)
from stripcheck.rules import load_rules
from stripcheck.sheet.cell import MAX_DEPTH, MAX_LENGTH
from stripcheck.sheet.labels import TABLES
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import KINDS
from tests.aircraft import trial_heron, trial_mule
from tests.ironcalc_book import Book
from tests.manual_cards import everything
from tests.sheet.package_check import package_faults

WRITTEN = [function for function in FUNCTIONS if not not_a_lambda(function)]
CARDS = {
    "ridge-runner": ("ridge-runner", "au-small"), "high-mule": ("high-mule", "uk-leaflet"),
    "heron": (trial_heron, "part-cat-b"), "mule": (trial_mule, "part-cat-b"),
}  # fmt: skip
CREDIBLE = {
    "elevation": (-200, 9000), "start_elevation": (0, 3000), "end_elevation": (0, 3000), "qnh": (960, 1050),
    "temperature": (-30, 45), "humidity": (0, 100), "wind_from": (0, 360), "wind_speed": (0, 40), "heading": (0, 360),
    "mass": (600, 3200), "bank": (0, 60), "length": (150, 1500), "slope": (-9, 9), "headwind": (-18, 25),
    "distance": (50, 2500), "height": (0, 300), "beyond": (10, 2000),
}  # fmt: skip
TALLEST, WIDEST = 4, 3  # cells of the ranges that are tried
NO_VALUE = "#N/A"  # an error in a cell, as the sheet shows it and the other doors hand it over


class Tried:
    """A library workbook of one card and rule set, and how its ranges look to Python."""

    def __init__(self, path: Path, card: Card, rules: str) -> None:
        self.path = path
        lambda_book.write_library(path, card, load_rules(rules))
        shown = openpyxl.load_workbook(path, data_only=True)
        self.rows, self.ranges = {}, {}
        for key, sheet, columns, letter in (("aircraft", shown["Aircraft"], 9, "I"), ("rules", shown["Rules"], 6, "F")):
            rows = sheet.iter_rows(max_col=columns, values_only=True)
            self.rows[key] = [[float(cell) if type(cell) is int else cell for cell in row] for row in rows]
            self.ranges[key] = lambda_book.range_of(sheet, letter)
        start = next(i for i, row in enumerate(self.rows["aircraft"]) if row[0] == "Setting")
        self.flaps = [str(row[0]) for row in self.rows["aircraft"][start + 1 : start + 1 + len(card.flaps)]]
        self.mass = (card.values["max_takeoff_mass"] * 0.55, card.values["max_takeoff_mass"] * 1.05)

    def expected(self, function: Function, given: Sequence[Any]) -> Any:
        pairs = zip(function.arguments, given, strict=True)
        found = call(function, *(self.rows.get(argument.kind, value) for argument, value in pairs))
        return NO_REACH_HERE if found == NO_REACH else found

    def answers(self, cases: Sequence[tuple[Function, Sequence[Any]]]) -> list[Any]:
        """What the names give for arguments that stand in cells of their own, blank ones for None."""
        book = openpyxl.load_workbook(self.path)
        sheet = book.create_sheet("Cases")
        for row, (function, given) in enumerate(cases, 1):
            typed = []
            for column, (argument, value) in enumerate(zip(function.arguments, given, strict=True), 2):
                cell = sheet.cell(row, column, value)
                cell.data_type = "s" if isinstance(value, str) else cell.data_type
                typed.append(self.ranges.get(argument.kind, cell.coordinate))
            sheet.cell(row, 1).value = f"={function.full_name}({','.join(typed)})"
        with TemporaryDirectory() as folder:
            path = Path(folder) / "cases.xlsx"
            book.save(path)
            recalculated = Book(path)
            recalculated.recalculate()
        return [row[0] for row in recalculated.values("Cases", f"A1:A{len(cases)}")]

    def filled(self, cases: Sequence[tuple[Function, Sequence[Any]]], name: str = "STRIP_{}") -> list[list[list[Any]]]:
        """What the names fill where arguments are rows of cells that stand in the sheet, blank ones for None.

        The formulas are typed in, as a user does, so that their results spill."""
        book = openpyxl.load_workbook(self.path)
        sheet = book.create_sheet("Cases")
        formulas = []
        for at, (function, given) in enumerate(cases):
            typed = []
            for place, (argument, rows) in enumerate(zip(function.arguments, given, strict=True)):
                if argument.kind in self.ranges:
                    typed.append(self.ranges[argument.kind])
                    continue
                first = (1 + at * (TALLEST + 1), 1 + place * WIDEST)
                for row, cells in enumerate(rows):
                    for column, value in enumerate(cells):
                        cell = sheet.cell(first[0] + row, first[1] + column, value)
                        cell.data_type = "s" if isinstance(value, str) and value != NO_VALUE else cell.data_type
                last = f"{get_column_letter(first[1] + len(rows[0]) - 1)}{first[0] + len(rows) - 1}"
                typed.append(f"{get_column_letter(first[1])}{first[0]}:{last}")
            formulas.append(f"={name.format(function.name)}({','.join(typed)})")
        with TemporaryDirectory() as folder:
            path = Path(folder) / "cases.xlsx"
            book.save(path)
            recalculated = Book(path)
        left = 1 + WIDEST * max(len(given) for _, given in cases)
        columns = f"{get_column_letter(left)}{{}}:{get_column_letter(left + WIDEST)}{{}}"
        number = recalculated.sheets().index("Cases")
        for at, formula in enumerate(formulas):
            recalculated._model.set_user_input(number, 1 + at * (TALLEST + 1), left, formula)
        recalculated.recalculate()
        tops = [1 + at * (TALLEST + 1) for at in range(len(cases))]
        blocks = [recalculated.values("Cases", columns.format(top, top + TALLEST)) for top in tops]
        return [[kept for row in block if (kept := [value for value in row if value is not None])] for block in blocks]

    def expected_rows(self, function: Function, given: Sequence[Any]) -> list[list[Any]]:
        found = self.expected(function, given)
        rows = found if isinstance(found, list) else [[found]]
        return [[NO_REACH_HERE if value == NO_REACH else value for value in row] for row in rows]

    def usual(self, function: Function) -> list[Any]:
        """The function's example with a setting that the card has."""
        pairs = zip(function.arguments, lambda_book.whole_example(function), strict=True)
        return [self.flaps[1] if argument.kind == "flap" else value for argument, value in pairs]

    def random_ranges(self, function: Function, dice: random.Random) -> list[Any]:
        """Arguments as rows of cells: one at least fills the result, others a column or a row of it, or one cell."""
        rows, columns = dice.choice([(TALLEST, 1), (1, WIDEST), (3, 2)])
        spread = [argument for argument in function.arguments if argument.kind not in WHOLE]
        whole = dice.choice(spread)
        shapes = {argument.key: dice.choice([(rows, columns), (rows, 1), (1, columns), (1, 1), (1, 1)]) for argument in spread}
        shapes[whole.key] = (rows, columns)
        given = []
        for argument in function.arguments:
            if argument.kind in self.rows:
                given.append(None)
                continue
            high, wide = shapes[argument.key]
            given.append([[self._random_cell(argument, dice) for _ in range(wide)] for _ in range(high)])
        return given

    def _random_cell(self, argument: Argument, dice: random.Random) -> Any:
        return dice.choice([None, NO_VALUE]) if dice.random() < 0.02 else self._random(argument, dice)

    def random_given(self, function: Function, dice: random.Random) -> list[Any]:
        return [self._random(argument, dice) for argument in function.arguments]

    def _random(self, argument: Argument, dice: random.Random) -> Any:
        if argument.kind in self.rows:
            return None
        if argument.kind == "flap":
            return dice.choice(self.flaps) if dice.random() < 0.95 else dice.choice(["99", "up*", "", "?"])
        if argument.kind in ("surface", "condition"):
            words = SURFACES if argument.kind == "surface" else CONDITIONS
            return dice.choice(words) if dice.random() < 0.97 else dice.choice(["gr*", "tarmac", "?", "Grass"])
        if dice.random() < 0.02:
            return dice.choice([-1e4, 1e4, 500.0, 0.0])
        if argument.key == "qnh" and dice.random() < 0.2:
            return round(dice.uniform(28.3, 31.0), 2)
        low, high = self.mass if argument.key == "mass" else CREDIBLE[argument.key]
        return round(dice.uniform(low, high), 3)


@cache
def tried(name: str) -> Tried:
    card, rules = CARDS[name]
    folder = TemporaryDirectory()
    made = Tried(Path(folder.name) / "library.xlsx", load_card(card) if isinstance(card, str) else card(), rules)
    made.folder = folder  # kept as long as the book is
    return made


def same(got: Any, expected: Any, scale: float) -> bool:
    if isinstance(expected, str) or isinstance(got, str):
        return got == expected
    return math.isclose(got, expected, rel_tol=1e-9, abs_tol=1e-9 * scale)


def about(sentence: Any, arguments: Sequence[Argument]) -> str:
    """The argument that a sentence on wrong input speaks of."""
    told = sentence if isinstance(sentence, str) else ""
    return next((argument.name for argument in arguments if told.startswith((argument.name + ":", argument.name + " "))), "")


@pytest.mark.parametrize("name", CARDS)
def test_random_arguments_give_what_python_gives(name: str) -> None:
    book, dice = tried(name), random.Random(7)
    cases = [(function, book.random_given(function, dice)) for function in WRITTEN for _ in range(25)]
    texts = numbers = 0
    for (function, given), got in zip(cases, book.answers(cases), strict=True):
        expected = book.expected(function, given)
        of = about(expected, function.arguments)
        if of:  # wrong input is told in other words, as units in texts are not read
            assert about(got, function.arguments), (function.name, given, got, expected)
        else:
            # a margin is a difference of distances, so its error is that of a kilometre
            assert same(got, expected, 1000.0), (function.name, given, got, expected)
        texts, numbers = texts + isinstance(got, str), numbers + isinstance(got, float)
    assert len(cases) > 600 and numbers > 330 and texts > 110


def test_the_random_arguments_meet_every_verdict() -> None:
    book, dice = tried("heron"), random.Random(7)
    verdicts = [f for f in WRITTEN if f.name.endswith("VERDICT")]
    cases = [(function, book.random_given(function, dice)) for function in verdicts for _ in range(200)]
    assert set(book.answers(cases)) >= {"suitable", "marginal", "unsuitable", "not assessed"}


@pytest.mark.parametrize("name", CARDS)
def test_documented_examples_and_the_values_kept_beside_them(name: str) -> None:
    book = tried(name)
    shown = openpyxl.load_workbook(book.path, data_only=True)["Functions"]
    recalculated = Book(book.path)
    recalculated.recalculate()
    found = {}
    for row in range(lambda_book.HEADER_ROW + 1, shown.max_row + 1):
        if shown.cell(row, 6).value is not None:
            kept, live = shown.cell(row, 6).value, recalculated.value("Functions", f"F{row}")
            found[shown.cell(row, 1).value] = (kept, live)
            assert same(live, kept, 1000.0) or about(kept, BY_NAME[shown.cell(row, 1).value[6:]].arguments)
    assert list(found) == [function.full_name for function in WRITTEN]
    if name == "ridge-runner":  # whose flaps and masses the examples are made for
        for function in WRITTEN:
            assert same(found[function.full_name][0], book.expected(function, lambda_book.whole_example(function)), 1000.0)
            assert function.unit is None or isinstance(found[function.full_name][0], float | int)


def test_wrong_arguments_are_told_in_the_cell() -> None:
    book, cases = tried("heron"), []
    for function in WRITTEN:
        usual = book.usual(function)
        for place, argument in enumerate(function.arguments):
            if argument.kind not in book.rows:
                wrongs = [None, "x"] if argument.kind not in KINDS else [None, "x", "12", True]
                cases += [(function, argument, [*usual[:place], wrong, *usual[place + 1 :]]) for wrong in wrongs]
    got = book.answers([(function, given) for function, _, given in cases])
    for (function, argument, given), sentence in zip(cases, got, strict=True):
        assert about(sentence, function.arguments) == argument.name, (function.name, given, sentence)
        if given[function.arguments.index(argument)] is None:
            assert sentence == f"{argument.name}: {EMPTY}", (function.name, given)


def test_cells_that_are_empty_or_hold_an_error_are_told_in_their_place() -> None:
    """In a column of every argument in turn; alone they are told in the same words."""
    book, cases = tried("heron"), []
    for function in WRITTEN:
        usual = [[[value]] for value in book.usual(function)]
        for place, argument in enumerate(function.arguments):
            if argument.kind not in book.rows:
                good = usual[place][0]
                for rows in ([good, [None], [NO_VALUE], good], [[None]], [[NO_VALUE]]):
                    cases.append((function, argument, [*usual[:place], rows, *usual[place + 1 :]]))
    got = book.filled([(function, given) for function, _, given in cases])
    for at in range(0, len(cases), 3):
        function, argument, given = cases[at]
        words = [[f"{argument.name}: {EMPTY}"], [f"{argument.name}: the cell holds an error"]]
        column, *alone = got[at : at + 3]
        assert column[1:3] == words and alone == [[words[0]], [words[1]]], (function.name, argument.key, column, alone)
        expected = book.expected_rows(function, given)
        assert column[0] == column[3] and expected[1] == words[0], (function.name, argument.key)
        assert same(column[0][0], expected[0][0], 1000.0), (function.name, argument.key)
    assert len(cases) > 400


@pytest.mark.parametrize("name", CARDS)
def test_random_ranges_give_what_python_gives(name: str) -> None:
    book, dice = tried(name), random.Random(11)
    cases = [(function, book.random_ranges(function, dice)) for function in WRITTEN for _ in range(3)]
    numbers = words = told = 0
    for (function, given), got in zip(cases, book.filled(cases), strict=True):
        expected = book.expected_rows(function, given)
        assert [len(row) for row in got] == [len(row) for row in expected], (function.name, given, got)
        for one, other in zip(chain.from_iterable(got), chain.from_iterable(expected), strict=True):
            of = about(other, function.arguments)
            if of:  # wrong input is told in other words, as units in texts are not read
                assert about(one, function.arguments), (function.name, given, one, other)
            else:
                assert same(one, other, 1000.0), (function.name, given, one, other)
            told, words = told + bool(of), words + (isinstance(one, str) and not of)
            numbers += isinstance(one, float)
    assert len(cases) >= 75 and numbers > 120 and words > 40 and told > 40


def test_a_column_beside_a_row_makes_a_table_and_one_value_counts_for_all() -> None:
    book, function = tried("heron"), BY_NAME["DENSITY_ALT"]
    elevations, temperatures = [[800.0], [2400.0], [4100.0]], [[12.0, 31.0]]
    column, table, row = book.filled([
        (function, [elevations, [[1008.0]], [[31.0]], [[0.0]]]),
        (function, [elevations, [[1008.0]], temperatures, [[0.0]]]),
        (function, [[[2400.0]], [[29.77]], temperatures, [[0.0]]]),
    ])  # fmt: skip
    alone = [[call(function, start, 1008.0, heat, 0.0) for heat in temperatures[0]] for (start,) in elevations]
    assert table == [pytest.approx(one, rel=1e-9) for one in alone]
    assert column == [[pytest.approx(one[1], rel=1e-9)] for one in alone]
    assert row == [pytest.approx([call(function, 2400.0, 29.77, heat, 0.0) for heat in temperatures[0]], rel=1e-9)]


@pytest.mark.parametrize(("typed", "given"), [
    ("{2400;4100},{1008}", ([[2400.0], [4100.0]], 1008.0)), ("{2400},{1008}", (2400.0, 1008.0)),
    ("{2400,4100},1000+{8;13}", ([[2400.0, 4100.0]], [[1008.0], [1013.0]])),
    ("1200*{2;3},29.77", ([[2400.0], [3600.0]], 29.77)),
])  # fmt: skip
def test_arrays_that_a_formula_makes_count_as_ranges(typed: str, given: tuple[Any, Any]) -> None:
    book, function = Book(tried("heron").path), BY_NAME["PRESSURE_ALT"]
    book._model.set_user_input(book.sheets().index("Functions"), 200, 1, f"={function.full_name}({typed})")
    book.recalculate()
    expected = call(function, *given)
    rows = expected if isinstance(expected, list) else [[expected]]
    got = book.values("Functions", f"A200:{get_column_letter(len(rows[0]) + 1)}{200 + len(rows)}")
    assert [row[:-1] for row in got[:-1]] == [pytest.approx(row, rel=1e-9) for row in rows]
    assert {row[-1] for row in got} | set(got[-1]) == {None}


def test_ranges_that_do_not_go_together_are_told_in_the_words_of_the_other_doors() -> None:
    book, cases = tried("heron"), []
    misfits = [((3, 1), (2, 1)), ((3, 2), (2, 2)), ((2, 3), (2, 2)), ((1, 3), (1, 2)), ((4, 1), (2, 2))]
    for function in WRITTEN:
        spread = [place for place, argument in enumerate(function.arguments) if argument.kind not in WHOLE]
        if len(spread) > 1:
            for one, other in misfits:
                given = [[[value]] for value in book.usual(function)]
                for at, place in enumerate(spread):  # the two shapes again and again: each is told once
                    rows, columns = one if at == 0 else (1, 1) if at % 3 == 2 else other if at % 3 == 1 else one
                    given[place] = [given[place][0] * columns] * rows
                cases.append((function, given))
    for (function, given), got in zip(cases, book.filled(cases), strict=True):
        expected = book.expected(function, given)
        assert "different shapes" in expected and got == [[expected]], (function.name, got)
    assert len(cases) > 100


def test_a_range_given_to_the_step_for_one_value_never_gives_a_number() -> None:
    book, cases = tried("heron"), []
    for function in WRITTEN:
        usual = [[[value]] for value in book.usual(function)]
        for place, argument in enumerate(function.arguments):
            if argument.kind in KINDS:
                cases.append((function, [*usual[:place], usual[place] * 2, *usual[place + 1 :]]))
    for (function, given), got in zip(cases, book.filled(cases, f"{STEP}{{}}_ONE"), strict=True):
        assert got and not any(isinstance(value, float) for row in got for value in row), (function.name, given, got)
    assert len(cases) > 80


@pytest.mark.parametrize(("sheet", "label", "blank"), [
    ("Aircraft", "Crosswind limit", "D"), ("Aircraft", "Wing area", "D"), ("Aircraft", "Propeller", "A"),
    ("Rules", "Take-off safety factor", "D"), ("Rules", "Headwind credited", "A"), ("Rules", "grass, dry", "A"),
    ("Aircraft", "Setting", "A"), ("Aircraft", "Greatest take-off mass", "A"),
])  # fmt: skip
def test_a_range_that_lacks_a_row_or_a_number_gives_no_verdict(tmp_path: Path, sheet: str, label: str, blank: str) -> None:
    book = tried("heron")
    workbook = openpyxl.load_workbook(book.path)
    row = next(cell.row for cell in workbook[sheet]["A"] if cell.value == label)
    workbook[sheet][f"{blank}{row}"] = "gone" if blank == "A" else "none"
    cases = workbook.create_sheet("Cases")
    for at, name in enumerate(("TAKEOFF_VERDICT", "TAKEOFF_MARGIN"), 1):
        given = zip(BY_NAME[name].arguments, book.usual(BY_NAME[name]), strict=True)
        typed = [book.ranges.get(argument.kind) or lambda_book._typed(value) for argument, value in given]
        cases.cell(at, 1).value = f"=STRIP_{name}({','.join(typed)})"
    workbook.save(tmp_path / "lacks.xlsx")
    recalculated = Book(tmp_path / "lacks.xlsx")
    recalculated.recalculate()
    for at in (1, 2):
        got = recalculated.value("Cases", f"A{at}")
        assert isinstance(got, str) and got not in ("suitable", "marginal", "unsuitable") and not got.startswith("#ERR")


def test_corrections_of_a_manual_are_refused(tmp_path: Path) -> None:
    made = Tried(tmp_path / "library.xlsx", everything(), "part-cat-b")
    function = BY_NAME["TAKEOFF_VERDICT"]
    assert made.answers([(function, made.usual(function))]) == [NO_CORRECTIONS]


def test_tables_of_a_manual_are_refused_but_for_speeds(tmp_path: Path) -> None:
    made = Tried(tmp_path / "library.xlsx", load_card("ridge-runner"), "part-cat-b")
    workbook = openpyxl.load_workbook(tmp_path / "library.xlsx")
    sheet = workbook["Aircraft"]
    next(cell for cell in sheet["A"] if cell.value is None).value = TABLES
    workbook.save(made.path)
    functions = [BY_NAME[name] for name in ("TAKEOFF_VERDICT", "CLIMB_GRADIENT", "LANDING_DIST", "LIFT_OFF_SPEED")]
    *refused, speed = made.answers([(function, made.usual(function)) for function in functions])
    assert refused == [NO_TABLES] * 3
    assert isinstance(speed, float)


def test_names_are_within_excel_s_limits() -> None:
    names = library().names
    assert len({name.name.upper() for name in names}) == len(names) > 80
    for name in names:
        assert len(name.text) + 1 <= MAX_LENGTH and nesting(name.text) <= MAX_DEPTH, name.name
        assert len(name.comment) <= MAX_COMMENT and len(name.name) <= 255
        assert re.fullmatch(r"STRIP_[A-Z0-9_]+", name.name)  # with its underscore no reference to a cell in any style
        for variable in set(re.findall(r"_xlpm\.(\w+)", name.text)):
            assert not re.fullmatch(r"[A-Za-z]{1,3}[0-9]+|[RrCc]|[Rr][0-9]*[Cc][0-9]*", variable), (name.name, variable)
        assert not re.search(r"(?<![.\w])(LET|LAMBDA|MAKEARRAY)\(", name.text)  # newer than the format: with its prefix
        pairs = [len(variables) for variables in _let_variables(name.text)]
        assert max(pairs, default=0) <= MAX_PAIRS and name.text.count("(") == name.text.count(")")
        assert len(re.findall(r"_xlpm\.\w+", name.text.split("(", 1)[1])) > 0


def _let_variables(text: str) -> list[list[str]]:
    """The variables of each LET: every second of its parts, apart from the last."""
    found = []
    for start in (match.end() for match in re.finditer(r"_xlfn\.LET\(", text)):
        level, parts, quoted = 0, [""], False
        for letter in text[start:]:
            quoted ^= letter == '"'
            level += 0 if quoted else (letter in "({") - (letter in ")}")
            if level < 0:
                break
            if letter == "," and level == 0 and not quoted:
                parts.append("")
            else:
                parts[-1] += letter
        assert len(parts) % 2 == 1
        assert len(set(parts[:-1:2])) == len(parts) // 2 and all(part.startswith("_xlpm.") for part in parts[:-1:2])
        found.append(parts[:-1:2])
    return found


def test_every_name_that_a_name_calls_is_there() -> None:
    names = {name.name for name in library().names}
    for name in library().names:
        assert set(re.findall(r"STRIP_[A-Z0-9_]+", re.sub('"[^"]*"', "", name.text))) <= names


def test_what_is_left_out_has_its_reason() -> None:
    left_out = {function.name for function, why in library().left_out if why}
    assert left_out == {f.name for f in FUNCTIONS if f.ask is not None} | {"CONVERT"}
    assert left_out | {function.name for function in WRITTEN} == set(BY_NAME)


def test_the_library_workbook_is_sound_and_says_the_caution(tmp_path: Path) -> None:
    path = tmp_path / "library.xlsx"
    assert main(["door", "lambda", "-o", str(path)]) == 0
    assert package_faults(path) == []
    book = openpyxl.load_workbook(path)
    for sheet in book:
        assert CAUTION in [cell.value for row in sheet.iter_rows(max_row=3) for cell in row]
    texts = [str(cell.value) for row in book["Functions"].iter_rows() for cell in row]
    for function in FUNCTIONS:
        assert function.full_name in texts
    with zipfile.ZipFile(path) as package:
        sheet = package.read("xl/worksheets/sheet1.xml").decode()
        assert sheet.count('cm="1"') == sheet.count('<f t="array"') == len(WRITTEN)
        assert "xl/metadata.xml" in package.namelist()


def test_the_library_opens_in_an_office_without_lambda(office: Any, tmp_path: Path) -> None:
    """LibreOffice 7.4 has no LAMBDA and shows errors in the cells that call one; the other sheets must be whole there."""
    path = tmp_path / "library.xlsx"
    lambda_book.write_library(path)
    shown = openpyxl.load_workbook(path, data_only=True)
    with office.open(path) as book:
        for name in ("Aircraft", "Rules"):
            for row in shown[name].iter_rows(max_col=9, max_row=60):
                for cell in row:
                    if isinstance(cell.value, float):
                        assert book.value(name, cell.coordinate) == pytest.approx(cell.value, rel=1e-12)


# --- a copy of a user's workbook


@pytest.fixture
def own_book(tmp_path: Path) -> Path:
    """A user's workbook with what a load and save would lose."""
    plain = tmp_path / "plain.xlsx"
    book = openpyxl.Workbook()
    book.active["A1"], book.active["A2"] = 2400, "=A1*2"
    book.defined_names["Home"] = DefinedName("Home", attr_text="Sheet!$A$1")
    book.save(plain)
    path = tmp_path / "own.xlsx"
    with zipfile.ZipFile(plain) as source, zipfile.ZipFile(path, "w") as target:
        for entry in source.infolist():
            target.writestr(entry, source.read(entry))
        target.writestr("xl/media/photo.png", bytes(range(256)))
        target.writestr("customXml/item1.xml", "<own/>")
    return path


def hashes(path: Path) -> dict[str, str]:
    with zipfile.ZipFile(path) as package:
        return {name: hashlib.sha256(package.read(name)).hexdigest() for name in package.namelist()}


def test_a_copy_changes_the_list_of_names_only(own_book: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before, out = hashes(own_book), tmp_path / "out.xlsx"
    assert main(["door", "lambda", str(own_book), "-o", str(out)]) == 0
    after = hashes(out)
    assert list(after) == list(before)
    assert {name for name in before if before[name] != after[name]} == {"xl/workbook.xml"}
    assert hashes(own_book) == before
    book = openpyxl.load_workbook(out)
    assert book.defined_names["Home"].attr_text == "Sheet!$A$1"
    assert {name.name: name.text for name in library().names}.items() <= {
        name: entry.attr_text for name, entry in book.defined_names.items()
    }.items()
    again = tmp_path / "again.xlsx"
    assert main(["door", "lambda", str(out), "-o", str(again)]) == 0
    assert hashes(again) == after
    assert f"0 names added, {len(library().names)} there already" in capsys.readouterr().out


def test_a_copy_works(own_book: Path, tmp_path: Path) -> None:
    with_formula = tmp_path / "with.xlsx"
    book = openpyxl.load_workbook(own_book)
    del book.defined_names["Home"]
    book.active["B1"] = "=STRIP_PRESSURE_ALT(A1,1008)"
    book.save(with_formula)
    lambda_book.write_copy(with_formula, tmp_path / "out.xlsx")
    copied = Book(tmp_path / "out.xlsx")
    copied.recalculate()
    assert copied.value("Sheet", "B1") == pytest.approx(call(BY_NAME["PRESSURE_ALT"], 2400, 1008), rel=1e-9)


def test_names_find_their_place_in_a_workbook_with_a_prefix(own_book: Path, tmp_path: Path) -> None:
    """Some programs write every element with a prefix."""
    prefixed = tmp_path / "prefixed.xlsx"
    with zipfile.ZipFile(own_book) as source, zipfile.ZipFile(prefixed, "w") as target:
        for entry in source.infolist():
            data = source.read(entry)
            if entry.filename == "xl/workbook.xml":
                text = re.sub(r"<(/?)(?=[a-zA-Z])", r"<\1x:", data.decode()).replace("xmlns=", "xmlns:x=")
                data = re.sub(r"<x:definedNames>.*</x:definedNames>", "", text).encode()
            target.writestr(entry, data)
    lambda_book.write_copy(prefixed, tmp_path / "out.xlsx")
    with zipfile.ZipFile(tmp_path / "out.xlsx") as package:
        xml = package.read("xl/workbook.xml").decode()
    assert xml.index("</x:sheets>") < xml.index("<x:definedNames>") < xml.index("<x:calcPr")
    assert xml.count("<x:definedName ") == len(library().names)


@pytest.mark.parametrize(("what", "words"), [
    ("another meaning", "in use there with another meaning"), ("no zip", "no workbook"), ("missing", "there is no such file"),
    ("other zip", "no workbook"), ("other suffix", "saved as .xlsx"), ("itself", "the workbook itself"),
    ("exists", "this file exists"), ("signed", "signed"), ("folder", "folder does not exist"), ("out suffix", "end in .xlsx"),
])  # fmt: skip
def test_what_can_t_take_the_names_is_refused_in_one_sentence(
    own_book: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str], what: str, words: str
) -> None:
    book, out = own_book, tmp_path / "out.xlsx"
    if what == "another meaning":
        changed = openpyxl.load_workbook(own_book)
        changed.defined_names["strip_slope"] = DefinedName("strip_slope", attr_text="Sheet!$A$1")
        changed.save(book)
    elif what == "no zip":
        book.write_bytes(b"\xd0\xcf\x11\xe0 locked")
    elif what == "missing":
        book = tmp_path / "none.xlsx"
    elif what == "other zip":
        with zipfile.ZipFile(book, "w") as package:
            package.writestr("a.txt", "a")
    elif what == "other suffix":
        book = own_book.rename(tmp_path / "own.xlsm")
    elif what == "itself":
        out = book
    elif what == "exists":
        out.write_text("mine")
    elif what == "signed":
        with zipfile.ZipFile(book, "a") as package:
            package.writestr("_xmlsignatures/sig1.xml", "<a/>")
    elif what == "folder":
        out = tmp_path / "nowhere" / "out.xlsx"
    elif what == "out suffix":
        out = tmp_path / "out.ods"
    before = sorted(tmp_path.iterdir())
    assert main(["door", "lambda", str(book), "-o", str(out)]) == 2
    told = capsys.readouterr().err
    assert words in told and told.count("\n") == 1 and "Traceback" not in told
    assert sorted(tmp_path.iterdir()) == before
