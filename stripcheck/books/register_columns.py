"""The columns of the sheet Register, in order: a runway list like any other, one row for each runway.

Headers that `stripcheck.register.columns` understands are written so that they are read back as they are meant; the others
are carried.
"""

from __future__ import annotations

from dataclasses import dataclass

from stripcheck.register.limits import LIMITS
from stripcheck.units import from_si, tidy

SHEET = "Register"
BAND_ROW, HEADER_ROW, FIRST_ROW = 6, 7, 8
SPARE_SHARE, LEAST_SPARE = 0.10, 5  # rows that are worked out beyond those of the list
LEAST_LAST = 2000  # row to which formulas look at the least; what is inserted above moves it down
MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
CLOSED, UNSURE = "x", "?"  # in a month's cell

Key = tuple[str, int]  # of a column: what it tells, and of which end (0: of the whole runway)


@dataclass(frozen=True)
class RegisterColumn:
    """One column. ``kind``: text, number, choice, yes or no, month or date; ``unit`` and limits of a number as shown."""

    key: str
    end: int
    header: str
    kind: str
    width: float
    band: str
    help: str
    unit: str = ""

    @property
    def place(self) -> Key:
        return self.key, self.end

    @property
    def limits(self) -> tuple[float, float]:
        """Least and greatest number, in the unit shown."""
        limits = LIMITS[self.key]
        return tidy(from_si(limits.least, self.unit)), tidy(from_si(limits.greatest, self.unit))


def _text(key: str, header: str, width: float, band: str, help_text: str, kind: str = "text") -> RegisterColumn:
    return RegisterColumn(key, 0, header, kind, width, band, help_text)


def _number(key: str, header: str, unit: str, band: str, help_text: str, end: int = 0, width: float = 9.5) -> RegisterColumn:
    shown = "° true" if key == "heading" else unit
    return RegisterColumn(key, end, f"{header} [{shown}]", "number", width, band, help_text, unit)


def _ends(key: str, header: str, unit: str, band: str, help_text: str, width: float = 9.5) -> list[RegisterColumn]:
    return [_number(key, f"{header} end {end}", unit, band, help_text, end, width) for end in (1, 2)]


_WHICH, _WHERE, _LONG, _HIGH = "Which strip", "Where", "How long", "How high and how steep"
_GROUND, _OBSTACLES, _WAY, _CLOSED, _SURVEY = "Ground", "Obstacles", "Which way", "Closed in", "Survey and notes"
_END_1 = "End 1 is the end named first: in 09/27 it is where a landing on 09 begins."
SECOND_HEADING = _number("heading", "Heading end 2", "°", _WHERE, "True heading from end 2, where it is not just opposite", 2)

COLUMNS: tuple[RegisterColumn, ...] = (
    _text("strip", "Strip", 10, _WHICH, "Identifier of the strip"),
    _text("name", "Name", 21, _WHICH, "Name of the strip"),
    _text("runway", "Runway", 9, _WHICH, f"Both ends, such as 09/27. {_END_1}", "runway"),
    *(column for end in (1, 2) for column in (
        _number("latitude", f"Latitude end {end}", "°", _WHERE, "Decimal degrees, north positive", end, 10.5),
        _number("longitude", f"Longitude end {end}", "°", _WHERE, "Decimal degrees, east positive", end, 10.5),
    )),
    _number("heading", "Heading", "°", _WHERE,
            "True heading from end 1 to end 2. Blank: from the coordinates, else from the runway's name."),
    _number("length", "Length", "m", _LONG, "Between the two ends"),
    *_ends("tora", "TORA", "m", _LONG, "Usable for the take-off that begins there. Blank: the whole length"),
    *_ends("lda", "LDA", "m", _LONG, "Usable for the landing over that end. Blank: what the threshold leaves"),
    *_ends("displaced", "Displaced threshold", "m", _LONG, "Distance of the threshold from its end"),
    _number("width", "Width", "m", _LONG, "Width of the strip"),
    _number("elevation", "Elevation", "ft", _HIGH, "Published elevation; not needed where both ends have theirs"),
    *_ends("elevation", "Elevation", "ft", _HIGH, "Elevation of that end"),
    _number("slope", "Slope", "%", _HIGH, "Rising from end 1 to end 2: positive. Blank: from the elevations of the ends"),
    _number("local_slope", "Greatest local slope", "%", _HIGH, "Steepest part, without sign"),
    _text("profile", "Slope profile", 22, _HIGH,
          "Points distance:height from end 1, such as 0:0, 200:3.5, 450:12. It counts here by its steepest part, all along. "
          "One typed anew counts once the workbook is made again.", "profile"),
    _text("surface", "Surface", 11, _GROUND, "Choose a word of the list", "choice"),
    _text("condition", "Condition", 10, _GROUND, "dry, wet or soft; blank: that of the day or the month", "choice"),
    _text("surface_listed", "Surface as listed", 16, _GROUND, "The spelling in the list that the register was made from"),
    *(column for end in (1, 2) for column in (
        _number("obstacle_height", f"Obstacle height end {end}", "ft", _OBSTACLES, "Above that end; 0: none", end),
        _number("obstacle_distance", f"Obstacle distance end {end}", "m", _OBSTACLES, "From that end", end),
    )),
    _text("land_towards", "Land on", 8, _WAY, "The only direction to land in, such as 09; blank: both", "end"),
    _text("take_off_towards", "Leave by", 8, _WAY, "The only direction to take off in, such as 27; blank: both", "end"),
    _text("one_way", "One-way", 8, _WAY, 'yes asks for "Land on" and "Leave by" to be filled', "yes or no"),
    _text("closed", "Closed", 8, _WAY, "yes: closed for good, or until further notice", "yes or no"),
    *(RegisterColumn("month", number, name, "month", 4.6, _CLOSED,
                     f'"{CLOSED}": closed in this month; "{UNSURE}": not known whether')
      for number, name in enumerate(MONTHS, 1)),
    _text("survey_date", "Survey date", 17, _SURVEY, "When the figures were last measured", "date"),
    _text("survey_source", "Survey source", 20, _SURVEY, "Who or what they come from"),
    _text("notes", "Notes", 34, _SURVEY, "Anything"),
    _text("photo", "Photo link", 24, _SURVEY, "A file or an address, as text or as a link"),
)  # fmt: skip


def columns_for(second_heading: bool) -> tuple[RegisterColumn, ...]:
    """The columns of a register; ``second_heading``: with a heading of end 2 of its own.

    >>> len(columns_for(True)) - len(columns_for(False))
    1
    """
    if not second_heading:
        return COLUMNS
    at = next(i for i, column in enumerate(COLUMNS) if column.key == "heading") + 1
    return (*COLUMNS[:at], SECOND_HEADING, *COLUMNS[at:])


def spare_rows(rows: int) -> int:
    """How many rows beyond those of the list are worked out.

    >>> spare_rows(12), spare_rows(300)
    (5, 30)
    """
    return max(LEAST_SPARE, round(SPARE_SHARE * rows))
