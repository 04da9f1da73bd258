"""The spreadsheet functions' equations as native formulas, and as LAMBDA names, on the calls that every door is tried with.

The arguments stand in cells. An equation is a formula beside them; a step of the chain is read from a filled workbook whose
mass, flap and strips are linked to the cells of one call after another. So every call goes through the formulas that a user
gets, the manual's tables for its own mass and flap included. LibreOffice and ironcalc recalculate them.

A native formula, like a LAMBDA, can't read "2300 ft": its cell has the value that the text stands for, in the usual unit.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
import openpyxl
import pytest
from openpyxl.utils import get_column_letter

from stripcheck.card import load_card, shipped_cards
from stripcheck.chain import Step
from stripcheck.day import read_day
from stripcheck.doors.aircraft import CARRIED, NO_WORDS
from stripcheck.doors.call import call
from stripcheck.doors.functions import FUNCTIONS, Argument, Function
from stripcheck.doors.lambda_book import whole_example
from stripcheck.inputs import STRIP
from stripcheck.register import read_list
from stripcheck.rules import load_rules, shipped_rules
from stripcheck.sheet.book import fill, write_workbook
from stripcheck.sheet.cell import Cell, as_cell, formula, reference, shown, where
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.strips import FIRST_ROW, layout
from stripcheck.speeds import load_factor
from stripcheck.units import KINDS, from_si, read_quantity, unit_scale
from tests.doors.random_cells import random_sets
from tests.doors.test_lambdas import WRITTEN, Tried
from tests.ironcalc_book import Book as IroncalcBook

TOLERANCE = 1e-9
# what is left of two lengths of up to some thousand metres: its own size says nothing
DIFFERENCES = ("TAKEOFF_MARGIN", "LANDING_MARGIN", "OVER_OBSTACLE")
DIFFERENCE_SCALE = 1000.0
NOT_NATIVE = dict.fromkeys(
    ("MOST_TAKEOFF_MASS", "MOST_LANDING_MASS", "HOTTEST_TAKEOFF", "HOTTEST_LANDING", "ABORT_POINT", "ABORT_SPEED",
     "BEST_TAKEOFF_FLAP", "BEST_LANDING_FLAP"),
    "an inverse question: it looks for its answer by trying, which a formula without a program can't",
)  # fmt: skip
IN_GROUND_TABLE = {"ROLLING": "rolling", "BRAKING": "braking"}  # steps that read what the function reads
NATIVE = [function for function in FUNCTIONS if function.name not in NOT_NATIVE]
OF_THE_BOOK = ("aircraft", "rules", "text", "flap", "mass")  # kinds of which a filled workbook has one for all its strips
CARD, RULES = "ridge-runner", "manual-only"  # for a function without one
# what stands for an argument that a function of the chain does not have
USUAL = {"elevation": 0.0, "qnh": 1013.25, "temperature": 15.0, "length": 5000.0, "slope": 0.0, "surface": "paved",
         "condition": "dry", "headwind": 0.0, "bank": 0.0}  # fmt: skip
LINKED = {"elevation_field": "elevation", "own_qnh": "qnh", "own_temperature": "temperature", "slope_given": "slope",
          "tora": "length", "lda": "length", "surface": "surface", "condition": "condition",
          "obstacle_height": "height", "obstacle_distance": "beyond"}  # fmt: skip
KIND_OF = {argument.key: argument.kind for function in NATIVE for argument in function.arguments}
LETTERS = {key: get_column_letter(number) for number, key in enumerate(KIND_OF, 4)}  # of the arguments on the sheet of calls
SHEET, PICK, FIRST = "Calls", "$B$1", 4
STRIPS = 8  # rows of a range


class Job(NamedTuple):
    """One call: its arguments, and the rows of cells that they are, one row unless they have ranges."""

    function: Function
    given: list[Any]
    rows: list[list[Any]]

    @property
    def whole(self) -> tuple[str, str]:
        """Card and rule set."""
        names = dict(zip((argument.kind for argument in self.function.arguments), self.given, strict=False))
        return names.get("aircraft", CARD), names.get("rules", RULES)

    def expected(self) -> list[Any]:
        """What Python's own call gives in each row."""
        found = call(self.function, *self.given)
        return [cells[0] for cells in found] if isinstance(found, list) else [found]


@cache
def single_jobs() -> tuple[Job, ...]:
    """The same calls as through Python, Excel and Calc."""
    return tuple(Job(function, row, [row]) for function in NATIVE for row in random_sets(function))


@cache
def range_jobs() -> tuple[Job, ...]:
    """The first sets of each function as one call with ranges: formulas filled down."""
    return tuple(job for function in NATIVE for job in _range_job(function))


def _range_job(function: Function) -> list[Job]:
    sets, arguments = random_sets(function)[:STRIPS], function.all_arguments
    spread = [argument.kind not in OF_THE_BOOK and argument.key != "bank" for argument in arguments]
    columns = [[_or_usual(argument, row[at]) if spread[at] else sets[0][at] for row in sets]
               for at, argument in enumerate(arguments)]  # fmt: skip
    given = [[[cell] for cell in column] if spread[at] else column[0] for at, column in enumerate(columns)]
    return [Job(function, given, [list(row) for row in zip(*columns, strict=True)])] if any(spread) else []


def jobs_of(card: str, rules: str) -> list[Job]:
    return [job for job in (*single_jobs(), *range_jobs()) if job.whole == (card, rules)]


def _or_usual(argument: Argument, cell: Any) -> Any:
    return argument.default if cell is None else cell


def in_cell(argument: Argument, cell: Any) -> Any:
    """What stands in a cell for an argument: a text with a unit as the number that it stands for."""
    cell = _or_usual(argument, cell)
    if isinstance(cell, str) and argument.kind in KINDS:
        return float(from_si(read_quantity(cell, argument.kind), KINDS[argument.kind][0]))
    return cell


def wrong(job: Job, found: Sequence[Any], expected: Sequence[Any]) -> list[str]:
    """A sentence for each cell that is not what is expected."""
    scale = DIFFERENCE_SCALE if job.function.name in DIFFERENCES else 0.0
    return [f"{job.function.name}{tuple(row)}: {got!r}, not {awaited!r}"
            for row, got, awaited in zip(job.rows, found, expected, strict=True) if not _same(got, awaited, scale)]  # fmt: skip


def _same(got: Any, expected: Any, scale: float) -> bool:
    if isinstance(got, str) or isinstance(expected, str):
        return bool(got == expected)
    return math.isclose(got, expected, rel_tol=TOLERANCE, abs_tol=TOLERANCE * scale)


# --- the formulas


def equation(function: Function, row: int, given: Sequence[Any]) -> Cell:
    """The function's equation over the cells of a row, in the function's unit. Raises TypeError where it can't be written."""
    values: list[Any] = []
    for argument, cell in zip(function.arguments, given, strict=False):
        if argument.kind == "rules":
            values.append(_Names())
        elif argument.kind == "text":
            values.append(cell)  # a unit is read when the formula is written
        else:
            values.append(reference(f"${LETTERS[argument.key]}{row}", KINDS.get(argument.kind, ("",))[0]))
    if function.compute is None:
        raise TypeError(f"{function.name} is no equation")
    result = shown(as_cell(function.compute(*values)), function.unit or "")
    return where(np.isfinite(result), result, NO_WORDS)


class _Names(Mapping[str, Cell]):
    """A rule set's values by key: the sheet Rules gives each its key as a name."""

    def __getitem__(self, key: str) -> Cell:
        return Cell(key)

    def __iter__(self) -> Iterator[str]:
        raise TypeError("values are asked for by key")

    __len__ = __iter__


def in_unit(cell: Cell, function: Function, asked: Any) -> Cell:
    """A result's cell in the unit asked for; a text stays a text."""
    if not asked:
        return cell
    kind = next(kind for kind, (unit, _) in KINDS.items() if unit == function.unit)
    factor, offset = unit_scale(asked, kind)
    return where(np.isfinite(cell), (reference(cell.text, function.unit or "") - offset) / factor, cell)


class Filled:
    """A filled workbook of one card and rule set, and beside its sheets one with the cells of many calls.

    The workbook's inputs are linked to the row of calls whose number is typed into one cell, its strips to that and the next.
    """

    def __init__(self, path: Path, card_name: str, rules_name: str, jobs: Sequence[Job]) -> None:
        self.path, self.jobs = path, jobs
        card = load_card(card_name)
        chosen = {key: card.values[key] for key in ("mass_takeoff", "mass_landing", "takeoff_flap", "landing_flap")}
        names = dict.fromkeys(("takeoff_flap", "landing_flap"), card.flaps[0].name)
        directions = read_list(_any_list(path.with_suffix(".csv")))
        filling = fill(directions, card, read_day({}), load_rules(rules_name), chosen, names)
        write_workbook(filling, path, full=True)
        columns = layout(card.chain, directions, full=True)
        self.chain = card.chain
        self.letters = {column.key: get_column_letter(number) for number, column in enumerate(columns, 1)}
        self.book = openpyxl.load_workbook(path)
        self.calls = self.book.create_sheet(SHEET)
        self.calls["A1"], self.calls["B1"] = "Row of the call", FIRST
        self.starts = self._write_calls()
        self._link_aircraft()
        self._link_strips()
        for sheet in self.book:  # ironcalc does not find the notes where openpyxl puts them
            for line in sheet.iter_rows():
                for cell in line:
                    if cell.comment:
                        cell.comment = None
        self.book.save(path)

    def _write_calls(self) -> list[int]:
        starts, row = [], FIRST
        for job in self.jobs:
            starts.append(row)
            for at, given in enumerate(job.rows):
                typed = {a.key: in_cell(a, cell) for a, cell in zip(job.function.arguments, given, strict=False)}
                for key, value in {**(USUAL if picked(job.function) else {}), **typed}.items():
                    self.calls[f"{LETTERS[key]}{row}"] = value
                result = self._of_chain(job.function, at) if picked(job.function) else equation(job.function, row, given)
                self.calls[f"A{row}"] = "=" + formula(result)
                asked = given[-1] if job.function.unit else None
                self.calls[f"B{row}"] = "=" + formula(in_unit(Cell(f"$A{row}"), job.function, asked))
                row += 1
        return starts

    def _of_chain(self, function: Function, at: int) -> Cell:
        """The cell of the workbook that answers for a strip, or the cell with the reason why there is no answer."""
        key = IN_GROUND_TABLE.get(function.name, function.step)
        key = next((carried for carried in CARRIED.get(key, ()) if carried in self.chain.by_key), key)
        step = self.chain.by_key[key]
        assert isinstance(step, Step)
        place = Place(self._strip(key, at), step.unit) if key in self.letters else Place(key)
        if step.words:
            return Cell(place.reference)
        result = reference(*place)
        side = "landing" if key.startswith(("landing", "approach", "carried_landing")) else "takeoff"
        reason = NO_WORDS if function.name in IN_GROUND_TABLE else Cell(self._strip(f"{side}_reason", at))
        return where(np.isfinite(result), shown(result, function.unit or ""), reason)

    def _strip(self, key: str, at: int) -> str:
        return f"Strips!${self.letters[key]}${FIRST_ROW + at}"

    def _link(self, key: str, at: int) -> str:
        """The cell of an argument, some rows after the one that is picked; a blank stays one."""
        letter = LETTERS[key]
        cell = f"INDEX({SHEET}!${letter}$1:${letter}${self.calls.max_row},{SHEET}!{PICK}+{at})"
        return f'IF({cell}="","",{cell})'

    def _link_aircraft(self) -> None:
        """Mass and flap. The stall speed in a bank is that of a mass as many times as great as the load factor."""
        sheet = self.book["Aircraft"]
        cells = {str(row[0].value): row[1] for row in reversed(list(sheet.iter_rows(max_col=2)))}
        for key in ("mass", "bank"):
            self.calls[f"{LETTERS[key]}2"] = "=" + self._link(key, 0)
        mass, bank = (reference(f"{SHEET}!${LETTERS[key]}$2", unit) for key, unit in (("mass", "kg"), ("bank", "°")))
        loaded = formula(where(np.isfinite(mass), shown(mass * load_factor(bank), "kg"), np.nan))
        for key in ("mass_takeoff", "mass_landing"):
            cells[self.chain.by_key[key].label].value = "=" + loaded
        for key in ("takeoff_flap", "landing_flap"):
            cell = cells[self.chain.by_key[key].label]
            cell.value, cell.number_format = "=" + self._link("flap", 0), "General"  # a formula in a cell of texts is a text

    def _link_strips(self) -> None:
        for at in range(STRIPS):
            head = self._link("headwind", at)
            given: dict[str, Any] = {key: "=" + self._link(argument, at) for key, argument in LINKED.items()}
            given |= {"own_wind_speed": f"=ABS({head})", "own_wind_from": f"=IF({head}<0,180,0)", "heading": 0.0}
            for item in STRIP:
                if item.kind != "flag":
                    self.book["Strips"][f"{self.letters[item.key]}{FIRST_ROW + at}"].value = given.get(item.key)

    def differences(self, book: Any, every: int = 1) -> tuple[int, list[str]]:
        """Number of calls, and a sentence for each that a recalculated book answers otherwise than Python."""
        count, found = 0, []
        for start, job in list(zip(self.starts, self.jobs, strict=True))[::every]:
            if picked(job.function):
                book.set(SHEET, {PICK.replace("$", ""): start})
            cells = book.values(SHEET, f"B{start}:B{start + len(job.rows) - 1}")
            found += wrong(job, [row[0] for row in cells], job.expected())
            count += len(job.rows)
        return count, found


def picked(function: Function) -> bool:
    """Whether a filled workbook answers, for one call after another."""
    return bool(function.step) or function.name in IN_GROUND_TABLE


def _any_list(path: Path) -> Path:
    rows = [f"AAA {number},09/27,700,paved,500,0" for number in range(STRIPS // 2)]
    path.write_text("\n".join(["Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]", *rows]), encoding="utf-8")
    return path


# --- tests


def test_all_but_the_inverse_questions_are_native() -> None:
    assert set(NOT_NATIVE) == {function.name for function in FUNCTIONS if function.ask is not None}
    equations = [function for function in NATIVE if not function.step]
    assert {function.name for function in equations if not _is_written(function)} == set(IN_GROUND_TABLE)


def _is_written(function: Function) -> bool:
    try:
        return bool(formula(equation(function, FIRST, whole_example(function))))
    except TypeError:  # what NumPy asks of it, a cell can't say
        return False


def test_the_calls_are_over_a_thousand_of_all_kinds() -> None:
    jobs = single_jobs()
    assert len(jobs) > 1000 and {job.function.name for job in jobs} == {function.name for function in NATIVE}
    assert sum(job.function in WRITTEN for job in jobs) >= 1000
    assert sum(_has_unit_in_text(job) for job in jobs) > 600
    found = [(job.function.name, job.expected()[0]) for job in jobs]
    assert sum(isinstance(answer, float) for _, answer in found) > 700
    assert {answer for name, answer in found if name.endswith("VERDICT")} >= {"suitable", "marginal", "unsuitable"}
    ranges = range_jobs()
    assert sum(len(job.rows) for job in ranges) == STRIPS * len(ranges) > 150
    assert sum(_has_unit_in_text(job) for job in ranges) > 10


def _has_unit_in_text(job: Job) -> bool:
    arguments = job.function.arguments
    return any(argument.kind in KINDS and isinstance(cell, str) and not cell[-1].isdigit()
               for row in job.rows for argument, cell in zip(arguments, row, strict=False))  # fmt: skip


@pytest.mark.parametrize("rules", shipped_rules())
@pytest.mark.parametrize("card", shipped_cards())
def test_native_formulas_give_what_python_gives(office: Any, tmp_path: Path, card: str, rules: str) -> None:
    filled = Filled(tmp_path / "native.xlsx", card, rules, jobs_of(card, rules))
    with office.open(filled.path) as book:
        book.recalculate()
        count, found = filled.differences(book)
    assert found == [] and count >= len(filled.jobs) > 10
    independent = IroncalcBook(filled.path)
    independent.recalculate()
    _, found = filled.differences(independent, every=11)
    assert found == []


@pytest.mark.parametrize("rules", shipped_rules())
@pytest.mark.parametrize("card", shipped_cards())
def test_lambda_names_give_what_python_gives(tmp_path: Path, card: str, rules: str) -> None:
    """A LAMBDA is given the sheets Aircraft and Rules; for a card with tables of the manual so is Python."""
    loaded = load_card(card)
    book = Tried(tmp_path / "library.xlsx", loaded, rules)
    jobs = [job._replace(given=[*job.given[:-1], None] if job.function.unit else job.given)
            for job in jobs_of(card, rules) if job.function in WRITTEN]  # fmt: skip
    whole = [[row[: len(job.function.arguments)] for row in job.rows] for job in jobs]
    cases = [(job.function, [in_cell(argument, cell) for argument, cell in zip(job.function.arguments, row, strict=True)])
             for job, rows in zip(jobs, whole, strict=True) for row in rows]  # fmt: skip
    answers, found = iter(book.answers(cases)), []
    for job, rows in zip(jobs, whole, strict=True):
        expected = [book.expected(job.function, row) for row in rows] if loaded.tables else job.expected()
        found += wrong(job, [next(answers) for _ in rows], expected)
    assert found == [] and len(cases) >= len(jobs) > 10
