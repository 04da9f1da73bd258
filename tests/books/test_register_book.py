"""The register workbook in LibreOffice: recalculated, edited, sorted, with rows and columns inserted, against the arrays."""

from __future__ import annotations

import datetime
import zipfile
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import numpy as np
import openpyxl
import pytest
from openpyxl.utils import get_column_letter

from stripcheck.assessment import Result
from stripcheck.books import register_book, register_climate, register_fleet, register_months
from stripcheck.books.register_best import CLOSED
from stripcheck.books.register_book import DEMO_CARDS, DEMO_CLIMATE, DEMO_DAY, DEMO_LIST, DEMO_RULES, LOADING
from stripcheck.books.register_columns import COLUMNS, FIRST_ROW, HEADER_ROW, MONTHS
from stripcheck.books.register_rows import rows_of
from stripcheck.card import Card, load_card
from stripcheck.caution import CAUTION
from stripcheck.cli import main
from stripcheck.day import read_day
from stripcheck.flaps import flap_setting
from stripcheck.register import Directions, read_list
from stripcheck.rules import Rules, load_rules
from stripcheck.sheet import summary
from stripcheck.sheet.strips import given_columns
from stripcheck.surface import CONDITIONS
from tests.aircraft import trial_heron
from tests.manual_cards import everything
from tests.office import Book, Office, OfficeError
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import differences, same

SCENARIO = Path(__file__).parents[2] / "stripcheck" / "scenario"
SIZE = 15  # rows that are worked out in the shipped register
MARGIN = 1000.0  # m: what a margin's digits are compared with, as it is the rest of two lengths


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("register") / "register.xlsx"
    assert main(["register", "--demo", "-o", str(path)]) == 0
    return path


@dataclass
class State:
    """What stands on the other sheets of the workbook."""

    day: dict[str, Any] = field(default_factory=lambda: dict(DEMO_DAY))
    rules: Rules = field(default_factory=lambda: load_rules(DEMO_RULES))
    cards: list[Card] = field(default_factory=lambda: [load_card(name) for name in DEMO_CARDS])
    chosen: list[dict[str, float]] = field(default_factory=list)
    climate: register_climate.Climate = field(default_factory=lambda: register_climate.read_climate(SCENARIO / DEMO_CLIMATE))
    refused: int = 0  # rows that the reader of lists can read, and a formula can't

    def __post_init__(self) -> None:
        self.chosen = [{key: float(card.values[key]) for key in LOADING} for card in self.cards]

    def inputs(self, number: int, directions: Directions, **over: Any) -> dict[str, Any]:
        """The chain's inputs, SI; a slope profile as its steepest part."""
        given = given_columns(directions)
        for at, profile in enumerate(directions.profiles):
            if profile is not None:
                for side in ("takeoff", "climb"):
                    given[f"profile_{side}_slope"][at] = max(profile.slopes)
                for side in ("landing", "approach"):
                    given[f"profile_{side}_slope"][at] = min(profile.slopes)
                given["local_slope"][at] = np.fmax(given["local_slope"][at], profile.steepest)
        values = {**self.cards[number].values, **self.rules.values, **self.chosen[number], **given}
        return {**values, **read_day(self.day).values, **over}


class Open:
    """The workbook as it is open, with the places of its columns by header."""

    def __init__(self, book: Book, folder: Path) -> None:
        self.book, self.folder = book, folder

    def letter(self, header: str) -> str:
        headers = self.book.values("Register", f"A{HEADER_ROW}:BZ{HEADER_ROW}")[0]
        return str(get_column_letter(headers.index(header) + 1))

    def row(self, strip: str) -> int:
        texts = [line[0] for line in self.book.values("Register", f"A{FIRST_ROW}:A{FIRST_ROW + 40}")]
        return FIRST_ROW + texts.index(strip)

    def type(self, strip: str, **cells: Any) -> None:
        """Type into the row of a strip: headers with underscores for spaces, without their units."""
        self.fill(self.row(strip), **cells)

    def fill(self, row: int, **cells: Any) -> None:
        headers = [str(text) for text in self.book.values("Register", f"A{HEADER_ROW}:BZ{HEADER_ROW}")[0] if text]
        typed = {}
        for name, value in cells.items():
            plain = name.replace("__", "-").replace("_", " ")
            header = next(text for text in headers if text.split(" [")[0] == plain)
            typed[f"{self.letter(header)}{row}"] = value
        self.book.set("Register", typed)

    def saved(self) -> Path:
        """The whole workbook, as the spreadsheet program saves it."""
        path = self.folder / "saved.xlsx"
        self.book.save_as(path)
        return path

    def listed(self) -> Path:
        """The sheet Register alone, as values: quicker to save."""
        copy = openpyxl.Workbook()
        for line in self.book.values("Register", f"A1:BZ{FIRST_ROW + 40}"):
            copy.active.append(line)
        for line in copy.active.iter_rows(min_row=FIRST_ROW):
            for cell in line:
                if isinstance(cell.value, str):
                    cell.data_type = "s"
        path = self.folder / "listed.xlsx"
        copy.save(path)
        return path


def _label_row(book: Book, sheet: str, label: str) -> int:
    return [line[0] for line in book.values(sheet, "A1:A60")].index(label) + 1


def _set_page(book: Book, sheet: str, label: str, value: Any) -> None:
    book.set(sheet, {f"B{_label_row(book, sheet, label)}": value})


# --- what must stand on Fleet and Months, by the arrays


def _compared(open_book: Open, state: State, path: Path) -> tuple[int, int, list[str]]:
    """How many results were compared, how many rows the formulas refused that the reader reads, and what differs."""
    directions = read_list(path)
    rows = (directions.numbers["source_row"][::2] - FIRST_ROW).astype(int)
    letter = _fault_letter(open_book.book)
    faults = [line[0] or "" for line in open_book.book.values("Reading", f"{letter}4:{letter}{3 + SIZE}")]
    refused = [at for at, row in enumerate(rows) if row < SIZE and faults[row] and not directions.texts["fault"][2 * at]]
    count = 0
    found = [
        f"row {row}: a fault of the list is none to the formulas"
        for at, row in enumerate(rows)
        if row < SIZE and directions.texts["fault"][2 * at] and not faults[row]
    ]
    for number in range(len(state.cards)):
        results = _results(state, number, directions)
        lines = _fleet_lines(open_book.book, number, len(state.cards))
        for at, row in enumerate(rows):
            if row >= SIZE or directions.texts["fault"][2 * at] or at in refused:
                continue
            for got, expected, scale in zip(
                lines[row], results[at], (1.0, 1.0, 1.0, MARGIN, 1.0, 1.0, MARGIN, 1.0), strict=True
            ):
                count += 1
                if not same(got, expected, scale):
                    found.append(f"plane {number} row {row}: {got!r}, not {expected!r} ({directions.texts['pair'][2 * at]})")
        for row in {row for row in range(SIZE) if faults[row]} - _closed_rows(open_book.book):
            count += 1
            if lines[row][0] != "not assessed" or lines[row][7] != faults[row]:
                found.append(f"row {row} has a fault, and Fleet says {lines[row]!r}")
        inside = {int(row) for row in rows if row < SIZE}
        for row in set(range(SIZE)) - inside:  # not in use, or closed, which the reader leaves out
            count += 1
            if lines[row][0] not in ("", None, CLOSED):
                found.append(f"row {row} is not in use, and Fleet says {lines[row][0]!r}")
    return count, len(refused), found


def _fault_letter(book: Book) -> str:
    return str(get_column_letter(book.values("Reading", "A3:BZ3")[0].index("Fault: not assessed") + 1))


def _closed_rows(book: Book) -> set[int]:
    words = [line[0] for line in book.values("Fleet", f"E{register_fleet.FIRST_ROW}:E{register_fleet.FIRST_ROW + SIZE - 1}")]
    return {row for row, word in enumerate(words) if word == CLOSED}


def _fleet_lines(book: Book, number: int, planes: int) -> list[list[Any]]:
    """In a row each: the word, verdict, direction and margin in, the same out, and what limits it."""
    first, last = register_fleet.FIRST_ROW, register_fleet.FIRST_ROW + SIZE - 1
    word = get_column_letter(5 + number)
    start = 5 + planes + number * len(register_fleet.PARTS)
    detail = f"{get_column_letter(start + 2)}{first}:{get_column_letter(start + len(register_fleet.PARTS) - 1)}{last}"
    words, details = book.values("Fleet", f"{word}{first}:{word}{last}"), book.values("Fleet", detail)
    return [[*one, *rest] for one, rest in zip(words, details, strict=True)]


def _results(state: State, number: int, directions: Directions, **over: Any) -> list[tuple[Any, ...]]:
    """For each runway the word for in and out, and verdict, direction and margin of the better direction in, and out."""
    card = state.cards[number]
    result = Result(card.chain, directions.n, state.inputs(number, directions, **over), {}, directions.texts["fault"])
    words = {step.key: step.words for step in card.chain.steps}
    keys = [f"{side}_{part}" for side in ("takeoff", "landing") for part in ("finding", "verdict", "margin")]
    best = summary.summarise({key: result.si(key) for key in keys}, words)
    results = []
    for at in range(directions.n // 2):
        line: list[Any] = [summary.BOTH[int(best["both"][at]) - 1]]
        for key, side in (("in", "landing"), ("out", "takeoff")):
            row = int(best[key][at])
            verdict, margin = result[f"{side}_verdict"][row], float(result.si(f"{side}_margin")[row])
            line += [
                verdict,
                "" if verdict == "not assessed" else directions.texts["direction"][row],
                "" if np.isnan(margin) else margin,
            ]
        results.append((*line, _why(result, int(best["in"][at]), int(best["out"][at]))))
    return results


def _why(result: Result, row_in: int, row_out: int) -> str:
    told = [
        (word, result[f"{side}_reason"][row])
        for word, side, row in (("In", "landing", row_in), ("Out", "takeoff", row_out))
        if result[f"{side}_verdict"][row] != "suitable"
    ]
    if len(told) == 2 and told[0][1] == told[1][1]:
        return str(told[0][1])
    whole = "; ".join(f"{word}: {reason}" for word, reason in told)
    return whole.replace("; Out", "; out")


def _months_compared(open_book: Open, state: State) -> tuple[int, list[str]]:
    """How many words of the sheet Months were compared, and what differs."""
    directions = read_list(open_book.listed())
    first = register_months.FIRST_ROW
    shown = open_book.book.values("Months", f"D{first}:O{first + SIZE - 1}")
    letters = [open_book.letter(month) for month in MONTHS]
    marks = open_book.book.values("Register", f"{letters[0]}{FIRST_ROW}:{letters[-1]}{FIRST_ROW + SIZE - 1}")
    surface = given_columns(directions)["surface"]
    count, found = 0, []
    for month in range(12):
        climate = state.climate
        ground = CONDITIONS.index(climate.grounds[month]) if climate.grounds[month] else -2
        over = {
            "temperature": climate.temperatures[month],
            "temperature_elevation": climate.taken_at,
            "isa_deviation": np.nan,
            "dew_point": np.nan,
            "qnh": climate.pressures[month],
            "day_condition": np.where((surface == 0) & (ground == 2), 1, ground),
        }
        words = _results(state, 0, directions, **over)
        for at, row in enumerate((directions.numbers["source_row"][::2] - FIRST_ROW).astype(int)):
            mark = marks[row][month]
            expected = words[at][0] if mark is None else "closed" if mark == "x" else "closed?"
            if directions.texts["fault"][2 * at] and mark is None:
                expected = "not assessed"
            count += 1
            if shown[row][month] != expected:
                found.append(f"{MONTHS[month]}, row {row}: {shown[row][month]!r}, not {expected!r}")
    return count, found


# --- the edits; each leaves the workbook to the next


def _new_strip(open_book: Open, state: State) -> None:
    row = FIRST_ROW + 12
    open_book.fill(
        row,
        Strip="XNEW",
        Name="New Bench",
        Runway="08/26",
        Length=655,
        Width=18,
        Elevation_end_1=2950,
        Elevation_end_2=2990,
        Surface="gravel",
        Obstacle_height_end_2=40,
        Obstacle_distance_end_2=300,
    )


def _rows_inserted(open_book: Open, state: State) -> None:
    open_book.book.insert_rows("Register", FIRST_ROW + 2, 2)
    open_book.fill(
        FIRST_ROW + 3,
        Strip="XIN",
        Name="Put Between",
        Runway="17/35",
        Length=900,
        Width=20,
        Elevation=3100,
        Slope=-1.2,
        Surface="grass",
        Condition="wet",
        Land_on="17",
        Leave_by="35",
    )


def _row_before_the_first(open_book: Open, state: State) -> None:
    open_book.book.insert_rows("Register", FIRST_ROW, 1)
    open_book.fill(
        FIRST_ROW,
        Strip="XTOP",
        Name="On Top",
        Runway="02/20",
        Heading=30,
        Length=810,
        Elevation=900,
        Slope=0.5,
        Width=25,
        Surface="dirt",
    )


def _sorted(open_book: Open, state: State) -> None:
    last = open_book.letter("Caretaker")
    open_book.book.sort("Register", f"A{FIRST_ROW}:{last}{FIRST_ROW + 16}", 2)


def _columns_inserted(open_book: Open, state: State) -> None:
    for before, header in ((4, "Chief"), (20, "Fee")):
        open_book.book.insert_columns("Register", before)
        letter = get_column_letter(before)
        open_book.book.set(
            "Register", {f"{letter}{HEADER_ROW}": header, f"{letter}{FIRST_ROW + 1}": 12.5, f"{letter}{FIRST_ROW + 2}": "yes"}
        )


def _day(open_book: Open, state: State, label: str, key: str, value: Any) -> None:
    _set_page(open_book.book, "Day", label, value)
    state.day[key] = value


def _mass(open_book: Open, state: State) -> None:
    _set_page(open_book.book, "Aircraft 1", "Take-off mass", 900)
    state.chosen[0]["mass_takeoff"] = 900.0


def _flap(open_book: Open, state: State) -> None:
    name = next(flap.name for flap in state.cards[1].flaps if "take-off" in flap.uses)
    _set_page(open_book.book, "Aircraft 2", "Take-off flap", name)
    state.chosen[1]["takeoff_flap"] = flap_setting(name, state.cards[1].flaps, "take-off", "test")


def _factor(open_book: Open, state: State) -> None:
    _set_page(open_book.book, "Rules", "Take-off safety factor", 1.4)
    state.rules = Rules(**{**vars(state.rules), "values": {**state.rules.values, "takeoff_factor": 1.4}})


def _refusing(strip: str, **cells: Any) -> Callable[[Open, State], None]:
    """An edit that the reader of lists reads, and the formulas refuse."""

    def edit(open_book: Open, state: State) -> None:
        open_book.type(strip, **cells)
        state.refused += 1

    return edit


def _mended(strip: str, **cells: Any) -> Callable[[Open, State], None]:
    def edit(open_book: Open, state: State) -> None:
        open_book.type(strip, **cells)
        state.refused -= 1

    return edit


def _typed(strip: str, **cells: Any) -> Callable[[Open, State], None]:
    return lambda open_book, state: open_book.type(strip, **cells)


EDITS: dict[str, Callable[[Open, State], None]] = {
    "as it was made": lambda open_book, state: None,
    "a shorter strip": _typed("XLRB", Length=640, TORA_end_1=600, LDA_end_2=590),
    "no length": _typed("XKDF", Length=None),
    "a width out of range": _typed("XFSL", Width=900),
    "a length with its unit": _refusing("XKDF", Length="1400 m"),
    "the length as a number": _mended("XKDF", Length=1400),
    "a surface in other words": _refusing("XSPT", Surface="murram"),
    "a surface of the list": _mended("XSPT", Surface="long grass", Condition="wet"),
    "a wildcard for a condition": _refusing("XWKM", Condition="*"),
    "no condition": _mended("XWKM", Condition=None),
    "a slope given": _typed("XSCC", Slope=-2.5),
    "both ways open": _typed("XGLN", Land_on=None, Leave_by=None),
    "leaving by no end": _typed("XSPT", Leave_by="05"),
    "one-way, not which way": _typed("XTNM", One__way="yes"),
    "an obstacle without distance": _typed("XLRB", Obstacle_height_end_1=120),
    "ends too far apart in height": _typed("XKDF", Elevation_end_1=2000, Elevation_end_2=6000),
    "a profile typed by hand": _refusing(
        "XKDF", Elevation_end_1=None, Elevation_end_2=None, Slope=1, Slope_profile="0:0, 700:7, 1400:14"
    ),
    "no profile": _mended("XKDF", Slope_profile=None),
    "a displaced threshold": _typed("XLRB", Obstacle_height_end_1=None, Displaced_threshold_end_1=150),
    "a hot day": lambda open_book, state: _day(open_book, state, "Temperature", "temperature", 36),
    "wind": lambda open_book, state: (
        _day(open_book, state, "Wind from", "wind_from", 200),
        _day(open_book, state, "Wind", "wind_speed", 12),
    )[0],
    "lighter": _mass,
    "another flap": _flap,
    "another factor": _factor,
    "a strip in a spare row": _new_strip,
    "rows inserted": _rows_inserted,
    "a row before the first": _row_before_the_first,
    "columns inserted": _columns_inserted,
    "sorted by name": _sorted,
    "a row deleted": lambda open_book, state: open_book.book.delete_rows("Register", open_book.row("XSPT")),
    "closed": _typed("XSPH", Closed="yes"),
}


SAVED = ("a hot day", "sorted by name", "closed")  # after these the whole workbook is saved, and the list read from it


@pytest.fixture(scope="module")
def opened(office: Office, demo: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Open]:
    with office.open(demo) as book:
        book.recalculate()
        yield Open(book, tmp_path_factory.mktemp("saved"))


@pytest.fixture(scope="module")
def state() -> State:
    return State()


@pytest.mark.parametrize("name", EDITS)
def test_fleet_follows_an_edit_as_the_arrays_do(opened: Open, state: State, name: str) -> None:
    EDITS[name](opened, state)
    path = opened.saved() if name in SAVED else opened.listed()
    count, refused, found = _compared(opened, state, path)
    assert found == []
    assert count > 80
    assert refused == state.refused


def test_months_follow_as_the_arrays_do(opened: Open, state: State) -> None:
    opened.type("XLRB", Jan="x", Feb="?", Mar="no")
    opened.book.set("Climate", {"B12": 24.5, "C12": "wet", "D12": None, "C16": None, "B4": 3100})
    climate = state.climate
    temperatures, grounds, pressures = (list(column) for column in (climate.temperatures, climate.grounds, climate.pressures))
    temperatures[3], grounds[3], pressures[3], grounds[7] = 24.5 + 273.15, "wet", register_climate.STANDARD_QNH, ""
    state.climate = register_climate.Climate(tuple(temperatures), tuple(pressures), tuple(grounds), 3100 * 0.3048, "")
    count, found = _months_compared(opened, state)
    assert found == []
    assert count > 100


def test_the_counts_below_the_months_add_up(opened: Open) -> None:
    in_use = sum(
        line[0] not in ("", None)
        for line in opened.book.values("Months", f"A{register_months.FIRST_ROW}:A{register_months.FIRST_ROW + SIZE - 1}")
    )
    first = register_months.FIRST_ROW + SIZE + 2
    counts = np.array(opened.book.values("Months", f"D{first}:O{first + len(register_months.COUNTED) - 1}"), dtype=float)
    assert counts.sum(axis=0).tolist() == [in_use] * 12


# the register's sentences stood in E3 and E4 until a column was inserted before them
def test_surveys_are_flagged_in_words(opened: Open) -> None:
    def said(strip: str) -> Any:
        return opened.book.value("Fleet", f"D{register_fleet.FIRST_ROW + opened.row(strip) - FIRST_ROW}")

    days = {"XLRB": (2020, 7, 1), "XKDF": (2020, 6, 30), "XTNM": (2025, 7, 2), "XWKM": None, "XGLN": "long ago"}
    for strip, day in days.items():
        serial = (datetime.date(*day) - datetime.date(1899, 12, 30)).days if isinstance(day, tuple) else day
        opened.type(strip, Survey_date=serial)
    assert said("XLRB") == ""  # 60 months to the day
    assert said("XKDF") == "OLD: 60 months"
    assert said("XTNM") == register_fleet.AHEAD
    assert said("XWKM") == register_fleet.NO_DATE
    assert said("XGLN") == register_fleet.NOT_READ
    assert str(opened.book.value("Register", "F3")).startswith("Surveys: 2 old, ")  # and the closed strip's
    opened.book.set("Register", {"C3": None})
    assert said("XKDF") == ""
    opened.book.set("Register", {"C3": 60})


def test_a_changed_header_stops_everything_and_says_which(opened: Open) -> None:
    letter = opened.letter("Length [m]")
    opened.book.set("Register", {f"{letter}{HEADER_ROW}": "Length [ft]"})
    words = {
        line[0] for line in opened.book.values("Fleet", f"E{register_fleet.FIRST_ROW}:E{register_fleet.FIRST_ROW + SIZE - 1}")
    }
    assert words <= {"not assessed", "", "closed"}
    assert "Length [m]" in str(_fleet_lines(opened.book, 0, 2)[0][7])
    opened.book.set("Register", {f"{letter}{HEADER_ROW}": "Length [m]"})
    words = {
        line[0] for line in opened.book.values("Fleet", f"E{register_fleet.FIRST_ROW}:E{register_fleet.FIRST_ROW + SIZE - 1}")
    }
    assert "IN BUT NOT OUT" in words


@pytest.mark.parametrize(
    ("label", "value"), [("QNH", None), ("QNH", 29.92), ("Temperature", None), ("Temperature", 75), ("QNH", "high")]
)
def test_a_day_without_a_credible_value_assesses_nothing(opened: Open, label: str, value: Any) -> None:
    cell = f"B{_label_row(opened.book, 'Day', label)}"
    before = opened.book.value("Day", cell)
    opened.book.set("Day", {cell: value})
    lines = _fleet_lines(opened.book, 0, 2)
    opened.book.set("Day", {cell: before})
    assert {line[0] for line in lines} <= {"not assessed", "", "closed"}
    assert not [number for line in lines for number in line if isinstance(number, float)]
    assert any("not known or not credible" in str(line[7]) for line in lines)


def test_more_rows_than_are_worked_out_are_told_of(opened: Open) -> None:
    assert "rows that are worked out are in use" in str(opened.book.value("Register", "F4"))
    for at in range(2):
        opened.fill(FIRST_ROW + SIZE + at, Strip=f"XTOO{at}", Runway="09/27", Length=700)
    told = f"THE LAST 2 ROWS ARE NOT WORKED OUT: there is room for {SIZE}. Make the workbook anew with stripcheck register."
    assert opened.book.value("Register", "F4") == told
    assert opened.book.value("Fleet", "A3") == told


def test_no_cell_shows_an_error_after_all_edits(opened: Open) -> None:
    for sheet in opened.book.sheets():
        cells = opened.book.values(sheet, "A1:CZ260")
        assert not [value for line in cells for value in line if str(value).startswith("#ERR")], sheet


def test_the_other_sheets_let_no_row_in(opened: Open) -> None:
    before = opened.book.values("Fleet", "A18:H40")
    with pytest.raises(OfficeError):
        opened.book.insert_rows("Fleet", 20)
    assert opened.book.values("Fleet", "A18:H40") == before


# --- the file as it is made


def test_every_formula_recalculated_is_the_value_beside_it(office: Office, demo: Path) -> None:
    assert package_faults(demo) == []
    assert demo.stat().st_size < 1_000_000
    with office.open(demo) as book:
        book.recalculate()
        count, found = differences(book, demo)
    assert found == []
    assert count > 25_000


@pytest.fixture(scope="module")
def fleet_of_four(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Four aeroplanes, fixed pitch and constant speed, with tables, corrections and neither, and three strips; no climate."""
    folder = tmp_path_factory.mktemp("four")
    strips = folder / "strips.csv"
    strips.write_text(
        "Strip,Runway,Length [m],Elevation end 1 [ft],Elevation end 2 [ft],Surface,Heading [° true],Obstacle height end 2 [ft],"
        "Obstacle distance end 2 [m]\nA,09/27,700,2000,2020,turf,88,50,400\nB,18/36,1100,4200,4300,gravel,190,,\nC,,600,,,,,,\n"
    )
    request = register_book.Request(
        strips, folder / "four.xlsx", ("ridge-runner",), "uk-leaflet", {"temperature": 25, "wind_speed": 6, "wind_from": 120}
    )
    rows, cards = rows_of(strips), [trial_heron(), load_card("high-mule"), everything(), everything(fixed=False)]
    book = register_book.RegisterBook(
        rows, cards, load_rules("uk-leaflet"), read_day(request.day), register_climate.UNKNOWN, 1, 60, None
    )
    book.write(request.output)
    return request.output


def test_four_aeroplanes_recalculated_are_the_arrays(office: Office, fleet_of_four: Path) -> None:
    assert package_faults(fleet_of_four) == []
    with office.open(fleet_of_four) as book:
        book.recalculate()
        count, found = differences(book, fleet_of_four)
        words = {word for line in book.values("Fleet", "E19:H20") for word in line}
        months = {word for line in book.values("Months", "D8:O9") for word in line}
    assert found == []
    assert count > 10_000
    assert words <= set(summary.BOTH) and len(words) > 1
    assert months == {"not assessed"}  # nobody gave a climate


def test_every_cell_of_the_register_is_its_user_s(demo: Path) -> None:
    book = openpyxl.load_workbook(demo)
    sheet = book["Register"]
    guard = sheet.protection
    assert guard.sheet and guard.password is None
    assert not (guard.insertRows or guard.insertColumns or guard.deleteRows or guard.deleteColumns or guard.sort)
    assert not any(cell.protection.locked for line in sheet.iter_rows(min_row=HEADER_ROW) for cell in line)
    assert not any(sheet.column_dimensions[get_column_letter(n)].protection.locked for n in range(1, sheet.max_column + 2))
    assert not [cell.coordinate for line in sheet.iter_rows(min_row=FIRST_ROW) for cell in line if cell.data_type == "f"]
    locked = [other.title for other in book.worksheets if other.title != "Register" and not other.protection.sheet]
    assert locked == []


def test_every_column_of_the_register_is_checked(demo: Path) -> None:
    sheet = openpyxl.load_workbook(demo)["Register"]
    checks = sheet.data_validations.dataValidation
    for column in COLUMNS:
        letter = next(cell.column_letter for cell in sheet[HEADER_ROW] if cell.value == column.header)
        own = [
            check for check in checks for area in check.sqref.ranges if area.coord.startswith(f"{letter}{FIRST_ROW}:{letter}")
        ]
        assert len(own) == 1, column.header
        assert own[0].showErrorMessage and own[0].error and len(own[0].error) < 226 and len(own[0].errorTitle) < 33
        assert len(own[0].formula1) < 256
        assert max(area.max_row for area in own[0].sqref.ranges) >= 2000


def test_the_day_s_values_have_limits(demo: Path) -> None:
    sheet = openpyxl.load_workbook(demo)["Day"]
    row = next(cell.row for cell in sheet["A"] if cell.value == "QNH")
    own = [check for check in sheet.data_validations.dataValidation if f"B{row}" in check.sqref]
    assert [(check.formula1, check.formula2) for check in own] == [("850", "1085")]


def test_the_chart_is_sound(demo: Path) -> None:
    with zipfile.ZipFile(demo) as package:
        charts = [name for name in package.namelist() if name.startswith("xl/charts/chart")]
        assert len(charts) == 1
        root = ElementTree.fromstring(package.read(charts[0]))
    space = "{http://schemas.openxmlformats.org/drawingml/2006/chart}"
    titles = [
        "".join(text.text or "" for text in title.iter() if text.tag.endswith("}t")) for title in root.iter(f"{space}title")
    ]
    assert titles == ["Runways in and out, month by month", "Month", "Runways"]
    assert len(list(root.iter(f"{space}ser"))) == len(register_months.COUNTED)
    assert {delete.get("val") for delete in root.iter(f"{space}delete")} == {"0"}


def test_the_caution_stands_wherever_a_verdict_does(demo: Path) -> None:
    book = openpyxl.load_workbook(demo)
    for name in ("Register", "Fleet", "Months", "Climate", "Day", "Rules", "Aircraft 1", "Aircraft 1 end 1", "Aircraft 2 air"):
        cells = [cell.value for line in book[name].iter_rows(max_row=3) for cell in line]
        assert CAUTION in cells, name
        assert "Planning aid only" in book[name].oddFooter.center.text


def test_the_register_is_a_list_like_any_other(demo: Path, tmp_path: Path) -> None:
    ours, theirs = read_list(demo), read_list(SCENARIO / DEMO_LIST)
    assert ours.texts["pair"] == theirs.texts["pair"]
    for key in ("surface", "condition", "land_here", "take_off_here", "direction", "survey_date", "notes", "name"):
        assert ours.texts[key] == theirs.texts[key], key
    for key in set(theirs.numbers) - {"source_row"}:
        assert np.allclose(ours.numbers[key], theirs.numbers[key], rtol=0, atol=1e-7, equal_nan=True), key
    assert [str(profile) for profile in ours.profiles] == [str(profile) for profile in theirs.profiles]
    assert (
        main(
            [
                "fill",
                str(demo),
                "--card",
                "ridge-runner",
                "--rules",
                "part-cat-b",
                "--temp",
                "20",
                "-o",
                str(tmp_path / "filled.xlsx"),
                "--quiet",
            ]
        )
        == 0
    )


def test_a_register_made_from_a_register_is_the_same(demo: Path, tmp_path: Path) -> None:
    again = tmp_path / "again.xlsx"
    assert main(["register", str(demo), "--card", *DEMO_CARDS, "--rules", DEMO_RULES, "--temp", "22", "-o", str(again)]) == 0
    sheets = [openpyxl.load_workbook(path)["Register"] for path in (demo, again)]
    rows = [[[cell.value for cell in line] for line in sheet.iter_rows(min_row=HEADER_ROW)] for sheet in sheets]
    assert rows[0] == rows[1]
    assert len(rows[0]) == SIZE + 1


# --- the command


def _register(*options: str, list_of: Path = SCENARIO / DEMO_LIST) -> list[str]:
    return ["register", str(list_of), "--card", "ridge-runner", "--rules", "part-cat-b", *options]


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (["register", "-o", "{out}"], "LIST is missing"),
        (_register("-o", "{out}"), "no temperature of the standard day"),
        (_register("--temp", "20", "-o", "{folder}/out.csv"), "must end in .xlsx"),
        (_register("--temp", "20", "--month-card", "high-mule", "-o", "{out}"), "none of the cards given"),
        (_register("--temp", "20", "--survey-age", "0", "-o", "{out}"), "1 to 600 months"),
        (_register("--temp", "20", "--climate", "{folder}/none.csv", "-o", "{out}"), "there is no such file"),
        (_register("--temp", "20", "--card", *["ridge-runner"] * 4, "-o", "{out}"), "1 to 4 aircraft cards"),
    ],
)
def test_bad_options_are_said_in_a_sentence(
    options: list[str], said: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out.xlsx"
    assert main([text.format(out=out, folder=tmp_path) for text in options]) == 2
    told = capsys.readouterr().err
    assert said in told and told.count("\n") == 1
    assert list(tmp_path.iterdir()) == []


def test_what_is_not_taken_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    options = _register("--isa-dev", "15", "-o", str(tmp_path / "out.xlsx"), list_of=SCENARIO / "lantern-range.csv")
    assert main(options) == 0
    told = capsys.readouterr().out
    assert "Not taken: XCRL 18/36, the surface is water" in told and "Not taken: XLCP H1/B" in told
    assert 'carried under "In the list"' in told and CAUTION in told
    sheet = openpyxl.load_workbook(tmp_path / "out.xlsx")["Register"]
    assert "In the list: QNH [hPa]" in [cell.value for cell in sheet[HEADER_ROW]]
