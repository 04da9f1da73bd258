"""A runway list as the rows of a register: what can be read is written in the register's words and units.

What can't be read stays as it is written, so that the sheet tells of it and its user mends it there.
"""

from __future__ import annotations

import datetime
import math
import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from stripcheck.books.register_columns import CLOSED, MONTHS, UNSURE, Key, RegisterColumn, columns_for
from stripcheck.errors import InputError
from stripcheck.profile import Profile
from stripcheck.register.limits import within_limits
from stripcheck.register.read_table import read_table
from stripcheck.register.reader import Reading, read_runways
from stripcheck.register.runways import PERCENT_CELLS_BELOW, Runways
from stripcheck.register.values import as_written, is_blank, read_numbers, read_yes
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import from_si

OWN_AIR = ("temperature", "qnh", "wind_from", "wind_speed")  # of one day: no matter of a register
CARRIED_AIR = "In the list"
# headers of columns that a list may have, and that only the register knows
TOLD = {
    "survey_source": ("survey source", "source of survey", "surveyed by", "source"),
    "photo": ("photo link", "photo", "photos", "photo links", "picture", "pictures"),
    "surface_listed": ("surface as listed",),
}
CLOSURES = ("months closed", "closed months", "seasonal closure", "seasonal closures", "closed in", "season closed")
_DIGITS = 7  # decimals of a number as it is written: a centimetre on the ground for degrees, less for all else

Cell = str | float | datetime.date | None


@dataclass(frozen=True)
class Rows:
    """The rows of a register: cells by column, the user's own columns, the profiles by their text, and what is not taken."""

    columns: tuple[RegisterColumn, ...]
    rows: list[dict[Key, Cell]]
    carried: list[tuple[str, list[object]]]
    profiles: dict[str, Profile]
    told: list[str]
    source: str


def rows_of(path: Path, airports: str | None = None, sheet: str | None = None) -> Rows:
    """The rows of a register from a runway list. Raises InputError for a file or a header row that can't be used.

    Helicopter pads and water are not taken; what is closed is.
    """
    table = read_table(path, sheet)
    reading = read_runways(table, path, airports)
    kept = [at for at, reason in enumerate(reading.reasons) if reason is None or reason[0] == "closed"]
    if not kept:
        raise InputError(f"{table.where}: there is no runway for an aeroplane on wheels in this list")
    runways = reading.runways
    columns = columns_for(("heading", 2) in runways.found)
    cells = _Cells(reading)
    places, months, closures = _carried_places(runways)
    understood = {at for at in closures if all(_understood(table.cells[at][row]) for row in kept)}
    rows: list[dict[Key, Cell]] = []
    for at in kept:
        row = cells.row(at, columns)
        row |= {(key, 0): _written(table.cells[place][at]) for key, place in places.items()}
        row |= _closed_months(at, table.cells, months, closures)
        rows.append(row)
    _write_small_slopes(rows)
    taken = {*places.values(), *months.values(), *understood}
    carried = [(table.headers[at], [table.cells[at][row] for row in kept]) for at in runways.carried if at not in taken]
    air = [(f"{CARRIED_AIR}: {item.header}", [table.cells[item.position][row] for row in kept])
           for (key, _), item in runways.found.items() if key in OWN_AIR]  # fmt: skip
    profiles = {str(row["profile", 0]): profile for at, row in zip(kept, rows, strict=True)
                if (profile := runways.profiles[at]) is not None}  # fmt: skip
    return Rows(columns, rows, [*carried, *air], profiles, _told(reading, bool(air)), table.source)


def _told(reading: Reading, air: bool) -> list[str]:
    runways = reading.runways
    lines = [
        f"Not taken: {reading.texts['strip'][0][at]} {reading.texts['runway'][0][at]}, {reason[1]}"
        for at, reason in enumerate(reading.reasons)
        if reason is not None and reason[0] != "closed"
    ]
    lines += [f"Row {runways.table.row_numbers[at]} has more cells than the header: a question mark stands in its column Runway"
              for at in runways.table.too_wide]  # fmt: skip
    guessed = [item for item in runways.found.values() if item.column.key not in OWN_AIR]
    for item in guessed:
        if not item.unit and item.column.kind in ("length", "altitude", "slope"):
            unit = {"length": "m", "altitude": "ft", "slope": "%"}[item.column.kind]
            lines.append(f'Taken for granted: bare numbers of the column "{item.header}" are in {unit}')
    if air:
        lines.append(f'Temperature, QNH or wind of a strip is of one day: carried under "{CARRIED_AIR}", and not used')
    return lines


class _Cells:
    """Cells of a register from the columns of a list."""

    def __init__(self, reading: Reading) -> None:
        self.reading, self.runways = reading, reading.runways
        self.numbers = {place: self._as_read(place) for place in self.runways.numbers}
        self.faulty = {(fault.row_index, fault.header) for fault in self.runways.faults}

    def _as_read(self, place: Key) -> np.ndarray:
        """Numbers of a column [SI] with those that are out of limits, too."""
        item, table = self.runways.found[place], self.runways.table
        return read_numbers(table.cells[item.position], item.column.kind, item.unit, item.header, table.delimiter == ";")[0]

    def row(self, at: int, columns: Sequence[RegisterColumn]) -> dict[Key, Cell]:
        """One runway's cells, without those that only the register knows."""
        row: dict[Key, Cell] = {column.place: self.number(at, column) for column in columns if column.kind == "number"}
        self._usable(at, row)
        reading, runways = self.reading, self.runways
        row["strip", 0] = runways.texts("strip")[at] or None
        row["name", 0] = reading.texts["name"][0][at] or None
        row["runway", 0] = self._or_raw(at, "runway", reading.texts["runway"][0][at])
        if at in runways.table.too_wide:  # its cells may be shifted: nothing is assessed until somebody has looked
            row["runway", 0] = f"{row['runway', 0]} ?"
        surface = reading.surfaces[at]
        listed = runways.spellings("surface")[at] or None
        row["surface", 0] = surface.word if surface.word in SURFACES else listed
        row["surface_listed", 0] = listed
        condition = reading.texts["condition"][0][at]
        row["condition", 0] = condition or None
        if surface.word not in SURFACES and condition in CONDITIONS:  # it would be read from the spelling once more
            row["condition", 0] = runways.texts("condition")[at] or None
        row["profile", 0] = runways.texts("profile")[at] or None
        for key, allowed in (("land_towards", "land_here"), ("take_off_towards", "take_off_here")):
            first, second = (texts[at] for texts in reading.texts[allowed])
            only = {("yes", "no"): runways.first[at], ("no", "yes"): runways.second[at]}.get((first, second))
            row[key, 0] = self._or_raw(at, key, only)
        for key in ("one_way", "closed"):
            row[key, 0] = self._yes_or_no(at, key)
        if reading.reasons[at] is not None:
            row["closed", 0] = "yes"
        row["survey_date", 0] = _date(self._raw(at, "survey_date"))
        row["notes", 0] = runways.spellings("notes")[at] or None
        return row

    def number(self, at: int, column: RegisterColumn) -> Cell:
        """The number of a column of the register, from that of the end or the one for the whole runway."""
        places = [column.place, (column.key, 0)]
        if column.key == "heading" and column.end == 0:
            places = [("heading", 1), ("heading", 0)]
        elif column.key == "heading" or (column.key == "elevation" and column.end):
            places = [column.place]
        for place in places:
            cell = self._of_column(at, place, column.unit)
            if cell is not None:
                return cell
        if column.place == ("elevation", 0) and (airport := self.reading.known[at]) is not None:
            return _shown(airport.elevation, "ft")
        return None

    def _of_column(self, at: int, place: Key, unit: str) -> Cell:
        if place not in self.numbers or is_blank(self._raw(at, *place)):
            return None
        number, raw = float(self.numbers[place][at]), as_written(self._raw(at, *place))
        if math.isnan(number):
            return raw
        if at in self.runways.unreadable.get(place, []) and within_limits(place[0], number):
            return f"{raw} ?"  # a number that can't be what it says: a slope that may be a percent cell
        return _shown(number, unit)

    def _usable(self, at: int, row: dict[Key, Cell]) -> None:
        """A usable length for both ways stands for TORA and LDA where they are not told."""
        usable = self._of_column(at, ("usable", 0), "m")
        if usable is None:
            return
        for key in ("tora", "lda"):
            for end in (1, 2):
                displaced = row["displaced", end]
                lost = key == "lda" and row["length", 0] is None and isinstance(displaced, float) and displaced > 0.0
                if row[key, end] is None and not lost:  # no telling what the threshold leaves of an unknown length
                    row[key, end] = usable

    def _raw(self, at: int, key: str, end: int = 0) -> object:
        cells = self.runways.cells(key, end)
        return None if cells is None else cells[at]

    def _or_raw(self, at: int, key: str, made: str | None) -> Cell:
        """What was made of a cell, or the cell itself where it can't be read."""
        item = self.runways.found.get((key, 0))
        if item is not None and (at, item.header) in self.faulty:
            return as_written(self._raw(at, key)) or made
        return made

    def _yes_or_no(self, at: int, key: str) -> Cell:
        raw = self._raw(at, key)
        try:
            said = read_yes(raw)
        except InputError:
            return as_written(raw)
        return None if said is None else "yes" if said else "no"


def _shown(number: float, unit: str) -> Cell:
    return None if math.isnan(number) else round(float(from_si(number, unit)), _DIGITS) + 0.0


def _written(cell: object) -> Cell:
    return None if is_blank(cell) else as_written(cell)


def _date(cell: object) -> Cell:
    """A date, also one that is written as 2025-04-11; else what is written."""
    if isinstance(cell, datetime.datetime):
        return cell.date()
    if isinstance(cell, datetime.date):
        return cell
    text = "" if is_blank(cell) else as_written(cell)
    try:
        return datetime.date.fromisoformat(text)
    except ValueError:
        return text or None


def _carried_places(runways: Runways) -> tuple[dict[str, int], dict[int, int], list[int]]:
    """Columns of the list that only the register knows: those it takes over, those of single months, and closures."""
    places: dict[str, int] = {}
    months: dict[int, int] = {}
    closures = []
    for at in runways.carried:
        name = " ".join(runways.table.headers[at].lower().replace("_", " ").split())
        key = next((key for key, names in TOLD.items() if name in names), None)
        number = month_number(name)
        if key is not None:
            places.setdefault(key, at)
        elif number and number not in months:
            months[number] = at
        elif name in CLOSURES:
            closures.append(at)
    return places, months, closures


_MONTH_WORDS = {"": None, "no": None, "open": None, "x": CLOSED, "yes": CLOSED, "closed": CLOSED}


def _closed_months(at: int, cells: list[list[object]], months: dict[int, int], closures: list[int]) -> dict[Key, Cell]:
    """The twelve cells of the months."""
    row: dict[Key, Cell] = {("month", number): None for number in range(1, 13)}
    for number, place in months.items():
        raw = cells[place][at]
        word = "" if is_blank(raw) and raw != UNSURE else as_written(raw).lower()
        row["month", number] = _MONTH_WORDS.get(word, UNSURE)
    for place in closures:
        try:
            closed = closed_months(as_written(cells[place][at]) if not is_blank(cells[place][at]) else "")
        except InputError:
            row |= {("month", number): row["month", number] or UNSURE for number in range(1, 13)}
        else:
            row |= {("month", number): CLOSED for number in closed}
    return row


def _understood(cell: object) -> bool:
    try:
        closed_months("" if is_blank(cell) else as_written(cell))
    except InputError:
        return False
    return True


def closed_months(text: str) -> set[int]:
    """Months [1 to 12] of a text such as "Jun-Aug, Dec". Raises InputError for anything else.

    >>> sorted(closed_months("Nov - Feb; June"))
    [1, 2, 6, 11, 12]
    """
    closed: set[int] = set()
    for part in re.split(r"[,;/+&]| and ", text):
        if not part.strip():
            continue
        ends = [month_number(end) for end in re.split(r"\s*(?:-|\u2013|\bto\b)\s*", part.strip().lower())]
        if not all(ends) or len(ends) > 2:
            raise InputError(f'"{text}" is no closure; write months such as "Jun-Aug, Dec"')
        first, last = ends[0], ends[-1]
        closed |= {(first - 1 + step) % 12 + 1 for step in range((last - first) % 12 + 1)}
    return closed


def month_number(word: str) -> int:
    """Number of a month by its name or its first three letters; 0 for anything else."""
    names = ("january", "february", "march", "april", "may", "june", "july", "august", "september", "october", "november",
             "december")  # fmt: skip
    plain = word.strip(" .").lower()
    return next((number for number, name in enumerate(names, 1) if plain in (name, name[:3], MONTHS[number - 1].lower())), 0)


def _write_small_slopes(rows: list[dict[Key, Cell]]) -> None:
    """Slopes as texts such as "0.2 %" where all are so small that a reader of the workbook takes them for percent cells."""
    for place in (("slope", 0), ("local_slope", 0)):
        told = [value for row in rows if isinstance(value := row[place], float) and value != 0.0]
        if told and all(abs(value) < 100.0 * PERCENT_CELLS_BELOW for value in told):
            for row in rows:
                if isinstance(value := row[place], float) and value != 0.0:
                    row[place] = f"{value:.12g} %"
