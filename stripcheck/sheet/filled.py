"""A workbook that stripcheck filled, read as it stands now: what was typed over, inserted, sorted or deleted counts.

Columns are found by their headers, and values by the names of their cells, wherever a user's own rows and columns have moved
them. What a cell's formula could not read, as a text where a number belongs, is not known here either.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from openpyxl.utils import column_index_from_string

from stripcheck.chain import Chain, Step
from stripcheck.doors.aircraft import Aeroplane, aeroplane_of, rules_of
from stripcheck.errors import InputError
from stripcheck.inputs import DAY, STRIP
from stripcheck.profile import Profile, check_length, local_slopes, read_profile
from stripcheck.profile_run import profile_slopes
from stripcheck.sheet import strips, summary
from stripcheck.sheet.labels import FLAP_HEADER
from stripcheck.sheet.package import Package, RawSheet, Value
from stripcheck.speeds import greatest_lift_coefficient
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import from_si, to_si

PAGES = ("Aircraft", "Day", "Rules")
SHEETS = (*PAGES, strips.SHEET, summary.SHEET, "Method")
HEADER_WITHIN = 40  # rows in which a sheet's header is looked for
FLAPS = ("takeoff_flap", "landing_flap")
MASSES = ("mass_takeoff", "mass_landing")
_FROM_MANUAL = re.compile(r"IF\(ISNUMBER\(\$?Manual[!.]\$?([A-Z]+)\$?(\d+)\),[^,]*,\"(.*)\"\)")


@dataclass(frozen=True)
class Sheet:
    """One of our sheets: its cells, the row of its headers, and the column of each header."""

    title: str
    raw: RawSheet
    header_row: int
    columns: Mapping[str, int]

    def value(self, row: int, header: str) -> Value:
        """The cell of a row below a header; None where there is no such column."""
        return self.raw.value(row, self.columns[header]) if header in self.columns else None


@dataclass(frozen=True)
class Filled:
    """A filled workbook as it stands: ``rows`` are the rows of the sheet Strips that hold a direction.

    ``inputs`` are all inputs of the chain in SI, those of the strips as arrays; ``faults`` the texts of the rows' faults;
    ``doubts`` tells in a sentence each what is typed but can't be read.
    """

    pages: Mapping[str, RawSheet]
    strips: Sheet
    summary: Sheet
    aeroplane: Aeroplane
    rows: Sequence[int]
    inputs: Mapping[str, Any]
    faults: Sequence[str]
    profiles: Sequence[Profile | None]
    doubts: Sequence[str]

    @property
    def chain(self) -> Chain:
        return self.aeroplane.chain


def is_filled(package: Package) -> bool:
    """Whether a workbook has the sheets that stripcheck fills."""
    return set(SHEETS) <= set(package.sheets)


def open_filled(package: Package) -> tuple[dict[str, RawSheet], Sheet, Sheet]:
    """The cells of the pages, and the sheets Strips and Summary. Raises InputError for another workbook."""
    if not is_filled(package):
        missing = next(title for title in SHEETS if title not in package.sheets)
        raise InputError(f'{package.path}: this is no workbook that stripcheck filled: it has no sheet "{missing}"')
    pages = {title: package.sheet(title) for title in (*PAGES, "Method", "Manual") if title in package.sheets}
    return pages, _with_header(package, strips.SHEET, "Direction"), _with_header(package, summary.SHEET, "In and out")


def read_filled(package: Package, pages: Mapping[str, RawSheet], strip_sheet: Sheet, summary_sheet: Sheet,
                typed: Mapping[str, Mapping[tuple[int, int], Value]] | None = None,
                loaded: tuple[Aeroplane, Mapping[str, float]] | None = None) -> Filled:  # fmt: skip
    """Read a workbook's inputs. ``typed``: values that go before those of the pages, by sheet, row and column; ``loaded``: an
    aeroplane, with its mass and flap by chain key, that goes before the one on the sheet Aircraft."""
    own = typed or {}
    rows = {title: page_rows(pages, title, own.get(title, {})) for title in PAGES}
    aeroplane = loaded[0] if loaded else aeroplane_in(pages["Aircraft"], rows["Aircraft"])
    values = {**aeroplane.values, **rules_of(_typed_counts(pages["Rules"], rows["Rules"], "Rules")), **_day(rows["Day"])}
    values |= loaded[1] if loaded else _loading(rows["Aircraft"], aeroplane)
    below = (row for row in sorted(strip_sheet.raw.by_number) if row > strip_sheet.header_row)
    directions = [row for row in below if _is_direction(strip_sheet, row)]
    if not directions:
        raise InputError(f'{package.path}: the sheet "{strips.SHEET}" has no rows any more')
    doubts: list[str] = []
    given, faults = _strip_inputs(strip_sheet, directions, doubts)
    profiles = _profiles(strip_sheet, directions, given, doubts)
    values |= given
    if any(profile is not None for profile in profiles):
        values["local_slope"] = local_slopes(values["local_slope"], profiles)
        values |= _rounded(profile_slopes(aeroplane.chain, values, profiles))
    return Filled(pages, strip_sheet, summary_sheet, aeroplane, directions, values, faults, profiles, doubts)


def aeroplane_in(raw: RawSheet, rows: list[list[Any]]) -> Aeroplane:
    """The aeroplane of a sheet Aircraft, by what is typed on it."""
    return aeroplane_of(_typed_counts(raw, rows, "Aircraft"))


def rules_in(pages: Mapping[str, RawSheet]) -> dict[str, Any]:
    """The values of the sheet Rules, by what is typed on it."""
    return rules_of(_typed_counts(pages["Rules"], page_rows(pages, "Rules", {}), "Rules"))


def _with_header(package: Package, title: str, mark: str) -> Sheet:
    raw = package.sheet(title)
    for row in raw.rows[:HEADER_WITHIN]:
        texts = {str(cell.value): column for column, cell in reversed(row.cells.items()) if isinstance(cell.value, str)}
        if mark in texts and "Strip" in texts:
            return Sheet(title, raw, row.number, texts)
    raise InputError(f'{package.path}: the sheet "{title}" has lost its row of headers')


def page_rows(pages: Mapping[str, RawSheet], title: str, typed: Mapping[tuple[int, int], Value]) -> list[list[Any]]:
    """The cells A to M of a page, row by row from row 1; what is read from the sheet Manual is read from it anew."""
    raw = pages[title]
    last = max(raw.by_number, default=0)
    rows: list[list[Any]] = [[None] * 13 for _ in range(last)]
    for number, row in raw.by_number.items():
        for column, cell in row.cells.items():
            if column <= 13:
                value = _from_manual(pages, cell.formula) if cell.formula else None
                rows[number - 1][column - 1] = cell.value if value is None else value
    for (number, column), value in typed.items():
        rows[number - 1][column - 1] = value
    return rows


def _from_manual(pages: Mapping[str, RawSheet], text: str) -> Value:
    match = _FROM_MANUAL.fullmatch(text)
    if not match or "Manual" not in pages:
        return None
    value = pages["Manual"].value(int(match[2]), column_index_from_string(match[1]))
    return value if isinstance(value, float) else match[3]


def _typed_counts(raw: RawSheet, rows: list[list[Any]], title: str) -> list[list[Any]]:
    """The rows with their SI values left out where they follow from what is typed beside, and the flap table worked out."""
    made = [list(row) for row in rows]
    for number, row in enumerate(made, 1):
        cell = raw.by_number[number].cells.get(4) if number in raw.by_number else None
        if cell is not None and f"B{number}" in (cell.formula or "") and _is_number(row[1]):
            row[3] = None
    if title == "Aircraft":
        _work_out_flaps(made)
    return made


def _work_out_flaps(rows: list[list[Any]]) -> None:
    area = next((row[1] for row in rows if row[0] == "Wing area"), None)
    start = next((i for i, row in enumerate(rows) if row[0] == FLAP_HEADER[0] and row[1] == FLAP_HEADER[1]), len(rows))
    for row in rows[start + 1 :]:
        if row[0] in (None, "") or not _is_number(row[1]):
            break
        row[3] = float(to_si(row[1], "°"))
        if _is_number(row[5]) and _is_number(row[6]) and _is_number(area):
            row[8] = float(greatest_lift_coefficient(to_si(row[5], "kt"), row[6], area))


def _is_number(cell: Any) -> bool:
    return isinstance(cell, int | float) and not isinstance(cell, bool)


def _day(rows: list[list[Any]]) -> dict[str, Any]:
    typed = {str(row[0]): row[1] for row in reversed(rows) if isinstance(row[0], str)}
    values: dict[str, Any] = {}
    for item in DAY:
        cell = typed.get(item.label)
        if item.kind == "choice":
            values[item.key] = CONDITIONS.index(cell) if cell in CONDITIONS else -2
        else:
            values[item.key] = float(to_si(float(cell), item.unit)) if isinstance(cell, float) else np.nan
    return values


def _loading(rows: list[list[Any]], aeroplane: Aeroplane) -> dict[str, Any]:
    typed = {str(row[0]): row[1] for row in reversed(rows) if isinstance(row[0], str)}
    values: dict[str, Any] = {}
    for key in MASSES:
        cell = typed.get(aeroplane.chain.by_key[key].label)
        values[key] = float(cell) if isinstance(cell, float) else np.nan
    by_name = {flap.name: flap.deflection for flap in aeroplane.flaps}
    for key in FLAPS:
        cell = typed.get(aeroplane.chain.by_key[key].label)
        values[key] = by_name.get(f"{cell:g}" if isinstance(cell, float) else str(cell), np.nan)
    return values


def _is_direction(sheet: Sheet, row: int) -> bool:
    """Whether a row tells of a direction: of its identity or its inputs; a user's row of totals does not."""
    titles = ["Strip", "Name", "Direction", *(strips.input_column(item).header for item in STRIP)]
    return any(sheet.value(row, title) not in (None, "") for title in titles)


def _strip_inputs(sheet: Sheet, rows: Sequence[int], doubts: list[str]) -> tuple[dict[str, Any], list[str]]:
    """The strips' inputs by chain key in SI, and the texts of faults."""
    given: dict[str, Any] = {}
    faults = [""] * len(rows)
    for item in STRIP:
        header = strips.input_column(item).header
        cells = [sheet.value(row, header) for row in rows]
        if item.kind == "number":
            given[item.key] = np.array([_number(cell, item.unit, header, row, doubts)
                                        for row, cell in zip(rows, cells, strict=True)])  # fmt: skip
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
    return given, faults


def _number(cell: Value, unit: str, header: str, row: int, doubts: list[str]) -> float:
    if isinstance(cell, float) and not isinstance(cell, bool):
        return float(to_si(cell, unit))
    if cell not in (None, ""):
        doubts.append(f'sheet {strips.SHEET}, row {row}, {header}: "{cell}" is not known; a plain number is expected')
    return np.nan


def _text(cell: Value) -> str:
    return "" if cell is None else f"{cell:g}" if isinstance(cell, float) else str(cell)


def _profiles(sheet: Sheet, rows: Sequence[int], given: Mapping[str, Any], doubts: list[str]) -> list[Profile | None]:
    """The slope profile of each row, none where its text can't be read or does not fit the strip."""
    profiles: list[Profile | None] = []
    usable = np.fmax(given["tora"], given["lda"])
    for at, row in enumerate(rows):
        text = _text(sheet.value(row, strips.PROFILE_TEXT[1]))
        try:
            profile = read_profile(text) if text.strip() else None
            if profile is not None:
                check_length(profile, float(given["length"][at]), float(usable[at]))
            profiles.append(profile)
        except InputError as error:
            doubts.append(f"sheet {strips.SHEET}, row {row}, {strips.PROFILE_TEXT[1]}: {error}")
            profiles.append(None)
    return profiles


def _rounded(found: Mapping[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Slopes and rolls as the sheet shows them, so that its formulas give the same."""
    units = {item.key: item.unit for item in STRIP}
    return {key: np.asarray(to_si(np.round(from_si(values, units[key]), 6), units[key])) for key, values in found.items()}


def step_columns(sheet: Sheet, chain: Chain) -> dict[str, int]:
    """The columns of the chain's steps that the sheet Strips has, by key."""
    headers = {step.key: strips.step_column(step, "").header for step in chain.steps if isinstance(step, Step)}
    return {key: sheet.columns[header] for key, header in headers.items() if header in sheet.columns}
