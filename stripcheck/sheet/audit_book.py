"""A workbook that stripcheck filled, audited by the inputs that stand on its sheet Strips now, typed over or not.

The two directions of a strip become one runway under the headers of a list, so that the checks of a list hold for both.
What only a workbook can have wrong is found here: directions that disagree, and cells that its formulas can't read.
"""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from stripcheck.errors import InputError
from stripcheck.inputs import STRIP
from stripcheck.register import audit_kinds as kinds
from stripcheck.register.audit import SURVEY_AGE, Audit, Finding, Place, check_age, column_of, find, in_order
from stripcheck.register.audit_case import HEADER, Hit
from stripcheck.register.read_table import HEADER_WITHIN, Table, check_file, workbook_sheets
from stripcheck.register.reader import Reading, read_runways
from stripcheck.register.surface_words import known_condition, read_surface
from stripcheck.register.values import as_text, as_written, is_blank
from stripcheck.sheet.strips import SHEET, input_column
from stripcheck.surface import CONDITIONS, SURFACES

BOOK_KINDS = (".xlsx", ".xlsm")
MARKS = ("Key", "Strip", "Direction", "Surface")  # headers by which the sheet is known
ROUNDING = 1e-4  # in the unit of the column: a difference that was not typed

Row = Sequence[object]

# Header of a list -> title of the sheet's column, and the direction from which it is read.
_TEXTS = {
    "Strip": ("Strip", 1), "Name": ("Name", 1), "Survey date": ("Survey date", 1), "Notes": ("Notes", 1),
    "Slope profile": ("Slope profile", 1), "Designator end 1": ("Direction", 1), "Designator end 2": ("Direction", 2),
}  # fmt: skip
# Header of a list -> input, and the direction from which it is read; an obstacle on the climb-out stands at end 2.
_INPUTS = {
    "Surface": ("surface", 1), "Condition": ("condition", 1), "Length [m]": ("length", 1), "Width [m]": ("width", 1),
    "TORA end 1 [m]": ("tora", 1), "TORA end 2 [m]": ("tora", 2), "LDA end 1 [m]": ("lda", 1), "LDA end 2 [m]": ("lda", 2),
    "Elevation [ft]": ("elevation_field", 1), "Elevation end 1 [ft]": ("elevation_start", 1),
    "Elevation end 2 [ft]": ("elevation_end", 1), "Slope [%]": ("slope_given", 1),
    "Greatest local slope [%]": ("local_slope", 1),
    "Heading end 1 [°]": ("heading", 1), "Heading end 2 [°]": ("heading", 2),
    "Obstacle height end 1 [ft]": ("approach_obstacle_height", 1), "Obstacle height end 2 [ft]": ("obstacle_height", 1),
    "Obstacle distance end 1 [m]": ("approach_obstacle_distance", 1), "Obstacle distance end 2 [m]": ("obstacle_distance", 1),
    "Temperature [°C]": ("own_temperature", 1), "QNH [hPa]": ("own_qnh", 1), "Wind from [°]": ("own_wind_from", 1),
    "Wind speed [kt]": ("own_wind_speed", 1),
}  # fmt: skip
_WAYS = {"Land on": "land_here", "Leave by": "take_off_here"}
# What must agree in the two directions: input of the first, input of the second, sign.
_BOTH = (
    *((key, key, 1.0) for key in ("surface", "condition", "length", "width", "elevation_field", "local_slope",
                                  "own_temperature", "own_qnh", "own_wind_from", "own_wind_speed")),
    ("elevation_start", "elevation_end", 1.0), ("elevation_end", "elevation_start", 1.0),
    ("slope_given", "slope_given", -1.0),
    ("obstacle_height", "approach_obstacle_height", 1.0), ("obstacle_distance", "approach_obstacle_distance", 1.0),
    ("approach_obstacle_height", "obstacle_height", 1.0), ("approach_obstacle_distance", "obstacle_distance", 1.0),
)  # fmt: skip
_BY_KEY = {item.key: item for item in STRIP}
_TITLES = {item.key: input_column(item).header for item in STRIP}


@dataclass(frozen=True)
class Book:
    """The sheet Strips: its rows, the row of the titles, the column of each title, and the rows of the two directions of
    each runway (1 = first; None where there is no second)."""

    path: Path
    rows: Sequence[Row]
    title_row: int
    columns: dict[str, int]
    pairs: list[tuple[int, int | None]]

    def cell(self, row: int | None, title: str) -> object:
        """The cell of a row below a title, "" where there is none."""
        column = self.columns.get(title, 0)
        return "" if row is None or not 0 < column <= len(self.rows[row - 1]) else self.rows[row - 1][column - 1]

    def given(self, row: int | None, key: str) -> object:
        """The cell of a row for an input."""
        return self.cell(row, _TITLES[key])

    def has(self, key: str) -> bool:
        """Whether the sheet has a column for an input; one of short detail leaves out what is always blank."""
        return _TITLES[key] in self.columns

    def source(self, header: str) -> tuple[str, int]:
        """Title of the sheet's column, and direction, for a header of the list."""
        if header in _TEXTS:
            return _TEXTS[header]
        key, direction = _INPUTS.get(header) or (_WAYS[header], 1)
        return _TITLES[key], direction


def is_filled(path: Path, sheet: str | None) -> bool:
    """Whether a file is a workbook that stripcheck filled, told by its sheet Strips; one with a ``sheet`` named is a list."""
    return _book_in(path) is not None if sheet is None and path.suffix.lower() in BOOK_KINDS else False


def audit_book(path: Path, *, survey_age: float = SURVEY_AGE, today: datetime.date | None = None) -> Audit:
    """Find what makes the verdicts of a filled workbook untrustworthy; rows and columns are those of its sheet Strips.

    Arguments and errors as in ``audit_list``; ValueError for a workbook that stripcheck did not fill.
    """
    check_age(survey_age)
    book = _book_in(path)
    if book is None:
        raise ValueError(f"{path}: not a workbook that stripcheck filled")
    table = _as_list(book)
    reading = read_runways(table, path)
    findings = find(reading, lambda hit: _place(book, reading, hit), survey_age, today)
    findings = [finding for finding in findings if not _needless(book, finding)]
    return Audit(path, SHEET, table, len(book.pairs), 0, in_order([*findings, *_own_findings(book, reading)]))


def _needless(book: Book, finding: Finding) -> bool:
    """About the titles, which are the workbook's own, or a slope that is missing beside the slope of a profile."""
    profiled = finding.kind is kinds.NO_SLOPE and _is_number(book.given(finding.row, "profile_takeoff_slope"))
    return profiled or finding.row == book.title_row


def _book_in(path: Path) -> Book | None:
    try:
        check_file(path)
        _, found = next(workbook_sheets(path, SHEET))
    except InputError:  # no such sheet, or no workbook: whoever reads it as a list says what is wrong
        return None
    for number, row in enumerate(found[:HEADER_WITHIN], 1):
        titles = [" ".join(as_written(cell).split()) for cell in row]
        if set(MARKS) <= {*titles}:
            columns: dict[str, int] = {}
            for column, title in enumerate(titles, 1):
                columns.setdefault(title, column)  # a user's column of the same title stands further right
            return Book(path, found, number, columns, _pairs(found, number, columns["Key"], columns["Strip"]))
    return None


def _pairs(rows: Sequence[Row], title_row: int, key_column: int, strip_column: int) -> list[tuple[int, int | None]]:
    """Rows of the two directions of each runway, by the hidden keys "XLRB 14/32 1" and "XLRB 14/32 2".

    A row that the user added has no key, or the key of the row that it was copied from: it stands alone.
    """
    ways: dict[str, dict[str, int]] = {}
    alone: list[tuple[int, int | None]] = []
    for number, row in enumerate(rows[title_row:], title_row + 1):
        key = as_text(row[key_column - 1]) if len(row) >= key_column else ""
        pair, _, way = key.rpartition(" ")
        if way in ("1", "2") and way not in ways.setdefault(pair, {}):
            ways[pair][way] = number
        elif len(row) >= strip_column and not is_blank(row[strip_column - 1]):
            alone.append((number, None))
    pairs = [(found.get("1", found.get("2", 0)), found.get("2") if "1" in found else None) for found in ways.values() if found]
    return sorted([*pairs, *alone], key=lambda pair: pair[0])


def _as_list(book: Book) -> Table:
    """The runways as a list has them, one in a row; the row number is that of the direction named first."""
    columns: dict[str, list[object]] = {}
    for header in (*_TEXTS, *(header for header, (key, _) in _INPUTS.items() if book.has(key))):
        title, direction = book.source(header)
        cells = [book.cell(pair[direction - 1], title) for pair in book.pairs]
        is_number = header in _INPUTS and _BY_KEY[_INPUTS[header][0]].kind == "number"
        columns[header] = ["" if is_number and not _is_number(cell) else cell for cell in cells]
    for header, key in _WAYS.items():
        if book.has(key):
            columns[header] = [_only_way(book, pair, key) for pair in book.pairs]
    where = f'{book.path.name} sheet "{SHEET}"'
    rows = [first for first, _ in book.pairs]
    # a comma as delimiter: slopes are in percent, as their title says, and not in cells formatted as percent
    return Table(where, book.path.name, SHEET, [*columns], book.title_row, [*columns.values()], rows, {}, ",",
                 list(range(1, len(columns) + 1)))  # fmt: skip


def _only_way(book: Book, pair: tuple[int, int | None], key: str) -> object:
    """The one direction that is open, "" where both or none are, or there is only one."""
    names = [as_text(book.cell(row, "Direction")) for row in pair]
    open_ways = [name for name, row in zip(names, pair, strict=True) if _word(book.given(row, key)) != "no"]
    return open_ways[0] if len(open_ways) == 1 and names[0] != names[1] and all(names) else ""


def _place(book: Book, reading: Reading, hit: Hit) -> Place:
    """Where a hit of the list's checks stands on the sheet."""
    found = None if hit.at == HEADER else column_of(reading, hit)
    if hit.at == HEADER or found is None:
        return (book.title_row if hit.at == HEADER else book.pairs[hit.at][0]), 0, ""
    title, direction = book.source(found.header)
    first, second = book.pairs[hit.at]
    return (second if direction == 2 and second is not None else first), book.columns.get(title, 0), title


def _own_findings(book: Book, reading: Reading) -> Iterator[Finding]:
    """What only a filled workbook can have wrong."""
    for index, pair in enumerate(book.pairs):
        told = [*_disagreements(book, *pair), *(item for row in pair if row is not None for item in _cells(book, row))]
        for row, key, kind, what, fix in told:
            strip, runway = (reading.texts[name][0][index] for name in ("strip", "runway"))
            yield Finding(row, book.columns[_TITLES[key]], strip, runway, _TITLES[key], kind, what, fix)


def _disagreements(book: Book, first: int, second: int | None) -> Iterator[tuple[int, str, kinds.Kind, str, str]]:
    for key, other, sign in _BOTH if second is not None else ():
        here, there = book.given(first, key), book.given(second, other)
        if book.has(key) and book.has(other) and not _agree(here, there, sign):
            shown = as_written(here) or "nothing", as_written(there) or "nothing"
            what = f'{shown[0]} here, but row {second} has {shown[1]} for "{_TITLES[other]}"'
            yield first, key, kinds.ROWS_DISAGREE, what, "change both rows"


def _agree(here: object, there: object, sign: float) -> bool:
    if isinstance(here, int | float) and isinstance(there, int | float):
        return abs(here - sign * there) <= ROUNDING
    return _word(here) == _word(there)


def _cells(book: Book, row: int) -> Iterator[tuple[int, str, kinds.Kind, str, str]]:
    """Cells of a row that the formulas of the workbook can't read, and a fault that still stands there."""
    for item in STRIP:
        cell = book.given(row, item.key)
        text = as_written(cell)
        if not book.has(item.key) or is_blank(cell):
            continue
        if item.kind == "fault":
            yield row, item.key, kinds.FILLED_FAULT, text, "mend what it says, then clear the cell in both directions"
        elif item.kind == "number" and not _is_number(cell):
            what = f'"{text}" is text, and the formulas need a number'
            yield row, item.key, kinds.BAD_VALUE, what, f"type a number in {item.unit}"
        elif item.kind == "flag" and _word(cell) not in ("yes", "no"):
            yield row, item.key, kinds.BAD_VALUE, f'"{text}" is neither yes nor no', "type yes or no"
        elif item.key == "surface" and _word(cell) not in SURFACES and read_surface(text).word:
            what = f'"{text}" is not a word of the ground table'
            yield row, item.key, kinds.STRANGE_SURFACE, what, f"choose {read_surface(text).word} from the list"
        elif item.key == "condition" and _word(cell) not in CONDITIONS and known_condition(text) in CONDITIONS:
            what = f'"{text}" is not a condition of the ground table'
            yield row, item.key, kinds.STRANGE_CONDITION, what, f"choose {known_condition(text)} from the list"


def _word(cell: object) -> str:
    return as_text(cell).lower()


def _is_number(cell: object) -> bool:
    return isinstance(cell, int | float) and not isinstance(cell, bool)
