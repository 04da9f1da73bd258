"""Workbooks whose verdicts are formulas of a door: that they hold what the door gives, and what stays a value."""

from __future__ import annotations

import math
import re
from functools import cache
from importlib.resources import files
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import openpyxl
import pytest
from openpyxl.utils import get_column_letter

from stripcheck.card import load_card
from stripcheck.cli import main
from stripcheck.doors.call import call
from stripcheck.doors.columns import FORMULAS, PARTS, SIDES
from stripcheck.doors.functions import BY_NAME
from tests.aircraft import HERON
from tests.ironcalc_book import Book
from tests.manual_cards import everything_text
from tests.office import Office
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import MARGIN_SCALE, same
from tests.sheet.test_book import cells_of
from tests.sheet.test_manual_tables import EDITS, FULL, TEN, Place, manual_cells

LIST = str(files("stripcheck") / "scenario" / "lantern-range.csv")
FIRST_ROW = 4
DAY = ("--isa-dev", "15", "--qnh", "1009", "--wind", "310/8", "--quiet")


@cache
def folder() -> TemporaryDirectory[str]:
    return TemporaryDirectory()


def filled(formulas: str, card: str = "heron") -> Path:
    return _filled(formulas, card)


@cache
def _filled(formulas: str, card: str) -> Path:
    place = Path(folder().name)
    text = {"heron": HERON, "everything": everything_text()}.get(card)
    if text:
        (place / f"{card}.toml").write_text(text, encoding="utf-8")
    out = place / f"{card}-{formulas}.xlsx"
    named = str(place / f"{card}.toml") if text else card
    arguments = ["fill", LIST, "--card", named, "--rules", "part-cat-b", *DAY, "--formulas", formulas, "--detail", "full"]
    assert main([*arguments, "-o", str(out)]) == 0
    return out


def cells(path: Path, *, values: bool) -> dict[str, list[Any]]:
    """Columns of the Strips sheet by header."""
    sheet = openpyxl.load_workbook(path, data_only=values)["Strips"]
    return {column[2].value: [cell.value for cell in column[3:]] for column in sheet.iter_cols()}


def door_formulas(path: Path) -> list[tuple[str, str, str, Any]]:
    """Cell, function, arguments, and the value kept beside it, of every formula that calls a function."""
    book, shown = openpyxl.load_workbook(path)["Strips"], openpyxl.load_workbook(path, data_only=True)["Strips"]
    found = []
    for row in book.iter_rows(min_row=FIRST_ROW):
        for cell in row:
            text = getattr(cell.value, "text", cell.value)
            if cell.data_type == "f" or hasattr(cell.value, "text"):
                match = re.fullmatch(r"=STRIP[_.](\w+)\((.*)\)", text)
                assert match, text
                found.append((cell.coordinate, match[1], match[2], shown[cell.coordinate].value))
    return found


def argument_values(shown: openpyxl.Workbook, text: str) -> list[Any]:
    """What the references of a call hold, as a spreadsheet program hands it over."""
    values: list[Any] = []
    for part in re.findall(r'IF\([^)]*\)|"[^"]*"|[^,]+', text):
        if part.startswith('"'):
            values.append(part.strip('"'))
            continue
        reference = part
        if part.startswith("IF("):
            own, day = re.fullmatch(r'IF\((.*)="",(.*),.*\)', part).groups()  # type: ignore[union-attr]
            reference = own if shown["Strips"][own.replace("$", "")].value else day
        sheet, _, area = reference.rpartition("!")
        found = shown[sheet or "Strips"][area.replace("$", "")]
        if isinstance(found, tuple):
            values.append([[float(c.value) if type(c.value) is int else c.value for c in row] for row in found])
        else:
            values.append(found.value)
    return values


@pytest.mark.parametrize(("formulas", "card"), [
    ("excel", "heron"), ("calc", "heron"), ("lambda", "heron"), ("excel", "ridge-runner"), ("calc", "ridge-runner"),
    ("excel", "high-mule"), ("excel", "everything"), ("calc", "everything"),
])  # fmt: skip
def test_every_door_formula_s_kept_value_is_what_the_door_gives(formulas: str, card: str) -> None:
    path = filled(formulas, card)
    assert package_faults(path) == []
    shown = openpyxl.load_workbook(path, data_only=True)
    found = door_formulas(path)
    assert {name for _, name, _, _ in found} == {f"{side}_{part}".upper() for side in SIDES for part in PARTS}
    assert len(found) > 60
    for where, name, text, kept in found:
        got = call(BY_NAME[name], *argument_values(shown, text))
        if isinstance(got, str) or isinstance(kept, str):
            assert got == kept, where
        else:
            assert math.isclose(got, kept, rel_tol=1e-9, abs_tol=1e-6), where


@pytest.mark.parametrize("formulas", [kind for kind in FORMULAS if kind not in ("native", "lambda")])
@pytest.mark.parametrize("card", ["heron", "ridge-runner", "everything"])
def test_all_values_are_those_of_the_native_workbook(formulas: str, card: str) -> None:
    """But for a margin that is none, in whose place the function says why."""
    native, other = cells(filled("native", card), values=True), cells(filled(formulas, card), values=True)
    assert native.keys() == other.keys()
    for header, column in native.items():
        for one, two in zip(column, other[header], strict=True):
            if not one and "margin [m]" in header:
                assert two is None or isinstance(two, str)
            else:
                assert one == two or (not one and not two), header


def test_none_holds_no_formula_at_all() -> None:
    path = filled("none")
    book = openpyxl.load_workbook(path)
    assert [cell.coordinate for sheet in book for row in sheet.iter_rows() for cell in row if cell.data_type == "f"] == []
    assert package_faults(path) == []
    shown = openpyxl.load_workbook(filled("native"), data_only=True)
    for name in ("Summary", "Aircraft", "Rules", "Day"):
        for row in shown[name].iter_rows():
            for cell in row:
                plain, live = book[name][cell.coordinate].value, cell.value
                near = isinstance(plain, float) and math.isclose(plain, live, rel_tol=1e-15)  # 15 to 17 digits are written
                assert near or (plain or None) == (live or None), (name, cell.coordinate)


def test_lambda_workbook_follows_its_cells_as_the_native_one_does() -> None:
    """Recalculated as filled, and again with another mass and flap: the same verdict, reason and margin in both."""
    books = {kind: Book(filled(kind)) for kind in ("native", "lambda")}
    sheet = openpyxl.load_workbook(filled("lambda"))["Aircraft"]
    places = {cell.value: cell.row for cell in sheet["A"] if cell.value in ("Take-off mass", "Landing mass", "Landing flap")}
    flaps = next(cell.row for cell in sheet["A"] if cell.value == "Setting") + 1
    last = sheet[f"A{flaps + 1}"].value
    headers = {cell.value: cell.column_letter for cell in openpyxl.load_workbook(filled("native"))["Strips"][3]}
    compared = 0
    verdicts = set()
    for masses in ((1110, 1110), (850, 900)):
        for book in books.values():
            book.set("Aircraft", {f"B{places['Take-off mass']}": masses[0], f"B{places['Landing mass']}": masses[1],
                                  f"B{places['Landing flap']}": last})  # fmt: skip
        for where, name, _, _ in door_formulas(filled("lambda")):
            column = where.rstrip("0123456789")
            header = next(text for text, letter in headers.items() if letter == column)
            native, other = (book.value("Strips", where) for book in books.values())
            if native in (None, ""):
                assert "margin" in header and isinstance(other, str)
            elif isinstance(native, str):
                assert native == other, (where, name)
                verdicts.add(native)
            else:
                assert math.isclose(native, other, rel_tol=1e-9, abs_tol=1e-6), (where, name)
            compared += 1
    assert compared > 150 and {"suitable", "marginal", "unsuitable"} <= verdicts


def test_native_formulas_and_names_give_the_same_for_every_kind_of_function() -> None:
    """Each function that is one step of a filled workbook, on the cells of its directions."""
    lambdas, native = Book(filled("lambda")), Book(filled("native"))
    workbook = openpyxl.load_workbook(filled("lambda"))
    headers = {cell.value: cell.column_letter for cell in workbook["Strips"][3]}
    chain = load_card(str(Path(folder().name) / "heron.toml")).chain
    letters = {}
    for step in chain.steps:
        label = f"{step.label}, {step.symbol}" if step.symbol else step.label
        letters[step.key] = headers.get(f"{label} [{step.unit}]" if step.unit else label)
    found = [(int(re.sub("[A-Z]", "", where)), name, text) for where, name, text, _ in door_formulas(filled("lambda"))]
    row = next(row for row, name, _ in found if name == "TAKEOFF_MARGIN")
    call_of = {name: text for at, name, text in found if at == row}
    takeoff, landing = (call_of[f"{side.upper()}_MARGIN"].split(",") for side in SIDES)
    air = f"{takeoff[4]},{takeoff[5]},{takeoff[6]}"
    counted = f"${letters['wind']}{row}"  # without a rule set all of the wind counts
    run = {side: ",".join([*given[:3], *given[4:9], *given[10:-1], counted])
           for side, given in zip(SIDES, (takeoff, landing), strict=True)}  # fmt: skip
    days = {cell.value: cell.row for cell in workbook["Day"]["A"]}
    wind = f"Day!$B${days['Wind from']},Day!$B${days['Wind']},${headers['Heading [°]']}{row}"
    calls = {
        "pressure_altitude": f"STRIP_PRESSURE_ALT({takeoff[4]},{takeoff[5]})",
        "density_altitude": f"STRIP_DENSITY_ALT({air},0)", "sigma": f"STRIP_DENSITY_RATIO({air},0)",
        "headwind": f"STRIP_HEADWIND({wind})", "crosswind": f"STRIP_CROSSWIND({wind})",
        "takeoff_roll": f"STRIP_TAKEOFF_ROLL({run['takeoff']})", "landing_roll": f"STRIP_LANDING_ROLL({run['landing']})",
        "climb_gradient": f"STRIP_CLIMB_GRADIENT({','.join(takeoff[:3])},{air})",
        "rolling": f"STRIP_ROLLING({takeoff[8]},{','.join(takeoff[10:-1])})",
        "braking": f"STRIP_BRAKING({takeoff[8]},{','.join(takeoff[10:-1])})",
    }  # fmt: skip
    sheet = lambdas.sheets().index("Strips")
    for at, text in enumerate(calls.values()):
        lambdas._model.set_user_input(sheet, row, 200 + at, "=" + text)
    for book in (lambdas, native):
        book.recalculate()
    for at, key in enumerate(calls):
        got = lambdas.value("Strips", f"{get_column_letter(200 + at)}{row}")
        assert letters[key] and got == pytest.approx(native.value("Strips", f"{letters[key]}{row}"), rel=1e-9), key


@pytest.mark.parametrize(("arguments", "words"), [
    (["--card", "ridge-runner", "--formulas", "lambda"], "do not read the manual's tables and corrections of this card"),
    (["--card", "ridge-runner", "--formulas", "excel", "--humidity", "60"], "take no humidity"),
])  # fmt: skip
def test_what_a_door_can_t_say_is_refused(
    arguments: list[str], words: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out.xlsx"
    assert main(["fill", LIST, "--rules", "part-cat-b", *DAY, *arguments, "-o", str(out)]) == 2
    assert words in capsys.readouterr().err
    assert not out.exists()


def test_directions_whose_obstacles_a_function_does_not_know_hold_values() -> None:
    columns = cells(filled("excel"), values=False)
    heights = columns["Obstacle on climb-out, height [ft]"]
    assert any(heights)
    for height, verdict in zip(heights, columns["Take-off verdict"], strict=True):
        assert not (height and str(verdict).startswith("="))


# edits on the sheet Manual, and what they are called in a failing test's name
TYPED_OVER: dict[str, dict[Place, float | None]] = {
    "typed over, filled and deleted": EDITS,
    "longer everywhere": {
        (side, page, figure, height, heat): 900.0 if figure == "distance" else 610.0
        for side, page in [("takeoff", TEN), ("takeoff", FULL), *(("landing", f"flap 30, {kg} kg") for kg in ("1,110", "900"))]
        for figure in ("roll", "distance") for height in (0.0, 2000.0, 4000.0) for heat in (10.0, 20.0, 30.0)
    },
    "all of the take-off deleted": {
        ("takeoff", page, figure, height, heat): None
        for page in (TEN, FULL) for figure in ("roll", "distance")
        for height in (0.0, 2000.0, 3000.0, 4000.0, 6000.0, 8000.0, 9000.0)
        for heat in (-10.0, 0.0, 10.0, 15.0, 20.0, 30.0, 40.0)
    },
}  # fmt: skip


LOADED = {"Take-off mass": 960.0, "Landing mass": 1000.0, "Take-off flap": "20", "Landing flap": "20"}


@pytest.mark.parametrize(("edit", "loaded"), [*((edit, {}) for edit in TYPED_OVER), ("typed over, filled and deleted", LOADED)],
                         ids=[*TYPED_OVER, "edited, and another mass and flap"])  # fmt: skip
def test_figures_edited_on_the_manual_s_sheet_are_followed_by_the_functions(
    office: Office, tmp_path: Path, edit: str, loaded: dict[str, float | str]
) -> None:
    """Verdict, reason and margin from the range of the sheet Aircraft against the native columns of the same workbook, after
    LibreOffice has recalculated it."""
    native, found = filled("native", "everything"), door_formulas(filled("excel", "everything"))
    before = openpyxl.load_workbook(native, data_only=True)["Strips"]
    places = manual_cells(native)
    book = office.open(native)
    book.set("Manual", {places[place]: value for place, value in TYPED_OVER[edit].items() if place in places})
    book.set("Aircraft", {cells_of(native, "Aircraft", "B")[label]: value for label, value in loaded.items()})
    book.recalculate()
    book.save_as(tmp_path / "edited.xlsx")
    book.close()
    shown = openpyxl.load_workbook(tmp_path / "edited.xlsx", data_only=True)
    changed = 0
    for where, name, text, _ in found:
        got, native_value = call(BY_NAME[name], *argument_values(shown, text)), shown["Strips"][where].value
        if native_value in (None, ""):
            assert name.endswith("MARGIN") and isinstance(got, str), where
        else:
            assert same(got, native_value, MARGIN_SCALE), (where, name, got, native_value)
        changed += not same(native_value, before[where].value)
    assert len(found) > 60 and changed > 10


def test_a_temperature_deleted_on_the_manual_s_sheet_is_told(office: Office, tmp_path: Path) -> None:
    """It is not the end of the tables, nor 0 degrees."""
    native, found = filled("native", "ridge-runner"), door_formulas(filled("excel", "ridge-runner"))
    heats = next(cell for cell in openpyxl.load_workbook(native)["Manual"]["A"] if cell.value == "Pressure altitude [ft]").row
    book = office.open(native)
    book.set("Manual", {f"G{heats}": None})  # the last of five
    book.recalculate()
    book.save_as(tmp_path / "edited.xlsx")
    book.close()
    shown = openpyxl.load_workbook(tmp_path / "edited.xlsx", data_only=True)
    _, name, text, _ = found[0]
    said = call(BY_NAME[name], *argument_values(shown, text))
    assert said == 'Aircraft: "Take-off tables, temperatures" lacks a number in the range'
