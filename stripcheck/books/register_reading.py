"""The sheet Reading: each row of the register as the chain needs it, or the sentence that keeps it from being assessed.

The rules are those of `stripcheck.register`, for cells that hold plain numbers and the words of the drop-downs. What a
formula can't read is a fault, so that a row is not assessed rather than misread.
"""

from __future__ import annotations

import datetime
import math
import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import register_columns as columns_of
from stripcheck.books.register_columns import Key, RegisterColumn
from stripcheck.books.register_rows import Cell as Written
from stripcheck.links import highest_elevation
from stripcheck.numeric import Number
from stripcheck.profile import LENGTH_SHARE, LENGTH_SLACK, Profile
from stripcheck.register.checks import GREATEST_END_TO_END, SAME_SLOPE
from stripcheck.register.direction_numbers import SAME_NUMBER
from stripcheck.register.runway_ends import bearings, designator_degrees
from stripcheck.register.runways import PERCENT_CELLS_BELOW
from stripcheck.sheet import styles
from stripcheck.sheet.cases import FIRST_ROW, HEADER_ROW
from stripcheck.sheet.cell import Cell, as_cell, formula, reference, shown, where
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.sheet.stream import ROW, FormulaColumn, NumberColumn, Table
from stripcheck.sheet.stream import Column as StreamColumn
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import from_si, to_si

SHEET, PROFILES = "Reading", "Profiles"
PRINT_SCALE = 60  # percent
TEXTS = ("strip", "name", "runway", "surface", "condition", "land_towards", "take_off_towards", "one_way", "closed", "profile",
         "survey_date")  # fmt: skip
AGAIN = "make the workbook anew with stripcheck register"
_COMPASS = ("N", "NNE", "NE", "ENE", "E", "ESE", "SE", "SSE", "S", "SSW", "SW", "WSW", "W", "WNW", "NW", "NNW")


@dataclass(frozen=True)
class Source:
    """Where the register's columns stand: letters by column, the rows to which formulas look."""

    columns: tuple[RegisterColumn, ...]
    letters: Mapping[Key, str]
    last: int

    def cells(self, place: Key) -> str:
        """A column's cells from the header on, so that a row inserted before the first one is seen."""
        letter = self.letters[place]
        return f"{columns_of.SHEET}!${letter}${columns_of.HEADER_ROW}:${letter}${self.last}"

    def header(self, place: Key) -> str:
        return f"{columns_of.SHEET}!${self.letters[place]}${columns_of.HEADER_ROW}"


@dataclass(frozen=True)
class Reading:
    """The sheet as written: where each key's column stands, its table, and the values of its columns as shown."""

    letters: Mapping[str, str]
    table: Table
    values: Mapping[str, Any]
    source: Source

    @property
    def rows(self) -> int:
        return len(self.values["fault"])

    def at(self, key: str, row: str | int = ROW) -> str:
        """Reference of a key's cell in a row of the sheet."""
        return f"{SHEET}!${self.letters[key]}{row}"

    def number(self, key: str) -> np.ndarray:
        """A column's numbers, NaN where a cell has none."""
        return _as_numbers(self.values[key])


@dataclass(frozen=True)
class _Column:
    """A column of the sheet: header, formula, values, number format, width."""

    header: str
    formula: str
    values: Any
    width: float = 9.0
    format: str = "General"


@dataclass(frozen=True)
class _Fault:
    """A sentence, when it stands: as a formula's condition, and for the values of one row."""

    sentence: str
    condition: str
    holds: Callable[[Mapping[str, Any]], bool]


def number_key(column: RegisterColumn) -> str:
    """Key of a number's column on this sheet, such as ``elevation_2``; without the end where it is of the whole runway."""
    return f"{column.key}_{column.end}" if column.end else column.key


def write_reading(pages: Pages, source: Source, rows: Sequence[Mapping[Key, Written]],
                  profiles: Mapping[str, Profile]) -> Reading:  # fmt: skip
    """Write the sheet, and the table of profiles that it looks into; ``rows`` are those of the register, spare ones too."""
    _write_profiles(pages, profiles)
    made = _Maker(source, rows, profiles)
    columns = made.columns()
    letters = made.letters
    _write_skeleton(pages, source, columns, letters, made.suspect)
    table: list[StreamColumn] = [NumberColumn(np.arange(1.0, len(rows) + 1.0))]
    table += [FormulaColumn(column.formula, column.values) for column in columns.values()]
    return Reading(letters, Table(FIRST_ROW, table), {key: column.values for key, column in columns.items()}, source)


class _Maker:
    """Formulas and values side by side, column by column; a formula may read the columns before it."""

    def __init__(self, source: Source, rows: Sequence[Mapping[Key, Written]], profiles: Mapping[str, Profile]) -> None:
        self.source, self.rows, self.profiles = source, rows, profiles
        self.numbers = [column for column in source.columns if column.kind == "number"]
        self.made: dict[str, _Column] = {}
        self.letters: dict[str, str] = {}
        self.suspect = {key: _may_be_percent([row.get((key, 0)) for row in rows]) for key in ("slope", "local_slope")}

    def columns(self) -> dict[str, _Column]:
        for key in TEXTS:
            self._text(key)
        for column in self.numbers:
            self._number(column)
        identity = ("strip", "name", "runway", "length")
        used = [any(value != "" for value in told) for told in self._each(*identity)]
        self._put("used", "In use", "&".join(map(self.ref, identity)) + '<>""', used, 8)
        self._names()
        self._headings()
        self._profile()
        elevations = ("elevation", "elevation_1", "elevation_2")
        self._computed("elevation_used", "Highest elevation [ft]", highest_elevation, elevations, "ft", "ft")
        numbers, words = self._number_faults(), self._word_faults()
        self._faults("fault_of_numbers", "Fault of a number", numbers, "")
        self._faults("fault_of_words", "Fault of words, or contradiction", words, "fault_of_numbers")
        self._fault()
        return self.made

    def ref(self, key: str) -> str:
        return f"${self.letters[key]}{ROW}"

    def _put(self, key: str, header: str, text: str, values: Any, width: float = 9.0, number_format: str = "General") -> None:
        self.letters[key] = get_column_letter(len(self.made) + 2)
        self.made[key] = _Column(header, text, values, width, number_format)

    def _each(self, *keys: str) -> list[tuple[Any, ...]]:
        """Values of some columns, row by row."""
        return list(zip(*(self.made[key].values for key in keys), strict=True))

    def _fetched(self, place: Key) -> str:
        return f"INDEX({self.source.cells(place)},$A{ROW}+1)"

    def _text(self, key: str) -> None:
        """A text, or a number such as 9 where an end is meant; blanks and spaces around it are nothing."""
        cell = self._fetched((key, 0))
        if key == "survey_date":
            text = f'IFERROR(IF({cell}="","",{cell}),"?")'
            values: list[Any] = [_shown_date(row.get((key, 0))) for row in self.rows]
            self._put(key, "Survey date, as a number", text, values, 12)
            return
        plain = f"TRIM({cell})"
        if key in ("land_towards", "take_off_towards", "runway"):
            plain = f'UPPER(TRIM(IF(ISNUMBER({cell}),TEXT({cell},"00"),{cell})))'
        header = next(column.header for column in self.source.columns if column.key == key)
        values = [_plain_text(key, row.get((key, 0))) for row in self.rows]
        self._put(key, header, f'IFERROR({plain},"?")', values, {"name": 20, "profile": 20}.get(key, 10))

    def _number(self, column: RegisterColumn) -> None:
        """A number as it stands; what is none stays a text, which is a fault. A slope may be written as 0.2 %."""
        cell = self._fetched(column.place)
        found = cell
        if column.key in ("slope", "local_slope"):
            bare = f'VALUE(TRIM(LEFT({cell},LEN({cell})-1)))'
            percent = f'IF(AND(RIGHT({cell},1)="%",ISERROR(FIND(",",{cell}))),{bare},{cell})'
            found = f"IF(ISNUMBER({cell}),{cell},{percent})"
        text = f'IFERROR(IF({cell}="","",{found}),"?")'
        values = [_plain_number(column.key, row.get(column.place)) for row in self.rows]
        self._put(number_key(column), column.header, text, values, 9, "0.####")

    def _computed(self, key: str, header: str, function: Callable[..., Number], inputs: Sequence[str], unit: str,
                  result: str) -> None:  # fmt: skip
        """A number by an equation of the package, over the cells and over their values."""
        cells = [reference(self.ref(name), unit) for name in inputs]
        values = [to_si(_as_numbers(self.made[name].values), unit) for name in inputs]
        text = formula(shown(as_cell(function(*cells)), result))
        self._put(key, header, text, _blanks(from_si(np.asarray(function(*values)), result)), 9, "0.##")

    def _names(self) -> None:
        """The names of the two ends, and the directions [°] that they stand for."""
        runway = self.ref("runway")
        for end, part in ((1, f'LEFT({runway},FIND("/",{runway})-1)'), (2, f'MID({runway},FIND("/",{runway})+1,30)')):
            values = [_end_of(text, end) for text in self.made["runway"].values]
            self._put(f"end_{end}", f"End {end}", f'IFERROR(TRIM({part}),"")', values, 7)
        numbers = ",".join(f'"{number:02d}"' for number in range(1, 37))
        tens = ",".join(str(10 * number) for number in range(1, 37))
        points = ",".join(f'"{point}"' for point in _COMPASS)
        places = ",".join(str(place) for place in range(1, 17))
        for end in (1, 2):
            name = self.ref(f"end_{end}")
            lettered = f"IF(LEN({name})=3,AND(CODE(RIGHT({name},1))>=65,CODE(RIGHT({name},1))<=90),LEN({name})=2)"
            ten = f"SUMPRODUCT((LEFT({name},2)={{{numbers}}})*{{{tens}}})"
            point = f"SUMPRODUCT(({name}={{{points}}})*{{{places}}})"
            text = f'IF(AND({ten}>0,{lettered}),{ten},IF({point}>0,({point}-1)*22.5,""))'
            values = [_degrees_of(name) for name in self.made[f"end_{end}"].values]
            self._put(f"degrees_{end}", "Its name says [°]", text, values, 9)

    def _headings(self) -> None:
        """True headings [°] of both directions: given, else from the coordinates, else from the names of the ends."""
        corners = ("latitude_1", "longitude_1", "latitude_2", "longitude_2")
        cells = [reference(self.ref(name), "°") for name in corners] + [Cell(self.ref("length"))]
        values = [to_si(_as_numbers(self.made[name].values), "°") for name in corners]
        values.append(_as_numbers(self.made["length"].values))
        there = Cell(f"COUNT({','.join(self.ref(name) for name in (*corners, 'length'))})=5")
        bearing = where(there, shown(as_cell(bearings(*cells)), "°"), np.nan)  # type: ignore[arg-type]
        self._put("bearing", "Bearing by coordinates [°]", formula(bearing), _blanks(np.degrees(bearings(*values))), 10, "0.##")
        degrees = [Cell(self.ref(f"degrees_{end}")) for end in (1, 2)]
        given = [Cell(self.ref("heading")), Cell(self.ref("heading_2")) if "heading_2" in self.made else as_cell(np.nan)]
        nothing = np.full(len(self.rows), np.nan)
        heading, other, by_place, by_name, by_other = (
            _as_numbers(self.made[key].values) if key in self.made else nothing
            for key in ("heading", "heading_2", "bearing", "degrees_1", "degrees_2")
        )
        text = formula(as_cell(first_heading(given[0], given[1], Cell(self.ref("bearing")), degrees[0], degrees[1])))
        with np.errstate(invalid="ignore"):
            values_1 = _blanks(np.asarray(first_heading(heading, other, by_place, by_name, by_other)))
            self._put("heading_1_used", "Heading from end 1 [°]", text, values_1, 10, "0.##")
            first = _as_numbers(self.made["heading_1_used"].values)
            text = formula(as_cell(second_heading(given[1], Cell(self.ref("heading_1_used")))))
            values_2 = _blanks(np.asarray(second_heading(other, first)))
            self._put("heading_2_used", "Heading from end 2 [°]", text, values_2, 10, "0.##")

    def _profile(self) -> None:
        """Which row of the table of profiles holds this text, and what it says there; 0: none."""
        known = list(self.profiles)
        count = max(len(known), 1)
        cells = {letter: f"{PROFILES}!${letter}${FIRST_ROW}:${letter}${FIRST_ROW + count - 1}" for letter in "ABCDE"}
        text = self.ref("profile")
        rank = f"ROW({cells['A']})-{FIRST_ROW - 1}"
        which = [known.index(value) + 1 if value in self.profiles else 0 for value in self.made["profile"].values]
        found = f'IF({text}="",0,SUMPRODUCT(({cells["A"]}={text})*({rank})))'
        self._put("profile_row", "Profile, row", found, [float(n) for n in which])
        row = self.ref("profile_row")
        for letter, key, header in PROFILE_COLUMNS:
            values = ["" if n == 0 else _of_profile(self.profiles[known[n - 1]])[key] for n in which]
            self._put(key, header, f'IF({row}>0,INDEX({cells[letter]},{row}),"")', values, 9, "0.####")

    def _number_faults(self) -> list[_Fault]:
        faults = []
        for column in self.numbers:
            key, (low, high) = number_key(column), column.limits
            cell = self.ref(key)
            condition = f'AND({cell}<>"",OR(NOT(ISNUMBER({cell})),{cell}<{low:.12g},{cell}>{high:.12g}))'
            sentence = f'column "{column.header}": a plain number from {low:,.6g} to {high:,.6g} is expected'
            faults.append(_Fault(sentence, condition, _outside(key, low, high)))
        for key, told in self.suspect.items():
            header = next(column.header for column in self.numbers if column.key == key)
            cell = self.ref(key)
            doubt = f"${self.letters[key]}$1"
            sentence = (
                f'column "{header}": all are below {100 * PERCENT_CELLS_BELOW:.1g}, as cells formatted as percent would be; '
                'write a small one as "0.2 %"'
            )
            condition = f'AND({doubt}<>"",ISNUMBER({self._fetched((key, 0))}),{cell}<>0)'
            faults.append(_Fault(sentence, condition, _suspected(key, told, self.rows)))
        return faults

    def _word_faults(self) -> list[_Fault]:
        ref = self.ref
        good = [
            f'IF(LEN({ref(f"end_{end}")})=0,FALSE,OR(ISNUMBER({ref(f"degrees_{end}")}),AND(LEN({ref(f"end_{end}")})<3,'
            f'LEFT({ref(f"end_{end}")},1)<>"H",CODE({ref(f"end_{end}")})>=65,CODE({ref(f"end_{end}")})<=90,'
            f'CODE(RIGHT({ref(f"end_{end}")},1))>=65,CODE(RIGHT({ref(f"end_{end}")},1))<=90)))'
            for end in (1, 2)
        ]
        faults = [
            _Fault('column "Runway": both ends are expected, such as 09/27',
                   f'OR({ref("runway")}="N/A",NOT(AND({good[0]},{good[1]})))',
                   lambda row: row["runway"] == "N/A" or not (_good_end(row, 1) and _good_end(row, 2))),
            *(_one_of(self, key, header, words) for key, header, words in (
                ("surface", "Surface", SURFACES), ("condition", "Condition", CONDITIONS), ("one_way", "One-way", ("yes", "no")),
                ("closed", "Closed", ("yes", "no")))),
        ]  # fmt: skip
        for key, header in (("land_towards", "Land on"), ("take_off_towards", "Leave by")):
            one, first, second = ref(key), ref("end_1"), ref("end_2")
            condition = f'AND({one}<>"",OR({first}={second},AND({one}<>{first},{one}<>{second})))'
            faults.append(_Fault(f'column "{header}": it is neither end of the runway', condition, _neither(key)))
        either = f'OR({ref("land_towards")}="",{ref("take_off_towards")}="")'
        which_way = 'one-way, but not which way: fill "Land on" and "Leave by"'
        faults.append(_Fault(which_way, f'AND({ref("one_way")}="yes",{either})', _not_told_which_way))
        length = ref("length")
        for end in (1, 2):
            cell = ref(f"displaced_{end}")
            faults.append(_Fault("a displaced threshold lies beyond the other end of the runway",
                                 f"AND(COUNT({cell},{length})=2,{cell}>={length})", _displaced_beyond(end)))  # fmt: skip
        low, high = ref("elevation_1"), ref("elevation_2")
        faults.append(_Fault("the two ends differ in elevation by more than 30 % of the length",
                             f"IF(COUNT({low},{high},{length})=3,ABS({high}-{low})*0.3048>{GREATEST_END_TO_END}*{length},FALSE)",
                             _too_steep))  # fmt: skip
        for end in (1, 2):
            height, distance = ref(f"obstacle_height_{end}"), ref(f"obstacle_distance_{end}")
            lone_height = f'IF(ISNUMBER({height}),AND({height}>0,{distance}=""),FALSE)'
            lone_distance = f'AND({height}="",ISNUMBER({distance}))'
            needs = f"the obstacle at end {end} needs a"
            faults.append(_Fault(f"{needs} distance, too", lone_height, _half_obstacle(end, "distance")))
            faults.append(_Fault(f"{needs} height, too", lone_distance, _half_obstacle(end, "height")))
        return [*faults, *self._profile_faults()]

    def _profile_faults(self) -> list[_Fault]:
        text, row, length, end = (self.ref(key) for key in ("profile", "profile_row", "length", "profile_end"))
        slope, low, high, rise = (self.ref(key) for key in ("slope", "elevation_1", "elevation_2", "profile_rise"))
        return [
            _Fault(f"the slope profile can't be read, or was changed since the workbook was made: {AGAIN}",
                   f'AND({text}<>"",{row}=0)', lambda row: row["profile"] != "" and row["profile_row"] == 0),
            _Fault("a slope profile needs the length of the strip", f'AND({text}<>"",{length}="")',
                   lambda row: row["profile"] != "" and row["length"] == ""),
            _Fault("the slope profile does not reach from end to end of the strip",
                   f"IF(COUNT({end},{length})=2,ABS({length}-{end})>MAX({LENGTH_SHARE}*{length},{LENGTH_SLACK:g}),FALSE)",
                   _profile_length),
            _Fault("the slope profile rises otherwise than the slope says",
                   f"IF(COUNT({slope},{rise})=2,ABS({slope}-{rise}/{end}*100)>{100 * SAME_SLOPE:g},FALSE)", _profile_slope),
            _Fault("the slope profile rises otherwise than the elevations of the ends say",
                   f"IF(COUNT({low},{high},{length},{rise})=4,"
                   f"ABS(({high}-{low})*0.3048/{length}-{rise}/{end})>{SAME_SLOPE:g},FALSE)", _profile_ends),
        ]  # fmt: skip

    def _faults(self, key: str, header: str, faults: Sequence[_Fault], before: str) -> None:
        """The first of some faults, where none is found ``before``."""
        text = '""'
        for fault in reversed(faults):
            sentence = fault.sentence.replace('"', '""')
            text = f'IF({fault.condition},"{sentence}",{text})'
        if before:
            text = f'IF({self.ref(before)}<>"","",{text})'
        values = []
        for at in range(len(self.rows)):
            row = {name: column.values[at] for name, column in self.made.items()} | {"at": at}
            first = next((fault.sentence for fault in faults if fault.holds(row)), "")
            values.append("" if before and row[before] else first)
        formula(Cell(text))  # raises when it is too long
        self._put(key, header, text, values, 30)

    def _fault(self) -> None:
        used, numbers, words = (self.ref(key) for key in ("used", "fault_of_numbers", "fault_of_words"))
        text = f'IF({used},IF($B$2<>"",$B$2,IF({numbers}<>"",{numbers},{words})),"")'
        found = self._each("used", "fault_of_numbers", "fault_of_words")
        self._put("fault", "Fault: not assessed", text, [(one or other) if used else "" for used, one, other in found], 30)


def first_heading(given: Number, other: Number, bearing: Number, degrees_1: Number, degrees_2: Number) -> Number:
    """True heading from end 1 [°]: given, else opposite to the one ``given`` for end 2, else by coordinates, else by name.

    >>> float(first_heading(np.nan, np.nan, np.nan, 90.0, 270.0))
    90.0
    """
    opposite = np.abs((degrees_1 - degrees_2) % 360.0 - 180.0) <= np.degrees(SAME_NUMBER)
    named = np.where(np.isfinite(degrees_1) & np.isfinite(degrees_2), np.where(opposite, degrees_1, np.nan), np.nan)
    found = np.where(np.isfinite(bearing), bearing, named)
    return np.where(np.isfinite(given), given % 360.0, np.where(np.isfinite(other), (other + 180.0) % 360.0, found))


def second_heading(given: Number, first: Number) -> Number:
    """True heading from end 2 [°]: given, else opposite to the first."""
    turned = np.where(np.isfinite(first), (first + 180.0) % 360.0, np.nan)
    return np.where(np.isfinite(given), given % 360.0, turned)


PROFILE_COLUMNS = (
    ("B", "profile_end", "Profile, its end [m]"),
    ("C", "profile_rise", "Profile, its rise [m]"),
    ("D", "profile_up", "Profile, steepest up [%]"),
    ("E", "profile_down", "Profile, steepest down [%]"),
)


def _of_profile(profile: Profile) -> dict[str, float]:
    slopes = profile.slopes
    return {"profile_end": profile.length, "profile_rise": profile.heights[-1], "profile_up": 100.0 * max(slopes),
            "profile_down": 100.0 * min(slopes)}  # fmt: skip


def _write_profiles(pages: Pages, profiles: Mapping[str, Profile]) -> None:
    """The table of the profiles that could be read, by their text."""
    sheet: Worksheet = pages.book.create_sheet(PROFILES)
    sheet["A1"], sheet["A1"].font = "Slope profiles, by their text", styles.HEADING
    sheet["A2"] = (
        "A profile counts by its steepest part up, and down, as if it went on so all along: never better than along the "
        f"profile. One that is typed or changed in the register counts once you {AGAIN}."
    )
    sheet["A2"].font = styles.SMALL
    write_header(sheet, HEADER_ROW, ("Profile", *(header for _, _, header in PROFILE_COLUMNS)))
    sheet.row_dimensions[HEADER_ROW].height = 30
    for at, (text, profile) in enumerate(profiles.items(), FIRST_ROW):
        told = _of_profile(profile)
        for letter, value in zip("ABCDE", (text, *(told[key] for _, key, _ in PROFILE_COLUMNS)), strict=True):
            cell = sheet[f"{letter}{at}"]
            cell.value, cell.font, cell.border = value, styles.BODY, styles.LINE
            cell.number_format = "@" if letter == "A" else "0.00"
            if letter == "A":
                cell.data_type = "s"
    for letter, width in zip("ABCDE", (60, 12, 12, 14, 14), strict=True):
        sheet.column_dimensions[letter].width = width
    styles.set_print(sheet)


def _write_skeleton(pages: Pages, source: Source, columns: Mapping[str, _Column], letters: Mapping[str, str],
                    suspect: Mapping[str, bool]) -> None:  # fmt: skip
    """Headers, the check of the register's headers in row 2, and one row that carries the styles."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    sheet["A1"], sheet["A1"].font = "How the rows of the register are read", styles.HEADING
    write_header(sheet, HEADER_ROW, ("Row", *(column.header for column in columns.values())))
    sheet.row_dimensions[HEADER_ROW].height = 58
    sheet.column_dimensions["A"].width = 6
    for key, column in columns.items():
        letter = letters[key]
        sheet.column_dimensions[letter].width = column.width
        cell = sheet[f"{letter}{FIRST_ROW}"]
        cell.font, cell.border, cell.alignment, cell.number_format = styles.BODY, styles.LINE, styles.MIDDLE, column.format
    sheet[f"A{FIRST_ROW}"].font = styles.SMALL
    wrong = ""
    for one in source.columns:
        wrong += f'IF(TRIM({source.header(one.place)})="{one.header}","","{one.header}; ")&'
    sheet["A2"], sheet["A2"].font = "Headers", styles.SMALL
    told = f'IF({wrong[:-1]}="","","the header of a column of the register was changed; type it as it was: "&{wrong[:-1]})'
    pages.formula(sheet, "B2", formula(Cell(told)), "")
    for key, found in suspect.items():
        cells = source.cells((key, 0))
        limit = 100.0 * PERCENT_CELLS_BELOW
        text = f'IF(AND(COUNT({cells})>COUNTIF({cells},0),MAX({cells})<{limit:g},MIN({cells})>-{limit:g}),"percent cells?","")'
        pages.formula(sheet, f"{letters[key]}1", text, "percent cells?" if found else "")
        sheet[f"{letters[key]}1"].font = styles.SMALL
    sheet.freeze_panes = sheet.cell(FIRST_ROW, 4)
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}", "A:C")
    sheet.sheet_properties.pageSetUpPr.fitToPage = False
    sheet.page_setup.scale = PRINT_SCALE


# --- what the formulas give, for the cells as they are written


def _plain_text(key: str, cell: Written) -> str:
    if cell is None:
        return ""
    cell = _shown_date(cell)
    if isinstance(cell, float):
        as_end = f"{'-' if cell < 0.0 else ''}{abs(cell):02.0f}"
        cell = as_end if key in ("land_towards", "take_off_towards", "runway") else f"{cell:.10g}"
    text = re.sub(" +", " ", str(cell)).strip(" ")
    return text.upper() if key in ("land_towards", "take_off_towards", "runway") else text


def _shown_date(cell: Written) -> Any:
    from openpyxl.utils.datetime import to_excel

    return float(to_excel(cell)) if isinstance(cell, datetime.date) else "" if cell is None else cell


def _plain_number(key: str, cell: Written) -> Any:
    if cell is None:
        return ""
    if isinstance(cell, str) and key in ("slope", "local_slope") and cell.endswith("%") and "," not in cell:
        try:
            return float(cell[:-1])
        except ValueError:
            return "?"
    return _shown_date(cell)


def _may_be_percent(cells: Sequence[Written]) -> bool:
    told = [cell for cell in cells if isinstance(cell, float)]
    limit = 100.0 * PERCENT_CELLS_BELOW
    return any(cell != 0.0 for cell in told) and all(abs(cell) < limit for cell in told)


def _as_numbers(values: Sequence[Any]) -> np.ndarray:
    return np.array([value if isinstance(value, float) else math.nan for value in values])


def _blanks(values: Any) -> list[Any]:
    return ["" if math.isnan(value) else value for value in np.asarray(values, dtype=float).tolist()]


def _end_of(runway: str, end: int) -> str:
    first, mark, second = runway.partition("/")
    return (first if end == 1 else second[:30]).strip() if mark else ""


def _degrees_of(name: str) -> Any:
    degrees = designator_degrees(name) if name in _COMPASS or re.fullmatch(r"\d{2}[A-Z]?", name, re.ASCII) else math.nan
    return "" if math.isnan(degrees) else degrees


def _good_end(row: Mapping[str, Any], end: int) -> bool:
    name = row[f"end_{end}"]
    return row[f"degrees_{end}"] != "" or bool(re.fullmatch("[A-GI-Z][A-Z]?", name))


def _outside(key: str, low: float, high: float) -> Callable[[Mapping[str, Any]], bool]:
    def holds(row: Mapping[str, Any]) -> bool:
        value = row[key]
        return value != "" and (isinstance(value, str) or not low <= value <= high)

    return holds


def _suspected(key: str, told: bool, rows: Sequence[Mapping[Key, Written]]) -> Callable[[Mapping[str, Any]], bool]:
    return lambda row: told and isinstance(rows[row["at"]].get((key, 0)), float) and row[key] != 0.0


def _one_of(made: _Maker, key: str, header: str, words: Sequence[str]) -> _Fault:
    listed = ",".join(f'"{word}"' for word in words)
    cell = made.ref(key)
    told = ", ".join(words) if len(words) > 2 else " or ".join(words)
    return _Fault(f'column "{header}": choose from the list ({told})', f'AND({cell}<>"",SUMPRODUCT(--({cell}={{{listed}}}))=0)',
                  lambda row: row[key] != "" and row[key].lower() not in words)  # fmt: skip


def _neither(key: str) -> Callable[[Mapping[str, Any]], bool]:
    def holds(row: Mapping[str, Any]) -> bool:
        ends = row["end_1"], row["end_2"]
        return row[key] != "" and (ends[0] == ends[1] or row[key] not in ends)

    return holds


def _not_told_which_way(row: Mapping[str, Any]) -> bool:
    return row["one_way"].lower() == "yes" and "" in (row["land_towards"], row["take_off_towards"])


def _known(row: Mapping[str, Any], *keys: str) -> list[float] | None:
    values = [row[key] for key in keys]
    return values if all(isinstance(value, float) for value in values) else None


def _displaced_beyond(end: int) -> Callable[[Mapping[str, Any]], bool]:
    def holds(row: Mapping[str, Any]) -> bool:
        known = _known(row, f"displaced_{end}", "length")
        return known is not None and known[0] >= known[1]

    return holds


def _too_steep(row: Mapping[str, Any]) -> bool:
    known = _known(row, "elevation_1", "elevation_2", "length")
    return known is not None and abs(known[1] - known[0]) * 0.3048 > GREATEST_END_TO_END * known[2]


def _half_obstacle(end: int, missing: str) -> Callable[[Mapping[str, Any]], bool]:
    def holds(row: Mapping[str, Any]) -> bool:
        height, distance = row[f"obstacle_height_{end}"], row[f"obstacle_distance_{end}"]
        if missing == "distance":
            return isinstance(height, float) and height > 0.0 and distance == ""
        return height == "" and isinstance(distance, float)

    return holds


def _profile_length(row: Mapping[str, Any]) -> bool:
    known = _known(row, "profile_end", "length")
    return known is not None and abs(known[1] - known[0]) > max(LENGTH_SHARE * known[1], LENGTH_SLACK)


def _profile_slope(row: Mapping[str, Any]) -> bool:
    known = _known(row, "slope", "profile_rise", "profile_end")
    return known is not None and abs(known[0] - known[1] / known[2] * 100.0) > 100.0 * SAME_SLOPE


def _profile_ends(row: Mapping[str, Any]) -> bool:
    known = _known(row, "elevation_1", "elevation_2", "length", "profile_rise", "profile_end")
    if known is None:
        return False
    low, high, length, rise, end = known
    return abs((high - low) * 0.3048 / length - rise / end) > SAME_SLOPE
