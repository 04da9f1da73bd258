"""The manual's tables in a range of an Aircraft sheet: the rows at its end, read back into what the chain reads.

The rows are those of ``stripcheck.sheet.manual_tables``: labels of ``stripcheck.sheet.labels`` in the first column, values
beside each other in the others. A figure that is the manual's is a number; one that the model carries is a text.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Sequence
from itertools import pairwise
from typing import Any

import numpy as np

from stripcheck.book_tables import BookTables
from stripcheck.errors import InputError
from stripcheck.inputs import SIDE_WORDS
from stripcheck.sheet.labels import CARRIED, FIGURES, FIRST_VALUE, REST, TABLES, VALUES_IN_ROW, figure_row, table_row
from stripcheck.units import to_si

Rows = Sequence[Sequence[Any]]
MOST_PAGES = 1000
SETTING_KEYS = ("book_flaps", "least_masses", "most_masses")


def sides_told(words: Any) -> list[str]:
    """The sides that a sheet tells to have tables, in its words. Raises InputError for other words.

    >>> sides_told("take-off, climb")
    ['takeoff', 'climb']
    """
    sides = {word.lower(): side for side, word in SIDE_WORDS.items()}
    found = [sides.get(word.strip()) for word in words.split(",")] if isinstance(words, str) else [None]
    told = [side for side in found if side is not None]
    if len(told) < len(found):
        raise InputError(f'Aircraft: "{TABLES}": {", ".join(sides)} or some of these are expected in the range')
    return told


def table_values(rows: Rows, sides: Collection[str], settings: int) -> dict[str, Any]:
    """Values by chain key, SI, of the tables of some sides, for an aeroplane with so many flap settings.

    Raises InputError where a row lacks or holds something else.
    """
    cells = _cells(rows)
    values: dict[str, Any] = {}
    for side in sides:
        values |= _Side(cells, side).values(settings)
    return values


def tables_of(rows: Rows, side: str) -> BookTables:
    """The tables of one side, but that nothing tells what would stand for a figure. Raises InputError."""
    return _Side(_cells(rows), side).tables()


def _cells(rows: Rows) -> dict[str, list[Any]]:
    """The cells beside each label; those of rows with the same label one behind the other."""
    found: dict[str, list[Any]] = {}
    for row in rows:
        if isinstance(row[0], str) and REST in row[0]:
            found.setdefault(row[0].split(REST)[0], []).extend(row[FIRST_VALUE - 1 : FIRST_VALUE - 1 + VALUES_IN_ROW])
    return found


class _Side:
    """The rows of one side."""

    def __init__(self, cells: dict[str, list[Any]], side: str) -> None:
        self.cells, self.side = cells, side
        self.all_figures = ("rate",) if side == "climb" else ("roll", "distance")  # the model carries one not in the manual

    def values(self, settings: int) -> dict[str, Any]:
        """Values by chain key, SI."""
        used = np.array([self.numbers(table_row(self.side, f"setting {i}"), 3) for i in range(1, settings + 1)]).T
        own = {f"{self.side}_{key}": column for key, column in zip(SETTING_KEYS, used, strict=True)}
        return {**self.tables().values(()), **own}

    def tables(self) -> BookTables:
        """The tables as the card's are, but that nothing but the range tells what stands for a hole."""
        temperatures = to_si(np.array(self.rising("temperatures")), "°C")
        altitudes = to_si(np.array(self.rising("pressure altitudes")), "ft")
        of_manual, pages = self.figures_of_manual(), self.pages()
        printed, filled = {}, {}
        for figure in self.all_figures:
            lines = [[self.figures(figure_row(self.side, figure, page, line), len(temperatures))
                      for line in range(1, len(altitudes) + 1)] for page in range(1, len(pages) + 1)]  # fmt: skip
            grid = np.array(lines)  # pages x lines x columns x (figure of the manual, figure used)
            of_page, used = (np.asarray(to_si(grid[..., part], FIGURES[figure][1])) for part in (0, 1))
            filled[figure] = used
            if figure in of_manual:
                printed[figure] = of_page
        return BookTables(self.side, pages, altitudes, temperatures, printed, filled, {}, (), ())

    def figures_of_manual(self) -> list[str]:
        label = table_row(self.side, "figures")
        words = {FIGURES[figure][0].lower(): figure for figure in self.all_figures}
        cells = self.row(label)
        if not cells or any(cell not in words for cell in cells):
            raise InputError(f'Aircraft: "{label}": {" or ".join(words)} is expected in the range')
        return [words[cell] for cell in cells]

    def pages(self) -> tuple[tuple[float, float], ...]:
        """Flap [rad] and mass [kg] of each page, in rising order."""
        label = table_row(self.side, "pages")
        (count,) = self.numbers(label, 1)
        if not (count.is_integer() and 1.0 <= count <= MOST_PAGES):
            raise InputError(f'Aircraft: "{label}": a whole number of pages is expected in the range')
        found = []
        for number in range(1, int(count) + 1):
            mass, flap = self.numbers(table_row(self.side, f"page {number}"), 2)
            found.append((flap, mass))
        if any(one >= other for one, other in pairwise(found)):
            raise InputError(f"Aircraft: the pages of the {SIDE_WORDS[self.side].lower()} tables must rise in flap and mass")
        return tuple(found)

    def rising(self, what: str) -> list[float]:
        label = table_row(self.side, what)
        values = self.numbers(label, len(self.row(label)))
        if len(values) < 2 or any(one >= other for one, other in pairwise(values)):
            raise InputError(f'Aircraft: "{label}": two numbers or more that rise are expected in the range')
        return values

    def figures(self, label: str, count: int) -> list[tuple[float, float]]:
        """Of each column the manual's figure, NaN where it has none, and the one that is used."""
        found = []
        for place, cell in enumerate(self.row(label, count), 1):
            if is_number(cell):
                found.append((float(cell), float(cell)))
            else:
                found.append((math.nan, self.carried(label, place, cell)))
        return found

    def carried(self, label: str, place: int, cell: Any) -> float:
        """The number in a text of a carried figure."""
        try:
            value = float(cell.removesuffix(CARRIED)) if isinstance(cell, str) and cell.endswith(CARRIED) else math.nan
        except ValueError:
            value = math.nan
        if not math.isfinite(value):
            raise InputError(f'Aircraft: "{label}" has no figure at its temperature {place} in the range')
        return value

    def numbers(self, label: str, count: int) -> list[float]:
        cells = self.row(label, count)
        if not all(is_number(cell) for cell in cells):
            raise InputError(f'Aircraft: "{label}" lacks a number in the range')
        return [float(cell) for cell in cells]

    def row(self, label: str, count: int = 0) -> list[Any]:
        """The cells beside a label: so many, or all up to the last one that is not blank."""
        if label not in self.cells:
            raise self.no_row(label)
        cells = list(self.cells[label])
        while cells and cells[-1] in (None, ""):
            cells.pop()
        return [*cells, *[None] * (count - len(cells))][: count or None]

    def no_row(self, label: str) -> InputError:
        return InputError(f'Aircraft: the range has no row "{label}"; give the whole Aircraft sheet, columns A to I, with the '
                          f'folded rows at its end: the row "{TABLES}" tells how far')  # fmt: skip


def is_number(cell: Any) -> bool:
    return isinstance(cell, float | int) and not isinstance(cell, bool) and math.isfinite(cell)
