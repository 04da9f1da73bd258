"""The manual's tables in the range of an Aircraft sheet: the same tables as the card's, and the workbook's own answers."""

from __future__ import annotations

import copy
import random
from collections.abc import Callable
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import openpyxl
import pytest

from stripcheck.card import Card, load_card, shipped_cards
from stripcheck.doors.aircraft import aeroplane_of
from stripcheck.doors.call import call
from stripcheck.doors.functions import BY_NAME, FUNCTIONS, Function
from stripcheck.sheet.book import write_workbook
from stripcheck.sheet.labels import CARRIED, TABLES
from stripcheck.sheet.manual_tables import AS_ROWS
from tests.doors.random_cells import random_arguments
from tests.manual_cards import BARE, CLIMB, LANDING_POINTS, NAMES, TAKEOFF_POINTS, everything, load, table
from tests.sheet.test_book import filling
from tests.sheet.test_manual_tables import ODD

Rows = list[list[Any]]
LIST = "Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]\nAAA,09/27,900,grass,3000,1\n"
HEATS = tuple(range(-10, 45, 5))  # eleven temperatures: more than a row holds
CARDS: dict[str, Callable[[], Card]] = {
    "ridge-runner": lambda: load_card("ridge-runner"),
    "high-mule": lambda: load_card("high-mule"),
    "everything": everything,
    "everything, constant speed": lambda: everything(False, False),
    "odd units": lambda: load(ODD),
    "climb alone": lambda: load(BARE + CLIMB + TAKEOFF_POINTS + LANDING_POINTS),
    "rolls alone": lambda: load(BARE + table(
        "take-off roll", (0, 4000, 8000), HEATS, [[190 + 3 * i + 60 * j for i in range(11)] for j in range(3)], flap="10",
        mass="1110 kg") + LANDING_POINTS),
    "landing alone, many temperatures": lambda: load(BARE + TAKEOFF_POINTS + table(
        NAMES["landing"], (0, 5000), HEATS, [[170 + i + 20 * j for i in range(11)] for j in range(2)],
        [[380 + i + 20 * j if i < 9 else np.nan for i in range(11)] for j in range(2)], flap="30", mass="1110 kg")),
}  # fmt: skip
EACH = pytest.mark.parametrize("name", list(CARDS))
# inputs of a card that functions take as arguments, and the workbook's own mass and flap
OF_THE_DAY = {"mass_takeoff", "mass_landing", "takeoff_flap", "landing_flap"}


@pytest.fixture(scope="module")
def sheet_of(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str], openpyxl.worksheet.worksheet.Worksheet]:
    """The sheet Aircraft of a workbook for a card, with values."""

    @cache
    def filled(name: str) -> openpyxl.worksheet.worksheet.Worksheet:
        folder = tmp_path_factory.mktemp("filled")
        (folder / "list.csv").write_text(LIST)
        write_workbook(filling(folder / "list.csv", CARDS[name]()), folder / "out.xlsx", True)
        return openpyxl.load_workbook(folder / "out.xlsx", data_only=True)["Aircraft"]

    return filled


@pytest.fixture(scope="module")
def rows_of(sheet_of: Callable[[str], Any]) -> Callable[[str], Rows]:
    """The sheet's cells as a spreadsheet program hands them over; not to be changed."""
    return cache(lambda name: [list(row) for row in sheet_of(name).iter_rows(max_col=9, values_only=True)])


@EACH
def test_all_that_the_chain_reads_of_a_card_is_in_the_range(name: str, rows_of: Callable[[str], Rows]) -> None:
    """Every figure, carried or not, every edge, page and setting. Units are converted there and back: 1e-12."""
    card, aeroplane = CARDS[name](), aeroplane_of(rows_of(name))
    assert aeroplane.chain is card.chain and aeroplane.without_reach == frozenset()
    inputs = [item for item in card.chain.inputs if item.where == "card" and item.key not in OF_THE_DAY]
    assert sum(item.kind == "range" for item in inputs) > 15
    for item in inputs:
        np.testing.assert_allclose(aeroplane.values[item.key], card.values[item.key], rtol=1e-12, err_msg=item.key)


@pytest.mark.parametrize("function", [f for f in FUNCTIONS if f.arguments[0].key == "aircraft"], ids=lambda f: f.name)
def test_every_function_answers_by_range_as_by_name(function: Function, rows_of: Callable[[str], Rows]) -> None:
    """Random arguments for the shipped cards; a search stops short of the last digits."""
    dice, numbers = random.Random(function.name), 0
    for _ in range(4 if function.ask else 40):
        cells = random_arguments(function, dice)
        assert cells[0] in shipped_cards()
        one, other = call(function, *cells), call(function, rows_of(cells[0]), *cells[1:])
        if isinstance(one, float):
            numbers += 1
            assert other == pytest.approx(one, rel=1e-7 if function.ask else 1e-9, abs=1e-9), cells
        else:
            assert one == other, cells
    assert numbers > 0 or function.unit is None or function.ask


def test_the_rows_are_folded_and_not_printed(sheet_of: Callable[[str], Any]) -> None:
    sheet = sheet_of("ridge-runner")
    heading = next(cell.row for cell in sheet["A"] if cell.value == AS_ROWS)
    area = sheet.print_area.replace("$", "").split(":")[1]
    assert area == f"I{heading - 2}"
    for row in range(1, sheet.max_row + 1):
        dimension = sheet.row_dimensions[row]
        assert bool(dimension.hidden) == (dimension.outlineLevel == 1) == (row > heading)
    assert not sheet.sheet_properties.outlinePr.summaryBelow and sheet.row_dimensions[heading].collapsed
    told = next(row for row in sheet.iter_rows() if row[0].value == TABLES)
    assert told[1].value == "take-off, landing, climb" and f"A1:I{sheet.max_row}," in told[4].value


def test_a_card_without_tables_has_no_such_rows(tmp_path: Path) -> None:
    (tmp_path / "list.csv").write_text(LIST)
    write_workbook(filling(tmp_path / "list.csv", load(BARE + TAKEOFF_POINTS + LANDING_POINTS)), tmp_path / "out.xlsx", True)
    sheet = openpyxl.load_workbook(tmp_path / "out.xlsx")["Aircraft"]
    assert not {AS_ROWS, TABLES} & {cell.value for cell in sheet["A"]} and not sheet.print_area


def starting(rows: Rows, label: str) -> list[int]:
    """Where rows of a label stand."""
    found = [i for i, row in enumerate(rows) if str(row[0]).split(": ")[0] == label]
    assert found
    return found


def verdict(rows: Rows) -> Any:
    return call(BY_NAME["TAKEOFF_VERDICT"], rows, 1000, "10", 800, 2400, 1008, 31, 1.5, "grass", "part-cat-b")


@pytest.mark.parametrize("label", [
    "Take-off tables, figures", "Take-off tables, temperatures", "Landing tables, pressure altitudes", "Climb tables, page 1",
    "Landing tables, page 1", "Landing tables, pages", "Climb tables, page 2",
    "Take-off tables, setting 2", "Take-off, roll [m], page 2, line 3", "Take-off, over 50 ft [m], page 1, line 1",
    "Climb, rate of climb [ft/min], page 2, line 4",
])  # fmt: skip
def test_a_row_that_lacks_is_told(label: str, rows_of: Callable[[str], Rows]) -> None:
    rows = rows_of("ridge-runner")
    there = starting(rows, label)
    said = verdict([row for i, row in enumerate(rows) if i not in there])
    assert said.startswith(f'Aircraft: the range has no row "{label}"; give the whole Aircraft sheet, columns A to I')


@pytest.mark.parametrize("name", ["ridge-runner", "rolls alone", "climb alone"])
def test_a_range_that_ends_too_soon_is_told(name: str, rows_of: Callable[[str], Rows]) -> None:
    """Wherever it ends from the row that tells of the tables on: no answer, never one of fewer tables."""
    rows = rows_of(name)
    assert verdict(rows) in ("suitable", "marginal")
    first = starting(rows, TABLES)[0] + 1
    for count in range(first, len(rows)):
        assert verdict(rows[:count]).startswith("Aircraft: "), count
    assert all(verdict([row[:width] for row in rows]).startswith("Aircraft: ") for width in range(1, 9))


@pytest.mark.parametrize(("label", "column", "cell", "said"), [
    (TABLES, 1, "take-off, gliding", f'"{TABLES}": take-off, landing, climb or some of these'),
    (TABLES, 1, None, f'"{TABLES}": take-off, landing, climb or some of these'),
    ("Take-off tables, figures", 1, "rolling", '"Take-off tables, figures": roll or over 50 ft is expected'),
    ("Climb tables, figures", 1, "roll", '"Climb tables, figures": rate of climb is expected'),
    ("Climb tables, figures", 1, None, '"Climb tables, figures": rate of climb is expected'),
    ("Climb tables, pages", 1, 1.5, '"Climb tables, pages": a whole number of pages'),
    ("Climb tables, pages", 1, 1e9, '"Climb tables, pages": a whole number of pages'),
    ("Take-off tables, temperatures", 2, "", '"Take-off tables, temperatures" lacks a number'),
    ("Take-off tables, temperatures", 2, 40.0, '"Take-off tables, temperatures": two numbers or more that rise'),
    ("Landing tables, pressure altitudes", 1, "#N/A", '"Landing tables, pressure altitudes" lacks a number'),
    ("Take-off tables, page 2", 1, True, '"Take-off tables, page 2" lacks a number'),
    ("Take-off tables, page 2", 1, 3000.0, "the pages of the take-off tables must rise in flap and mass"),
    ("Take-off tables, setting 1", 2, None, '"Take-off tables, setting 1" lacks a number'),
    ("Take-off, roll [m], page 2, line 3", 3, "", '"Take-off, roll [m], page 2, line 3" has no figure at its temperature 3'),
    ("Take-off, roll [m], page 2, line 3", 5, None, '"Take-off, roll [m], page 2, line 3" has no figure at its temperature 5'),
    ("Take-off, roll [m], page 2, line 3", 1, "about 200", "has no figure at its temperature 1"),
    ("Take-off, roll [m], page 2, line 3", 1, f"two hundred{CARRIED}", "has no figure at its temperature 1"),
    ("Take-off, roll [m], page 2, line 3", 1, f"nan{CARRIED}", "has no figure at its temperature 1"),
    ("Take-off, roll [m], page 2, line 3", 1, float("inf"), "has no figure at its temperature 1"),
    ("Take-off, roll [m], page 2, line 3", 1, True, "has no figure at its temperature 1"),
])  # fmt: skip
def test_what_is_wrong_in_a_row_is_told(label: str, column: int, cell: Any, said: str,
                                        rows_of: Callable[[str], Rows]) -> None:  # fmt: skip
    rows = copy.deepcopy(rows_of("ridge-runner"))
    rows[starting(rows, label)[0]][column] = cell
    answer = verdict(rows)
    assert answer.startswith("Aircraft: ") and said in answer


def test_a_range_is_read_once_for_the_same_content(rows_of: Callable[[str], Rows]) -> None:
    """The same rows again give what was made of them; a figure changed, and TRUE for 1, does not."""
    rows = rows_of("ridge-runner")
    first = aeroplane_of(rows)
    assert aeroplane_of(copy.deepcopy(rows)) is first
    changed = copy.deepcopy(rows)
    changed[starting(rows, "Take-off, roll [m], page 1, line 1")[0]][1] += 1.0
    assert aeroplane_of(changed).values["takeoff_roll_table"][0, 0, 0] == first.values["takeoff_roll_table"][0, 0, 0] + 1.0
    one, true = copy.deepcopy(rows), copy.deepcopy(rows)
    at = starting(rows, "Screen speed over stall")[0]
    one[at][1] = one[at][3] = 1.0
    true[at][1] = true[at][3] = True
    assert verdict(one) in ("suitable", "marginal", "unsuitable")
    assert verdict(true) == 'Aircraft: "Screen speed over stall" has no number in the range'
