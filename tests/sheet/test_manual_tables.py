"""The sheet Manual: tables of the manual typed over, filled and emptied in the workbook, against arrays of the card changed
alike; recalculated by LibreOffice and ironcalc."""

from collections.abc import Mapping
from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
import openpyxl
import pytest

from stripcheck.book_tables import BookTables
from stripcheck.card import Card
from stripcheck.sheet import styles
from stripcheck.sheet.book import write_workbook
from stripcheck.verdict import BEYOND, SUITABLE
from tests import ironcalc_book
from tests.aircraft import trial_heron
from tests.manual_cards import BARE, LANDING_POINTS, everything, load, table
from tests.sheet.messy import write_list
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import differences, formula_cells, same, scale_of
from tests.sheet.test_book import cells_of, filling

FOOT, ZERO = 0.3048, 273.15
KINDS = pytest.mark.parametrize("fixed", [True, False], ids=["fixed pitch", "constant speed"])
HEADINGS = {"Take-off": "takeoff", "Landing": "landing", "Climb": "climb"}
FIGURES = {"Roll [m]": "roll", "Over 50 ft [m]": "distance", "Rate of climb [ft/min]": "rate"}
Place = tuple[str, str, str, float, float]  # side, page as it is titled, figure, altitude [ft], temperature [deg C]


@pytest.fixture(scope="module")
def messy_list(tmp_path_factory):
    return write_list(tmp_path_factory.mktemp("messy") / "messy.csv", 30, seed=7)


@pytest.fixture(scope="module")
def written(messy_list, tmp_path_factory):
    """The workbooks of the cards with everything, by propeller and detail; tests open them and leave the files alone."""

    @cache
    def write(fixed: bool, full: bool) -> Path:
        path = tmp_path_factory.mktemp("written") / "out.xlsx"
        write_workbook(filling(messy_list, everything(fixed)), path, full)
        return path

    return write


def manual_cells(path: Path) -> dict[Place, str]:
    """Where each figure of each page stands, found by what somebody reads on the sheet."""
    found: dict[Place, str] = {}
    side = page = ""
    figures: dict[int, str] = {}
    heats: dict[int, float] = {}
    for row in openpyxl.load_workbook(path)["Manual"].iter_rows(min_row=4):
        first = str(row[0].value or "")
        if first.split(",")[0] in HEADINGS:
            side, page = HEADINGS[first.split(",")[0]], ""
        if first.startswith("Page: "):
            page = first.removeprefix("Page: ")
            figures = {cell.column: FIGURES[cell.value] for cell in row if cell.value in FIGURES}
        elif first == "Pressure altitude [ft]":
            heats = {cell.column: cell.value for cell in row[2:] if isinstance(cell.value, int | float)}
        elif first == "Flap setting":
            page = ""
        elif page and isinstance(row[0].value, int | float):
            for column, heat in heats.items():
                figure = figures[max(start for start in figures if start <= column)]
                found[side, page, figure, round(row[0].value, 3), round(heat, 3)] = row[column - 1].coordinate
    return found


def titled(card: Card, tables: BookTables) -> dict[str, int]:
    """Number of each page by its title."""
    names = {flap.deflection: flap.name for flap in card.flaps}
    return {f"flap {names[flap]}, {mass:,.0f} kg": number for number, (flap, mass) in enumerate(tables.pages)}


def with_figures(card: Card, changes: Mapping[Place, float | None]) -> Card:
    """The card with figures exchanged in its tables, its coefficients as they were; None where one was deleted.

    The carried figures of other holes stay what they were filled with, as the sheet says.
    """
    tables = dict(card.tables)
    for (side, page, figure, altitude, heat), value in changes.items():
        one = tables[side]
        place = (titled(card, one)[page], int(np.argmin(abs(one.altitudes - altitude * FOOT))),
                 int(np.argmin(abs(one.temperatures - ZERO - heat))))  # fmt: skip
        printed, filled = one.printed[figure].copy(), one.filled[figure].copy()
        unit = FOOT / 60.0 if figure == "rate" else 1.0
        if value is None:
            printed[place], filled[place] = np.nan, one.spare[figure][place]
        else:
            printed[place] = filled[place] = value * unit
        tables[side] = replace(one, printed={**one.printed, figure: printed}, filled={**one.filled, figure: filled})
    values = dict(card.values)
    for one in tables.values():
        values |= one.values(card.flaps)
    return replace(card, tables=tables, values=values)


@cache
def formulas_in(path: Path) -> dict:
    """`formula_cells` of a file that nothing changes any more."""
    return formula_cells(path)


@cache
def sizes_of(path: Path) -> dict[str, str]:
    return {sheet.title: sheet.dimensions for sheet in openpyxl.load_workbook(path).worksheets}


@cache
def headers_of(path: Path) -> list:
    return [cell.value for cell in openpyxl.load_workbook(path)["Strips"][3]]


def wrong_cells(book, path: Path, expected: Path, title: str = "Strips") -> list[str]:
    """Cells of a sheet that are not what another workbook was written with."""
    values = {where: value for where, _, _, value in formulas_in(expected)[title]}
    rows, headers = book.values(title, sizes_of(path)[title]), headers_of(path) if title == "Strips" else [""] * 500
    return [f"{headers[column - 1]} {where}: {rows[row - 1][column - 1]!r}, not {values[where]!r}"
            for where, row, column, _ in formulas_in(path)[title]
            if not same(rows[row - 1][column - 1], values[where], scale_of(headers[column - 1]))]  # fmt: skip


def errors_in(book, path: Path) -> list[str]:
    """Cells of any sheet that show an error."""
    return [f"{title} row {number}: {value}" for title, size in sizes_of(path).items()
            for number, row in enumerate(book.values(title, size), 1) for value in row if str(value).startswith("#ERR")]


# -- as filled ---------------------------------------------------------------------------------------------------------


@KINDS
@pytest.mark.parametrize("full", [True, False], ids=["full", "short"])
def test_a_card_with_everything_recalculated_is_the_array_s_value(office, written, fixed, full):
    """Tables of two flap settings with holes, climb tables, corrections: every formula of every sheet, and no error."""
    path = written(fixed, full)
    book = office.open(path)
    book.recalculate()
    count, found = differences(book, path)
    broken = errors_in(book, path)
    book.close()
    assert found == [] and broken == []
    assert count > (10_000 if full else 3_500)


ODD = (
    BARE
    + table("take-off roll and to 50 ft", ("-100 m", "700 m", "2000 m"), ("30 °F", "55 °F", "101 °F"),
            [[790, 880, 1030], [1010, np.nan, 1350], [1500, 1710, np.nan]],
            [[1500, 1610, 1830], [1800, np.nan, 2400], [3000, 3400, np.nan]], flap="10", unit="ft", mass="2447 lb")
    + table("take-off roll and to 50 ft", (0, 3000, 7000), (-7, 16, 37), [[150, 170, 190], [200, 221, 260], [290, 330, 390]],
            [[300, 340, 380], [380, 430, 515], [600, 710, 880]], flap="10", mass="913 kg")
    + LANDING_POINTS
).replace("'", '"')  # fmt: skip


def test_odd_units_and_axes_lose_nothing_on_the_sheet(office, messy_list, tmp_path):
    """Feet, degrees Fahrenheit and pounds, and figures put between others: cells show them with all their digits."""
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, load(ODD)), path, True)
    book = office.open(path)
    book.recalculate()
    count, found = differences(book, path)
    book.close()
    assert found == [] and count > 7_000


def test_an_independent_engine_agrees_on_a_sample(messy_list, tmp_path):
    path, few = tmp_path / "out.xlsx", tmp_path / "few.csv"
    few.write_text("\n".join(messy_list.read_text().splitlines()[:12]))
    write_workbook(filling(few, everything()), path, True)
    book = ironcalc_book.Book(path)
    book.recalculate()
    count, found = differences(book, path)
    assert found == [] and count > 5_000


def test_the_package_is_sound(written):
    assert package_faults(written(True, False)) == []


def test_the_sheet_shows_the_manual_s_figures_to_type_over(written):
    """Every printed figure on yellow, every hole blank on grey, each where its page, altitude and temperature say."""
    path, card = written(True, False), everything()
    sheet, cells = openpyxl.load_workbook(path)["Manual"], manual_cells(path)
    seen = 0
    for side, tables in card.tables.items():
        for page, number in titled(card, tables).items():
            for figure, grid in tables.printed.items():
                for (line, column), value in np.ndenumerate(grid[number]):
                    at = (round(float(tables.altitudes[line]) / FOOT, 3), round(float(tables.temperatures[column]) - ZERO, 3))
                    cell = sheet[cells[side, page, figure, *at]]
                    assert not cell.protection.locked
                    if np.isnan(value):
                        assert cell.value is None and cell.fill.fgColor == styles.BAND_FILL.fgColor
                    else:
                        shown = cell.value * (FOOT / 60.0 if figure == "rate" else 1.0)
                        assert shown == pytest.approx(value, rel=1e-12) and cell.fill.fgColor == styles.INPUT_FILL.fgColor
                    seen += 1
    assert seen == len(cells) > 150


def test_a_card_without_tables_has_no_such_sheet(messy_list, tmp_path):
    path = tmp_path / "out.xlsx"
    write_workbook(filling(messy_list, trial_heron()), path, False)
    assert "Manual" not in openpyxl.load_workbook(path).sheetnames


# -- edited ------------------------------------------------------------------------------------------------------------

TEN, TWENTY, FULL = "flap 10, 1,000 kg", "flap 20, 1,110 kg", "flap 10, 1,110 kg"
EDITS: dict[Place, float | None] = {
    ("takeoff", TEN, "distance", 2000.0, 20.0): 437.5,  # typed over
    ("takeoff", TEN, "roll", 4000.0, 30.0): 266.0,
    ("takeoff", FULL, "roll", 6000.0, 40.0): 560.0,  # a hole filled
    ("takeoff", FULL, "distance", 6000.0, 40.0): 1450.0,
    ("takeoff", FULL, "roll", 8000.0, 30.0): 640.0,  # a hole of which one figure alone is filled
    ("takeoff", TEN, "roll", 2000.0, 10.0): None,  # deleted among others
    ("takeoff", TEN, "distance", 2000.0, 10.0): None,
    ("takeoff", TEN, "roll", 0.0, 40.0): None,  # deleted at the edge
    ("takeoff", TEN, "distance", 0.0, 40.0): None,
    ("landing", "flap 30, 1,110 kg", "distance", 4000.0, 20.0): 466.0,
    ("landing", "flap 30, 900 kg", "distance", 8000.0, 40.0): None,
    ("climb", "flap up, 1,110 kg", "rate", 4000.0, 20.0): 455.0,
    ("climb", "flap up, 1,110 kg", "rate", 12000.0, 0.0): None,
}


@KINDS
@pytest.mark.parametrize("full", [True, False], ids=["full", "short"])
def test_figures_edited_in_the_sheet_give_what_python_gives(office, messy_list, written, tmp_path, fixed, full):
    """Typed over, filled and deleted, all at once: every step of every strip against arrays of the card changed alike."""
    path, fresh = written(fixed, full), tmp_path / "fresh.xlsx"
    write_workbook(filling(messy_list, with_figures(everything(fixed), EDITS)), fresh, full)
    cells = manual_cells(path)
    book = office.open(path)
    book.recalculate()
    before = wrong_cells(book, path, fresh)
    book.set("Manual", {cells[place]: value for place, value in EDITS.items()})
    book.recalculate()
    found = wrong_cells(book, path, fresh)
    broken = errors_in(book, path)
    book.close()
    assert found == [] and broken == []
    assert len(before) > 20  # the edits matter


@pytest.mark.parametrize(
    ("mass", "takeoff_flap", "landing_flap"),
    [(1105.0, "10", "30"), (1000.0, "up", "10"), (700.0, "20", "20")],
)
def test_another_mass_and_flap_read_other_pages(office, messy_list, written, tmp_path, mass, takeoff_flap, landing_flap):
    card, path, fresh = everything(), written(True, True), tmp_path / "fresh.xlsx"
    flaps = {flap.name: flap.deflection for flap in card.flaps}
    write_workbook(filling(messy_list, card, mass_takeoff=mass, mass_landing=mass - 30.0, takeoff_flap=flaps[takeoff_flap],
                           landing_flap=flaps[landing_flap]), fresh, True)  # fmt: skip
    aircraft = cells_of(path, "Aircraft", "B")
    book = office.open(path)
    book.set("Aircraft", {aircraft["Take-off mass"]: mass, aircraft["Landing mass"]: mass - 30.0,
                          aircraft["Take-off flap"]: takeoff_flap, aircraft["Landing flap"]: landing_flap})  # fmt: skip
    book.recalculate()
    found = wrong_cells(book, path, fresh)
    tables = wrong_cells(book, path, fresh, "Manual")
    book.close()
    assert found == [] and tables == []


def test_figures_edited_and_another_flap(office, messy_list, written, tmp_path):
    """The pages of the other flap, edited, count once that flap is chosen."""
    card, path, fresh = everything(), written(True, True), tmp_path / "fresh.xlsx"
    edits = {("takeoff", TWENTY, "distance", 3000.0, 15.0): 640.0, ("takeoff", TWENTY, "distance", 0.0, 15.0): None}
    twenty = next(flap.deflection for flap in card.flaps if flap.name == "20")
    write_workbook(filling(messy_list, with_figures(card, edits), takeoff_flap=twenty), fresh, True)
    cells = manual_cells(path)
    book = office.open(path)
    book.set("Manual", {cells[place]: value for place, value in edits.items()})
    book.set("Aircraft", {cells_of(path, "Aircraft", "B")["Take-off flap"]: "20"})
    book.recalculate()
    found = wrong_cells(book, path, fresh)
    book.close()
    assert found == []


@pytest.fixture
def one_strip(tmp_path) -> Path:
    path = tmp_path / "list.csv"
    path.write_text("Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]\nAAA,09/27,3000,paved,6000,0\n")
    return path


def column(book, path: Path, header: str) -> object:
    return book.value("Strips", f"{openpyxl.utils.get_column_letter(headers_of(path).index(header) + 1)}4")


@pytest.mark.parametrize("deleted", [None, "n/a"])
def test_a_figure_deleted_at_the_edge_is_beyond_the_book(office, one_strip, tmp_path, deleted):
    """6,000 ft and 40 deg C at 1,000 kg: with its figures suitable; once they are gone, or words stand for them, and so are
    those at 8,000 ft, which would tell that the manual goes so far, beyond the book by the 10 K to the next one, with the
    figure that the next one tells; typed in again, as it was."""
    card, path = everything(corrections=False), tmp_path / "out.xlsx"
    write_workbook(filling(one_strip, card, "manual-only", {"temperature": 40}, mass_takeoff=1000.0), path, True)
    cells = manual_cells(path)
    places = {figure: cells["takeoff", TEN, figure, 6000.0, 40.0] for figure in ("roll", "distance")}
    sheet = openpyxl.load_workbook(path)["Manual"]
    higher = [cells["takeoff", TEN, figure, 8000.0, 40.0] for figure in places]
    typed = {place: sheet[place].value for place in (*places.values(), *higher)}
    distance = "Take-off to 50 ft of the manual at its own conditions [m]"
    book = office.open(path)
    book.recalculate()
    assert column(book, path, "Take-off verdict") == SUITABLE
    assert column(book, path, distance) == pytest.approx(typed[places["distance"]], abs=1e-9)
    book.set("Manual", dict.fromkeys(typed, deleted))
    book.recalculate()
    assert column(book, path, "Take-off: limiting reason") == BEYOND
    assert column(book, path, "Take-off: hotter than the tables (colder: negative) [K]") == pytest.approx(10.0, abs=1e-9)
    tables = card.tables["takeoff"]
    spare = tables.spare["distance"][titled(card, tables)[TEN], int(np.argmin(abs(tables.altitudes - 6000.0 * FOOT))), -1]
    assert column(book, path, distance) == pytest.approx(spare, rel=1e-9)
    assert spare != pytest.approx(typed[places["distance"]], abs=0.5)
    book.set("Manual", typed)
    book.recalculate()
    assert column(book, path, "Take-off verdict") == SUITABLE
    book.close()


def test_one_figure_of_a_pair_deleted_is_beyond_the_book_too(office, one_strip, tmp_path):
    card, path = everything(corrections=False), tmp_path / "out.xlsx"
    write_workbook(filling(one_strip, card, "manual-only", {"temperature": 40}, mass_takeoff=1000.0), path, True)
    book = office.open(path)
    book.set("Manual", {manual_cells(path)["takeoff", TEN, "roll", height, 40.0]: None for height in (6000.0, 8000.0)})
    book.recalculate()
    assert column(book, path, "Take-off: limiting reason") == BEYOND
    book.close()


def test_a_figure_deleted_among_others_is_put_between_them(office, one_strip, tmp_path):
    """As it would be when the card is read: it is not in force any more, and the place is not beyond the book."""
    card, path = everything(corrections=False), tmp_path / "out.xlsx"
    write_workbook(filling(one_strip, card, "manual-only", {"temperature": 20}, mass_takeoff=1000.0), path, True)
    cells = manual_cells(path)
    line = [cells["takeoff", TEN, "distance", 6000.0, heat] for heat in (15.0, 20.0, 30.0)]
    sheet = openpyxl.load_workbook(path)["Manual"]
    before, figure, after = (sheet[cell].value for cell in line)
    book = office.open(path)
    book.set("Manual", {line[1]: figure + 100.0})
    book.recalculate()
    header = "Take-off to 50 ft of the manual at its own conditions [m]"
    assert column(book, path, header) == pytest.approx(figure + 100.0, abs=1e-9)
    book.set("Manual", {line[1]: None})
    book.recalculate()
    assert column(book, path, header) == pytest.approx(before + (after - before) * 5.0 / 15.0, rel=1e-9)
    assert column(book, path, "Take-off verdict") == SUITABLE
    book.close()


def test_a_hole_filled_in_the_sheet_is_in_the_book(office, tmp_path):
    """8,000 ft and 30 deg C at 1,110 kg: a hole until both of its figures are typed in, with those before it."""
    listed = tmp_path / "list.csv"
    listed.write_text("Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]\nAAA,09/27,3000,paved,8000,0\n")
    card, path = everything(corrections=False), tmp_path / "out.xlsx"
    write_workbook(filling(listed, card, "manual-only", {"temperature": 20}, mass_takeoff=1110.0), path, True)
    cells = manual_cells(path)
    book = office.open(path)
    book.recalculate()
    assert column(book, path, "Take-off: limiting reason") == BEYOND
    typed = {"roll": 560.0, "distance": 1450.0}
    for figure, value in typed.items():
        assert column(book, path, "Take-off: limiting reason") == BEYOND
        book.set("Manual", {cells["takeoff", FULL, figure, 8000.0, heat]: value for heat in (15.0, 20.0)})
        book.recalculate()
    assert column(book, path, "Take-off verdict") == SUITABLE
    assert column(book, path, "Take-off distance to 50 ft, unfactored, TOD [m]") == pytest.approx(1450.0, abs=1e-9)
    book.close()


def test_without_mass_or_flap_nothing_is_assessed_and_no_cell_breaks(office, one_strip, tmp_path):
    card, path = everything(), tmp_path / "out.xlsx"
    write_workbook(filling(one_strip, card, "manual-only", {"temperature": 20}), path, True)
    aircraft = cells_of(path, "Aircraft", "B")
    book = office.open(path)
    for changes in ({"Take-off mass": None}, {"Take-off mass": 1000.0, "Landing flap": "99"}, {"Landing flap": None},
                    {"Landing flap": "30", "Landing mass": "heavy"}):  # fmt: skip
        book.set("Aircraft", {aircraft[label]: value for label, value in changes.items()})
        book.recalculate()
        side = "Take-off" if "Take-off mass" in changes and changes["Take-off mass"] is None else "Landing"
        assert column(book, path, f"{side} verdict") == "not assessed"
        assert errors_in(book, path) == []
    book.close()


def test_all_figures_of_a_side_deleted_leave_nothing_suitable(office, one_strip, tmp_path):
    """The model stands for what is not there, and everything is beyond the book."""
    card, path = everything(corrections=False), tmp_path / "out.xlsx"
    write_workbook(filling(one_strip, card, "manual-only", {"temperature": 10}), path, True)
    cells = manual_cells(path)
    book = office.open(path)
    book.set("Manual", {cell: None for (side, *_), cell in cells.items() if side == "takeoff"})
    book.recalculate()
    assert column(book, path, "Take-off: limiting reason") == BEYOND
    assert column(book, path, "Landing verdict") == SUITABLE
    assert errors_in(book, path) == []
    book.close()
