"""Where things stand on the Trip sheet: a row for each line, a column for each stop.

The sheet Reading has the same rows and columns: each of its cells reads the one of the Trip sheet, and is blank where what
is typed there can't be right.
"""

from __future__ import annotations

from dataclasses import dataclass

from openpyxl.utils import get_column_letter

from stripcheck.books.trip_plan import FIRST_HAS_NOT, GENERAL, LEG, LOADS, STOPS, WEATHER, Item

TRIP, READING, KNEEBOARD = "Trip", "Reading", "Kneeboard"
LABEL, UNIT, VALUE = "A", "B", "C"  # columns of the lines that belong to the whole trip; stop 1 is in VALUE too
HEADER_ROW, RUNWAY_ROW, NAME_ROW = 3, 4, 5


@dataclass(frozen=True)
class Line:
    """A line of the page: its key, what it is, the unit, and how its numbers are shown. ``item``: where it is typed."""

    key: str
    label: str
    unit: str = ""
    shown: str = "General"
    item: Item | None = None
    small: bool = False


def _typed(items: tuple[Item, ...]) -> tuple[Line, ...]:
    return tuple(Line(item.key, item.label, item.unit, item.shown, item) for item in items)


def _side(side: str, mass: str, last: str) -> tuple[Line, ...]:
    """The lines of a landing or a take-off."""
    return (
        Line(f"{side}_verdict", "Verdict"),
        Line(f"{side}_reason", "Limiting reason", small=True),
        Line(f"{side}_direction", "Direction"),
        Line(f"{side}_flap", "Flap"),
        Line(f"mass_{side}", mass, "kg", "#,##0"),
        Line(f"{side}_greatest", "Greatest suitable mass", "kg", "#,##0"),
        Line(f"{side}_spare", "To spare", "kg", "#,##0;-#,##0;0"),
        Line(f"{side}_required", "Distance required", "m", "#,##0"),
        Line(f"{side}_available", "Distance available", "m", "#,##0"),
        Line(f"{side}_margin", "Margin", "m", "#,##0;-#,##0;0"),
        Line(f"{side}_headwind", "Headwind (tail -)", "kt", "0;-0;0"),
        Line(f"{side}_crosswind", "Crosswind", "kt", "0"),
        Line(f"{side}_stall", "Stall speed", "kt", "0.0"),
        Line(f"{side}_speed", last, "kt", "0.0"),
        Line(f"{side}_speeds_are", "Speeds are", "", small=True),
    )


SECTIONS: tuple[tuple[str, str, tuple[Line, ...]], ...] = (
    ("general", "The aeroplane and its fuel", _typed(GENERAL)),
    ("leg", "The leg to this stop", (*_typed(LEG), Line("leg", "Distance", "nm", "0.0"), Line("time", "Time", "min", "0"),
                                     Line("burn", "Fuel for the leg", "l", "0.0"),
                                     Line("fuel_left", "Fuel at landing", "l", "0.0"))),
    ("weather", "Forecast at this stop", (*_typed(WEATHER), Line("ground", "Ground"),
                                          Line("density_altitude", "Density altitude", "ft", "#,##0"))),
    ("landing", "Landing", _side("landing", "Landing mass", "Approach speed")),
    ("loads", "On the ground", (*_typed(LOADS), Line("payload", "Payload aboard", "kg", "#,##0"),
                                Line("fuel_out", "Fuel at take-off", "l", "0.0"),
                                Line("zero_fuel", "Zero-fuel mass", "kg", "#,##0"))),
    ("takeoff", "Take-off", (*_side("takeoff", "Take-off mass", "Lift-off speed"),
                             Line("abort", "Abort point", "", small=True),
                             Line("abort_place", "Abort by: along the strip", "m", "#,##0"),
                             Line("abort_speed", "Abort by: speed", "kt", "0"),
                             Line("seventy", "70 % of lift-off speed", "", small=True))),
    ("checks", "Checks", (Line("fuel_check", "Fuel", small=True), Line("mass_check", "Zero-fuel mass", small=True),
                          Line("entry_check", "What is typed", small=True))),
)  # fmt: skip


def _rows() -> tuple[dict[str, int], dict[str, int]]:
    """Row of each line by key, and of each section's heading."""
    rows, headings, row = {"runway": RUNWAY_ROW, "name": NAME_ROW}, {}, NAME_ROW + 1
    for name, _, lines in SECTIONS:
        headings[name] = row
        row += 1
        for line in lines:
            rows[line.key] = row
            row += 1
    return rows, headings


ROWS, HEADINGS = _rows()
LAST_ROW = max(ROWS.values())
GENERAL_KEYS = frozenset(item.key for item in GENERAL)


def column(stop: int) -> str:
    """Letter of a stop's column, stops numbered from 1."""
    return str(get_column_letter(stop + 2))


def cell(key: str, stop: int = 1) -> str:
    """Address of a line's cell for a stop, or of a value of the whole trip.

    >>> cell("runway", 2), cell("operating_mass")
    ('D4', 'C7')
    """
    letter: str = VALUE if key in GENERAL_KEYS else column(stop)
    return f"{letter}{ROWS[key]}"


def fixed(address: str, sheet: str = "") -> str:
    """An address that does not move, on a sheet if one is named.

    >>> fixed("D4", "Trip"), fixed("D4")
    ('Trip!$D$4', '$D$4')
    """
    letters = address.rstrip("0123456789")
    return f"{sheet}{'!' if sheet else ''}${letters}${address[len(letters):]}"


def typed_cells() -> list[tuple[Item, int]]:
    """Every number that is typed: the item and the stop, 1 for what belongs to the whole trip."""
    made = [(item, 1) for item in GENERAL]
    made += [(item, stop) for stop in range(1, STOPS + 1) for item in (*LEG, *WEATHER, *LOADS)
             if stop > 1 or item.key not in FIRST_HAS_NOT]  # fmt: skip
    return made
