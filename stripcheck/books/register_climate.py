"""The climate: twelve months' air and ground, read from a small table, and the sheet Climate that holds them.

The sheet's first row repeats the standard day, so that a case reads its day from one row whichever it is.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common
from stripcheck.books.register_columns import MONTHS
from stripcheck.books.register_levels import OF_DAY, Days, day_names
from stripcheck.books.register_rows import month_number
from stripcheck.caution import CAUTION
from stripcheck.day import Day
from stripcheck.errors import InputError
from stripcheck.register.read_table import check_file, find_delimiter, find_encoding, text_rows
from stripcheck.sheet import styles
from stripcheck.sheet.pages import UNKNOWN_GROUND, Pages, choice, write_header
from stripcheck.surface import CONDITIONS
from stripcheck.units import from_si, read_quantity, tidy

SHEET = "Climate"
TAKEN_AT = "$B$4"
HEADER_ROW, FIRST_ROW = 7, 8  # the row of the standard day; the months follow
STANDARD_QNH = 101325.0
LETTERS = dict(zip(OF_DAY, "FGHIJK", strict=True))
LIMITS = {"temperature": (-60, 60, "°C"), "qnh": (850, 1085, "hPa"), "taken_at": (-1476, 18045, "ft")}
_COLUMNS = {
    "month": ("month",),
    "temperature": ("temperature", "temp", "air temperature", "oat"),
    "ground": ("ground", "ground condition", "condition"),
    "qnh": ("qnh",),
    "taken_at": ("elevation", "taken at", "temperature taken at", "at", "station elevation"),
}
_KINDS = {"temperature": "temperature", "qnh": "pressure", "taken_at": "altitude"}
SAID = (
    "Each month's temperature is carried to a strip's elevation at the standard lapse rate; B4 blank: the same everywhere. "
    "Ground: where the register tells no condition; soft is wet where a strip is paved. QNH: blank is the standard 1013.25 "
    "hPa. Wind and humidity are those of the sheet Day."
)


@dataclass(frozen=True)
class Climate:
    """Twelve months: temperatures [K], QNH [Pa], ground, and the elevation [m] where they hold; NaN and "" where not known."""

    temperatures: tuple[float, ...]
    pressures: tuple[float, ...]
    grounds: tuple[str, ...]
    taken_at: float
    source: str
    told: tuple[str, ...] = ()


UNKNOWN = Climate((math.nan,) * 12, (math.nan,) * 12, ("",) * 12, math.nan, "none: type the months on the sheet Climate")


def read_climate(path: str | Path) -> Climate:
    """A climate table: a text file with a column for the month, one for the temperature, and more if there are.

    Columns in any order: Month, Temperature [°C], Ground (dry, wet or soft), QNH [hPa], Elevation [ft] where the temperatures
    hold. Raises InputError with what is wrong and what would be right.

    >>> read_climate("no such climate.csv")
    Traceback (most recent call last):
    ...
    stripcheck.errors.InputError: no such climate.csv: there is no such file
    """
    path = Path(path)
    check_file(path)
    encoding = find_encoding(path)
    rows = [row for row in text_rows(path, encoding, find_delimiter(path, encoding)) if any(cell.strip() for cell in row)]
    places = _places(path, rows[0] if rows else [])
    found: dict[int, dict[str, str]] = {}
    for number, row in enumerate(rows[1:], 2):
        cells = {key: row[at].strip() if at < len(row) else "" for key, (at, _) in places.items()}
        month = month_number(cells["month"]) or _plain_month(cells["month"])
        if not month or month in found:
            what = f'"{cells["month"]}" is no month, or comes twice; write each of the twelve once'
            raise InputError(f"{path.name} row {number}: {what}")
        found[month] = cells
    missing = [MONTHS[month - 1] for month in range(1, 13) if month not in found]
    if missing:
        raise InputError(f"{path.name}: {', '.join(missing)} missing; a climate table has a row for each of the twelve months")
    numbers = {key: tuple(_number(path, found[month], key, places) for month in range(1, 13)) for key in _KINDS}
    grounds = tuple(found[month].get("ground", "").lower() for month in range(1, 13))
    strange = next((ground for ground in grounds if ground and ground not in CONDITIONS), None)
    if strange is not None:
        raise InputError(f'{path.name}: ground "{strange}" is none of: {", ".join(CONDITIONS)}')
    heights = {height for height in numbers["taken_at"] if not math.isnan(height)}
    if len(heights) > 1:
        raise InputError(f"{path.name}: the temperatures hold for several elevations; give all months for one elevation")
    told = []
    if not any(grounds):
        grounds = ("dry",) * 12
        told.append("Climate: the ground is dry in all months, the table tells none")
    if any(map(math.isnan, numbers["qnh"])):
        told.append("Climate: QNH 1013.25 hPa in months that have none")
    if not heights:
        told.append("Climate: the temperatures hold for every strip, whatever its elevation; the table tells none")
    return Climate(numbers["temperature"], numbers["qnh"], grounds, next(iter(heights), math.nan), path.name, tuple(told))


def _places(path: Path, header: Sequence[str]) -> dict[str, tuple[int, str]]:
    """Place of each column, and the unit in its header."""
    places: dict[str, tuple[int, str]] = {}
    for at, cell in enumerate(header):
        name, _, rest = cell.replace("(", "[").partition("[")
        plain = " ".join(name.lower().replace("_", " ").split())
        key = next((key for key, names in _COLUMNS.items() if plain in names), None)
        if key is not None and key not in places:
            places[key] = at, rest.strip(" ])")
    for key, title in (("month", "Month"), ("temperature", "Temperature [°C]")):
        if key not in places:
            raise InputError(f'{path.name}: there is no column for it; a header such as "{title}" would be right')
    return places


def _plain_month(text: str) -> int:
    return int(text) if text.isdecimal() and 1 <= int(text) <= 12 else 0


def _number(path: Path, cells: Mapping[str, str], key: str, places: Mapping[str, tuple[int, str]]) -> float:
    text = cells.get(key, "")
    if not text:
        return math.nan
    try:
        value = float(read_quantity(text, _KINDS[key], places[key][1]))
    except InputError as error:
        raise InputError(f"{path.name}, {cells['month']}: {error}") from None
    low, high, unit = LIMITS[key]
    if not low <= from_si(value, unit) <= high:
        raise InputError(f"{path.name}, {cells['month']}: {text} is not credible; {low:,} to {high:,} {unit} is expected")
    return value


def write_climate(pages: Pages, climate: Climate, day: Day) -> Days:
    """The sheet: the standard day's row by formula, the months to type over, all in SI beside; returns the days."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    sheet["A1"], sheet["A1"].font = "The climate, month by month", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    sheet["A4"], sheet["A4"].font = "Temperatures hold at", styles.BODY
    common.input_cell(sheet, "B4", _typed(climate.taken_at, "ft"), '#,##0" ft"')
    common.expect_number(sheet, "B4", "Elevation", *LIMITS["taken_at"])
    sheet["A5"], sheet["A5"].font = SAID, styles.SMALL
    write_header(sheet, HEADER_ROW, ("Day", "Temperature [°C]", "Ground", "QNH [hPa]"))
    in_si = ("Temperature [K]", "Taken at [m]", "ISA deviation [K]", "Dew point [K]", "QNH [Pa]", "Ground")
    write_header(sheet, HEADER_ROW, in_si, 6)
    sheet.row_dimensions[HEADER_ROW].height = 30
    for letter, width in zip("ABCDEFGHIJK", (22, 13, 11, 11, 3, 13, 11, 13, 11, 11, 10), strict=True):
        sheet.column_dimensions[letter].width = width
    values = _values(climate, day)
    for at, name in enumerate(day_names()):
        _write_row(pages, sheet, FIRST_ROW + at, at, name, climate, {key: values[key][at] for key in OF_DAY})
    months = f"{FIRST_ROW + 1}:{{}}{FIRST_ROW + 12}"
    common.expect_number(sheet, f"B{months.format('B')}", "Temperature", *LIMITS["temperature"])
    common.expect_number(sheet, f"D{months.format('D')}", "QNH", *LIMITS["qnh"])
    choice(sheet, f"C{months.format('C')}", f'"{",".join(CONDITIONS)}"', "dry, wet or soft")
    sheet.freeze_panes = f"B{FIRST_ROW}"
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet)
    common.protect(sheet)
    return Days(day_names(), tuple(range(FIRST_ROW, FIRST_ROW + 13)), LETTERS, SHEET, values)


def _values(climate: Climate, day: Day) -> dict[str, np.ndarray]:
    """The values of the days, the standard one first, in SI."""
    nothing = [math.nan] * 12
    pressures = [STANDARD_QNH if math.isnan(value) else value for value in climate.pressures]
    grounds = [CONDITIONS.index(ground) if ground else -2 for ground in climate.grounds]
    columns = {
        "temperature": climate.temperatures, "temperature_elevation": [climate.taken_at] * 12, "isa_deviation": nothing,
        "dew_point": nothing, "qnh": pressures, "day_condition": grounds,
    }  # fmt: skip
    return {key: np.array([day.values[key], *column]) for key, column in columns.items()}


def _write_row(pages: Pages, sheet: Worksheet, row: int, at: int, name: str, climate: Climate,
               values: Mapping[str, float]) -> None:  # fmt: skip
    sheet[f"A{row}"], sheet[f"A{row}"].font = name, styles.BOLD if at == 0 else styles.BODY
    sheet[f"A{row}"].border = styles.LINE
    if at == 0:
        texts = {key: f'IF({key}="","",{key})' for key in OF_DAY} | {"day_condition": _known_ground("day_condition")}
        for letter, key, unit in (("B", "temperature", "°C"), ("D", "qnh", "hPa")):
            factor = f"{LETTERS[key]}{row}{'-273.15' if unit == '°C' else '/100'}"
            known = not math.isnan(values[key])
            pages.formula(sheet, f"{letter}{row}", f'IF(ISNUMBER({LETTERS[key]}{row}),{factor},"")',
                          float(from_si(values[key], unit)) if known else "")  # fmt: skip
            sheet[f"{letter}{row}"].font, sheet[f"{letter}{row}"].number_format = styles.BODY, "0.##"
        pages.formula(sheet, f"C{row}", f"K{row}", CONDITIONS[int(values["day_condition"])])
        sheet[f"C{row}"].font, sheet[f"C{row}"].alignment = styles.BODY, styles.CENTRE
    else:
        texts = {
            "temperature": f'IF(ISNUMBER(B{row}),B{row}+273.15,"")',
            "temperature_elevation": f'IF(ISNUMBER({TAKEN_AT}),{TAKEN_AT}*0.3048,"")',
            "isa_deviation": "",
            "dew_point": "",
            "qnh": f'IF(D{row}="",{STANDARD_QNH:g},IF(ISNUMBER(D{row}),D{row}*100,""))',
            "day_condition": _known_ground(f"C{row}"),
        }
        common.input_cell(sheet, f"B{row}", _typed(climate.temperatures[at - 1], "°C"), "0.##")
        common.input_cell(sheet, f"C{row}", climate.grounds[at - 1] or None)
        common.input_cell(sheet, f"D{row}", _typed(climate.pressures[at - 1], "hPa"), "0.##")
        sheet[f"C{row}"].alignment = styles.CENTRE
    for key, letter in LETTERS.items():
        cell = sheet[f"{letter}{row}"]
        cell.font, cell.number_format = styles.SMALL, "0.00"
        if texts[key]:
            pages.formula(sheet, f"{letter}{row}", texts[key], _shown(key, values[key]))


def _known_ground(cell: str) -> str:
    """The word of a cell, if it is one; a lookup would take "*" for any."""
    words = ",".join(f'{cell}="{word}"' for word in CONDITIONS)
    return f'IF(OR({words}),{cell},"{UNKNOWN_GROUND}")'


def _shown(key: str, value: float) -> float | str:
    if key == "day_condition":
        return CONDITIONS[int(value)] if value >= 0 else UNKNOWN_GROUND
    return "" if math.isnan(value) else float(value)


def _typed(value: float, unit: str) -> float | None:
    return None if math.isnan(value) else tidy(from_si(value, unit))
