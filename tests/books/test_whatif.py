"""The what-if workbook, edited and recalculated by a real program, against ``assess`` of the same strip, day and loading."""

from __future__ import annotations

import subprocess
import zipfile
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import numpy as np
import openpyxl
import pytest
from openpyxl.cell.cell import MergedCell

from stripcheck.assessment import Result, prepare
from stripcheck.books import whatif_fall, whatif_page
from stripcheck.books.charts import _values as cell_values
from stripcheck.books.whatif import DEMO_STRIP, write_whatif
from stripcheck.books.whatif_cases import MASSES, SWEEP, WARMER
from stripcheck.books.whatif_inputs import SIDES, from_list, from_options, wrong
from stripcheck.books.whatif_layout import MATRIX_LETTERS, MATRIX_ROW, PAGE, TABLES, WORKING, Layout
from stripcheck.card import Card, load_card
from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.day import read_day
from stripcheck.filling import DEMO_DAY
from stripcheck.inputs import RULES as RULES_INPUTS
from stripcheck.rules import Rules, load_rules
from stripcheck.sheet import summary
from stripcheck.sheet.pages import Pages
from stripcheck.units import from_si, to_si
from tests.aircraft import trial_heron
from tests.office import Office
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import differences

SCENARIO = Path(__file__).parents[2] / "stripcheck" / "scenario" / "lantern-range.csv"
TOLERANCE = 1e-9
CARDS = {"ridge-runner": lambda: load_card("ridge-runner"), "high-mule": lambda: load_card("high-mule"), "heron": trial_heron}
RULES = {"ridge-runner": "part-cat-b", "high-mule": "uk-leaflet", "heron": "manual-only"}


@dataclass
class Made:
    """A book, what it was made from, and where its cells are."""

    path: Path
    card: Card
    rules: Rules
    layout: Layout
    rule_cells: Mapping[str, str] = field(default_factory=dict)  # where each value of the rules is typed, by its label


@pytest.fixture(scope="module", params=CARDS)
def made(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Made:
    card, rules = CARDS[request.param](), load_rules(RULES[request.param])
    start = from_list(SCENARIO, DEMO_STRIP, None, card, read_day(DEMO_DAY), rules, {})
    path = tmp_path_factory.mktemp("whatif") / f"{request.param}.xlsx"
    write_whatif(card, rules, start, path)
    rows = openpyxl.load_workbook(path, read_only=True)["Rules"].iter_rows(max_col=2)
    cells = {label.value: cell.coordinate for label, cell in rows if cell.value is not None}
    return Made(path, card, rules, Layout(card, rules, start), cells)


# --- the same asked of ``assess``

Inputs = dict[str, tuple[Any, Any]]


def strips_of(inputs: Inputs) -> dict[str, Any]:
    """Both directions for ``prepare``; what is blank is not known."""
    def column(key: str) -> list[Any]:
        return [np.nan if one == "" else one for one in inputs[key]]

    heading, slope = column("heading")[0], column("slope_given")[0]
    strips = {key: column(key) for key in ("tora", "lda", "obstacle_height", "obstacle_distance", "local_slope", "width",
                                           "elevation_field")}  # fmt: skip
    strips |= {key: list(inputs[key]) for key in ("surface", "condition", "land_here", "take_off_here")}
    strips |= {"heading": [heading, (heading + 180.0) % 360.0], "slope_given": [slope, -slope]}
    strips |= {"approach_" + key: strips[key][::-1] for key in ("obstacle_height", "obstacle_distance")}
    return strips | {"own_" + key: column(key) for key in ("temperature", "qnh", "wind_from", "wind_speed")}


def asked(made: Made, inputs: Inputs) -> Result:
    """Both directions as ``assess`` sees them; the day has no defaults for what is blank on the page."""
    result = prepare(strips_of(inputs), made.card, {}, made.rules)
    given: dict[str, Any] = {"qnh": np.nan, "wind_speed": np.nan, "day_condition": -1}
    humidity = inputs["humidity"][0]
    given["humidity"] = np.nan if humidity == "" else to_si(humidity, "%")
    for side in SIDES:
        mass, flap = inputs[f"mass_{side}"][0], inputs[f"{side}_flap"][0]
        given[f"mass_{side}"] = np.nan if mass == "" else mass
        settings = {name: made.layout.deflection(name) for name in made.layout.flaps[side]}
        given[f"{side}_flap"] = np.radians(settings[flap]) if flap in settings else np.nan
    return result.changed(given)


def one_way(result: Result, way: int, **given: Any) -> Result:
    """One direction [1 or 2] of a result, with other inputs, as many rows as the longest of these."""
    tables = {item.key for item in result.chain.inputs if item.kind == "range"}
    size = max((len(value) for value in given.values() if np.ndim(value)), default=1)
    own = {key: np.broadcast_to(value[way - 1], size) if np.ndim(value) and key not in tables else value
           for key, value in result.given.items()}  # fmt: skip
    given = {key: np.broadcast_to(value, size) for key, value in given.items()}
    return Result(result.chain, size, {**own, **given}, {}, [""] * size)


def better(result: Result, side: str) -> int:
    """The better direction [1 or 2] by the summary's own rule."""
    words = result.chain.by_key[f"{side}_verdict"].words
    rank = summary.ranks_of(result.si(f"{side}_verdict"), words)
    order = np.where(result.si(f"{side}_finding") == summary.FORBIDDEN, 0, rank)
    margin = result.si(f"{side}_margin")
    return 1 if summary.first_is_better(order[0], margin[0], order[1], margin[1]) else 2


def factors(made: Made, result: Result, side: str, way: int) -> list[float]:
    """Distance [m] of each step of the waterfall, by ``assess``: book's conditions, then one after another today's."""
    book = {
        f"mass_{side}": made.card.values[f"max_{side}_mass"], "elevation_field": 0.0, "own_qnh": 101325.0,
        "own_temperature": np.nan, "isa_deviation": 0.0, "humidity": np.nan, "slope_given": 0.0, "surface": 0, "condition": 0,
        "own_wind_from": np.nan, "own_wind_speed": 0.0,
    }  # fmt: skip
    today = ((), (f"mass_{side}",), ("elevation_field", "own_qnh"), ("own_temperature", "isa_deviation", "humidity"),
             ("slope_given",), ("surface", "condition"), ("own_wind_from", "own_wind_speed"))  # fmt: skip
    found = []
    for keys in today:
        book = {key: value for key, value in book.items() if key not in keys}
        case = one_way(result, way, **book, physics_counts=True, corrections_count=False)
        found.append(float(case.si(f"{side}_distance")[0]))
    return [*found, float(result.si(f"{side}_distance")[way - 1]), float(result.si(f"{side}_required")[way - 1])]


# --- comparing with the book


class Page:
    """The recalculated cells of a book."""

    def __init__(self, book: Any) -> None:
        self.sheets = {name: book.values(name, area) for name, area in AREAS.items()}

    def __call__(self, cell: str, sheet: str = PAGE) -> Any:
        column, row = openpyxl.utils.cell.coordinate_from_string(cell)
        return self.sheets[sheet][row - 1][openpyxl.utils.column_index_from_string(column) - 1]

    def errors(self) -> list[str]:
        return [f"{name}: {value}" for name, rows in self.sheets.items() for row in rows for value in row
                if isinstance(value, str) and value.startswith("#ERR")]  # fmt: skip


AREAS = {PAGE: "A1:O41", "Charts": "A1:M45", TABLES: "A1:K99", WORKING["landing"]: "A4:CZ100",
         WORKING["takeoff"]: "A4:CZ100"}  # fmt: skip


def same(got: Any, expected: float, what: str) -> None:
    """A number of the book against one of ``assess``; margins are what is left of lengths of some hundred metres."""
    if np.isnan(expected):
        assert got in ("", None, whatif_fall.NOT_ASSESSED), f"{what}: {got}, and there is no value"
    else:
        assert got == pytest.approx(expected, rel=TOLERANCE, abs=TOLERANCE * 1000.0), what


def compare(made: Made, page: Page, inputs: Inputs) -> int:
    """All that the book shows against ``assess``; returns how many figures and words were compared."""
    result = asked(made, inputs)
    count = 0
    for (side, way), (letter, _) in whatif_page.COLUMNS.items():
        for row, name in enumerate(whatif_page.RESULTS, whatif_page.RESULT_ROW + 1):
            what, cell = f"{side} {way}: {name}", page(f"{letter}{row}")
            if name in ("verdict", "reason"):
                assert cell == result[f"{side}_{name}"][way - 1], what
            elif name == "better":
                known = result[f"{side}_verdict"][way - 1] != "not assessed"
                assert (cell == "better") == (known and better(result, side) == way), what
            elif name in ("headwind", "crosswind"):
                same(cell, result[name][way - 1], what)
            elif name == "available":
                lengths = result.si("landing_available") if side == "landing" else result.given["tora"]
                same(cell, lengths[way - 1], what)
            elif name:
                same(cell, result.si(f"{side}_{name}")[way - 1], what)
            count += bool(name)
    row = whatif_page.RESULT_ROW + len(whatif_page.RESULTS) + 2
    for side, first in (("landing", "H"), ("takeoff", "L")):
        for i, (words, key) in enumerate(whatif_page.SPEEDS[side]):
            same(page(f"{chr(ord(first) + i)}{row}"), result[key][0], words)
            count += 1
    same(page(f"H{row + 1}"), result["pressure_altitude"][0], "pressure altitude")
    same(page(f"L{row + 1}"), result["density_altitude"][0], "density altitude")
    for side in SIDES:
        way = better(result, side)
        count += compare_table(made, page, inputs, result, side, way) + compare_curves(made, page, inputs, result, side, way)
        count += compare_fall(made, page, result, side, way)
    return count


def compare_table(made: Made, page: Page, inputs: Inputs, result: Result, side: str, way: int) -> int:
    """Masses within the card's limits with today's among them, temperatures about today's, and the verdicts."""
    top, mass, temperature = MATRIX_ROW[side], inputs[f"mass_{side}"][0], inputs["temperature"][0]
    masses = [page(f"G{top + 1 + i}") for i in range(MASSES)]
    heats = [page(f"{letter}{top}") for letter in MATRIX_LETTERS]
    if temperature == "":
        assert set(heats) == {""}
    else:
        assert heats == pytest.approx([temperature + change for change in WARMER], abs=1e-9)
    greatest = made.card.values[f"max_{side}_mass"]
    if mass == "":
        assert set(masses) == {""}
        return 0
    known = [one for one in masses if one != ""]
    assert known[0] == greatest and known == sorted(known, reverse=True) and known[-1] >= made.card.values["empty_mass"]
    assert any(one == pytest.approx(min(mass, greatest), abs=1e-9) for one in known)
    rows, columns = len(known), len(WARMER)
    kelvin = [np.nan if one == "" else one + 273.15 for one in heats]
    case = one_way(result, way, **{f"mass_{side}": np.repeat(known, columns), "own_temperature": np.tile(kelvin, rows)})
    got = [page(f"{letter}{top + 1 + i}") for i in range(rows) for letter in MATRIX_LETTERS]
    assert got == case[f"{side}_verdict"]
    return len(got)


def compare_curves(made: Made, page: Page, inputs: Inputs, result: Result, side: str, way: int) -> int:
    """Required length over the temperature, and by flap setting."""
    temperature = inputs["temperature"][0]
    kelvin = np.array([np.nan if temperature == "" else temperature + 273.15 + change for change in SWEEP])
    case = one_way(result, way, own_temperature=kelvin)
    letter, first = {"landing": "F", "takeoff": "I"}[side], made.layout.sweep_row
    for i, required in enumerate(case.si(f"{side}_required")):
        same(page(f"{letter}{first + i}", TABLES), required, f"{side} at {SWEEP[i]:+.0f} K")
    names = made.layout.flaps[side]
    case = one_way(result, way, **{f"{side}_flap": np.radians([made.layout.deflection(name) for name in names])})
    for i, name in enumerate(names):
        row = made.layout.flap_row[side] + i
        assert page(f"E{row}", TABLES) == name
        same(page(f"G{row}", TABLES), case.si(f"{side}_required")[i], f"{side}, flap {name}")
        same(page(f"H{row}", TABLES), case.si(f"{side}_margin")[i], f"{side}, flap {name}: margin")
        assert page(f"I{row}", TABLES) == case[f"{side}_verdict"][i]
        assert page(f"K{row}", TABLES) == f"{name}: {case[f'{side}_verdict'][i]}"
    return len(SWEEP) + 4 * len(names)


def compare_fall(made: Made, page: Page, result: Result, side: str, way: int) -> int:
    """Each step of the waterfall, and that the steps add up to the distance required."""
    figures = factors(made, result, side, way)
    _, _, word, change, far = whatif_fall.LETTERS[side]
    first = whatif_fall.FIRST
    before = np.nan
    changes = []
    for k, figure in enumerate(figures):
        got, word_now = page(f"{change}{first + k}", "Charts"), page(f"{word}{first + k}", "Charts")
        expected = figure if k == 0 else figure - before
        same(got, expected, f"{side}: {whatif_fall.STEPS[k]}")
        if np.isnan(expected):
            assert word_now == "not assessed" == got
            assert "not assessed" in page(f"E{made.layout.fall_row[side] + k}", TABLES)
        else:
            changes.append(got)
            told = "adds" if got > 0.05 else "takes off" if got < -0.05 else "no change"
            assert word_now == (told if k else "begin with")
        before = figure if k == 0 or (np.isfinite(figure) and np.isfinite(before)) else before
        same(page(f"{far}{first + k}", "Charts"), before, f"{side}: so far, {whatif_fall.STEPS[k]}")
    total, required = (page(f"{letter}{first + len(figures)}", "Charts") for letter in (change, far))
    same(required, figures[-1], f"{side}: required")
    if np.isfinite(figures[-1]) and np.isfinite(figures[0]):
        assert total == pytest.approx(required, rel=TOLERANCE, abs=0.0)
        assert sum(changes) == pytest.approx(required, rel=TOLERANCE, abs=0.0)
        compare_bars(made, page, side)
    else:
        assert total == "not assessed"
    return len(figures) + 1


def compare_bars(made: Made, page: Page, side: str) -> None:
    """Each bar begins where the one before it ended, and the last is the distance required."""
    level, first = 0.0, made.layout.fall_row[side]
    for k in range(len(whatif_fall.STEPS)):
        base, whole, adds, takes = (page(f"{letter}{first + k}", TABLES) for letter in "FGHI")
        assert min(base, whole, adds, takes) >= 0.0
        bottom = base if adds or takes else level
        level = level + whole + adds - takes
        assert min(bottom, base + adds + takes) <= level + 1e-6
        if adds or takes:
            assert base == pytest.approx(min(level, level - adds + takes), abs=1e-6)
    assert page(f"G{first + len(whatif_fall.STEPS)}", TABLES) == pytest.approx(level, rel=TOLERANCE)


# --- the what-ifs


def what_ifs(layout: Layout) -> list[dict[str, Any]]:
    """Twenty and more edits of yellow cells; two values are those of the two directions."""
    card = layout.card
    heavy = card.values["max_takeoff_mass"]
    return [
        {},
        {"temperature": 35.0},
        {"mass_takeoff": 0.82 * heavy, "mass_landing": 0.79 * heavy},
        {"takeoff_flap": layout.flaps["takeoff"][-1], "landing_flap": layout.flaps["landing"][-2]},
        {"takeoff_flap": layout.flaps["takeoff"][0], "landing_flap": layout.flaps["landing"][0]},
        {"surface": "paved", "condition": "wet"},
        {"condition": "soft"},
        {"surface": "ice"},
        {"slope_given": -6.0},
        {"elevation_field": 7800.0, "temperature": 4.0},
        {"qnh": 985.0, "humidity": 90.0},
        {"wind_from": 60.0, "wind_speed": 14.0},
        {"wind_from": 240.0, "wind_speed": 9.0},
        {"wind_from": 330.0, "wind_speed": 30.0},
        {"obstacle_height": (80.0, 150.0), "obstacle_distance": (300.0, 700.0)},
        {"obstacle_height": (80.0, "")},
        {"land_here": ("yes", "no"), "take_off_here": ("no", "yes"), "slope_given": 9.0},
        {"land_here": ("no", "no")},
        {"tora": (500.0, 1200.0), "lda": (420.0, "")},
        {"heading": "", "wind_speed": 0.0},
        {"heading": ""},
        {"slope_given": ""},
        {"mass_takeoff": heavy + 50.0},
        {"mass_takeoff": heavy, "mass_landing": card.values["max_landing_mass"], "name": ("", "")},
        {"temperature": 50.0, "elevation_field": 12_000.0},
        {"slope_given": 20.0, "surface": "grass", "condition": "soft"},
        {"temperature": ""},
        {"elevation_field": ""},
        {"wind_speed": ""},
        {"qnh": ""},
        {"surface": ""},
        {"condition": ""},
        {"mass_landing": ""},
        {"takeoff_flap": "none such"},
    ]  # fmt: skip


def edited(layout: Layout, edits: Mapping[str, Any]) -> Inputs:
    """All inputs with some of them changed."""
    inputs = {key: tuple(values) for key, values in layout.start.values.items()}
    for key, value in edits.items():
        inputs[key] = value if isinstance(value, tuple) else (value, value)
    return inputs


def cells_of(layout: Layout, edits: Mapping[str, Any]) -> dict[str, Any]:
    """The yellow cells of some edits, and what is typed into them."""
    entries = {entry.key: entry for entry in layout.entries}
    typed = {}
    for key, value in edits.items():
        both = entries[key].both and not entries[key].turned
        for way in (1, 2) if both else (1,):
            one = value[way - 1] if isinstance(value, tuple) else value
            typed[layout.cell(key, way).rpartition("!")[2].replace("$", "")] = None if one == "" else one
    return typed


def typed_again(layout: Layout, edits: Mapping[str, Any]) -> dict[str, Any]:
    """The same cells as they were in the beginning."""
    return cells_of(layout, {key: layout.start.values[key] for key in edits})


def test_what_ifs_are_what_assess_says(made: Made, office: Office) -> None:
    edits = what_ifs(made.layout)
    assert len(edits) >= 20
    verdicts = set()
    with office.open(made.path) as book:
        for one in edits:
            book.set(PAGE, cells_of(made.layout, one))
            book.recalculate()
            page = Page(book)
            try:
                assert not page.errors()
                assert compare(made, page, edited(made.layout, one)) > 150
            except AssertionError as error:
                raise AssertionError(f"with {one}: {error}") from error
            verdicts |= {page(f"{letter}{whatif_page.RESULT_ROW + 1}") for letter, _ in whatif_page.COLUMNS.values()}
            book.set(PAGE, typed_again(made.layout, one))
        assert verdicts == {"suitable", "marginal", "unsuitable", "not assessed"}
        count, found = differences(book, made.path)  # all edits taken back, all is as it was written
    assert count > 10_000
    assert not found


WRONG: tuple[tuple[dict[str, Any], tuple[str, ...], str], ...] = (
    ({"humidity": 150.0}, SIDES, "Relative humidity: 0 to 100 % is expected."),
    ({"temperature": "warm"}, SIDES, "Temperature: -60 to 60 °C is expected."),
    ({"temperature": 99.0}, SIDES, "Temperature: -60 to 60 °C is expected."),
    ({"qnh": 29.92}, SIDES, "QNH: 850 to 1,085 hPa is expected."),
    ({"width": -5.0}, SIDES, "Width: 0 to 500 m is expected."),
    ({"wind_speed": -8.0}, SIDES, "Wind: 0 to 100 kt is expected."),
    ({"heading": 400.0}, SIDES, "Heading: 0 to 360 ° is expected."),
    ({"slope_given": 45.0}, SIDES, "Slope: -30 to 30 % is expected."),
    ({"obstacle_height": (-50.0, "")}, SIDES, "Obstacle ahead, height: 0 to 3,280 ft is expected."),
    ({"take_off_here": ("perhaps", "perhaps")}, ("takeoff",), "Take-off allowed: yes or no is expected."),
    ({"lda": (20_000.0, 20_000.0)}, ("landing",), "Usable for landing: 1 to 10,000 m is expected."),
    ({"mass_takeoff": 5.0}, ("takeoff",), "Take-off mass: "),
)


def test_what_cannot_be_right_is_not_assessed(made: Made, office: Office) -> None:
    """Pasted past the messages: never a figure, never an error, always the sentence."""
    with office.open(made.path) as book:
        for one, sides, sentence in WRONG:
            key = next(iter(one))
            entry = next(entry for entry in made.layout.entries if entry.key == key)
            assert any(wrong(entry, value) for value in edited(made.layout, one)[key])
            book.set(PAGE, cells_of(made.layout, one))
            book.recalculate()
            page = Page(book)
            assert not page.errors()
            assert sentence.rstrip(".").partition(": ")[2] in page(f"E{made.layout.rows[key]}")
            assert "is expected" in page(f"E{made.layout.rows[key]}")
            for (side, way), (letter, _) in whatif_page.COLUMNS.items():
                if side not in sides:
                    assert page(f"{letter}7") != "not assessed"
                    continue
                assert page(f"{letter}7") == "not assessed", (one, side, way)
                assert page(f"{letter}8").startswith(sentence), (one, side, way)
                assert {page(f"{letter}{row}") for row in (11, 12, 13)} == {""}
            for side in sides:
                rows = range(MATRIX_ROW[side] + 1, MATRIX_ROW[side] + 1 + MASSES)
                assert {page(f"{letter}{row}") for letter in MATRIX_LETTERS for row in rows} <= {"not assessed", ""}
                assert page(f"{whatif_fall.LETTERS[side][3]}{whatif_fall.FIRST + len(whatif_fall.STEPS)}", "Charts") == (
                    "not assessed")  # fmt: skip
            book.set(PAGE, typed_again(made.layout, one))


def test_one_direction_may_be_wrong_alone(made: Made, office: Office) -> None:
    with office.open(made.path) as book:
        book.set(PAGE, cells_of(made.layout, {"lda": (0.2, 760.0)}))
        book.recalculate()
        page = Page(book)
    assert page("H7") == "not assessed"
    assert page("J7") in ("suitable", "marginal", "unsuitable")
    assert page("H4") is None and str(page("G5")).startswith("Better way in: 23, ")


@pytest.mark.parametrize("made", ["high-mule"], indirect=True)
def test_a_step_without_a_figure_counts_in_the_next(made: Made, office: Office) -> None:
    """Too steep in still air, not so in the headwind that comes last: slope and surface are told as not assessed."""
    edits = {"slope_given": 10.0, "temperature": 35.0, "elevation_field": 3000.0, "wind_from": 61.0, "wind_speed": 20.0,
             "tora": (5000.0, 5000.0), "take_off_here": ("yes", "no")}  # fmt: skip
    with office.open(made.path) as book:
        book.set(PAGE, cells_of(made.layout, edits))
        book.recalculate()
        page = Page(book)
    assert compare(made, page, edited(made.layout, edits)) > 150
    words = [page(f"{whatif_fall.LETTERS['takeoff'][2]}{whatif_fall.FIRST + k}", "Charts") for k in range(7)]
    assert words[4:] == ["not assessed", "not assessed", "adds"]
    labels = [page(f"E{made.layout.fall_row['takeoff'] + k}", TABLES) for k in (4, 5)]
    assert labels == ["Slope: not assessed", "Surface: not assessed"]


@pytest.mark.parametrize("changes", [
    {"takeoff_factor": 1.6, "landing_factor": 1.9, "headwind_credit": 0.3},
    {"physics_counts": False, "corrections_count": True, "takeoff_factor": 1.1, "upslope_takeoff": 0.1},
    {"physics_counts": False, "corrections_count": False},
])  # fmt: skip
def test_edited_rules_count_everywhere(made: Made, office: Office, changes: dict[str, float | bool]) -> None:
    """Also in the waterfall, whose first steps are without the rule set's corrections whatever it says."""
    typed: dict[str, Any] = {}
    for key, value in changes.items():
        item = next(item for item in RULES_INPUTS if item.key == key)
        number = round(float(from_si(value, item.unit)), 9)
        typed[made.rule_cells[item.label]] = ("yes" if value else "no") if item.kind == "flag" else number
    rules = replace(made.rules, values={**made.rules.values, **changes})
    with office.open(made.path) as book:
        book.set("Rules", typed)
        book.recalculate()
        page = Page(book)
    assert not page.errors()
    assert compare(Made(made.path, made.card, rules, made.layout), page, edited(made.layout, {})) > 150


# --- the file


def test_the_file_is_sound_and_small(made: Made) -> None:
    assert not package_faults(made.path)
    assert made.path.stat().st_size < 700_000
    with zipfile.ZipFile(made.path) as package:
        names = package.namelist()
    assert not [name for name in names if "externalLink" in name]


def test_every_sheet_is_locked_but_for_the_inputs(made: Made) -> None:
    book = openpyxl.load_workbook(made.path)
    page = book[PAGE]
    assert book.sheetnames[0] == PAGE and book.sheetnames[-1] == WORKING["takeoff"]
    assert all(sheet.protection.sheet and not sheet.protection.password for sheet in book.worksheets)
    unlocked = {cell.coordinate for row in page.iter_rows() for cell in row
                if not isinstance(cell, MergedCell) and not cell.protection.locked}  # fmt: skip
    yellow = {cell for entry in made.layout.entries for cell in cells_of(made.layout, {entry.key: ("", "")})}
    assert unlocked == yellow
    checked = {cell for rule in page.data_validations.dataValidation for cells in rule.sqref.ranges for row in cells.rows
               for cell in [f"{openpyxl.utils.get_column_letter(column)}{at}" for at, column in row]}  # fmt: skip
    assert yellow - checked == set(cells_of(made.layout, {"name": ("", "")}))
    for title in (PAGE, "Charts", TABLES, *WORKING.values()):
        assert book[title]["A2"].value == CAUTION


NAMES = {"c": "http://schemas.openxmlformats.org/drawingml/2006/chart",
         "a": "http://schemas.openxmlformats.org/drawingml/2006/main"}  # fmt: skip


def charts_of(path: Path) -> Iterator[ElementTree.Element]:
    with zipfile.ZipFile(path) as package:
        for name in sorted(package.namelist()):
            if name.startswith("xl/charts/chart"):
                yield ElementTree.fromstring(package.read(name))


def test_charts_have_titles_axes_and_values(made: Made) -> None:
    values = openpyxl.load_workbook(made.path, data_only=True)
    pages = Pages(values)
    found = list(charts_of(made.path))
    assert len(found) == 6
    for chart in found:
        title = "".join(run.text or "" for run in chart.findall("c:chart/c:title//a:t", NAMES))
        assert len(title) > 10
        axes = [*chart.iterfind(".//c:catAx", NAMES), *chart.iterfind(".//c:valAx", NAMES)]
        assert len(axes) == 2
        words = ["".join(run.text or "" for run in axis.findall("c:title//a:t", NAMES)) for axis in axes]
        assert all(words) and any("[m]" in one for one in words)
        assert {axis.find("c:delete", NAMES).get("val") for axis in axes} == {"0"}  # type: ignore[union-attr]
        references = [*chart.iterfind(".//c:numRef", NAMES), *chart.iterfind(".//c:strRef", NAMES)]
        assert references
        for reference in references:
            cells = reference.find("c:f", NAMES).text  # type: ignore[union-attr]
            kept = {int(point.get("idx", "")): point.find("c:v", NAMES).text  # type: ignore[union-attr]
                    for point in reference.iterfind(".//c:pt", NAMES)}  # fmt: skip
            for i, value in enumerate(cell_values(pages, str(cells))):
                if isinstance(value, int | float):
                    assert float(str(kept[i])) == pytest.approx(value, rel=1e-12, abs=1e-12)
                else:
                    assert kept.get(i, "") == (value or "")


def test_bars_differ_in_grey_print(made: Made) -> None:
    """No two series of a chart of bars look alike without colour: solid, hatched or pale; lines differ by dash or marker."""
    for chart in charts_of(made.path):
        looks = []
        for series in chart.iterfind(".//c:ser", NAMES):
            look = series.find("c:spPr", NAMES)
            assert look is not None
            fill = look.find("a:solidFill/a:srgbClr", NAMES)
            pattern, dash = look.find("a:pattFill", NAMES), look.find("a:ln/a:prstDash", NAMES)
            marker = series.find("c:marker/c:symbol", NAMES)
            shade = None if fill is None else sum(bytes.fromhex(fill.get("val", ""))) // 150
            looks.append((shade, None if pattern is None else pattern.get("prst"), None if dash is None else dash.get("val"),
                          None if marker is None else marker.get("val"), look.find("a:noFill", NAMES) is not None))  # fmt: skip
        assert len(set(looks)) == len(looks)


def test_it_prints_on_one_page_and_the_charts_on_the_next(made: Made, office: Office, tmp_path: Path) -> None:
    with office.open(made.path) as book:
        book.recalculate()
        book.pdf(tmp_path / "printed.pdf")
    told = []
    for page in (1, 2, 3):
        text = subprocess.run(["pdftotext", "-f", str(page), "-l", str(page), "-layout", str(tmp_path / "printed.pdf"), "-"],
                              check=True, capture_output=True, text=True).stdout  # fmt: skip
        assert "###" not in text and "Err:" not in text
        told.append(text)
    assert [text.rstrip().splitlines()[-1].strip().split("  ")[0] for text in told] == [PAGE, "Charts", "Aircraft"]
    assert all(CAUTION in text for text in told[:2])
    assert "Length required and length available" in told[0] and "from the book figure" in told[1]


# --- what it begins with


def test_a_strip_typed_and_the_same_strip_of_a_list(tmp_path: Path) -> None:
    """The page's first values: those of the list, the day carried to the strip, and defaults that are told."""
    card, rules = load_card("ridge-runner"), load_rules("part-cat-b")
    file = tmp_path / "strips.csv"
    file.write_text("Strip,Name,Runway,Heading,Length [m],Elevation [ft],Slope [%],Surface,Width [m]\n"
                    "XAAA,Brook,09/27,88,640,1200,2,wet grass,20\n")  # fmt: skip
    typed = {"length": "640", "width": "20", "elevation_field": "1200", "slope_given": "2", "heading": "88",
             "surface": "wet grass"}  # fmt: skip
    day = read_day({"temperature": 20, "temperature_elevation": 0, "dew_point": 10})
    from_typed = from_options(typed, False, card, day, rules, {"landing_mass": "900 kg"})
    listed = from_list(file, "brook", None, card, day, rules, {"landing_mass": "900 kg"})
    assert {**from_typed.values, "name": ("09", "27")} == dict(listed.values)
    values = listed.values
    assert values["temperature"][0] == pytest.approx(20.0 - 0.0065 * 1200 * 0.3048, abs=0.05)  # to a tenth
    # vapour pressure of 12.28 hPa over 20.1 hPa (WMO Magnus form at 10 and 17.622 deg C), by hand
    assert values["humidity"][0] == pytest.approx(61.0, abs=0.2)
    assert values["mass_landing"][0] == 900.0 and values["condition"][0] == "wet"
    assert any("QNH" in sentence for sentence in listed.taken) and any("Wind" in sentence for sentence in listed.taken)
    one_way_strip = from_options(typed, True, card, day, rules, {})
    assert (one_way_strip.values["land_here"], one_way_strip.values["take_off_here"]) == (("yes", "no"), ("no", "yes"))


def test_what_a_list_tells_more_is_used_or_told(tmp_path: Path) -> None:
    """The strip's own day goes before the day's; a slope profile is left to the mean slope, and that is told."""
    card, rules, day = load_card("ridge-runner"), load_rules("part-cat-b"), read_day({"temperature": 20, "qnh": 1020})
    file = tmp_path / "strips.csv"
    file.write_text("Strip,Runway,Heading,Length [m],Elevation [ft],Slope [%],Surface,Temperature [°C],QNH [hPa],"
                    'Slope profile\nXAAA,09/27,88,640,1200,2,grass,31,1003.5,"0:0, 640:12.8"\n', encoding="utf-8")  # fmt: skip
    start = from_list(file, "XAAA", "27", card, day, rules, {})
    assert (start.values["temperature"][0], start.values["qnh"][0]) == (31.0, 1003.5)
    assert start.values["slope_given"] == (2.0, -2.0)
    assert any(sentence.startswith("Slope profile of the list: not used here") for sentence in start.taken)


COMMON = ["whatif", "--card", "ridge-runner", "--rules", "part-cat-b"]
TYPED = ["--length", "640", "--elev", "1200", "--surface", "grass", "--slope", "1", "--heading", "90"]
LISTED = ["--list", str(SCENARIO)]


@pytest.mark.parametrize(("options", "sentence"), [
    (["whatif"], "a what-if needs --card"),
    ([*COMMON, *TYPED], "no temperature"),
    ([*COMMON, "--temp", "20"], "the strip needs --elev"),
    ([*COMMON, *TYPED, "--temp", "20", "--strip", "XSPH"], "--strip and --runway go with --list"),
    ([*COMMON, *LISTED, *TYPED, "--temp", "20", "--strip", "XSPH"], "a strip of a list has its own values"),
    ([*COMMON, *LISTED, "--temp", "20"], "name the strip with --strip"),
    ([*COMMON, *LISTED, "--temp", "20", "--strip", "XNON"], "no strip of that identifier or name"),
    ([*COMMON, *LISTED, "--temp", "20", "--strip", "XRLB"], "no strip of that identifier or name"),
    ([*COMMON, *LISTED, "--temp", "20", "--strip", "XLRB"], "name one of its runways with --runway: 14/32, 05/23"),
    ([*COMMON, *LISTED, "--temp", "20", "--strip", "XLRB", "--runway", "09"], "there is no runway 09"),
    ([*COMMON, *LISTED, "--temp", "20", "--strip", "XLKB"], "an obstacle needs a distance"),
    ([*COMMON, *LISTED, "--temp", "20", "--strip", "XOTR"], "it is left out"),
    ([*COMMON, *TYPED, "--temp", "20", "--assume-slope", "2"], "--assume-slope"),
    ([*COMMON, *TYPED, "--temp", "20", "--takeoff-mass", "2000"], "665 to 1,110 kg is expected"),
    ([*COMMON, *TYPED, "--temp", "20", "--takeoff-flap", "30"], "not allowed for take-off"),
])  # fmt: skip
def test_what_cannot_be_made_is_told_in_a_sentence(options: Sequence[str], sentence: str, tmp_path: Path,
                                                  capsys: pytest.CaptureFixture[str]) -> None:  # fmt: skip
    out = tmp_path / "out.xlsx"
    assert main([*options, "-o", str(out)]) == 2
    told = capsys.readouterr().err
    assert sentence in told and told.count("\n") == 1 and not out.exists()


def test_the_command_makes_it_and_tells_the_better_way(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "out.xlsx"
    options = [*COMMON, *LISTED, "--strip", "xlrb", "--runway", "05/23", "--temp", "25", "--takeoff-mass", "950"]
    options += ["-o", str(out)]
    assert main(options) == 0
    told = capsys.readouterr().out
    assert "Lantern Basin 05/23, Ridge Runner 180" in told and "Land on " in told and "Take off on " in told and CAUTION in told
    book = openpyxl.load_workbook(out, data_only=True)
    assert book[PAGE]["A1"].value == "What if? Lantern Basin 05/23"
    assert main(options) == 2 and "--force" in capsys.readouterr().err
    assert main([*options, "--force"]) == 0
