"""The sheet Strips of a filled workbook as it stands now: which rows are directions, which columns are ours, what is typed.

Columns are found by their headers. Where one can't be found that the formulas read, or that the Summary needs, the sheet is
refused: a forgotten obstacle would make a verdict better than it is.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from openpyxl.utils import column_index_from_string, get_column_letter

from stripcheck.chain import Chain, Input
from stripcheck.errors import InputError
from stripcheck.inputs import STRIP
from stripcheck.profile import Profile, check_length, read_profile
from stripcheck.profile_run import KEYS as PROFILE
from stripcheck.sheet import strips
from stripcheck.sheet.filled_pages import NO_RESULT
from stripcheck.sheet.package import Package
from stripcheck.sheet.raw_sheet import RawCell, RawSheet, Value
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import to_si

NATIVE, DOOR, VALUES = "native", "door", "values"
OF_DOORS = re.compile(r"\bSTRIP[._]\w+\(", re.IGNORECASE)  # a function of another door
HEADER_WITHIN = 40  # rows in which a sheet's header is looked for
FIRST_FEW = 50  # rows that tell how a sheet was filled
PARTS = ("verdict", "reason", "margin", "finding")
NEEDED = [f"{side}_{part}" for side in ("landing", "takeoff") for part in PARTS]
LENGTHS = ("tora", "lda")
_TYPED = [item for item in STRIP if item.kind in ("number", "choice") and item.key not in PROFILE]
_HEADERS = {item.key: strips.input_column(item).header for item in STRIP}
_IDENTITY = {key: header for key, header, *_ in strips.IDENTITY}
_PROFILE_TEXT = strips.PROFILE_TEXT[1]


@dataclass(frozen=True)
class Sheet:
    """A sheet with a row of headers: its cells, the row of its headers, and the columns below each header, first one first."""

    path: str
    title: str
    raw: RawSheet
    header_row: int
    found: Mapping[str, Sequence[int]]

    @property
    def columns(self) -> dict[str, int]:
        """The first column of each header."""
        return {header: columns[0] for header, columns in self.found.items()}

    def lost(self, header: str) -> InputError:
        return InputError(f'{self.path}: the sheet "{self.title}" has lost its column "{header}"; put it back under its '
                          "header, or fill a new workbook")  # fmt: skip


def with_headers(package: Package, title: str, mark: str) -> Sheet:
    """A sheet whose header row has "Strip" and a mark. Raises InputError where there is none."""
    raw = package.sheet(title)
    for row in raw.rows[:HEADER_WITHIN]:
        found: dict[str, list[int]] = {}
        for column, cell in sorted(row.cells.items()):
            if isinstance(cell.value, str):
                found.setdefault(cell.value, []).append(column)
        if mark in found and "Strip" in found:
            return Sheet(str(package.path), title, raw, row.number, found)
    raise InputError(f'{package.path}: the sheet "{title}" has lost its row of headers, or the header "{mark}"; put it back')


class StripSheet:
    """The rows and columns of the sheet Strips, for an aeroplane's chain. Raises InputError for one that can't be used."""

    def __init__(self, sheet: Sheet, chain: Chain) -> None:
        self.sheet, self.raw, self.chain, self.path = sheet, sheet.raw, chain, sheet.path
        self.doubts: list[str] = []
        self._live_row = next((number for number in self._below() if self._lives_in(number)), 0)
        varying = chain.depends_on_strip()
        self.steps = {step.key: column for step in chain.steps if step.key in varying
                      and (column := self._column(strips.step_column(step, "").header)) is not None}  # fmt: skip
        self.inputs = {key: column for key, header in _HEADERS.items() if (column := self._column(header)) is not None}
        self.identity = {key: column for key, header in _IDENTITY.items()
                         if (column := self._column(header, first=key in ("strip", "name"))) is not None}  # fmt: skip
        self.kind = self._kind()
        self._check_columns()
        self.rows = [number for number in self._below() if self._is_direction(number)]
        if not self.rows:
            raise InputError(f'{self.path}: the sheet "{sheet.title}" has no rows of strips any more')

    def value(self, row: int, column: int | None) -> Value:
        """The cell of a row; None where there is no such column."""
        return None if column is None else self.raw.value(row, column)

    def text(self, row: int, key: str) -> str:
        """Key, strip, name or direction of a row, "" where there is none."""
        return _text(self.value(row, self.identity.get(key)))

    def raw_keys(self) -> list[str]:
        """The keys of the rows as they stand, "" where there is none."""
        return [self.text(row, "key") for row in self.rows]

    def _below(self) -> Iterator[int]:
        return (row.number for row in self.raw.rows if row.number > self.sheet.header_row)

    # --- columns

    @cached_property
    def _formulas(self) -> dict[int, str]:
        """Formulas of the first row that has our own, by column."""
        row = self.raw.by_number.get(self._live_row)
        cells = row.cells.values() if row is not None else ()
        return {cell.column: text for cell in cells if (text := cell.formula)}

    def _lives_in(self, number: int) -> bool:
        """Whether a row has a key, and a formula in a column of ours."""
        header = _IDENTITY["key"]
        if header not in self.sheet.columns or not self.raw.value(number, self.sheet.columns[header]):
            return False
        steps = {strips.step_column(step, "").header for step in self.chain.steps}
        ours = {column for title, columns in self.sheet.found.items() if title in steps for column in columns}
        return any(cell.live for column, cell in self.raw.by_number[number].cells.items() if column in ours)

    @cached_property
    def _read_columns(self) -> set[int]:
        """The columns that the formulas of that row read in it, or are written in."""
        mark = re.compile(rf"(?<![!:.\w$])\$?([A-Z]{{1,3}})\$?{self._live_row}(?![\d(:.\w])")
        ours = {self.sheet.columns.get(strips.step_column(step, "").header) for step in self.chain.steps}
        texts = (text for column, text in self._formulas.items() if column in ours)
        return {column_index_from_string(letters) for text in texts for letters in mark.findall(_without_texts(text))}

    def _column(self, header: str, first: bool = False) -> int | None:
        """The column of a header of ours; of several the one that the formulas read or stand in, or the ``first``."""
        candidates = self.sheet.found.get(header, ())
        if first or len(candidates) < 2:
            return next(iter(candidates), None)
        read = [column for column in candidates if column in self._read_columns]
        live = [column for column in candidates if column in self._formulas]
        chosen = read or live or list(candidates)
        if len(chosen) > 1:
            letters = " and ".join(get_column_letter(column) for column in chosen)
            raise InputError(f'{self.path}: the sheet "{self.sheet.title}" has the header "{header}" in the columns {letters}; '
                             "give your own another one")  # fmt: skip
        return chosen[0]

    def _kind(self) -> str:
        """Whether the computed columns are native formulas, those of another door, or values; a user may have typed others."""
        keyed = [number for number in self._below() if self.text(number, "key")][:FIRST_FEW]
        cells = [self.raw.cell(number, column) for number in keyed for column in self.steps.values()]
        live = [cell for cell in cells if cell is not None and cell.live]
        if any(map(is_of_door, live)):
            return DOOR
        return NATIVE if 2 * len(live) > len(cells) else VALUES

    def _check_columns(self) -> None:
        for key in ("key", "direction"):
            if key not in self.identity:
                raise self.sheet.lost(_IDENTITY[key])
        for key in NEEDED:
            if key not in self.steps:
                raise self.sheet.lost(self._step_header(key))
        full = self.kind != NATIVE or len(self.steps) > 0.5 * len(self.chain.depends_on_strip())
        lost = [header for key, header in _HEADERS.items() if key not in self.inputs and (full or key in LENGTHS)]
        if lost:
            raise self.sheet.lost(lost[0])
        if self.kind == NATIVE:
            self._check_formulas(full)

    def _check_formulas(self, full: bool) -> None:
        """Raise InputError where the formulas read a column that is gone, or whose header is another."""
        if not full and any("#REF!" in text for text in self._formulas.values()):
            raise InputError(f'{self.path}: the sheet "{self.sheet.title}" has lost a column that formulas read; put it back')
        known = {*self.steps.values(), *self.inputs.values()}
        for column in sorted(self._read_columns - known):
            header = _text(self.raw.value(self.sheet.header_row, column))
            raise InputError(
                f'{self.path}: formulas of the sheet "{self.sheet.title}" read the column {get_column_letter(column)}, whose '
                f'header "{header}" is not known; give it back the header that it had'
            )

    def _step_header(self, key: str) -> str:
        return next(strips.step_column(step, "").header for step in self.chain.steps if step.key == key)

    # --- rows

    def _is_direction(self, row: int) -> bool:
        """Whether a row tells of a direction: by its key, or by values that are typed; a user's row of totals does not."""
        if self.text(row, "key"):
            return True
        typed = [item for item in _TYPED if self._is_typed(row, self.inputs.get(item.key))]
        if len(typed) + bool(self.text(row, "direction")) >= 2:
            return True
        if any(self.text(row, key) for key in ("strip", "direction")):
            self.doubts.append(f"sheet {self.sheet.title}, row {row}: taken for one of your own, since no strip is typed there")
        return False

    def _is_typed(self, row: int, column: int | None) -> bool:
        cell = self.raw.cell(row, column) if column is not None else None
        return cell is not None and not cell.live and cell.value not in (None, "")

    # --- what is typed

    def given(self) -> tuple[dict[str, Any], list[str]]:
        """The strips' inputs by chain key in SI, and the texts of faults."""
        given: dict[str, Any] = {}
        faults = [""] * len(self.rows)
        for item in STRIP:
            cells = [self._input(row, item) for row in self.rows]
            if item.kind == "number":
                given[item.key] = np.array([self._number(cell, item, row) for row, cell in zip(self.rows, cells, strict=True)])
                continue
            texts = [_text(cell) for cell in cells]
            if item.kind == "fault":
                given[item.key], faults = np.array([bool(text) for text in texts]), texts
            elif item.kind == "flag":
                given[item.key] = np.array([text.lower() != "no" for text in texts])
            elif item.key == "surface":
                given[item.key] = strips.codes([text.lower() for text in texts], SURFACES)
            else:
                given[item.key] = strips.codes([text.lower() for text in texts], CONDITIONS, blank=-1, strange=-2)
        if self.profile_column is not None:  # without a profile nothing stands for one
            bare = np.array([not _text(self.value(row, self.profile_column)).strip() for row in self.rows])
            given |= {key: np.where(bare, np.nan, given[key]) for key in PROFILE}
        return given, faults

    def _input(self, row: int, item: Input) -> Value:
        column = self.inputs.get(item.key)
        cell = self.raw.cell(row, column) if column is not None else None
        if cell is not None and cell.live and cell.value is None:
            raise InputError(f"{self.path}: sheet {self.sheet.title}, row {row}, {_HEADERS[item.key]}: {NO_RESULT}")
        return cell.value if cell is not None else None

    def _number(self, cell: Value, item: Input, row: int) -> float:
        if isinstance(cell, float):
            return float(to_si(cell, item.unit))
        if cell not in (None, ""):
            self.doubts.append(
                f'sheet {self.sheet.title}, row {row}, {_HEADERS[item.key]}: "{cell}" is no number and does not count'
            )
        return np.nan

    @cached_property
    def profile_column(self) -> int | None:
        """The column of the slope profiles' texts."""
        return self._column(_PROFILE_TEXT)

    def profiles(self, given: Mapping[str, Any]) -> list[Profile | None]:
        """The slope profile of each row. Raises InputError for one that can't be read, or does not fit the strip."""
        usable = np.fmax(given["tora"], given["lda"])
        return [self._profile(row, float(given["length"][at]), float(usable[at])) for at, row in enumerate(self.rows)]

    def _profile(self, row: int, length: float, usable: float) -> Profile | None:
        text = _text(self.value(row, self.profile_column)).strip()
        if not text:
            return None
        try:
            profile = read_profile(text)
            check_length(profile, length, usable)
        except InputError as error:
            raise InputError(f"{self.path}: sheet {self.sheet.title}, row {row}, {_PROFILE_TEXT}: {error}") from None
        return profile

    # --- what was computed

    def computed(self, key: str) -> list[Value]:
        """What stands in the column of a step."""
        return [self.value(row, self.steps[key]) for row in self.rows]


def is_of_door(cell: RawCell) -> bool:
    """Whether a cell holds a formula of another door."""
    return OF_DOORS.search(cell.formula or "") is not None


def _without_texts(formula: str) -> str:
    return re.sub(r'"[^"]*"|\'[^\']*\'![$A-Z0-9:]*', "", formula)


def _text(cell: Value) -> str:
    return "" if cell is None else f"{cell:g}" if isinstance(cell, float) else str(cell)
