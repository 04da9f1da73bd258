"""The Strips sheet of a trip: one row for each direction, to be typed over and added to, and the list for the drop-downs."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common as book
from stripcheck.caution import CAUTION
from stripcheck.chain import Input
from stripcheck.inputs import STRIP
from stripcheck.profile import local_slopes
from stripcheck.register import Directions
from stripcheck.register.limits import LIMITS
from stripcheck.sheet import styles
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.pages import Pages, choice, note, write_header
from stripcheck.sheet.stream import Column as AnyColumn
from stripcheck.sheet.stream import FormulaColumn, NumberColumn, Table, TextColumn
from stripcheck.sheet.strips import given_columns, input_column
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import from_si

SHEET = "Strips"
HEADER_ROW, FIRST_ROW = 3, 4
SPARE = 10  # runways that can be added
GREATEST = 300  # directions: beyond it a drop-down is no help, and the list wants to be cut to the trip's strips
NAMES = "runway_names"
IDENTITY = (("strip", "Strip", 11), ("name", "Name", 22), ("runway", "Runway", 9), ("direction", "Direction", 9))
POSITION = (("latitude", "Latitude [°]"), ("longitude", "Longitude [°]"))
ABOUT = (("survey_date", "Survey date", 12), ("notes", "Notes", 36))
PROFILE_PARTS = {"takeoff": max, "climb": max, "landing": min, "approach": min}  # which part of a profile is against you
_PROFILE = tuple(f"profile_{part}_slope" for part in PROFILE_PARTS)
# the strip's inputs but its weather, which the trip has on its own page, and what held where a profile was worked out
INPUTS = tuple(item for item in STRIP if not item.key.startswith(("own_", "profile_")) or item.key in _PROFILE)
_LIMITS = {"elevation_start": "elevation", "elevation_end": "elevation", "elevation_field": "elevation", "slope_given": "slope",
           "approach_obstacle_height": "obstacle_height", "approach_obstacle_distance": "obstacle_distance"}  # fmt: skip


@dataclass(frozen=True)
class Strips:
    """The sheet as it will be written: its rows with the spare ones, what each column shows, and the runways' names."""

    rows: int
    shown: Mapping[str, Sequence[Any] | np.ndarray]
    names: tuple[str, ...]
    letters: Mapping[str, str]

    def range(self, key: str) -> str:
        """Reference of a column's rows, from any sheet."""
        letter = self.letters[key]
        return f"{SHEET}!${letter}${FIRST_ROW}:${letter}${FIRST_ROW + self.rows - 1}"

    @property
    def listed(self) -> str:
        """Reference of the list for the drop-downs."""
        letter = self.letters["listed"]
        return f"{SHEET}!${letter}${FIRST_ROW}:${letter}${FIRST_ROW + self.rows // 2 - 1}"


def runway_names(strips: Sequence[str], runways: Sequence[str]) -> tuple[str, ...]:
    """A name for each runway, told apart by a number where two would be the same.

    >>> runway_names(["A", "A", "B"], ["09/27", "09/27", ""])
    ('A 09/27', 'A 09/27 #2', 'B')
    """
    seen: Counter[str] = Counter()
    names = []
    for strip, runway in zip(strips, runways, strict=True):
        name = " ".join(f"{strip} {runway}".split())
        seen[name.casefold()] += 1
        names.append(f"{name} #{seen[name.casefold()]}" if seen[name.casefold()] > 1 else name)
    return tuple(names)


def steepest(directions: Directions) -> dict[str, np.ndarray]:
    """Slopes [-] that stand for a slope profile: its steepest part, against you both ways; NaN without one.

    What slope is as good as a profile hangs on mass and air, which differ from stop to stop and are typed over.
    """
    found = {key: np.full(directions.n, np.nan) for key in _PROFILE}
    for row, profile in enumerate(directions.profiles):
        if profile is not None:
            for key, most in zip(_PROFILE, PROFILE_PARTS.values(), strict=True):
                found[key][row] = most(profile.slopes)
    return found


def lay_out(directions: Directions) -> Strips:
    """What the sheet will hold."""
    spare = 2 * SPARE
    texts = {key: [*directions.texts[key], *[""] * spare] for key in
             ("strip", "name", "runway", "direction", "survey_date", "notes")}  # fmt: skip
    given = given_columns(directions)
    given["local_slope"] = local_slopes(given["local_slope"], directions.profiles)
    given |= steepest(directions)
    shown: dict[str, Any] = {**texts}
    for number, (key, _) in enumerate(POSITION):
        degrees = np.degrees(directions.positions[:, number])
        shown[key] = np.concatenate((np.round(degrees, 6), np.full(spare, np.nan)))
    for item in INPUTS:
        if item.kind == "number":
            column = np.round(np.asarray(from_si(given[item.key], item.unit)), 6)
            shown[item.key] = np.concatenate((column, np.full(spare, np.nan)))
        else:
            shown[item.key] = [*directions.texts[item.key], *[""] * spare]
    names = runway_names(directions.texts["strip"][::2], directions.texts["runway"][::2])
    keys = [*(key for key, *_ in (*IDENTITY, *POSITION)), *(item.key for item in INPUTS), *(key for key, *_ in ABOUT),
            "base", "listed"]  # fmt: skip
    letters = {key: get_column_letter(number) for number, key in enumerate(keys, 1)}
    return Strips(directions.n + spare, shown, names, letters)


def write_strips(pages: Pages, strips: Strips) -> Cases:
    """The sheet with its rows; the range of the drop-downs gets a name."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    last = FIRST_ROW + strips.rows - 1
    sheet["A1"], sheet["A1"].font = "The strips: two rows for each runway, one for each direction", styles.HEADING
    sheet["G1"], sheet["G1"].font = (
        f"Yellow cells are typed over. A new runway takes two of the {2 * SPARE} spare rows at the end, filled in alike.",
        styles.SMALL,
    )
    styles.write_caution(sheet, "A2", CAUTION)
    headers = [title for _, title, *_ in (*IDENTITY, *POSITION)]
    headers += [input_column(item).header for item in INPUTS]
    headers += [title for _, title, _ in ABOUT] + ["Name", "To choose from"]
    write_header(sheet, HEADER_ROW, tuple(headers))
    sheet.row_dimensions[HEADER_ROW].height = 58
    widths = {**{key: width for key, _, width in (*IDENTITY, *ABOUT)}, "base": 14, "listed": 16}
    for key, letter in strips.letters.items():
        sheet.column_dimensions[letter].width = widths.get(key, 10)
        cell = sheet[f"{letter}{FIRST_ROW}"]
        cell.font, cell.border = styles.BODY, styles.LINE
        if key not in ("base", "listed"):
            cell.number_format = "@"
            cell.fill, cell.border, cell.protection = styles.INPUT_FILL, styles.BOX, styles.UNLOCKED
    for key, _ in POSITION:
        sheet[f"{strips.letters[key]}{FIRST_ROW}"].number_format = "0.0000"
        low, high = (round(float(np.degrees(limit)), 6) for limit in (LIMITS[key].least, LIMITS[key].greatest))
        cells = f"{strips.letters[key]}{FIRST_ROW}:{strips.letters[key]}{last}"
        book.expect_number(sheet, cells, key.capitalize(), low, high, "°")
    for item in INPUTS:
        _dress(sheet, item, strips.letters[item.key], last)
    sheet.freeze_panes = f"E{FIRST_ROW}"
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}", "A:D")
    sheet.page_setup.fitToWidth = 2
    sheet.print_area = f"A1:{strips.letters['notes']}{last - 2 * SPARE}"
    pages.name(NAMES, sheet, strips.listed.partition("!")[2].replace("$", ""))
    book.protect(sheet)
    return Cases(SHEET, strips.letters, strips.rows, _table(strips), {})


def _dress(sheet: Worksheet, item: Input, letter: str, last: int) -> None:
    """Number format, drop-down or limits, and the meaning as a comment."""
    cells = f"{letter}{FIRST_ROW}:{letter}{last}"
    sheet[f"{letter}{HEADER_ROW}"].comment = note(item.help)
    sheet.column_dimensions[letter].width = input_column(item).width
    sheet[f"{letter}{FIRST_ROW}"].number_format = "#,##0.##" if item.kind == "number" else "General"
    if item.kind == "choice":
        words = SURFACES if item.key == "surface" else CONDITIONS
        choice(sheet, cells, f'"{",".join(words)}"', "Choose a word of the ground table, or leave the cell blank.")
    elif item.kind == "flag":
        choice(sheet, cells, '"yes,no"', "yes or no")
    elif item.kind == "number":
        limits = LIMITS["slope" if item.key.startswith("profile_") else _LIMITS.get(item.key, item.key)]
        low, high = (round(float(from_si(limit, item.unit)), 6) for limit in (limits.least, limits.greatest))
        book.expect_number(sheet, cells, item.label, low, high, item.unit)


def _table(strips: Strips) -> Table:
    columns: list[AnyColumn] = []
    for key in strips.letters:
        if key == "base":
            columns.append(_base_column(strips))
        elif key == "listed":
            columns.append(_listed_column(strips))
        else:
            values = strips.shown[key]
            columns.append(NumberColumn(values) if isinstance(values, np.ndarray) else TextColumn(values))
    return Table(FIRST_ROW, columns)


def _base_column(strips: Strips) -> FormulaColumn:
    """Strip and runway of the k-th pair of rows, in the k-th row."""
    strip, runway = (strips.letters[key] for key in ("strip", "runway"))
    formulas: list[str | None] = [None] * strips.rows
    values = [""] * strips.rows
    pairs = zip(strips.shown["strip"][::2], strips.shown["runway"][::2], strict=True)
    for number, pair in enumerate(pairs):
        row = FIRST_ROW + 2 * number
        formulas[number] = f'TRIM(${strip}${row}&" "&${runway}${row})'
        values[number] = " ".join(" ".join(pair).split())
    return FormulaColumn(formulas, values)


def _listed_column(strips: Strips) -> FormulaColumn:
    """The names to choose from; of two that are the same the later one has its number behind it."""
    base = strips.letters["base"]
    formulas: list[str | None] = [None] * strips.rows
    values = [""] * strips.rows
    for number in range(strips.rows // 2):
        row = FIRST_ROW + number
        before = f"SUMPRODUCT(--(${base}${FIRST_ROW}:${base}${row}=${base}${row}))"
        formulas[number] = f'IF(${base}${row}="","",IF({before}>1,${base}${row}&" #"&{before},${base}${row}))'
        values[number] = strips.names[number] if number < len(strips.names) else ""
    return FormulaColumn(formulas, values)


