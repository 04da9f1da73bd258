"""How the rows of a register are read: lists into rows, and rows by formulas as by the reader of lists."""

from __future__ import annotations

import datetime
from collections import Counter
from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pytest

from stripcheck.books import common, register_sheet
from stripcheck.books.register_columns import FIRST_ROW, SHEET
from stripcheck.books.register_levels import register_chain, write_ends
from stripcheck.books.register_reading import Reading, write_reading
from stripcheck.books.register_rows import Rows, closed_months, rows_of
from stripcheck.card import load_card
from stripcheck.day import read_day
from stripcheck.errors import InputError
from stripcheck.inputs import STRIP
from stripcheck.register import Directions, read_list
from stripcheck.rules import load_rules
from stripcheck.sheet import method, pages
from stripcheck.sheet.cases import Cases, no_inputs
from stripcheck.sheet.stream import write_book
from stripcheck.units import to_si
from tests.books.ugly_lists import HEADERS, write_ugly
from tests.office import Office
from tests.sheet.recalculated import differences

ROWS = 200
SCENARIO = Path(__file__).parents[2] / "stripcheck" / "scenario"
NUMBERS = (
    "length",
    "tora",
    "lda",
    "width",
    "elevation_start",
    "elevation_end",
    "slope_given",
    "heading",
    "obstacle_height",
    "obstacle_distance",
    "approach_obstacle_height",
    "approach_obstacle_distance",
)
UNITS = {item.key: item.unit for item in STRIP}
# what somebody may type into a cell: of these the reader of lists reads many that a formula does not
NUMBERS_TYPED = (
    620.0,
    45.0,
    0.0,
    2.5,
    12.0,
    300.0,
    1.0,
    95.0,
    7.0,
    5.0,
    -3.0,
    0.2,
    1e9,
    45000.0,
    None,
    None,
    "620",
    "2300 ft",
    "far",
    "-",
    "?",
    "0.2 %",
    "2%",
    "1,5 %",
    "1e3",
    "  ",
    "*",
    datetime.date(2024, 5, 1),
)
WORDS_TYPED = (
    "9",
    9.0,
    "both",
    "09 only",
    "turf",
    "Grass",
    "WET",
    " wet ",
    "*",
    "?",
    "~",
    "gr?ss",
    "-",
    "n/a",
    "yes",
    "Yes",
    "TRUE",
    "09/27",
    "27/09",
    "9/27",
    "N/S",
    "H1/H2",
    "09-27",
    "+9/27",
    "09L/27R",
    "04/22",
    "0:0, 700:7",
    "  ",
    "0",
    "Soft",
    "unknown",
    None,
    None,
    "no",
    "14",
    "32",
    "sand",
    "dry",
    "n",
    "s",
    14.0,
)


def _written(rows: Rows, path: Path) -> tuple[Reading, Sequence[Cases]]:
    """A workbook with the register, how it is read, and its directions, and nothing of an aeroplane."""
    made = common.start_book("A test")
    source = register_sheet.write_register(made, rows, 60, None)
    rules, day, card = load_rules("part-cat-b"), read_day({"wind_from": 250, "wind_speed": 9}), load_card("ridge-runner")
    pages.write_day(made, day)
    pages.write_rules(made, rules)
    chain = register_chain(card.chain)
    method.write_method(made, chain, [], [])
    reading = write_reading(made, source, rows.rows, rows.profiles)
    ends = write_ends(made, reading, chain, {**no_inputs(), **rules.values, **day.values, **card.values, "elevation": np.nan})
    write_book(made.book, {"Reading": reading.table} | {one.sheet: one.table for one in ends}, path, cached=made.cached)
    return reading, list(ends)


def _compared(
    reading: Reading, ends: Sequence[Cases], directions: Directions, rows: Sequence[int]
) -> tuple[Counter[str], list[str]]:
    """What was found of each kind, and what the formulas read otherwise than the reader; ``rows`` of each runway."""
    kinds: Counter[str] = Counter()
    found = []
    for at, row in enumerate(rows):
        fault, theirs = reading.values["fault"][row], directions.texts["fault"][2 * at]
        kinds[
            "both refuse" if fault and theirs else "formulas refuse" if fault else "reader refuses" if theirs else "read"
        ] += 1
        if theirs and not fault:
            found.append(f"row {row}: {theirs}")
        if fault or theirs:
            continue
        for end, cases in enumerate(ends):
            direction = 2 * at + end
            for key in NUMBERS:
                ours, other = float(cases.values[key][row]), float(directions.numbers[key][direction])
                turned = key == "heading" and abs(abs(ours - other) - 2 * np.pi) < 1e-9
                if not (abs(ours - other) <= 1e-6 or turned or (np.isnan(ours) and np.isnan(other))):
                    found.append(f"row {row}, end {end + 1}, {key}: {ours}, not {other}")
            flags = {key: "yes" if cases.values[key][row] else "no" for key in ("land_here", "take_off_here")}
            told = {
                **flags,
                "surface": reading.values["surface"][row].lower(),
                "condition": reading.values["condition"][row].lower(),
                "direction": reading.values[f"end_{end + 1}"][row],
            }
            found += [
                f"row {row}, {key}: {word!r}, not {directions.texts[key][direction]!r}"
                for key, word in told.items()
                if word != directions.texts[key][direction]
            ]
        field = to_si(reading.number("elevation")[row], "ft")
        if not np.isclose(field, directions.numbers["elevation_field"][2 * at], atol=1e-6, equal_nan=True):
            found.append(f"row {row}: elevation {field}")
    return kinds, found


@pytest.mark.parametrize(("seed", "ugliness"), [(1, 0.002), (2, 0.01), (3, 0.05)])
def test_a_list_becomes_rows_that_the_formulas_read_as_the_reader_reads_the_list(
    tmp_path: Path, seed: int, ugliness: float
) -> None:
    """Rows that the formulas refuse and the reader does not are not assessed with the reader either: no surface is known."""
    path = write_ugly(tmp_path / "ugly.csv", ROWS, seed, ugliness)
    directions, rows = read_list(path), rows_of(path)
    reading, ends = _written(rows, tmp_path / "book.xlsx")
    kept = _kept_rows(path, rows)
    places = [kept[int(row)] for row in directions.numbers["source_row"][::2]]
    kinds, found = _compared(reading, ends, directions, places)
    assert found == []
    assert kinds["read"] > 15 and kinds["both refuse"] > 15
    refused = [
        reading.values["fault"][row]
        for at, row in enumerate(places)
        if reading.values["fault"][row] and not directions.texts["fault"][2 * at]
    ]
    assert all(
        text.startswith(('column "Surface"', 'column "Condition"', "a slope profile needs the length")) for text in refused
    )


def _kept_rows(path: Path, rows: Rows) -> dict[int, int]:
    """Row of the register [from 0] by row of the list."""
    from stripcheck.register.read_table import read_table
    from stripcheck.register.reader import read_runways

    table = read_table(path)
    reasons = read_runways(table, path).reasons
    numbers = [table.row_numbers[at] for at, reason in enumerate(reasons) if reason is None or reason[0] == "closed"]
    assert len(numbers) == len(rows.rows)
    return {number: row for row, number in enumerate(numbers)}


def test_formulas_recalculated_are_what_is_written_beside_them(office: Office, tmp_path: Path) -> None:
    path = tmp_path / "book.xlsx"
    _written(rows_of(write_ugly(tmp_path / "ugly.csv", ROWS, 4, 0.02)), path)
    with office.open(path) as book:
        book.recalculate()
        count, found = differences(book, path)
    assert found == []
    assert count > 15_000


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_what_is_typed_into_the_register_is_never_misread(office: Office, tmp_path: Path, seed: int) -> None:
    """Cells typed over with anything: where the formulas assess a row, the reader of lists reads the same."""
    path, random = tmp_path / "book.xlsx", np.random.default_rng(seed)
    rows = rows_of(SCENARIO / "lantern-range.csv")
    rows.rows[:] = [dict(row) for row in rows.rows * 9]
    rows.carried.clear()
    kept = ("strip", "name", "month", "notes", "survey_source", "photo", "surface_listed")
    kinds_of = {column.place: column.kind for column in rows.columns if column.key not in kept}
    places = list(kinds_of)
    for row in rows.rows:
        for number in random.choice(len(places), random.integers(1, 3), replace=False):
            words = NUMBERS_TYPED if kinds_of[places[number]] == "number" else WORDS_TYPED
            row[places[number]] = words[random.integers(len(words))]
    reading, ends = _written(rows, path)
    if seed == 1:
        with office.open(path) as book:
            book.recalculate()
            _, changed = differences(book, path)
        assert changed == []  # so that the values are those of the formulas
    directions = read_list(path, sheet=SHEET)
    kinds, found = _compared(
        reading, ends, directions, (directions.numbers["source_row"][::2] - FIRST_ROW).astype(int).tolist()
    )
    assert found == []
    assert kinds["read"] > 35 and kinds["formulas refuse"] > 25 and kinds["both refuse"] > 50


def test_an_ugly_list_meets_most_faults(tmp_path: Path) -> None:
    rows = rows_of(write_ugly(tmp_path / "ugly.csv", 600, 7, 0.05))
    reading, _ = _written(rows, tmp_path / "book.xlsx")
    assert len(set(reading.values["fault"])) > 25


# --- lists into rows


def _list(tmp_path: Path, text: str) -> Rows:
    path = tmp_path / "list.csv"
    path.write_text(text, encoding="utf-8")
    return rows_of(path)


def test_units_words_and_ends_are_written_in_the_register_s_way(tmp_path: Path) -> None:
    rows = _list(
        tmp_path,
        "Ident,Rwy,Length (ft),Sfc,Elev [m],Displaced threshold,Land on,Obstacle height,Obstacle distance\n"
        "X1,9/27,2000,Soft turf,700,50,9 only,20 m,400\n",
    )
    row = rows.rows[0]
    assert (row["runway", 0], row["length", 0], row["land_towards", 0]) == ("09/27", 609.6, "09")
    assert (row["surface", 0], row["condition", 0], row["surface_listed", 0]) == ("grass", "soft", "Soft turf")
    assert row["elevation", 0] == pytest.approx(2296.587927, abs=1e-6)
    assert (row["displaced", 1], row["displaced", 2]) == (50.0, 50.0)
    assert row["obstacle_height", 2] == pytest.approx(65.6167979, abs=1e-6)


def test_what_cannot_be_read_stays_as_it_is_written(tmp_path: Path) -> None:
    rows = _list(
        tmp_path,
        "Strip,Runway,Length,Width,Surface,Leave by,Surveyed,Months closed\nX,09/27,far,20 kg,moss,31,spring,in snow\n",
    )
    row = rows.rows[0]
    assert (row["length", 0], row["width", 0], row["surface", 0], row["take_off_towards", 0]) == ("far", "20 kg", "moss", "31")
    assert row["survey_date", 0] == "spring"
    assert {row["month", month] for month in range(1, 13)} == {"?"}
    assert rows.carried == [("Months closed", ["in snow"])]


def test_a_row_with_too_many_cells_is_not_assessed(tmp_path: Path) -> None:
    rows = _list(tmp_path, "Strip,Runway,Length,Surface\nX,09/27,700,grass,of some kind\n")
    assert rows.rows[0]["runway", 0] == "09/27 ?"
    assert any("more cells than the header" in line for line in rows.told)


def test_small_slopes_are_written_so_that_no_reader_doubts_them(tmp_path: Path) -> None:
    rows = _list(
        tmp_path,
        "Strip,Runway,Length [m],Surface,Elevation [ft],Slope [%]\nX,09/27,700,grass,100,0.2\nY,09/27,700,grass,100,0\n",
    )
    assert [row["slope", 0] for row in rows.rows] == ["0.2 %", 0.0]
    reading, ends = _written(rows, tmp_path / "book.xlsx")
    assert set(reading.values["fault"]) == {""}
    assert ends[1].values["slope_given"].tolist() == pytest.approx([-0.002, 0.0])
    assert read_list(tmp_path / "book.xlsx").texts["fault"] == [""] * 4


def test_pads_and_water_are_not_taken_and_closed_strips_are(tmp_path: Path) -> None:
    rows = _list(tmp_path, "Strip,Runway,Length,Surface,Closed\nA,09/27,700,grass,yes\nB,H1,30,concrete,\nC,18/36,900,water,\n")
    assert [row["strip", 0] for row in rows.rows] == ["A"]
    assert rows.rows[0]["closed", 0] == "yes"
    assert sum(line.startswith("Not taken") for line in rows.told) == 2
    with pytest.raises(InputError, match="no runway for an aeroplane on wheels"):
        _list(tmp_path, "Strip,Runway,Length,Surface\nC,18/36,900,water\n")


def test_a_profile_is_kept_as_its_text(tmp_path: Path) -> None:
    rows = _list(tmp_path, 'Strip,Runway,Length [m],Surface,Slope profile\nX,09/27,450,grass,"0:0, 200:3.5, 450:12"\n')
    assert rows.rows[0]["profile", 0] == "0:0, 200:3.5, 450:12"
    reading, ends = _written(rows, tmp_path / "book.xlsx")
    assert reading.values["profile_up"] == [pytest.approx(3.4)]
    assert ends[0].values["profile_takeoff_slope"].tolist() == pytest.approx([0.034])
    assert ends[1].values["profile_takeoff_slope"].tolist() == pytest.approx([-0.0175])
    assert ends[1].values["profile_landing_slope"].tolist() == pytest.approx([-0.034])
    assert ends[0].values["local_slope"].tolist() == pytest.approx([0.034])


@pytest.mark.parametrize(
    ("text", "months"),
    [
        ("Jun-Aug", [6, 7, 8]),
        ("Dec to Feb", [1, 2, 12]),
        ("May", [5]),
        ("jan, Mar/July", [1, 3, 7]),
        ("", []),
        ("Jan-Dec", list(range(1, 13))),
    ],
)
def test_closures_are_read(text: str, months: list[int]) -> None:
    assert sorted(closed_months(text)) == months


@pytest.mark.parametrize("text", ["winter", "Jun-Jul-Aug", "13", "Juny", "when wet", "Jan-"])
def test_other_closures_are_not(text: str) -> None:
    with pytest.raises(InputError, match="write months such as"):
        closed_months(text)


def test_the_list_of_the_test_has_every_header_that_it_should() -> None:
    assert len(HEADERS) == len(set(HEADERS))
