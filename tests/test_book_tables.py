"""A manual's tables: grids as manuals print them, holes, common lines and columns, edges, and a sentence for each slip."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import openpyxl
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.interpolate import RegularGridInterpolator

from stripcheck.book_tables import NOWHERE, BookTables, fill_holes, read_grids, stack_tables
from stripcheck.errors import InputError
from stripcheck.toml_fields import Section
from tests.aircraft import trial_heron
from tests.manual_cards import table

FOOT, ZERO = 0.3048, 273.15
GREATEST = {"takeoff": 1110.0, "landing": 1050.0, "climb": 1110.0}
NAN = np.nan
HIGH, WARM = (0, 4000), (0, 20, 40)  # ft, deg C
ROLL = [[200, 220, 240], [280, 310, 350]]
WHOLE = [[400, 440, 480], [560, 620, 700]]
CLIMB = [[700, 600, 500], [400, 300, 200]]
WHERE = "trial.toml [book] [[table]] number"
HINT = ("a grid has a line of temperatures and below it a line for each pressure altitude, which stands in the first cell")


def read(text: str, side: str = "takeoff", folder: Path = Path("nowhere")) -> tuple[BookTables, list[str]]:
    """The tables of one side of a card's text, and the remarks made in reading."""
    top = Section("trial.toml", tomllib.loads(text))
    remarks: list[str] = []
    grids = read_grids(top.section("book"), trial_heron().flaps, GREATEST, folder, remarks)
    tables = stack_tables(grids, side)
    top.refuse_unknown()
    assert tables is not None
    return tables, [*remarks, *tables.remarks]


def roll(altitudes: Any = HIGH, temperatures: Any = WARM, grid: Any = ROLL, **entries: str) -> str:
    return table("take-off roll", altitudes, temperatures, grid, **{"flap": "10", "mass": "1110 kg", **entries})


def whole(altitudes: Any = HIGH, temperatures: Any = WARM, grid: Any = WHOLE, **entries: str) -> str:
    return table("take-off to 50 ft", altitudes, temperatures, grid, **{"flap": "10", "mass": "1110 kg", **entries})


def both(grid: Any = ROLL, other: Any = WHOLE, **entries: str) -> str:
    return table("take-off roll and to 50 ft", HIGH, WARM, grid, other, **{"flap": "10", "mass": "1110 kg", **entries})


def climb(grid: Any = CLIMB, **entries: str) -> str:
    return table("rate of climb", HIGH, WARM, grid, **{"flap": "up", "mass": "1110 kg", **entries})


# -- what is read ------------------------------------------------------------------------------------------------------


def test_a_typed_table() -> None:
    tables, remarks = read(both())
    assert remarks == [] and tables.side == "takeoff" and set(tables.printed) == {"roll", "distance"}
    np.testing.assert_allclose(tables.altitudes, [0.0, 4000.0 * FOOT], rtol=0, atol=1e-9)
    np.testing.assert_allclose(tables.temperatures, [ZERO, ZERO + 20.0, ZERO + 40.0], rtol=0, atol=1e-9)
    np.testing.assert_array_equal(tables.printed["roll"], [ROLL])
    np.testing.assert_array_equal(tables.printed["distance"], [WHOLE])
    assert tables.pages == ((pytest.approx(np.radians(10.0)), 1110.0),)


def test_two_tables_of_one_page_are_as_one_of_two_figures() -> None:
    one, _ = read(both())
    two, _ = read(roll() + whole())
    for figure in ("roll", "distance"):
        np.testing.assert_array_equal(one.printed[figure], two.printed[figure])


def test_units_of_figures_and_axes() -> None:
    """Feet as the unit of a table, feet in a cell, sea level in words, degrees Fahrenheit, metres of altitude."""
    text = roll(("sea level", "1000 m"), ("32 °F", "50 °F", "86 °F"), [[600, 700, 800], [700, 800, 900]], unit="ft")
    text = text.replace("'", '"').replace("700.0, 800.0, 900.0", '"213.36 m", "800 ft", 900.0')
    tables, _ = read(text)
    np.testing.assert_allclose(tables.altitudes, [0.0, 1000.0], atol=1e-6)
    np.testing.assert_allclose(tables.temperatures, [ZERO, ZERO + 10.0, ZERO + 30.0], atol=1e-6)
    np.testing.assert_allclose(tables.printed["roll"][0], np.array([[600, 700, 800], [700, 800, 900]]) * FOOT, rtol=1e-12)


def test_rates_of_climb() -> None:
    tables, _ = read(climb(), "climb")
    np.testing.assert_allclose(tables.printed["rate"][0], np.array(CLIMB) * FOOT / 60.0, rtol=1e-12)
    metric, _ = read(climb([[3.5, 3.0, 2.5], [2.0, 1.0, -0.5]], unit="m/s"), "climb")
    np.testing.assert_allclose(metric.printed["rate"][0], [[3.5, 3.0, 2.5], [2.0, 1.0, -0.5]], rtol=1e-12)


def test_a_mass_that_is_not_given_is_the_greatest_of_its_side_and_is_told() -> None:
    """For a landing the greatest landing mass: the take-off mass would make what is carried from it too short."""
    for text, side, mass in ((roll(), "takeoff", 1110.0), (climb(), "climb", 1110.0),
                             (table("landing roll", HIGH, WARM, ROLL, flap="30", mass="1110 kg"), "landing", 1050.0)):
        tables, remarks = read(text.replace('mass = "1110 kg"\n', ""), side)
        assert tables.pages[0][1] == mass
        assert remarks == [f"{WHERE} 1: mass not given, the greatest of {mass:g} kg used"]


# -- grids in files ----------------------------------------------------------------------------------------------------

IN_FILE = '[[book.table]]\ngives = "{gives}"\nflap = "10"\nmass = "1110 kg"\nfile = "{file}"\n{more}'


def of_file(folder: Path, file: str, gives: str = "take-off roll", more: str = "", side: str = "takeoff") -> BookTables:
    return read(IN_FILE.format(file=file, gives=gives, more=more), side, folder)[0]


def of_text(folder: Path, text: str, gives: str = "take-off roll", encoding: str = "utf-8") -> BookTables:
    (folder / "grid.csv").write_text(text, encoding=encoding)
    return of_file(folder, "grid.csv", gives)


PLAIN = np.array([[[200.5, 220.0, 240.0], [280.0, 310.0, NAN]]])


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
@pytest.mark.parametrize(
    "text",
    [
        "Take-off roll [m], flap 10\n\nPressure altitude,0 °C,20 °C,40 °C\n0 ft,200.5,220,240\n2000 ft,280,310,-\n",
        "Take-off roll;;;\n1110 kg, level, dry;;;\nft;0;20;40\nSL;200,5;220;240\n2 000;280;310;n/a\n;;;\n",
        "Pressure altitude\t32 °F\t68 °F\t104 °F\nsea level\t200.5 m\t220 m\t240 m\n2,000 ft\t280 m\t310 m\t\n",
        'x|0|20|40\n0|"200,5"|220|240\n"2,000"|280|310|--\n',
    ],
    ids=["commas", "semicolons", "tabs", "strokes"],
)  # fmt: skip
def test_text_files_as_manuals_print_them(tmp_path: Path, text: str, encoding: str) -> None:
    tables = of_text(tmp_path, text, encoding=encoding)
    np.testing.assert_allclose(tables.altitudes, [0.0, 2000.0 * FOOT], atol=1e-6)
    np.testing.assert_allclose(tables.temperatures, [ZERO, ZERO + 20.0, ZERO + 40.0], atol=1e-6)
    np.testing.assert_array_equal(tables.printed["roll"], PLAIN)


@pytest.mark.parametrize("hole", ["-", "–", "—", "--", "n/a", "N/A", " ", "", "x"])
def test_every_sign_for_a_hole(tmp_path: Path, hole: str) -> None:
    tables = of_text(tmp_path, f"x,0,20,40\n0,200.5,220,240\n2000,280,310,{hole}\n")
    np.testing.assert_array_equal(tables.printed["roll"], PLAIN)


@pytest.mark.parametrize(
    "head",
    ["x,0,,20,,\n,roll,50 ft,roll,50 ft\n", "x,0,0,20,20\nft,roll [m],50 ft [m],roll [m],50 ft [m]\n", "x,0 °C,,20 °C\n"],
)
def test_two_figures_under_each_temperature(tmp_path: Path, head: str) -> None:
    tables = of_text(tmp_path, f"{head}0,200,400,220,440\n2000,240,480,280,560\n", "take-off roll and to 50 ft")
    np.testing.assert_array_equal(tables.printed["roll"], [[[200, 220], [240, 280]]])
    np.testing.assert_array_equal(tables.printed["distance"], [[[400, 440], [480, 560]]])


def write_workbook(path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    sheet.title = "Flap 10"
    for row in (["Invented aeroplane: take-off roll"], [], ["Pressure altitude", 0, 20, 40], ["Sea level", 200.5, 220, 240],
                ["2000 ft", 280, 310, None]):  # fmt: skip
        sheet.append(row)
    sheet.merge_cells("A1:D1")
    for cell in "BCD":
        sheet[f"{cell}3"].number_format = '0" °C"'
    other = book.create_sheet("Flap 20")
    for row in (["ft", 0.0, 20.0, 40.0], [0, "180", "200", 220], [3000, 250, "-", 300]):
        other.append(row)
    book.save(path)


def test_a_workbook_with_its_sheets(tmp_path: Path) -> None:
    write_workbook(tmp_path / "grid.xlsx")
    first = of_file(tmp_path, "grid.xlsx")
    np.testing.assert_array_equal(first.printed["roll"], PLAIN)
    second = of_file(tmp_path, "grid.xlsx", more='sheet = "Flap 20"\n')
    np.testing.assert_allclose(second.altitudes, [0.0, 3000.0 * FOOT], atol=1e-6)
    np.testing.assert_array_equal(second.printed["roll"], [[[180, 200, 220], [250, 275, 300]]])


FILE_REFUSALS = [
    ("x,0,20\nSealevel,200,220\n2000,280,310\n", 'grid.csv row 2: pressure altitude: "Sealevel" is not a number; write for '
     'example "2300 ft"'),
    ("x,0,20\nGround,200 m,220 m\n2000,280,310\n5000,300,340\n", 'grid.csv row 2: pressure altitude: "Ground" is not a number; '
     'write for example "2300 ft"'),
    ("x,0,20\n,200,220\n2000,280,310\n4000,300,330\n",
     f"grid.csv row 2: there is no pressure altitude in the first cell; {HINT}"),
    ("x,0,20\n0,200,220\n2000,280,310\n,300,330\n", f"grid.csv row 4: there is no pressure altitude in the first cell; {HINT}"),
    ("x,0,20\n0,200,220\n2000,280,310\nNote: dry\n",
     'grid.csv row 4: pressure altitude: "Note: dry" is not a number; write for '
     'example "2300 ft"'),
    ("x,0,20\n0,200,220,240\n2000,280,310\n", f"grid.csv row 2 has more figures than there are temperatures above it; {HINT}"),
    ("x,0,20\n0,200,220\n", f"grid.csv: two lines of figures or more are expected below the temperatures; {HINT}"),
    ("0,200,220\n2000,280,310\n", f"grid.csv: no line of temperatures was found; {HINT}"),
    ("x,ISA,ISA+20\n0,200,220\n2000,280,310\n", f"grid.csv: no line of temperatures was found; {HINT}"),
    ("x,20,0\n0,200,220\n2000,280,310\n", f"grid.csv: no line of temperatures was found; {HINT}"),
    ("", "grid.csv: the file is empty; a table has a header row and a row for each entry"),
    ('"x,0,20\n0,200,220\n',
     "grid.csv line 2: broken quote marks or text (unexpected end of data); a quote mark inside a quoted "
     'value must be doubled ("")'),
]  # fmt: skip


@pytest.mark.parametrize(("text", "sentence"), FILE_REFUSALS)
def test_grids_that_are_refused(tmp_path: Path, text: str, sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(f'{WHERE} 1: {sentence}')}$"):
        of_text(tmp_path, text)


def test_a_slip_in_a_file_is_told_by_its_row(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"^grid\.csv row 3: 28000 can't be right for a roll in m; check it and the unit$"):
        of_text(tmp_path, "x,0,20\n0,200,220\n2000,28000,310\n")


def test_one_figure_under_each_temperature_is_not_taken_for_two(tmp_path: Path) -> None:
    """Every second figure would be read as the distance over 50 ft that belongs to the roll before it."""
    sentence = (
        f"{WHERE} 1: grid.csv: no line of temperatures was found; {HINT}; each temperature stands over two columns, roll and "
        "distance"
    )
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}$"):
        of_text(tmp_path, "x,0,10,20,30\n0,200,210,220,230\n2000,280,300,310,330\n", "take-off roll and to 50 ft")


@pytest.mark.parametrize(
    ("file", "more", "sentence"),
    [
        ("none.csv", "", "none.csv: there is no such file"),
        (".", "", ": this is a directory; name the file of the table"),
        ("grid.md", "", 'grid.md: ".md" is not a kind of table; save it as one of .csv, .xlsx, .xls or .ods'),
        ("grid.csv", 'sheet = "Roll"\n', 'grid.csv: a text file has no sheets; leave the sheet "Roll" out'),
        ("grid.xlsx", 'sheet = "Roll"\n', 'grid.xlsx: there is no sheet "Roll"; its sheets are Flap 10, Flap 20'),
        ("broken.xlsx", "", "broken.xlsx: this is a text and no workbook; name it .csv if it is a list"),
    ],
)
def test_files_that_are_refused(tmp_path: Path, file: str, more: str, sentence: str) -> None:
    for name in ("grid.md", "grid.csv", "broken.xlsx"):
        (tmp_path / name).write_text("x,0,20\n0,200,220\n2000,280,310\n")
    write_workbook(tmp_path / "grid.xlsx")
    with pytest.raises(InputError, match=f"^{re.escape(WHERE)} 1: .*{re.escape(sentence)}"):
        of_file(tmp_path, file, more=more)


# -- what is refused ---------------------------------------------------------------------------------------------------

NO_FLAP = 'there is no flap setting "15"; the card has: up, 10, 20, 30'
MISSING = "is missing; it takes a list, such as [0, 10, 20]"
LEFT_OUT = "a figure that the manual leaves out is written as -"
REFUSALS = [
    (roll().replace("take-off roll", "take-off"),
     '1: gives = "take-off" is none of: take-off roll, take-off to 50 ft, take-off '
     "roll and to 50 ft, landing roll, landing from 50 ft, landing roll and from 50 ft, rate of climb"),
    (roll(flap="30"), '1: flap "30" is not allowed for take-off by the card'),
    (roll(flap="15"), f"1: {NO_FLAP}"),
    (climb(flap="15"), f"1: {NO_FLAP}"),
    (roll().replace('flap = "10"\n', ""), "1: flap is missing; it takes a text"),
    (roll(mass="1200 kg"), "1: mass = 1200 kg can't be right for a mass; 100 kg to 1,111.11 kg is expected"),
    (roll().replace("pressure_altitudes", "altitudes"), f"1: pressure_altitudes {MISSING}"),
    (roll().replace("temperatures = [0, 20, 40]\n", ""), f"1: temperatures {MISSING}"),
    (roll().replace("[0, 4000]", "[]"), f"1: pressure_altitudes {MISSING}"),
    (roll((4000, 0)), "1: pressure altitudes must rise from one to the next"),
    (roll(temperatures=(0, 0, 20)), "1: temperatures must rise from one to the next"),
    (roll(("", 4000)).replace("''", '""'), "1: one of the pressure altitudes is blank"),
    (roll((0, 40000)), "1: pressure altitudes are not credible; -984 to 18,045 ft is expected"),
    (roll(temperatures=(0, 20, 400)), "1: temperatures are not credible; -60 to 60 °C is expected"),
    (roll(("0 kg", 4000)).replace("'", '"'),
     '1: pressure_altitudes: "kg" is not a unit of altitude; write for example "2300 ft"'),
    (roll(temperatures=("warm", 20, 40)).replace("'", '"'),
     '1: temperatures: "warm" is not a number; write for example "12 °C"'),
    (roll((0,), grid=ROLL[:1]),
     "1: pressure altitudes must be two or more; type single figures of a roll as [[book.takeoff]] or "
     "[[book.landing]] points"),
    (roll(temperatures=(0,), grid=[[200], [280]]), "1: temperatures must be two or more; type single figures of a roll as "
     "[[book.takeoff]] or [[book.landing]] points"),
    (roll(grid=[[200, 220], [280, 310]]), "1: values, line 1 has 2 figures where 3 are expected: one for each temperature"),
    (both().replace(", 700.0]", "]"), "1: values, line 2 has 5 figures where 6 are expected: two, roll and distance, for each "
     "temperature"),
    (roll().replace("    [280.0, 310.0, 350.0],\n", ""), "1: values must be a list of 2 lines, one for each pressure altitude"),
    (roll().replace("[200.0, 220.0, 240.0]", "200"), "1: values must be a list of 2 lines, one for each pressure altitude"),
    (roll().replace("values", "figures"), "1: values must be a list of 2 lines, one for each pressure altitude"),
    (roll().replace("310.0", '"long"'), f'1: values, line 2: "long" is not a number; write for example "620 m"; {LEFT_OUT}'),
    (roll().replace("310.0", "true"), f'1: values, line 2: "True" is not a number; write for example "620 m"; {LEFT_OUT}'),
    (roll().replace("310.0", "inf"), f'1: values, line 2: "inf" is not a number; write for example "620 m"; {LEFT_OUT}'),
    (roll().replace("310.0", "3.1"), "1: values, line 2: 3.1 can't be right for a roll in m; check it and the unit"),
    (roll().replace("310.0", '"310 km"'), "1: values, line 2: 310 km can't be right for a roll in m; check it and the unit"),
    (roll(unit="kg"), f'1: values, line 1: "kg" is not a unit of length; write for example "620 m"; {LEFT_OUT}'),
    (climb([[9000, 600, 500], [400, 300, 200]]),
     "1: values, line 1: 9000.0 can't be right for a rate of climb in ft/min; check it "
     "and the unit"),
    (roll(grid=[[NAN] * 3] * 2), "1: there is no figure of the roll; leave such a table out"),
    (both(other=[[NAN] * 3] * 2), "1: there is no figure of the distance over 50 ft; leave such a table out"),
    (roll(grid=[[200, 190, 240], [280, 310, 350]]),
     "1: the roll falls with heat, from 200 m at 0 °C to 190 m at 20 °C (0 ft); heat "
     "never helps: check the two figures"),
    (roll(grid=[[200, NAN, 190], [280, 310, 350]]),
     "1: the roll falls with heat, from 200 m at 0 °C to 190 m at 40 °C (0 ft); heat "
     "never helps: check the two figures"),
    (roll(grid=[[200, 220, 240], [280, 310, 235]]),
     "1: the roll falls with heat, from 310 m at 20 °C to 235 m at 40 °C (4,000 ft); "
     "heat never helps: check the two figures"),
    (both(other=[[400, 440, 480], [560, 560, 470]]),
     "1: the distance over 50 ft falls with heat, from 560 m at 20 °C to 470 m at "
     "40 °C (4,000 ft); heat never helps: check the two figures"),
    (roll(grid=[[200, 220, 240], [220, 230, 235]]),
     "1: the roll falls with height, from 240 m at 0 ft to 235 m at 4,000 ft (40 °C); "
     "height never helps: check the two figures"),
    (climb([[700, 600, 650], [400, 300, 200]]),
     "1: the rate of climb rises with heat, from 600 ft/min at 20 °C to 650 ft/min at "
     "40 °C (0 ft); heat never helps: check the two figures"),
    (climb([[400, 300, 200], [500, 100, 50]]),
     "1: the rate of climb rises with height, from 400 ft/min at 0 ft to 500 ft/min at "
     "4,000 ft (0 °C); height never helps: check the two figures"),
    (roll() + roll(), "2: there are two tables of the roll for the same flap and mass; keep one"),
    (both() + whole(), "2: there are two tables of the distance over 50 ft for the same flap and mass; keep one"),
    (both() + roll(mass="900 kg"),
     "2: there is no table of the distance over 50 ft for this flap and mass, but there is one for "
     "another; give both figures for each flap and mass, or one of them throughout"),
    (roll() + whole(flap="20"),
     "2: there is no table of the roll for this flap and mass, but there is one for another; give both "
     "figures for each flap and mass, or one of them throughout"),
    (roll() + 'colour = "red"\n',
     '1: "colour" is not an entry here; the entries are: file, flap, gives, lift_off_speed, mass, pressure_altitudes, '
     "sheet, temperatures, unit, values"),
    (roll(file="grid.csv"), "1: the table stands in a file, so pressure_altitudes must not be typed too"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "sentence"), REFUSALS)
def test_tables_that_are_refused(text: str, sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(f'{WHERE} {sentence}')}$"):
        read(text, "climb" if "rate of climb" in text else "takeoff")


TOGETHER = [
    (both(other=ROLL), "the distance over 50 ft must be longer than the roll; at 0 ft and 0 °C it is not"),
    (roll(mass="900 kg") + roll(grid=np.array(ROLL) - 10),
     "the roll is better at 1,110 kg than at 900 kg at 0 ft and 0 °C; mass "
     "never helps: check both tables"),
    (roll((0, 2000)) + whole((4000, 8000)), "the tables of roll and distance over 50 ft at 1,110 kg have no place in common"),
    (roll(grid=[[200, 220, NAN], [NAN, NAN, 210]]),
     "the roll at 4,000 ft and 40 °C and 1,110 kg is better than one at less height, "
     "heat and mass; these never help: check the figures"),
    # the page between has a hole where the other two do not agree
    (roll(mass="800 kg") + roll(grid=[[210, 230, 250], [290, 320, NAN]], mass="900 kg")
     + roll(grid=[[220, 240, 260], [300, 330, 345]], mass="1000 kg"),
     "the roll is better at 1,000 kg than at 800 kg at 4,000 ft and 40 °C; mass never helps: check both tables"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "sentence"), TOGETHER)
def test_tables_that_do_not_go_together(text: str, sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(f'trial.toml [book]: {sentence}')}$"):
        read(text)


def test_figures_that_stay_the_same_are_taken() -> None:
    """A manual that rounds to 10 m prints some figures twice."""
    tables, _ = read(both([[200, 200, 240], [200, 310, 310]], mass="900 kg") + both([[200, 200, 240], [200, 310, 310]]))
    assert len(tables.pages) == 2


# -- holes -------------------------------------------------------------------------------------------------------------


def test_a_hole_between_two_figures_of_its_line_is_put_between() -> None:
    tables, remarks = read(roll(grid=[[200, NAN, 240], [280, NAN, 350]]))
    np.testing.assert_array_equal(tables.printed["roll"], [[[200, 220, 240], [280, 315, 350]]])
    assert remarks == [f"{WHERE} 1: 2 figures of the roll missing between others put between them"]


def test_by_temperature_not_by_column() -> None:
    tables, _ = read(roll(temperatures=(0, 10, 40), grid=[[200, NAN, 240], [280, 310, 350]]))
    assert tables.printed["roll"][0, 0, 1] == 210.0


def test_a_hole_between_two_figures_of_its_column_is_put_between() -> None:
    """In the last column of the middle line; the line goes before the column where both could tell."""
    tables, remarks = read(roll((0, 2000, 8000), WARM, [[200, 220, 240], [220, 250, NAN], [340, 400, 480]]))
    assert tables.printed["roll"][0, 1, 2] == 300.0
    assert remarks == [f"{WHERE} 1: 1 figure of the roll missing between others put between them"]


def test_what_is_missing_at_the_edges_stays_a_hole() -> None:
    tables, remarks = read(roll((0, 4000, 8000), WARM, [[NAN, 220, 240], [280, 310, NAN], [350, NAN, NAN]]))
    np.testing.assert_array_equal(np.isnan(tables.printed["roll"][0]), [[1, 0, 0], [0, 0, 1], [0, 1, 1]])
    assert remarks == []


# -- common lines and columns ------------------------------------------------------------------------------------------


@st.composite
def loose_tables(draw: st.DrawFn) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Altitudes [ft], temperatures [deg C] and figures that rise with both, each table on axes of its own."""
    rng = np.random.default_rng(draw(st.integers(0, 10**6)))
    lines, columns = (draw(st.integers(2, 5)) for _ in range(2))
    altitudes = np.round(np.cumsum(rng.uniform(200.0, 3000.0, lines)) - 500.0)
    temperatures = np.round(np.cumsum(rng.uniform(2.0, 15.0, columns)) - 20.0)
    grid = 100.0 + np.cumsum(np.cumsum(rng.uniform(0.0, 20.0, (lines, columns)), axis=0), axis=1)
    return altitudes, temperatures, np.round(grid)


@given(loose_tables(), loose_tables())
def test_lines_and_columns_of_other_tables_change_nothing(one: tuple[np.ndarray, ...], other: tuple[np.ndarray, ...]) -> None:
    """A table alone against the same beside a heavier one on other axes: its own nodes to the last bit, and the new ones
    as SciPy puts them between; nothing outside of it."""
    tables = [one, (*other[:2], other[2] + one[2].max())]
    stacked, _ = read("".join(roll(axes[0].tolist(), axes[1].tolist(), grid, mass=mass)
                              for (*axes, grid), mass in zip(tables, ("800 kg", "1110 kg"), strict=True)))  # fmt: skip
    altitudes, temperatures = np.round(stacked.altitudes / FOOT), np.round(stacked.temperatures - ZERO)
    places = np.stack(np.meshgrid(altitudes, temperatures, indexing="ij"), axis=2)
    for (*axes, grid), found in zip(tables, stacked.printed["roll"], strict=True):
        alone = RegularGridInterpolator(axes, grid, bounds_error=False)  # NaN outside
        np.testing.assert_allclose(found, alone(places), rtol=1e-8)  # the axes are kept to a millionth of a metre and kelvin
        own = np.ix_(np.isin(altitudes, axes[0]), np.isin(temperatures, axes[1]))
        np.testing.assert_array_equal(found[own], grid)


# -- pages and edges ---------------------------------------------------------------------------------------------------


def stack(*pages: tuple[float, Any], altitudes: Any = (0, 4000, 8000), flap: str = "10") -> BookTables:
    return read("".join(roll(altitudes, WARM, grid, mass=f"{mass} kg", flap=flap) for mass, grid in pages))[0]


STEPPED = [[200, 220, 240], [280, 310, NAN], [350, NAN, NAN]]
LIGHT = [[150, 170, 190], [230, 260, 280], [300, 330, NAN]]


def test_the_pages_below_and_above() -> None:
    tables = stack((890, LIGHT), (1000, STEPPED), (1110, STEPPED))
    assert tables.masses(tables.pages[0][0]) == [890.0, 1000.0, 1110.0]
    assert tables.below().tolist() == [889.0, 890.0, 1000.0] and tables.above().tolist() == [1000.0, 1110.0, 1111.0]


def test_edges_of_a_stepped_table() -> None:
    tables = stack((890, LIGHT), (1110, STEPPED))
    np.testing.assert_allclose(tables.edge(hot=True) - ZERO, [[40, 40, 20], [40, 20, 0]], atol=1e-9)
    np.testing.assert_allclose(tables.edge(hot=False) - ZERO, [[0, 0, 0], [0, 0, 0]], atol=1e-9)
    np.testing.assert_allclose(tables.highest() / FOOT, [8000, 8000])


def test_edges_where_both_figures_count() -> None:
    """A place counts only where roll and distance are both printed."""
    tables, _ = read(both([[200, 220, 240], [280, 310, 350]], [[400, 440, 480], [560, NAN, NAN]]))
    np.testing.assert_allclose(tables.edge(hot=True)[0] - ZERO, [40, 0], atol=1e-9)


def test_lines_above_the_last_with_figures_are_beyond() -> None:
    """Whatever the temperature there: the last line with figures is the highest, and its hottest one the edge."""
    tables = stack((890, LIGHT), (1110, [STEPPED[0], STEPPED[1], [NAN] * 3]))
    np.testing.assert_allclose(tables.highest() / FOOT, [8000, 4000])
    np.testing.assert_allclose(tables.edge(hot=True) - ZERO, [[40, 40, 20], [40, 20, 20]], atol=1e-9)
    assert tables.reach()[1, 2] == NOWHERE


def test_what_is_printed_for_harder_conditions_holds_for_easier_ones() -> None:
    """A light page without its first and last lines, and with a hot hole that a heavier page fills: else height and mass
    would seem to help."""
    tables = stack((890, [[NAN] * 3, [180, 200, NAN], [NAN] * 3]), (1110, [[200, 220, 240], [280, 310, 350], [350, 400, NAN]]))
    np.testing.assert_allclose(tables.highest() / FOOT, [8000, 8000])
    np.testing.assert_allclose(tables.edge(hot=True) - ZERO, [[40, 40, 20], [40, 40, 20]], atol=1e-9)


@given(st.integers(0, 10**6))
def test_edges_never_widen_with_height_or_mass(seed: int) -> None:
    """Any pattern of holes: a hotter edge, and a higher last line, at less height or mass, never at more."""
    tables, _ = random_stack(seed)
    edge, top = tables.edge(hot=True), tables.highest()
    assert (np.diff(edge, axis=1) <= 0.0).all()
    for page in range(len(tables.pages)):
        for heavier in tables.heavier(page):
            assert (edge[page][tables.altitudes <= top[heavier]] >= edge[heavier][tables.altitudes <= top[heavier]]).all()
            assert top[page] >= top[heavier]


def random_stack(seed: int) -> tuple[BookTables, np.ndarray]:
    """Two or three pages on one set of axes with random holes, and a model that is out by up to a third."""
    rng = np.random.default_rng(seed)
    count, shape = int(rng.integers(1, 4)), (int(rng.integers(2, 5)), int(rng.integers(2, 5)))
    steps = rng.uniform(5.0, 40.0, (count, *shape))
    grid = np.round(150.0 + np.cumsum(np.cumsum(np.cumsum(steps, axis=0), axis=1), axis=2))
    holed = np.where(rng.random(grid.shape) < rng.uniform(0.0, 0.6), NAN, grid)
    holed[:, 0, 0] = grid[:, 0, 0]
    altitudes, temperatures = (tuple(step * np.arange(size)) for step, size in zip((2000, 15), shape, strict=True))
    text = "".join(roll([float(at) for at in altitudes], [float(at) for at in temperatures], page, mass=f"{800 + 100 * i} kg")
                   for i, page in enumerate(holed))  # fmt: skip
    tables, _ = read(text)
    model = grid * rng.uniform(0.75, 1.33) * (1.0 + rng.uniform(-0.05, 0.3, grid.shape))
    return tables, np.where(rng.random(grid.shape) < 0.2, NAN, model)


def test_the_nearest_flap_with_tables() -> None:
    """Of two as near the lesser, whatever the rounding of the angles."""
    tables, _ = read(roll(flap="10") + roll(flap="20"))
    ten, twenty = sorted({flap for flap, _ in tables.pages})
    for deflection, used in ((0.0, ten), (10.0, ten), (14.9, ten), (15.0, ten), (15.1, twenty), (30.0, twenty)):
        assert tables.nearest_flap(np.radians(deflection)) == used


# -- holes carried by the model ----------------------------------------------------------------------------------------


def filled(tables: BookTables, model: Any) -> np.ndarray:
    grid = np.asarray(model, float).reshape(tables.known.shape)
    return fill_holes(tables, {"roll": grid, "distance": 2.0 * grid}).filled["roll"]


def test_an_edge_hole_is_the_nearest_figure_times_what_the_model_says() -> None:
    tables = stack((1110, STEPPED))
    grid = filled(tables, [[100, 120, 150], [150, 180, 225], [200, 260, 390]])[0]
    np.testing.assert_allclose(grid, [[200, 220, 240], [280, 310, 310 * 225 / 180], [350, 350 * 260 / 200, 350 * 390 / 200]])


def test_colder_holes_too() -> None:
    tables = stack((1110, [[NAN, NAN, 240], [NAN, NAN, 350], [NAN, 400, 480]]))
    grid = filled(tables, [[100, 110, 120], [150, 180, 225], [200, 260, 390]])[0]
    np.testing.assert_allclose(grid[:, 0], [240 * 100 / 120, 350 * 150 / 225, 400 * 200 / 260])
    np.testing.assert_allclose(grid[:2, 1], [240 * 110 / 120, 350 * 180 / 225])


def test_a_line_without_figures_is_the_one_below_times_what_the_model_says() -> None:
    tables = stack((1110, [[200, 220, 240], [NAN] * 3, [NAN] * 3]))
    grid = filled(tables, [[100, 120, 150], [150, 180, 225], [200, 260, 390]])[0]
    np.testing.assert_allclose(grid[1], [200 * 1.5, 220 * 1.5, 240 * 1.5])
    np.testing.assert_allclose(grid[2], [200 * 2.0, 220 * 260 / 120, 240 * 390 / 150])


def test_without_a_figure_of_the_model_a_hole_is_a_tenth_more_for_each_column_and_line() -> None:
    tables = stack((1110, [[200, NAN, NAN], [NAN] * 3, [NAN] * 3]))
    grid = filled(tables, [[100, 120, NAN], [NAN, NAN, NAN], [NAN, NAN, NAN]])[0]
    np.testing.assert_allclose(grid[0], [200, 240, 242])  # a tenth twice over is less than the model's figure before it
    np.testing.assert_allclose(grid[1], np.array([200, 240, 242]) * 1.1)
    np.testing.assert_allclose(grid[2], np.array([200, 240, 242]) * 1.21)


def test_a_carried_figure_stays_between_the_printed_ones() -> None:
    """A model that jumps, or falls, can't make a hole worse than a harder printed figure, nor better than an easier one."""
    light = [[180, 200, NAN], [200, 230, NAN], [NAN, NAN, NAN]]
    tables = stack((890, light), (1110, [[200, 220, 240], [280, 310, 350], [350, 400, NAN]]))
    jump = filled(tables, [[[100, 100, 300], [100, 100, 300], [200, 200, 900]]] * 2)
    fall = filled(tables, [[[100, 90, 10], [100, 90, 10], [100, 90, 10]]] * 2)
    assert jump[0, 0, 2] == 240.0 and jump[0, 1, 2] == 350.0 and jump[0, 2, 0] == 350.0
    assert fall[0, 0, 2] == 200.0 and fall[0, 2, 0] == 200.0 and fall[1, 2, 2] == 400.0


@given(st.integers(0, 10**6))
def test_carried_tables_rise_with_height_heat_and_mass_and_keep_every_printed_figure(seed: int) -> None:
    """Whatever the holes and the model: no number anywhere is missing, and printed ones are untouched."""
    tables, model = random_stack(seed)
    found = fill_holes(tables, {"roll": model, "distance": 1.9 * model}).filled
    printed = np.isfinite(tables.printed["roll"])
    np.testing.assert_array_equal(found["roll"][printed], tables.printed["roll"][printed])
    for axis in range(3):
        assert (np.diff(found["roll"], axis=axis) >= 0.0).all()
    assert np.isfinite(found["distance"]).all() and (found["distance"] > found["roll"]).all()


def test_a_figure_that_is_not_printed_at_all_keeps_the_model_s_share() -> None:
    model = {"roll": np.array([[[100, 120, 150], [150, 180, NAN]]]), "distance": np.array([[[250, 280, 320], [300, 400, NAN]]])}
    only_roll = fill_holes(read(roll())[0], model).filled
    np.testing.assert_allclose(only_roll["distance"][0], [[500, 220 * 280 / 120, 512], [560, 310 * 400 / 180, 700]])
    only_whole = fill_holes(read(whole())[0], model).filled
    np.testing.assert_allclose(only_whole["roll"][0], [[160, 440 * 120 / 280, 225], [280, 279, 350]])


def test_a_carried_roll_is_never_longer_than_the_distance() -> None:
    tables, _ = read(both([[200, 220, 240], [280, 310, NAN]], [[400, 440, 480], [560, NAN, NAN]]))
    found = fill_holes(tables, {"roll": np.array([[[1.0, 1.0, 1.0], [1.0, 1.0, 9.0]]]), "distance": np.full((1, 2, 3), 2.0)})
    assert (found.filled["distance"] >= found.filled["roll"]).all()
    np.testing.assert_array_equal(found.filled["roll"][0, 1, :2], [280, 310])


def test_rates_of_climb_are_carried_by_difference() -> None:
    tables, _ = read(climb([[700, 600, 500], [400, 300, NAN]]), "climb")
    model = np.array([[[3.0, 2.6, 2.2], [1.7, 1.4, 0.9]]])
    np.testing.assert_allclose(fill_holes(tables, {"rate": model}).filled["rate"][0, 1, 2], 300 * FOOT / 60 - 0.5, rtol=1e-12)


def test_what_would_stand_for_a_printed_figure() -> None:
    """For the workbook, where somebody may delete it: between its neighbours, at an edge carried from the next one."""
    tables = stack((1110, STEPPED))
    model = np.array([[[100, 120, 150], [150, 180, 225], [200, 260, 390]]], float)
    spare = fill_holes(tables, {"roll": model, "distance": 2.0 * model}).spare["roll"][0]
    np.testing.assert_allclose(spare[0], [220 * 100 / 120, 220, 220 * 150 / 120])
    np.testing.assert_allclose(spare[1, :2], [310 * 150 / 180, 280 * 180 / 150])
    assert spare[2, 0] == 350.0  # nothing else in its line
