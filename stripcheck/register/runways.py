"""The runways of a list, one entry each, before they become directions: their numbers, names and mistakes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from stripcheck.errors import InputError
from stripcheck.profile import Profile, read_profile
from stripcheck.register.columns import Found, find_columns
from stripcheck.register.limits import LIMITS, outside
from stripcheck.register.read_table import Table
from stripcheck.register.runway_ends import name_both, names_from_heading, split_runway, tidy_designator
from stripcheck.register.values import Fault, as_text, as_written, read_numbers, read_yes
from stripcheck.units import KINDS

T = TypeVar("T")

PERCENT_CELLS_BELOW = 0.003  # [fraction] a column of slopes all below 0.3 % is likelier one of percent-formatted cells


@dataclass
class Runways:
    """Runways as arrays and lists of one length, ``count``.

    ``found``: the columns, ``carried``: positions of those not understood. ``numbers``: {(key, end): array},
    SI. ``unreadable``: {(key, end): indexes} of cells that are no good. ``first``, ``second``: names of the
    ends; ``named``: whether the list names them. ``sizes``: length and width [m] as read, mistakes and all.
    ``profiles``: slope profiles, from end 1. ``faults``: all mistakes, in the order found.
    """

    table: Table
    found: dict[tuple[str, int], Found]
    carried: list[int]
    count: int
    numbers: dict[tuple[str, int], NDArray[np.float64]] = field(default_factory=dict)
    unreadable: dict[tuple[str, int], list[int]] = field(default_factory=dict)
    sizes: dict[str, NDArray[np.float64]] = field(default_factory=dict)
    first: list[str] = field(default_factory=list)
    second: list[str] = field(default_factory=list)
    named: list[bool] = field(default_factory=list)
    profiles: list[Profile | None] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)

    def cells(self, key: str, end: int = 0) -> list[object] | None:
        """Raw cells of a column, None when the list doesn't have it."""
        item = self.found.get((key, end))
        return None if item is None else self.table.cells[item.position]

    def texts(self, key: str, end: int = 0) -> list[str]:
        """Cells of a column as texts, "" for blanks and when the list doesn't have the column."""
        return self._each(as_text, key, end)

    def spellings(self, key: str) -> list[str]:
        """Cells of a column as texts, with "n/a" and the like kept as they are written."""
        return self._each(as_written, key, 0)

    def _each(self, to_text: Callable[[object], str], key: str, end: int) -> list[str]:
        cells = self.cells(key, end)
        if cells is None:
            return [""] * self.count
        # most texts come many times
        known = {cell: to_text(cell) for cell in set(cells) if type(cell) is str}
        return [known[cell] if type(cell) is str else to_text(cell) for cell in cells]

    def number(self, key: str, end: int = 0) -> NDArray[np.float64]:
        """Numbers of a column [SI], all NaN when the list doesn't have it."""
        return self.numbers.get((key, end), np.full(self.count, np.nan))

    def at_end(self, key: str, end: int) -> NDArray[np.float64]:
        """Numbers about one end [SI]: of the end's own column, else of the column for the whole runway."""
        own = self.number(key, end)
        return np.where(np.isnan(own), self.number(key), own)

    def header(self, key: str, end: int = 0) -> str:
        """Header of the column with that key for an end, or of the first with that key, for a message."""
        own = self.found.get((key, end))
        return own.header if own else next(item.header for (name, _), item in self.found.items() if name == key)

    def read_each(self, key: str, read: Callable[[object], T], if_bad: T) -> list[T]:
        """Cells of a column read one by one; a cell that can't be read gives a fault and ``if_bad``."""
        cells = self.cells(key)
        if cells is None:
            return [read("")] * self.count
        values: list[T] = []
        for index, cell in enumerate(cells):
            try:
                values.append(read(cell))
            except InputError as error:
                values.append(if_bad)
                self.faults.append(Fault(index, self.header(key), str(error)))
        return values


def runways_of(table: Table) -> Runways:
    """The runways of a raw list, with their numbers read and their ends named.

    Raises InputError for the header row (see ``find_columns``); mistakes in a row become faults.
    """
    found, carried = find_columns(table.headers, table.where)
    runways = Runways(table, found, carried, len(table.row_numbers))
    for index, cells in table.too_wide.items():
        what = (
            f"the row has {cells} cells but the header only {len(table.headers)}; "
            "put a value that contains the delimiter in quotes"
        )
        runways.faults.append(Fault(index, "", what))
    runways.sizes = {key: np.full(runways.count, np.nan) for key in ("length", "width")}
    _read_all_numbers(runways)
    _name_ends(runways)
    runways.profiles = runways.read_each("profile", _profile_in, None)
    return runways


def _profile_in(cell: object) -> Profile | None:
    text = as_text(cell)
    return read_profile(text) if text else None


def closed_cells(runways: Runways) -> list[bool | None]:
    """Whether the list says of each runway that it is closed, None where it says nothing."""
    return runways.read_each("closed", read_yes, None)


def _read_all_numbers(runways: Runways) -> None:
    local_marks = runways.table.delimiter == ";"
    for (key, end), item in runways.found.items():
        kind = item.column.kind
        if kind not in KINDS:
            continue
        cells = runways.table.cells[item.position]
        numbers, faults = read_numbers(cells, kind, item.unit, item.header, local_marks)
        if key in runways.sizes:
            runways.sizes[key] = numbers.copy()
        for index in np.flatnonzero(outside(key, numbers)):
            faults.append(Fault(int(index), item.header, f'"{as_text(cells[index])}": {LIMITS[key].sentence}'))
        if kind == "slope" and not runways.table.delimiter:
            faults += _percent_cells(cells, numbers, item)
        runways.unreadable[key, end] = [fault.row_index for fault in faults]
        numbers[runways.unreadable[key, end]] = np.nan
        runways.numbers[key, end] = numbers
        runways.faults += faults


def _percent_cells(cells: list[object], numbers: NDArray[np.float64], item: Found) -> list[Fault]:
    """Faults for the slopes of a workbook that may come from cells formatted as percent.

    Such a cell shows "2 %" and holds 0.02, which would be read as 0.02 %. When all plain numbers of the
    column are below 0.3 there is no telling, and a slope that is a hundred times too small must not pass.
    """
    bare = [index for index, cell in enumerate(cells) if isinstance(cell, int | float) and numbers[index] != 0.0]
    if item.unit not in ("", "%") or not np.all(np.abs(numbers[bare]) < PERCENT_CELLS_BELOW):
        return []
    return [Fault(index, item.header, _percent_message(cells[index], 100.0 * numbers[index])) for index in bare]


def _percent_message(cell: object, percent: float) -> str:
    return (
        f'"{cell}" is {percent:g} %, or {100.0 * percent:g} % if the cell is formatted as percent; '
        'write it as text, such as "2 %"'
    )


def _name_ends(runways: Runways) -> None:
    """Names of both ends: from columns of their own, else from the runway column, else from the heading."""
    pairs = runways.read_each("runway", split_runway, ("", ""))
    own = zip(runways.texts("designator", 1), runways.texts("designator", 2), strict=True)
    headings = runways.at_end("heading", 1)
    for index, (first, second) in enumerate(own):
        names = name_both(tidy_designator(first), tidy_designator(second)) if first or second else pairs[index]
        runways.named.append(bool(names[0] or names[1]))
        if not (names[0] or names[1]):
            names = names_from_heading(float(headings[index]))
        other = "A" if "B" in names else "B"
        runways.first.append(names[0] or other)
        runways.second.append(names[1] or other)
