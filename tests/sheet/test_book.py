"""The filled workbook, recalculated by LibreOffice and ironcalc against the arrays, before and after edits in it."""

import re
from pathlib import Path

import numpy as np
import openpyxl
import pytest

from stripcheck.card import Card, load_card
from stripcheck.caution import CAUTION
from stripcheck.day import read_day
from stripcheck.register import read_list
from stripcheck.rules import load_rules
from stripcheck.sheet.book import Filling, fill, write_workbook
from tests import ironcalc_book
from tests.aircraft import trial_heron, trial_mule
from tests.manual_cards import everything
from tests.sheet.messy import write_list
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import differences, formula_cells, same, scale_of

DAY = {"isa_deviation": 12, "qnh": 1007, "wind_from": 290, "wind_speed": 11, "humidity": 40}


def filling(path: Path, card: str | Card, rules: str = "au-small", day: dict | None = None, **chosen) -> Filling:
    card = load_card(card) if isinstance(card, str) else card
    usual = {key: card.values[key] for key in ("mass_takeoff", "mass_landing", "takeoff_flap", "landing_flap")}
    names = {key: next(flap.name for flap in card.flaps if flap.deflection == usual[key])
             for key in ("takeoff_flap", "landing_flap")}  # fmt: skip
    return fill(read_list(path), card, read_day(day or DAY), load_rules(rules), {**usual, **chosen}, names)


@pytest.fixture(scope="module")
def messy_list(tmp_path_factory):
    return write_list(tmp_path_factory.mktemp("messy") / "messy.csv", 120, seed=4)


@pytest.mark.parametrize("card", ["ridge-runner", "high-mule"])
@pytest.mark.parametrize("full", [True, False], ids=["full", "short"])
def test_every_formula_recalculated_is_the_array_s_value(office, messy_list, tmp_path, card, full):
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, card), path, full)
    book = office.open(path)
    book.recalculate()
    count, found = differences(book, path)
    book.close()
    assert found == []
    assert count > (20_000 if full else 5_000)


def test_the_messy_list_meets_every_verdict_and_many_reasons(messy_list):
    made = filling(messy_list, "ridge-runner")
    reasons = set()
    for side in ("takeoff", "landing"):
        steps = {step.key: step for step in made.chain.steps}
        assert len(set(made.shown(steps[f"{side}_verdict"]))) == 4
        reasons |= set(made.shown(steps[f"{side}_reason"]))
    assert len(reasons) > 25


def cells_of(path: Path, sheet: str, labels: str) -> dict[str, str]:
    """Value cell of each label on a page of labels and values."""
    rows = openpyxl.load_workbook(path)[sheet].iter_rows(min_col=1, max_col=1)
    return {str(row[0].value): f"{labels}{row[0].row}" for row in rows if row[0].value}


def strips_of(path: Path, rows: list, header: str) -> list:
    """A column of the Strips sheet, by its header, out of recalculated rows that begin at row 1."""
    headers = [cell.value for cell in openpyxl.load_workbook(path)["Strips"][3]]
    return [row[headers.index(header)] for row in rows[3:]]


@pytest.mark.parametrize("card", ["ridge-runner", "high-mule"])
def test_edits_in_the_workbook_give_what_python_gives(office, messy_list, tmp_path, card):
    """Mass, flap, temperature and rules changed in the sheet, then all steps of all rows against fresh arrays."""
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, card), path, True)
    aircraft, day, rules = (cells_of(path, sheet, "B") for sheet in ("Aircraft", "Day", "Rules"))
    flap = load_card(card).flaps[2]
    mass = 0.9 * load_card(card).values["max_takeoff_mass"]
    book = office.open(path)
    book.set("Aircraft", {aircraft["Take-off mass"]: mass, aircraft["Landing mass"]: mass - 50.0,
                          aircraft["Take-off flap"]: flap.name})  # fmt: skip
    book.set("Day", {day["ISA deviation"]: None, day["Temperature"]: 28.0, day["Temperature taken at"]: 1500.0,
                     day["Wind"]: 4.0, day["Ground condition"]: "wet"})  # fmt: skip
    book.set("Rules", {rules["Take-off safety factor"]: 1.4, rules["Landing factor, long distances"]: 1.5,
                       rules["Greatest mean slope"]: None, rules["Landing, each 1 % downhill"]: 5.0})  # fmt: skip
    book.recalculate()
    edited = filling(messy_list, card, day={**{k: v for k, v in DAY.items() if k != "isa_deviation"}, "temperature": 28.0,
                                            "temperature_elevation": 1500.0, "wind_speed": 4.0, "day_condition": "wet"},
                     mass_takeoff=mass, mass_landing=mass - 50.0, takeoff_flap=flap.deflection)  # fmt: skip
    edited.rules.values.update(takeoff_factor=1.4, landing_factor_long=1.5, greatest_slope=np.nan, downslope_landing=0.05)
    edited = fill(edited.directions, edited.card, edited.day, edited.rules, edited.chosen, edited.flap_names)
    fresh = tmp_path / "fresh.xlsx"
    write_workbook(edited, fresh, True)
    expected = {(sheet, where): value for sheet, cells in formula_cells(fresh).items() for where, _, _, value in cells}
    rows = book.values("Strips", openpyxl.load_workbook(path)["Strips"].dimensions)
    book.close()
    headers = [cell.value for cell in openpyxl.load_workbook(path)["Strips"][3]]
    wrong = [
        f"{headers[column - 1]}, row {row}"
        for where, row, column, _ in formula_cells(path)["Strips"]
        if not same(rows[row - 1][column - 1], expected["Strips", where], scale_of(headers[column - 1]))
    ]
    assert wrong == []


def test_a_surface_changed_in_the_sheet_changes_the_verdict(office, tmp_path):
    path = tmp_path / "list.csv"
    path.write_text("Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]\nAAA,09/27,700,grass,500,0\n")
    out = tmp_path / "out.xlsx"
    write_workbook(filling(path, "ridge-runner", "part-cat-b", {"temperature": 15}), out, True)
    headers = [cell.value for cell in openpyxl.load_workbook(out)["Strips"][3]]
    letter = openpyxl.utils.get_column_letter
    surface, verdict = (letter(headers.index(name) + 1) for name in ("Surface", "Take-off verdict"))
    book = office.open(out)
    book.recalculate()
    before = book.value("Strips", f"{verdict}4")
    book.set("Strips", {f"{surface}4": "snow"})
    book.recalculate()
    after = book.value("Strips", f"{verdict}4"), book.value("Summary", "P15")
    book.close()
    assert before == "suitable"
    assert after[0] == "not assessed"


def test_sorted_strips_keep_their_summary(office, messy_list, tmp_path):
    """The summary finds its two directions by key, wherever somebody has sorted them to."""
    path = tmp_path / "list.csv"
    path.write_text("Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]\n"
                    "AAA,09/27,900,grass,500,0\nBBB,18/36,250,grass,500,0\n")  # fmt: skip
    out = tmp_path / "out.xlsx"
    write_workbook(filling(path, "ridge-runner", "part-cat-b", {"temperature": 15}), out, True)
    sheet = openpyxl.load_workbook(out)["Strips"]
    headers = [cell.value for cell in sheet[3]]
    book = office.open(out)
    swapped = {}
    for name in ("Key", "Usable for take-off [m]", "Usable for landing [m]", "Length [m]"):
        column = openpyxl.utils.get_column_letter(headers.index(name) + 1)
        for row, other in ((4, 6), (5, 7), (6, 4), (7, 5)):
            swapped[f"{column}{row}"] = sheet[f"{column}{other}"].value
    book.set("Strips", swapped)
    book.recalculate()
    verdicts = [book.value("Summary", f"J{row}") for row in (15, 16)]
    book.close()
    assert verdicts == ["in and out", "neither in nor out"]


@pytest.mark.parametrize("card", ["ridge-runner", "high-mule"])
def test_an_independent_engine_agrees_on_a_sample(messy_list, tmp_path, card):
    """ironcalc, an engine of its own, recalculates a short list."""
    path = tmp_path / "out.xlsx"
    few = tmp_path / "few.csv"
    few.write_text("\n".join(messy_list.read_text().splitlines()[:25]))
    write_workbook(filling(few, card), path, True)
    book = ironcalc_book.Book(path)
    book.recalculate()
    count, found = differences(book, path)
    assert found == []
    assert count > 4_000


def test_package_is_sound_and_says_the_caution_on_every_sheet(messy_list, tmp_path):
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, "high-mule"), path, True)
    assert package_faults(path) == []
    for sheet in openpyxl.load_workbook(path).worksheets:
        texts = [cell.value for row in sheet.iter_rows(max_row=3) for cell in row]
        assert CAUTION in texts, sheet.title


def test_text_of_the_list_is_never_a_formula(messy_list, tmp_path):
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, "ridge-runner"), path, True)
    sheet = openpyxl.load_workbook(path)["Strips"]
    headers = [cell.value for cell in sheet[3]]
    carried = [sheet.cell(row, headers.index("Caretaker") + 1) for row in range(4, sheet.max_row + 1)]
    assert "=1+1" in {cell.value for cell in carried}
    assert {cell.data_type for cell in carried} <= {"s", "inlineStr", "n"}
    assert all(cell.data_type != "f" for cell in carried)


@pytest.mark.parametrize(
    ("card", "most"),
    [(trial_heron, 24), (trial_mule, 24), (lambda: load_card("high-mule"), 42), (lambda: everything(False), 54)],
)
def test_short_detail_has_few_live_columns(messy_list, tmp_path, card, most):
    """24 for a card of single figures; what the manual's tables and corrections add is bounded too."""
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, card()), path, False)
    live = {column for _, _, column, _ in formula_cells(path)["Strips"]}
    assert 15 < len(live) <= most


# functions that Excel 2010, Calc and others know, and that mean the same in all of them
PLAIN_FUNCTIONS = {
    "ABS", "AND", "CHOOSE", "COLUMNS", "COS", "COUNT", "COUNTIF", "EXP", "IF", "IFERROR", "INDEX", "INT", "ISNUMBER", "LN",
    "MATCH", "MAX", "MIN", "NOT", "OR", "ROUNDUP", "ROW", "ROWS", "SIN", "SQRT", "SUMPRODUCT",
}  # fmt: skip


@pytest.mark.parametrize(
    "card",
    [lambda: load_card("ridge-runner"), lambda: load_card("high-mule"), everything, lambda: everything(False)],
    ids=["ridge-runner", "high-mule", "everything, fixed pitch", "everything, constant speed"],
)
@pytest.mark.parametrize("full", [True, False], ids=["full", "short"])
def test_formulas_keep_to_plain_functions_and_to_the_limits(messy_list, tmp_path, card, full):
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, card()), path, full)
    used, longest, deepest = set(), 0, 0
    for sheet in openpyxl.load_workbook(path).worksheets:
        for row in sheet.iter_rows(max_row=40):
            for text in (cell.value for cell in row if cell.data_type == "f"):
                bare = re.sub(r'"[^"]*"', '""', text)
                used |= set(re.findall(r"([A-Z][A-Z0-9.]*)\(", bare))
                longest, deepest = max(longest, len(text)), max(deepest, nesting(bare))
    assert used <= PLAIN_FUNCTIONS
    assert 1_000 < longest <= 8_192
    assert 10 < deepest <= 64


def nesting(text: str) -> int:
    """How many functions are nested in a formula."""
    deepest, open_calls = 0, []
    for before, sign in zip(" " + text, text, strict=False):
        if sign == "(":
            open_calls.append(before.isalnum())
            deepest = max(deepest, sum(open_calls))
        elif sign == ")":
            open_calls.pop()
    return deepest
