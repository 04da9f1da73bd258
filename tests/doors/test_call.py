"""Calling the functions of the registry with cells and ranges, as a spreadsheet program hands them over."""

from __future__ import annotations

import random
from pathlib import Path
from typing import Any

import numpy as np
import openpyxl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from stripcheck import assess, solve
from stripcheck.card import load_card
from stripcheck.cli import main
from stripcheck.day import read_day
from stripcheck.doors import aircraft
from stripcheck.doors.aircraft import NO_REACH, aeroplane_of, rules_of
from stripcheck.doors.call import EMPTY, call, sentences
from stripcheck.doors.functions import BY_NAME, FUNCTIONS, Function
from stripcheck.rules import load_rules
from stripcheck.sheet.labels import TABLES
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.verdict import MARGINAL, SUITABLE, VERDICTS
from tests.aircraft import HERON, shipped_text
from tests.doors.random_cells import random_arguments
from tests.manual_cards import CORRECTIONS

TIGHT = 1e-9  # relative: the same equations run, on scalars and on arrays
SEARCHED = 1e-7  # a search stops short of the last digits, elsewhere where a sheet's values differ in the twelfth
RUN = ("ridge-runner", 1000, "10", 2400, 1008, 31, 1.5, "grass")
FITS = ("ridge-runner", 1000, "10", 800, 2400, 1008, 31, 1.5, "grass", "part-cat-b")


def do(name: str, *cells: Any) -> Any:
    return call(BY_NAME[name], *cells)


def close(one: Any, other: Any, tolerance: float = TIGHT) -> bool:
    if isinstance(one, float) and isinstance(other, float):
        return abs(one - other) <= tolerance * max(abs(one), abs(other), 1e-3)
    return bool(one == other)


# --- shapes


def test_a_scalar_gives_a_scalar_and_a_range_its_shape() -> None:
    alone = do("DENSITY_ALT", 2400, 1008, 31)
    assert isinstance(alone, float)
    assert do("DENSITY_ALT", [[2400]], 1008, 31) == alone
    assert do("DENSITY_ALT", [[2400], [2400]], 1008, 31) == [[alone], [alone]]
    assert do("DENSITY_ALT", ((2400, 2400),), ((1008,),), 31) == [[alone, alone]]
    assert do("DENSITY_ALT", np.array([[2400.0]]), 1008, np.array([31.0, 31.0])) == [[alone], [alone]]


def test_a_column_and_a_row_make_a_table() -> None:
    elevations, heats = [[0.0], [3000.0], [6000.0]], [[-10.0, 35.0]]
    table = do("DENSITY_ALT", elevations, 1013.25, heats)
    assert [len(row) for row in table] == [2, 2, 2]
    for row, (elevation,) in zip(table, elevations, strict=True):
        for cell, heat in zip(row, heats[0], strict=True):
            assert close(cell, do("DENSITY_ALT", elevation, 1013.25, heat))


def test_ranges_that_do_not_fit_are_told() -> None:
    said = do("DENSITY_ALT", [[1.0], [2.0]], 1008, [[1.0], [2.0], [3.0]])
    assert said == "the ranges have different shapes: 2 x 1 and 3 x 1 cells; give ranges of one shape"
    assert do("DENSITY_ALT", [[1.0], [2.0, 3.0]], 1008, 31) == "a range of cells in full rows is expected"
    assert do("DENSITY_ALT", [], 1008, 31) == "a range of cells in full rows is expected"
    assert "takes 3 values at the most" in do("PRESSURE_ALT", 1, 1013, "ft", 4)


# --- what a cell may hold


def test_left_out_is_the_usual_value_and_an_empty_cell_is_not() -> None:
    dry = do("DENSITY_ALT", 2400, 1008, 31)
    assert do("DENSITY_ALT", 2400, 1008, 31, None) == dry == do("DENSITY_ALT", 2400, 1008, 31, 0)
    for empty in ("", [[None]], [[""]], ((None,),)):
        assert do("DENSITY_ALT", 2400, 1008, 31, empty) == f"Humidity: {EMPTY}"
    assert do("DENSITY_ALT", 2400, 1008, 31, [[0.0], [None]]) == [[dry], [f"Humidity: {EMPTY}"]]
    assert do("DENSITY_ALT", 2400, 1008) == "Temperature is missing: Outside air temperature [°C]"
    assert do("DENSITY_ALT", 2400, 1008, [[None]]) == f"Temperature: {EMPTY}"
    assert do("DENSITY_ALT", 2400, 1008, 31, None, [[None]]) == dry  # the unit decides nothing but the look


@pytest.mark.parametrize("truth", [True, False, np.True_])
def test_a_truth_is_no_number(truth: Any) -> None:
    assert do("DENSITY_ALT", truth, 1008, 31).startswith(f'Elevation: "{truth}" is not a number')
    assert "is none of" in do("ROLLING", truth, "dry")


def test_text_carries_its_own_unit() -> None:
    plain = do("DENSITY_ALT", 2300, 1013.25, 30)
    assert close(do("DENSITY_ALT", "2300 ft", "1013.25 hPa", "86 °F"), plain)
    assert close(do("DENSITY_ALT", "701.04 m", "101325 Pa", "303.15 K"), plain)
    assert close(do("DENSITY_ALT", 2300, "29.92 inHg", 30), do("DENSITY_ALT", 2300, 29.92, 30))
    assert do("DENSITY_ALT", "2300 kg", 1013, 30).startswith('Elevation: "kg" is not a unit of altitude')


def test_a_bare_pressure_is_told_by_its_size() -> None:
    inches = do("PRESSURE_ALT", 1000, 29.92)
    assert abs(inches - do("PRESSURE_ALT", 1000, 29.92 * 33.86388640341)) < 1e-6  # ft: hPa in an inch of mercury at 0 °C
    assert do("PRESSURE_ALT", 1000, 500) == "QNH: 500 is neither a pressure in hPa (800 to 1100) nor in inHg (24 to 32.5)"
    both = do("PRESSURE_ALT", 1000, [[29.92], [1013.0], [500.0]])
    assert both[0] == [inches] and isinstance(both[1][0], float) and both[2][0].startswith("QNH: 500 is neither")


def test_the_unit_of_the_result() -> None:
    kilograms = do("MOST_TAKEOFF_MASS", *BY_NAME["MOST_TAKEOFF_MASS"].example)
    pounds = do("MOST_TAKEOFF_MASS", *BY_NAME["MOST_TAKEOFF_MASS"].example, None, None, "lb")
    assert close(pounds, kilograms / 0.45359237)
    celsius = do("HOTTEST_TAKEOFF", *BY_NAME["HOTTEST_TAKEOFF"].example)
    assert close(do("HOTTEST_TAKEOFF", *BY_NAME["HOTTEST_TAKEOFF"].example, None, None, "°F"), celsius * 1.8 + 32.0)
    assert do("SLOPE", 0, 100, 1000, "nonsense").startswith('"nonsense" is not a unit of slope')
    assert do("SLOPE", 0, 100, 1000, "kg").startswith('"kg" is not a unit of slope')
    assert do("SLOPE", 0, 100, 1000, 7) == 'Unit: a text such as "%" is expected'
    assert do("SLOPE", 0, 100, 1000, [["%"], ["%"]]) == 'Unit: a text such as "%" is expected'


def test_a_flap_called_ten_may_come_as_a_number() -> None:
    assert do("STALL_SPEED", "ridge-runner", 1000, 10) == do("STALL_SPEED", "ridge-runner", 1000, 10.0)
    assert do("STALL_SPEED", "ridge-runner", 1000, 10) == do("STALL_SPEED", "ridge-runner", 1000, "10")
    assert 'there is no flap setting "10.5"' in do("STALL_SPEED", "ridge-runner", 1000, 10.5)
    assert 'flap "30" is not allowed for take-off' in do("LIFT_OFF_SPEED", "ridge-runner", 1000, "30")


def test_units_of_any_kind_are_converted() -> None:
    assert close(do("CONVERT", 2400, "ft", "m"), 731.52)
    assert close(do("CONVERT", 15, "degC", "degF"), 59.0)
    assert close(do("CONVERT", [[1.0], [2.0]], "gallon", "liter")[1][0], 7.570823568)  # US gallon: 231 cubic inches
    assert do("CONVERT", 1, "ft", "kg") == '"ft" and "kg" do not measure the same thing'
    assert do("CONVERT", 1, "9**9**9", "m").startswith('"9**9**9" is not a unit')
    for wrong in (5, 5.0, True, [["ft"], ["m"]]):
        assert do("CONVERT", 1, wrong, "m").startswith("From unit: one text is expected")


# --- what is wrong stands in its place


def test_the_rest_of_a_range_is_computed() -> None:
    elevations = [[2400.0], ["x"], [None], ["#N/A"], [2400.0]]
    column = do("TAKEOFF_DIST", *RUN[:3], elevations, *RUN[4:])
    assert column[0] == column[4] == pytest.approx([do("TAKEOFF_DIST", *RUN)], rel=1e-14)
    assert [cell[0].split(":")[0] for cell in column[1:4]] == ["Elevation"] * 3
    assert len(sentences(BY_NAME["TAKEOFF_DIST"], *RUN[:3], elevations, *RUN[4:])) == 3
    grounds = do("ROLLING", [["grass"], ["moss"], ["gravel"]], "dry")
    assert [type(row[0]) for row in grounds] == [float, str, float]
    verdicts = do("TAKEOFF_VERDICT", "ridge-runner", 1000, [["10"], ["99"]], *FITS[3:])
    assert verdicts[0] == [do("TAKEOFF_VERDICT", "ridge-runner", 1000, "10", *FITS[3:])]
    assert 'no flap setting "99"' in verdicts[1][0]


@pytest.mark.parametrize("function", [f for f in FUNCTIONS if f.ask or f.step], ids=lambda f: f.name)
def test_a_wrong_cell_spoils_nothing_else(function: Function) -> None:
    good = call(function, *function.example)
    at = next(i for i, argument in enumerate(function.arguments) if argument.kind not in ("aircraft", "rules"))
    cells = [*function.example]
    cells[at] = [[function.example[at]], ["rubbish"], [None]]
    column = call(function, *cells)
    assert close(column[0][0], good)
    assert all(row[0].startswith(function.arguments[at].name + ":") for row in column[1:])


@pytest.mark.parametrize(
    ("name", "cells"),
    [
        ("PRESSURE_ALT", (99999, 1013)),
        ("PRESSURE_ALT", (1000, "5 hPa")),
        ("DENSITY_ALT", (1000, 1013, 80)),
        ("DENSITY_ALT", (1000, 1013, 20, 130)),
        ("DENSITY_ALT", (1000, 1013, 20, -1)),
        ("SLOPE", (1000, 1100, 0)),
        ("SLOPE", (1000, 1100, -500)),
        ("SLOPE", (1000, 9000, 600)),
        ("HEADWIND", (300, -5, 270)),
        ("CROSSWIND", (300, -5, 270)),
        ("TAKEOFF_FACTORED", (-600, "part-cat-b")),
        ("BRAKING", ("snow", "no such")),
    ],
)
def test_what_is_not_credible_has_no_result(name: str, cells: tuple[Any, ...]) -> None:
    assert isinstance(do(name, *cells), str)


def test_bank() -> None:
    level = do("STALL_SPEED", "ridge-runner", 1000, "10")
    assert close(do("STALL_SPEED", "ridge-runner", 1000, "10", 60), level * 2.0**0.5)  # load factor 2
    for bank in (85, -90, 120, 10**6):
        assert do("STALL_SPEED", "ridge-runner", 1000, "10", bank) == "Bank: less than 85° to either side is expected"
    assert "mass" in do("STALL_SPEED", "ridge-runner", -5, "10")


@pytest.mark.parametrize(("cells", "said"), [
    (("no such", *RUN[1:]), '"no such" is neither a file nor one of the shipped cards'),
    ((7, *RUN[1:]), "Aircraft: the name of a card, or a range"),
    (("", *RUN[1:]), "Aircraft is missing"),
    ((None, *RUN[1:]), "Aircraft is missing"),
    (([["a", "b"], ["c", "d"]], *RUN[1:]), 'Aircraft: the range has no row "Propeller"'),
    ((*FITS[:9], "no such"), '"no such" is neither a file nor one of the shipped rules'),
    ((*FITS[:9], 3.0), "Rules: the name of a rule set, or a range"),
    ((*FITS[:9], [["a", "b"], ["c", "d"]]), 'Rules: the range has no row "Headwind credited"'),
])  # fmt: skip
def test_wrong_aircraft_and_rules_are_told(cells: tuple[Any, ...], said: str) -> None:
    assert said in do("TAKEOFF_VERDICT" if len(cells) == len(FITS) else "TAKEOFF_DIST", *cells)


# --- the numbers


def test_agrees_with_assess() -> None:
    dice = random.Random(4)
    for _ in range(40):
        mass, length, slope, heat = dice.uniform(750, 1100), dice.uniform(250, 900), dice.uniform(-6, 6), dice.uniform(-10, 40)
        elevation, qnh, head = dice.uniform(0, 7000), dice.uniform(980, 1040), dice.uniform(-8, 20)
        surface, condition = dice.choice(SURFACES), dice.choice(CONDITIONS)
        strip = (
            {"tora": [length], "lda": [length], "elevation_field": [elevation], "slope_given": [slope], "surface": [surface],
             "condition": [condition], "heading": [90.0], "own_temperature": [heat], "own_qnh": [qnh],
             "own_wind_from": [90.0 if head >= 0 else 270.0], "own_wind_speed": [abs(head)]}
        )  # fmt: skip
        loading = {"takeoff_mass": mass, "landing_mass": mass, "takeoff_flap": "10", "landing_flap": "30"}
        result, without = (assess(strip, "ridge-runner", {}, rules, **loading) for rules in ("uk-leaflet", "manual-only"))
        for side, flap, names in (
            ("takeoff", "10", {"roll": "TAKEOFF_ROLL", "distance": "TAKEOFF_DIST", "margin": "TAKEOFF_MARGIN"}),
            ("landing", "30", {"roll": "LANDING_ROLL", "distance": "LANDING_DIST", "margin": "LANDING_MARGIN"}),
        ):
            site = (elevation, qnh, heat, slope, surface)
            fits = ("ridge-runner", mass, flap, length, *site, "uk-leaflet", condition, head)
            assert do(f"{side.upper()}_VERDICT", *fits) == result[f"{side}_verdict"][0]
            assert do(f"{side.upper()}_REASON", *fits) == result[f"{side}_reason"][0]
            for part, name in names.items():
                cells = fits if part == "margin" else ("ridge-runner", mass, flap, *site, condition, head)
                key = f"carried_{side}_{part}" if part == "roll" else f"{side}_{part}"  # the card has tables of its manual
                answer, expected = do(name, *cells), float((result if part == "margin" else without)[key][0])
                assert close(answer, expected) if np.isfinite(expected) else isinstance(answer, str)


@pytest.mark.parametrize("rules", ["part-cat-b", "uk-leaflet", "au-small", "manual-only"])
@pytest.mark.parametrize(("side", "flap"), [("TAKEOFF", "10"), ("LANDING", "30")])
def test_the_required_distance_is_the_length_less_the_margin(rules: str, side: str, flap: str) -> None:
    """And what an assessment gives; with surface and slope that the plain distance with its factor may not have."""
    longer = 0
    for slope, surface, condition, head in ((0, "paved", "dry", 0), (1.5, "grass", "dry", 6), (-2, "grass", "wet", -4)):
        air = (2400, 1008, 31, slope, surface)
        required = do(f"{side}_REQUIRED", "ridge-runner", 1000, flap, *air, rules, condition, head)
        margin = do(f"{side}_MARGIN", "ridge-runner", 1000, flap, 1500, *air, rules, condition, head)
        assert close(required, 1500.0 - margin)
        strip = {"tora": 1500.0, "lda": 1500.0, "elevation_field": 2400.0, "own_qnh": 1008.0, "own_temperature": 31.0,
                 "slope_given": slope, "surface": surface, "condition": condition, "heading": 0.0,
                 "own_wind_speed": abs(head), "own_wind_from": 180.0 if head < 0 else 0.0}  # fmt: skip
        loading = {f"{side.lower()}_mass": 1000, f"{side.lower()}_flap": flap}
        result = assess({key: [value] for key, value in strip.items()}, "ridge-runner", {}, rules, **loading)
        assert close(required, float(result[f"{side.lower()}_required"][0]))
        plain = do(f"{side}_FACTORED", do(f"{side}_DIST", "ridge-runner", 1000, flap, *air, condition, head), rules)
        longer += not close(required, plain)
    assert longer > 0 or rules == "manual-only"


def test_agrees_with_solve() -> None:
    day = read_day({"temperature": 31, "qnh": 1008})
    strip = {"tora": [800.0], "lda": [800.0], "elevation_field": [2400.0], "slope_given": [1.5], "surface": ["grass"]}
    case = assess(strip, "ridge-runner", day, "part-cat-b", takeoff_flap="10", landing_flap="30", takeoff_mass=1000)
    limit = BY_NAME["MOST_TAKEOFF_MASS"].example
    assert close(do("MOST_TAKEOFF_MASS", *limit), float(solve.most_mass(case, "takeoff").value[0]))
    hottest = do("HOTTEST_TAKEOFF", "ridge-runner", 1000, *limit[1:5], *limit[6:])
    expected = solve.hottest_air(case, "takeoff")
    assert close(hottest, float(expected.value[0]) - 273.15) if np.isfinite(expected.value[0]) else isinstance(hottest, str)
    point = solve.abort_point_of(case, solve.REACTION)
    assert close(do("ABORT_POINT", *FITS[:9]), float(point.distance[0]))


def test_best_flap_is_the_best_of_all() -> None:
    for side, use in (("TAKEOFF", "take-off"), ("LANDING", "landing")):
        best = do(f"BEST_{side}_FLAP", *BY_NAME[f"BEST_{side}_FLAP"].example)
        flaps = [flap.name for flap in load_card("ridge-runner").flaps if use in flap.uses]
        rest = ("ridge-runner", 950, 800, 2400, 1008, 31, 1.5, "grass", "part-cat-b")
        ranks = {name: (VERDICTS[::-1].index(do(f"{side}_VERDICT", *rest[:2], name, *rest[2:])),
                        do(f"{side}_MARGIN", *rest[:2], name, *rest[2:])) for name in flaps}  # fmt: skip
        assert best == max(ranks, key=lambda name: ranks[name][1])
        assert len(flaps) > 1
    assert do("BEST_TAKEOFF_FLAP", "ridge-runner", 950, 60, *BY_NAME["BEST_TAKEOFF_FLAP"].example[3:]) == "none"


@given(st.sampled_from([f for f in FUNCTIONS if f.ask is None]), st.integers(0, 10**6), st.integers(2, 4))
@settings(max_examples=120)
def test_a_range_call_equals_scalar_calls(function: Function, seed: int, rows: int) -> None:
    dice = random.Random(seed)
    first = random_arguments(function, dice)
    many = [random_arguments(function, dice) for _ in range(rows)]
    cells, lines = list(first), [list(first) for _ in range(rows)]
    for at, argument in enumerate(function.arguments):
        if argument.kind not in ("aircraft", "rules", "text", "flap") and first[at] is not None and dice.random() < 0.6:
            column = [row[at] if dice.random() < 0.9 else dice.choice(["rubbish", "", True]) for row in many]
            cells[at] = [[cell] for cell in column]
            for line, cell in zip(lines, column, strict=True):
                line[at] = [[cell]]
    answer = call(function, *cells)
    if not isinstance(answer, list):  # no range was drawn
        assert close(answer, call(function, *first))
        return
    for row, line in zip(answer, lines, strict=True):
        alone = call(function, *line)
        assert close(row[0], alone), (line, row, alone)


@pytest.mark.parametrize("function", [f for f in FUNCTIONS if f.ask is not None], ids=lambda f: f.name)
def test_a_range_call_equals_scalar_calls_for_the_inverse_questions(function: Function) -> None:
    at = next(i for i, argument in enumerate(function.arguments) if argument.key == "length")
    column = [[450.0], [800.0], ["700 yd"]]
    cells = [*function.example]
    cells[at] = column
    expected = [call(function, *function.example[:at], cell, *function.example[at + 1 :]) for (cell,) in column]
    assert all(close(row[0], one) for row, one in zip(call(function, *cells), expected, strict=True))


@given(st.sampled_from([f for f in FUNCTIONS if f.ask is None]), st.data())
@settings(max_examples=150, suppress_health_check=[HealthCheck.too_slow])
def test_nothing_that_a_cell_can_hold_raises(function: Function, data: st.DataObject) -> None:
    cell = st.one_of(st.none(), st.booleans(), st.floats(), st.integers(), st.text(max_size=8), st.sampled_from(
        ["ridge-runner", "part-cat-b", "10", 10.0, "grass", "wet", "2300 ft", "29.92 inHg", 1013, 2400.0, "m"]))  # fmt: skip
    rows = st.lists(st.lists(cell, min_size=1, max_size=3), min_size=1, max_size=3)
    cells = data.draw(st.lists(st.one_of(cell, rows), max_size=len(function.all_arguments) + 1))
    answer = call(function, *cells)
    for row in answer if isinstance(answer, list) else [[answer]]:
        for one in row:
            assert isinstance(one, str) or (isinstance(one, float) and np.isfinite(one))


# --- files and ranges


def sheet_rows(path: Path, sheet: str, columns: int) -> list[list[Any]]:
    book = openpyxl.load_workbook(path, data_only=True)
    return [list(row) for row in book[sheet].iter_rows(max_col=columns, values_only=True)]


@pytest.fixture(scope="module")
def heron(tmp_path_factory: pytest.TempPathFactory) -> str:
    """Path of a card that has single figures of its manual, and no tables."""
    path = tmp_path_factory.mktemp("card") / "heron.toml"
    path.write_text(HERON, encoding="utf-8")
    return str(path)


@pytest.fixture(scope="module")
def sheets(heron: str, tmp_path_factory: pytest.TempPathFactory) -> dict[str, list[list[Any]]]:
    """The Aircraft and Rules sheets of a workbook for it, as a spreadsheet program hands them over."""
    return filled(heron, "part-cat-b", tmp_path_factory.mktemp("book"))


def filled(card: str, rules: str, folder: Path) -> dict[str, list[list[Any]]]:
    """The same sheets of a workbook for a card and a rule set."""
    strips = folder / "one.csv"
    header = "Name,Length [m],Elevation [ft],Surface,Slope [%],Direction"
    strips.write_text(f"{header}\nHollow,800,2400,grass,1.5,09\n", encoding="utf-8")
    path = folder / "one.xlsx"
    assert main(["fill", str(strips), "--card", card, "--rules", rules, "--temp", "20", "-o", str(path), "--quiet"]) == 0
    return {"Aircraft": sheet_rows(path, "Aircraft", 9), "Rules": sheet_rows(path, "Rules", 6)}


def other(rows: list[list[Any]], label: str, column: int, value: Any) -> list[list[Any]]:
    """The rows with another value beside a label."""
    assert any(row[0] == label for row in rows)
    return [[*row[:column], value, *row[column + 1 :]] if row[0] == label else list(row) for row in rows]


@pytest.mark.parametrize("function", [f for f in FUNCTIONS if f.arguments[0].key == "aircraft"], ids=lambda f: f.name)
def test_the_sheets_of_a_filled_workbook_work_as_they_are(function: Function, heron: str,
                                                          sheets: dict[str, list[list[Any]]]) -> None:  # fmt: skip
    named = [heron if cell == "ridge-runner" else cell for cell in function.example]
    cells = [sheets["Aircraft"] if cell == heron else sheets["Rules"] if cell == "part-cat-b" else cell for cell in named]
    assert close(call(function, *cells), call(function, *named), SEARCHED if function.ask else TIGHT)
    assert sentences(function, *cells) == sentences(function, *named)


def test_the_sheets_of_the_shipped_scenario_work(tmp_path: Path) -> None:
    path = tmp_path / "demo.xlsx"
    assert main(["demo", "-o", str(path), "--quiet"]) == 0
    aircraft_rows, rules_rows = sheet_rows(path, "Aircraft", 9), sheet_rows(path, "Rules", 6)
    assert close(do("STALL_SPEED", aircraft_rows, 1000, "10"), do("STALL_SPEED", "ridge-runner", 1000, "10"))
    assert close(do("TAKEOFF_FACTORED", 700, rules_rows), do("TAKEOFF_FACTORED", 700, "part-cat-b"))
    assert close(do("TAKEOFF_DIST", aircraft_rows, *RUN[1:]), do("TAKEOFF_DIST", *RUN))
    assert do("TAKEOFF_VERDICT", *FITS[:9], rules_rows) == do("TAKEOFF_VERDICT", *FITS)


def test_a_changed_value_in_a_range_changes_the_answer(sheets: dict[str, list[list[Any]]]) -> None:
    plain = do("TAKEOFF_DIST", sheets["Aircraft"], *RUN[1:])
    heavier_drag = other(other(sheets["Aircraft"], "Parasite drag coefficient", 1, 0.08), "Parasite drag coefficient", 3, 0.08)
    assert do("TAKEOFF_DIST", heavier_drag, *RUN[1:]) > plain
    typed = other(other(sheets["Aircraft"], "Wing area", 1, 12.0), "Wing area", 3, "")  # not yet recalculated
    assert do("STALL_SPEED", typed, 1000, "10") == do("STALL_SPEED", other(typed, "Wing area", 3, 12.0), 1000, "10")
    label = "Take-off safety factor"
    assert do("TAKEOFF_FACTORED", 600, other(other(sheets["Rules"], label, 1, 1.5), label, 3, 1.5)) == 900.0


def test_rows_that_a_range_lacks_are_told(sheets: dict[str, list[list[Any]]]) -> None:
    for label in ("Propeller", "Wing area", "Crosswind limit", "Static thrust"):
        rows = [row for row in sheets["Aircraft"] if row[0] != label]
        assert f'Aircraft: the range has no row "{label}"' in do("STALL_SPEED", rows, 1000, "10")
    rows = [row for row in sheets["Rules"] if row[0] != "Tailwind counted"]
    assert 'Rules: the range has no row "Tailwind counted"' in do("TAKEOFF_FACTORED", 600, rows)
    assert "flap table" in do("STALL_SPEED", [row[:5] for row in sheets["Aircraft"]], 1000, "10")
    ground = next(i for i, row in enumerate(sheets["Rules"]) if row[0] == "Ground")
    assert "ground table" in do("TAKEOFF_FACTORED", 600, sheets["Rules"][:ground])
    assert "not complete" in do("TAKEOFF_FACTORED", 600, sheets["Rules"][: ground + 4])


def test_a_blank_never_takes_a_limit_or_a_factor_away(sheets: dict[str, list[list[Any]]]) -> None:
    for label in ("Greatest take-off mass", "Crosswind limit", "Tailwind limit", "Lift-off speed over stall"):
        rows = other(other(sheets["Aircraft"], label, 1, None), label, 3, "")
        assert do("TAKEOFF_VERDICT", rows, *FITS[1:]) == f'Aircraft: "{label}" has no number in the range'
    for label in ("Take-off safety factor", "Headwind credited", "Clearance over obstacles"):
        rows = other(other(sheets["Rules"], label, 1, None), label, 3, "")
        assert do("TAKEOFF_VERDICT", *FITS[:9], rows) == f'Rules: "{label}" has no number in the range'
    rows = other(other(sheets["Rules"], "Take-off safety factor", 1, "#N/A"), "Take-off safety factor", 3, "#N/A")
    assert "has no number" in do("TAKEOFF_FACTORED", 600, rows)
    assert "yes or no is expected" in do("TAKEOFF_FACTORED", 600, other(sheets["Rules"], "Physics counts", 1, None))
    assert "lacks a number for setting 10" in do("STALL_SPEED", other(sheets["Aircraft"], "10", 8, None), 1000, "10")
    assert "lacks a number for setting 10" in do("STALL_SPEED", other(sheets["Aircraft"], "10", 7, "x"), 1000, "10")
    assert "from up to down" in do("STALL_SPEED", other(sheets["Aircraft"], "10", 3, 2.0), 1000, "10")


def test_a_range_without_the_manuals_tables_is_at_best_marginal(tmp_path: Path) -> None:
    """As in a workbook of LAMBDA names, whose sheet Aircraft tells of none."""
    whole = filled("high-mule", "manual-only", tmp_path)["Aircraft"]
    rows = [row for row in whole if row[0] != TABLES and " tables, " not in str(row[0]) and ", page " not in str(row[0])]
    site = (3000, 0, 1013.25, 15, 0, "paved", "manual-only")
    for side, flap in (("TAKEOFF", "15"), ("LANDING", "40")):
        assert do(f"{side}_VERDICT", "high-mule", 2200, flap, *site) == SUITABLE
        assert do(f"{side}_VERDICT", whole, 2200, flap, *site) == SUITABLE
        assert do(f"{side}_VERDICT", rows, 2200, flap, *site) == MARGINAL
        assert do(f"{side}_REASON", rows, 2200, flap, *site) == NO_REACH
        assert isinstance(do(f"{side}_DIST", rows, 2200, flap, *site[1:-1]), float)
        assert isinstance(do(f"MOST_{side}_MASS", rows, flap, *site), str)


def test_a_range_that_does_not_tell_the_reach_is_at_best_marginal(sheets: dict[str, list[list[Any]]]) -> None:
    label = "Take-off figures reach to a density altitude of"
    site = (2000, 0, 1013.25, 15, 0, "paved", "manual-only")
    assert do("TAKEOFF_VERDICT", sheets["Aircraft"], 900, "10", *site) == SUITABLE
    for rows in ([row for row in sheets["Aircraft"] if row[0] != label],
                 other(other(sheets["Aircraft"], label, 1, None), label, 3, ""),
                 [*sheets["Aircraft"], ["Climb speed", 70.0, "kt", 36.0, *[None] * 5]]):  # fmt: skip
        assert do("TAKEOFF_VERDICT", rows, 900, "10", *site) == MARGINAL
        assert do("TAKEOFF_REASON", rows, 900, "10", *site) == NO_REACH
    assert do("LANDING_VERDICT", [row for row in sheets["Aircraft"] if row[0] != label], 900, "30", *site) == SUITABLE


def test_the_manuals_own_corrections_are_in_the_range(tmp_path: Path) -> None:
    card = tmp_path / "heron.toml"
    card.write_text(HERON + CORRECTIONS, encoding="utf-8")
    rows = filled(str(card), "uk-leaflet", tmp_path)["Aircraft"]
    for head in (-5.0, 12.0):
        cells = (1000, "20", 700, 1500, 1010, 20, 0.5, "grass", "uk-leaflet", "wet", head)
        for name in ("TAKEOFF_VERDICT", "TAKEOFF_REASON", "TAKEOFF_MARGIN", "LANDING_VERDICT", "LANDING_MARGIN"):
            assert close(do(name, rows, *cells), do(name, str(card), *cells))


def test_files_by_path_and_changed_on_the_way(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    card, rules = tmp_path / "own.toml", tmp_path / "rules.toml"
    card.write_text(shipped_text("ridge-runner"), encoding="utf-8")
    text = 'title = "a"\nissue = "b"\ncitation = "c"\nstatus = "own"\n[takeoff]\nsafety_factor = 1.4\n'
    rules.write_text(text, encoding="utf-8")
    assert do("TAKEOFF_DIST", str(card), *RUN[1:]) == do("TAKEOFF_DIST", *RUN)
    assert close(do("TAKEOFF_FACTORED", 500, str(rules)), 700.0)
    rules.write_text(text.replace("1.4", "1.6"), encoding="utf-8")
    now = aircraft.time.monotonic()
    monkeypatch.setattr(aircraft.time, "monotonic", lambda: now + 10.0)
    assert close(do("TAKEOFF_FACTORED", 500, str(rules)), 800.0)
    assert "no such.toml" in do("TAKEOFF_FACTORED", 500, str(tmp_path / "no such.toml"))
    assert aeroplane_of(str(card)).where == "own.toml"
    assert rules_of(str(rules))["takeoff_factor"] == 1.6
    assert load_rules(str(rules)).values["takeoff_factor"] == 1.6
