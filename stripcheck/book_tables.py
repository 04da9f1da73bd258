"""A manual's own tables on an aircraft card: read, checked, brought to common lines and columns, holes carried.

A table is a grid of one figure by pressure altitude (down) and temperature (across), for one flap setting and mass, typed
into the card or read from a .csv or workbook file as manuals print it. All tables of a side, take-off, landing or climb,
become one stack of pages with common lines and columns: figures put between two others that stand beside each other are
linear between them, which changes nothing in a table that is read linearly. What the manual leaves out at the edges stays
a hole: there the conditions are beyond the book, and the model carries the nearest figure on.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np

from stripcheck import links
from stripcheck.errors import InputError
from stripcheck.flaps import Flap
from stripcheck.register.read_table import (
    TEXT_KINDS,
    WORKBOOK_KINDS,
    check_file,
    find_delimiter,
    find_encoding,
    text_rows,
    workbook_sheets,
)
from stripcheck.register.safe_read import check_text
from stripcheck.toml_fields import Section
from stripcheck.units import from_si, read_quantity, tidy

# what a table gives -> its side and the figures in each of its columns
GIVES = {
    "take-off roll": ("takeoff", ("roll",)),
    "take-off to 50 ft": ("takeoff", ("distance",)),
    "take-off roll and to 50 ft": ("takeoff", ("roll", "distance")),
    "landing roll": ("landing", ("roll",)),
    "landing from 50 ft": ("landing", ("distance",)),
    "landing roll and from 50 ft": ("landing", ("roll", "distance")),
    "rate of climb": ("climb", ("rate",)),
}
FIGURE_WORDS = {"roll": "roll", "distance": "distance over 50 ft", "rate": "rate of climb"}
HOLES = ("", "-", "\u2013", "\u2014", "--", "---", "n/a", "na", "x")
SEA_LEVEL = ("sl", "s.l.", "sea level", "msl")
LIMITS = {"roll": (20.0, 3000.0), "distance": (20.0, 5000.0), "rate": (-5.0, 30.0)}  # m, m, m/s
ALTITUDES = (-300.0, 5500.0)  # m: as high as there are strips
TEMPERATURES = links.TEMPERATURES
NOWHERE = 200.0  # K: colder than any air that is assessed
STEP_ON = 1.1  # by which a figure grows from column to column where the model has none to carry it by
ROLL_SHARE = 0.5  # of the distance over 50 ft that is roll, where neither the manual nor the model tells
HINT = "a grid has a line of temperatures and below it a line for each pressure altitude, which stands in the first cell"


@dataclass(frozen=True)
class Grid:
    """One figure of one page, SI, as the manual prints it: lines by altitude [m], columns by temperature [K], NaN a hole."""

    where: str
    side: str
    figure: str
    flap: float
    mass: float
    altitudes: np.ndarray
    temperatures: np.ndarray
    values: np.ndarray
    lift_off: float = np.nan  # speed that the manual states with a take-off table [m/s EAS]


@dataclass(frozen=True)
class BookTables:
    """The tables of one side on common lines and columns, SI; arrays of figures are pages x lines x columns, NaN a hole.

    ``pages`` are (flap deflection [rad], mass [kg]) in rising order; ``filled`` is ``printed`` with its holes carried by
    the model, and ``spare`` what would stand for each printed figure if it were a hole, both empty until the model is
    known; ``remarks`` tells in words what was put between; ``lift_offs`` are lift-off speeds by page [m/s EAS].
    """

    side: str
    pages: tuple[tuple[float, float], ...]
    altitudes: np.ndarray
    temperatures: np.ndarray
    printed: Mapping[str, np.ndarray]
    filled: Mapping[str, np.ndarray]
    spare: Mapping[str, np.ndarray]
    remarks: tuple[str, ...]
    lift_offs: tuple[float, ...]

    @property
    def known(self) -> np.ndarray:
        """Where all figures are printed: pages x lines x columns."""
        known: np.ndarray = np.all([np.isfinite(values) for values in self.printed.values()], axis=0)
        return known

    def below(self) -> np.ndarray:
        """Mass [kg] of the page below each page, or 1 kg less than its own."""
        return np.array([max((m for f, m in self.pages if f == flap and m < mass), default=mass - 1.0)
                         for flap, mass in self.pages])  # fmt: skip

    def above(self) -> np.ndarray:
        """Mass [kg] of the page above each page, or 1 kg more than its own."""
        return np.array([min((m for f, m in self.pages if f == flap and m > mass), default=mass + 1.0)
                         for flap, mass in self.pages])  # fmt: skip

    def heavier(self, page: int) -> list[int]:
        """Numbers of the heavier pages for the same flap."""
        return [other for other in range(page + 1, len(self.pages)) if self.pages[other][0] == self.pages[page][0]]

    def edge(self, hot: bool) -> np.ndarray:
        """Hottest (or coldest) temperature [K] with all figures, pages x lines; above the last line with any, that one's."""
        reach = self.reach()
        top = np.maximum((reach > NOWHERE).sum(axis=1, keepdims=True) - 1, 0)
        last: np.ndarray = np.take_along_axis(reach, np.minimum(np.arange(len(self.altitudes)), top), axis=1)
        return last if hot else np.minimum(np.where(self.known, self.temperatures, np.inf).min(axis=2), last)

    def reach(self) -> np.ndarray:
        """Hottest temperature [K] with all figures at each line or harder, pages x lines; NOWHERE where there is none.

        What the manual prints for a greater height or mass holds for less of it too, so that neither ever seems to help.
        """
        reach: np.ndarray = np.where(self.known, self.temperatures, NOWHERE).max(axis=2)
        for page in reversed(range(len(self.pages))):
            for heavier in self.heavier(page):
                reach[page] = np.maximum(reach[page], reach[heavier])
        return np.maximum.accumulate(reach[:, ::-1], axis=1)[:, ::-1]

    def highest(self) -> np.ndarray:
        """Altitude [m] of the last line of each page with figures, there or on a heavier page."""
        highest: np.ndarray = np.where(self.reach() > NOWHERE, self.altitudes, self.altitudes[0]).max(axis=1)
        return highest

    def nearest_flap(self, deflection: float) -> float:
        """Deflection [rad] of the setting with tables that is nearest to one; of two as near, the lesser."""
        return min({flap for flap, _ in self.pages}, key=lambda flap: (round(abs(flap - deflection), 6), flap))

    def masses(self, flap: float) -> list[float]:
        """Masses [kg] of the pages for a flap setting that has tables."""
        return [mass for own, mass in self.pages if own == flap]

    def values(self, flaps: Sequence[Flap]) -> dict[str, Any]:
        """Values by chain key, SI."""
        used = [self.nearest_flap(flap.deflection) for flap in flaps]
        grids = self.filled or self.printed
        found = {
            "altitudes": self.altitudes,
            "temperatures": self.temperatures,
            **{f"{figure}_table": grid for figure, grid in grids.items()},
            "hottest": self.edge(hot=True),
            "coldest": self.edge(hot=False),
            "highest": self.highest(),
            "page_mass": np.array([mass for _, mass in self.pages]),
            "page_flap": np.array([flap for flap, _ in self.pages]),
            "page_below": self.below(),
            "page_above": self.above(),
            "book_flaps": np.array(used),
            "least_masses": np.array([min(self.masses(flap)) for flap in used]),
            "most_masses": np.array([max(self.masses(flap)) for flap in used]),
        }
        return {f"{self.side}_{key}": value for key, value in found.items()}

    def nodes(self) -> dict[str, np.ndarray]:
        """Every place of the stack as columns: page, flap [rad], mass [kg], altitude [m], temperature [K], and its figures."""
        shape = (len(self.pages), len(self.altitudes), len(self.temperatures))
        page, line, column = (index.ravel() for index in np.indices(shape))
        pages = np.array(self.pages)
        return {
            "flap": pages[page, 0],
            "mass": pages[page, 1],
            "altitude": self.altitudes[line],
            "temperature": self.temperatures[column],
            "lift_off": np.array(self.lift_offs)[page],
            **{figure: grid.ravel() for figure, grid in self.printed.items()},
        }


def read_grids(book: Section, flaps: Sequence[Flap], greatest: Mapping[str, float], folder: Path,
               remarks: list[str]) -> list[Grid]:  # fmt: skip
    """The tables of a card's part [[book.table]]; files are looked for in ``folder``.

    ``greatest`` masses [kg] by side stand for a mass that is not given, which is added to ``remarks`` in words.
    Raises InputError where a table can't be right.
    """
    grids: list[Grid] = []
    for part in book.sections("table"):
        side, figures = GIVES[part.text("gives", choices=tuple(GIVES))]
        flap = _flap(part, flaps, side)
        mass = part.number("mass", "mass", greatest[side], 100.0, greatest["takeoff"] * 1.001)
        if not part.has("mass"):
            remarks.append(f"{part.where}: mass not given, the greatest of {mass:g} kg used")
        unit = part.text("unit", "ft/min" if side == "climb" else "m")
        lift_off = part.number("lift_off_speed", "speed", np.nan, 10.0, 100.0) if side == "takeoff" else np.nan
        altitudes, temperatures, rows, names = _cells(part, folder, len(figures))
        _check_axis(part.where, "pressure altitudes", altitudes, ALTITUDES, "ft")
        _check_axis(part.where, "temperatures", temperatures, TEMPERATURES, "\u00b0C")
        for place, figure in enumerate(figures):
            values = np.array([[_figure(cell, figure, unit, name) for cell in row[place :: len(figures)]]
                               for row, name in zip(rows, names, strict=True)])  # fmt: skip
            if np.isnan(values).all():
                raise InputError(f"{part.where}: there is no figure of the {FIGURE_WORDS[figure]}; leave such a table out")
            grids.append(Grid(part.where, side, figure, flap, mass, altitudes, temperatures, values, lift_off))
    for grid in grids:
        _check_rising(grid)
    return grids


def _flap(part: Section, flaps: Sequence[Flap], side: str) -> float:
    name, use = part.text("flap"), {"takeoff": "take-off", "landing": "landing"}.get(side)
    for flap in flaps:
        if flap.name == name:
            if use and use not in flap.uses:
                raise InputError(f'{part.where}: flap "{name}" is not allowed for {use} by the card')
            return flap.deflection
    raise InputError(f'{part.where}: there is no flap setting "{name}"; the card has: {", ".join(f.name for f in flaps)}')


def _cells(part: Section, folder: Path, wide: int) -> tuple[np.ndarray, np.ndarray, list[list[object]], list[str]]:
    """Altitudes [m], temperatures [K], the raw cells line by line, and a name for each line in messages."""
    part.asked |= {"file", "sheet", "pressure_altitudes", "temperatures", "values"}
    if part.has("file"):
        typed = [name for name in ("pressure_altitudes", "temperatures", "values") if part.has(name)]
        if typed:
            raise InputError(f"{part.where}: the table stands in a file, so {typed[0]} must not be typed too")
        return _from_file(part, folder, wide)
    altitudes = _list(part, "pressure_altitudes", "altitude")
    temperatures = _list(part, "temperatures", "temperature")
    rows = part.entries.get("values")
    if not isinstance(rows, list) or not all(isinstance(row, list) for row in rows) or len(rows) != len(altitudes):
        raise InputError(f"{part.where}: values must be a list of {len(altitudes)} lines, one for each pressure altitude")
    names = [f"{part.where}: values, line {number}" for number in range(1, len(rows) + 1)]
    for row, name in zip(rows, names, strict=True):
        if len(row) != len(temperatures) * wide:
            each = "one" if wide == 1 else "two, roll and distance,"
            raise InputError(
                f"{name} has {len(row)} figures where {len(temperatures) * wide} are expected: {each} for each temperature"
            )
    return np.array(altitudes), np.array(temperatures), rows, names


def _list(part: Section, name: str, kind: str) -> list[float]:
    entries = part.entries.get(name)
    if not isinstance(entries, list) or not entries:
        raise InputError(f"{part.where}: {name} is missing; it takes a list, such as [0, 10, 20]")
    try:
        return [_axis_value(entry, kind) for entry in entries]
    except InputError as error:
        raise InputError(f"{part.where}: {name}: {error}") from None


def _axis_value(entry: object, kind: str) -> float:
    if kind == "altitude" and isinstance(entry, str) and entry.strip().lower() in SEA_LEVEL:
        return 0.0
    return read_quantity(entry, kind)


def _from_file(part: Section, folder: Path, wide: int) -> tuple[np.ndarray, np.ndarray, list[list[object]], list[str]]:
    path = folder / part.text("file")
    try:
        return parse_grid(_raw_rows(path, part.text("sheet", "") or None), path.name, wide)
    except InputError as error:
        raise InputError(f"{part.where}: {error}") from None


def _raw_rows(path: Path, sheet: str | None) -> list[Sequence[object]]:
    check_file(path, "table")
    kind = path.suffix.lower()
    if kind in TEXT_KINDS:
        if sheet is not None:
            raise InputError(f'{path.name}: a text file has no sheets; leave the sheet "{sheet}" out')
        check_text(path)
        encoding = find_encoding(path)
        return list(text_rows(path, encoding, find_delimiter(path, encoding)))
    if kind in WORKBOOK_KINDS:
        return list(next(workbook_sheets(path, sheet))[1])
    raise InputError(f'{path.name}: "{kind}" is not a kind of table; save it as one of .csv, .xlsx, .xls or .ods')


def parse_grid(rows: Iterable[Sequence[object]], source: str,
               wide: int = 1) -> tuple[np.ndarray, np.ndarray, list[list[object]], list[str]]:  # fmt: skip
    """A grid as manuals print it: altitudes [m], temperatures [K], raw cells, and a name for each line in messages.

    The first line with a temperature in each of its columns is the header; title lines above it are passed over, and so
    is a line of words below it. ``wide`` is the number of columns under each temperature, which may stand in the first of
    them only. Bare altitudes are ft, bare temperatures deg C. Raises InputError where no grid is found.

    >>> altitudes, temperatures, cells, _ = parse_grid([["ft", "0", "20"], ["SL", "210", "240"], ["2000", "250", "-"]], "t")
    >>> altitudes.tolist(), temperatures.tolist(), cells[1]
    ([0.0, 609.6], [273.15, 293.15], ['250', '-'])
    """
    numbered = [(number, list(row)) for number, row in enumerate(rows, 1) if any(not _blank(cell) for cell in row)]
    at, temperatures = next(((i, found) for i, (_, row) in enumerate(numbered) if len(found := _temperatures(row, wide)) > 1),
                            (-1, []))  # fmt: skip
    if at < 0:
        each = "" if wide == 1 else "; each temperature stands over two columns, roll and distance"
        raise InputError(f"{source}: no line of temperatures was found; {HINT}{each}")
    altitudes: list[float] = []
    cells: list[list[object]] = []
    names: list[str] = []
    for number, row in numbered[at + 1 :]:
        name = f"{source} row {number}"
        figures = [*row[1:], *[""] * (len(temperatures) * wide)]
        if not altitudes and _line_of_words(row, wide):
            continue
        if _blank(row[0]):
            raise InputError(f"{name}: there is no pressure altitude in the first cell; {HINT}")
        try:
            altitudes.append(_axis_value(row[0], "altitude"))
        except InputError as error:
            raise InputError(f"{name}: pressure altitude: {error}") from None
        if not all(_blank(cell) for cell in figures[len(temperatures) * wide :]):
            raise InputError(f"{name} has more figures than there are temperatures above it; {HINT}")
        cells.append(figures[: len(temperatures) * wide])
        names.append(name)
    if len(altitudes) < 2:
        raise InputError(f"{source}: two lines of figures or more are expected below the temperatures; {HINT}")
    return np.array(altitudes), np.array(temperatures), cells, names


def _temperatures(row: Sequence[object], wide: int) -> list[float]:
    """The temperatures of a header line, or none where it is no such line."""
    cells = list(row[1:])
    while cells and _blank(cells[-1]):
        cells.pop()
    try:
        read = [read_quantity(cell, "temperature") for cell in cells]
    except InputError:
        return []
    found = read[::wide]
    credible = all(TEMPERATURES[0] <= value <= TEMPERATURES[1] for value in found)
    over_both = all(np.isnan(value) or value == found[i // wide] for i, value in enumerate(read))
    return found if credible and over_both and all(a < b for a, b in pairwise(found)) else []


def _blank(cell: object) -> bool:
    return cell is None or (isinstance(cell, str) and not cell.strip())


def _line_of_words(row: Sequence[object], wide: int) -> bool:
    """Whether a line is one of words below the temperatures, such as "roll" and "50 ft" again and again."""
    if not _blank(row[0]) and (not isinstance(row[0], str) or re.search(r"\d", row[0])):
        return False
    words = {cell.strip() if isinstance(cell, str) else cell for cell in row[1:] if not _blank(cell)}
    return len(words) <= wide and all(isinstance(cell, str) and re.search(r"[^\W\d]", cell) for cell in words)


def _figure(cell: object, figure: str, unit: str, where: str) -> float:
    if cell is None or (isinstance(cell, str) and cell.strip().lower() in HOLES):
        return np.nan
    kind = "climb" if figure == "rate" else "length"
    try:
        value = read_quantity(cell, kind, unit)
    except InputError as error:
        raise InputError(f"{where}: {error}; a figure that the manual leaves out is written as -") from None
    low, high = LIMITS[figure]
    if not (low <= value <= high or np.isnan(value)):
        raise InputError(f"{where}: {cell} can't be right for a {FIGURE_WORDS[figure]} in {unit}; check it and the unit")
    return value


def _check_axis(where: str, name: str, values: np.ndarray, limits: tuple[float, float], unit: str) -> None:
    if np.isnan(values).any():
        raise InputError(f"{where}: one of the {name} is blank")
    if len(values) < 2:
        raise InputError(
            f"{where}: {name} must be two or more; type single figures of a roll as [[book.takeoff]] or [[book.landing]] points"
        )
    if not (np.diff(values) > 0.0).all():
        raise InputError(f"{where}: {name} must rise from one to the next")
    if not limits[0] <= values[0] <= values[-1] <= limits[1]:
        low, high = (f"{from_si(limit, unit):,.0f}" for limit in limits)
        raise InputError(f"{where}: {name} are not credible; {low} to {high} {unit} is expected")


def _check_rising(grid: Grid) -> None:
    """Heat and height never make a figure better: a table that says so has a slip of the pen in it, or a wrong sign."""
    better = -1.0 if grid.figure == "rate" else 1.0
    for axis, line in ((1, "heat"), (0, "height")):
        values = grid.values if axis else grid.values.T
        places = grid.temperatures if axis else grid.altitudes
        for i, row in enumerate(values):
            known = np.flatnonzero(np.isfinite(row))
            for one, other in pairwise(known):
                if better * (row[other] - row[one]) < 0.0:
                    unit = "ft/min" if grid.figure == "rate" else "m"
                    shown = [f"{from_si(row[k], unit):,.0f} {unit} at {_place(places[k], axis)}" for k in (one, other)]
                    beside = _place((grid.altitudes if axis else grid.temperatures)[i], 1 - axis)
                    verb = "falls" if better > 0 else "rises"
                    raise InputError(
                        f"{grid.where}: the {FIGURE_WORDS[grid.figure]} {verb} with {line}, from {shown[0]} to {shown[1]} "
                        f"({beside}); {line} never helps: check the two figures"
                    )


def _place(value: float, axis: int) -> str:
    return f"{tidy(from_si(value, '°C')):.4g} °C" if axis else f"{from_si(value, 'ft'):,.0f} ft"


def stack_tables(grids: Sequence[Grid], side: str) -> BookTables | None:
    """All grids of one side as one stack on common lines and columns; None where there are none.

    Raises InputError where the pages don't go together.
    """
    own = [grid for grid in grids if grid.side == side]
    if not own:
        return None
    altitudes = np.unique(np.concatenate([grid.altitudes for grid in own]).round(6))
    temperatures = np.unique(np.concatenate([grid.temperatures for grid in own]).round(6))
    pages = tuple(sorted({(grid.flap, grid.mass) for grid in own}))
    figures = [figure for figure in LIMITS if any(grid.figure == figure for grid in own)]
    printed = {figure: np.full((len(pages), len(altitudes), len(temperatures)), np.nan) for figure in figures}
    remarks: list[str] = []
    for figure in figures:
        for number, page in enumerate(pages):
            found = [grid for grid in own if grid.figure == figure and (grid.flap, grid.mass) == page]
            if len(found) != 1:
                raise InputError(_pages_differ(own, figure, page, found))
            bridged = _bridged(found[0], remarks)
            printed[figure][number] = _on_lines(bridged, altitudes, temperatures)
    lift_offs = tuple(_stated([grid.lift_off for grid in own if (grid.flap, grid.mass) == page]) for page in pages)
    tables = BookTables(side, pages, altitudes, temperatures, printed, {}, {}, tuple(remarks), lift_offs)
    _check_pages(tables, own[0].where.split(" [[")[0])
    return tables


def _stated(speeds: Sequence[float]) -> float:
    """The first speed that is stated, NaN where none is."""
    return next((speed for speed in speeds if np.isfinite(speed)), np.nan)


def _pages_differ(own: Sequence[Grid], figure: str, page: tuple[float, float], found: Sequence[Grid]) -> str:
    if found:
        return f"{found[1].where}: there are two tables of the {FIGURE_WORDS[figure]} for the same flap and mass; keep one"
    lone = next(grid for grid in own if (grid.flap, grid.mass) == page)
    return (
        f"{lone.where}: there is no table of the {FIGURE_WORDS[figure]} for this flap and mass, but there is one for "
        "another; give both figures for each flap and mass, or one of them throughout"
    )


def _bridged(grid: Grid, remarks: list[str]) -> Grid:
    """The grid with each hole put between that has figures on both sides in its line, or else in its column."""
    values = grid.values.copy()
    for lines, places in ((values, grid.temperatures), (values.T, grid.altitudes)):
        for line in lines:  # a part of ``values`` itself
            known = np.flatnonzero(np.isfinite(line))
            missing = np.flatnonzero(np.isnan(line))
            missing = missing[(missing > known[0]) & (missing < known[-1])] if len(known) else missing[:0]
            line[missing] = np.interp(places[missing], places[known], line[known]) if len(missing) else line[missing]
    count = int(np.isfinite(values).sum() - np.isfinite(grid.values).sum())
    if count:
        figures = "1 figure" if count == 1 else f"{count} figures"
        remarks.append(f"{grid.where}: {figures} of the {FIGURE_WORDS[grid.figure]} missing between others put between them")
    return replace(grid, values=values)


def _on_lines(grid: Grid, altitudes: np.ndarray, temperatures: np.ndarray) -> np.ndarray:
    """The grid's figures on common lines and columns, linear between neighbours that both have one."""
    across = np.stack([_between(temperatures, grid.temperatures.round(6), line) for line in grid.values])
    return np.stack([_between(altitudes, grid.altitudes.round(6), column) for column in across.T], axis=1)


def _between(at: np.ndarray, nodes: np.ndarray, values: np.ndarray) -> np.ndarray:
    """Linear interpolation that has no value outside the nodes or beside a hole, and is exact at a node."""
    right = np.clip(np.searchsorted(nodes, at, side="left"), 0, len(nodes) - 1)
    left = np.maximum(right - 1, 0)
    exact = nodes[right] == at
    share = np.where(exact, 1.0, (at - nodes[left]) / np.where(right > left, nodes[right] - nodes[left], 1.0))
    found: np.ndarray = np.where(exact, values[right], values[left] + share * (values[right] - values[left]))
    return np.where((at < nodes[0]) | (at > nodes[-1]), np.nan, found)


def _check_pages(tables: BookTables, where: str) -> None:
    """A roll is shorter than the distance over 50 ft; more mass never makes a figure better."""
    if {"roll", "distance"} <= set(tables.printed):
        wrong = np.argwhere(tables.printed["distance"] <= tables.printed["roll"])
        if len(wrong):
            at = _at(tables, wrong[0])
            raise InputError(f"{where}: the distance over 50 ft must be longer than the roll; {at} it is not")
    if not tables.known.any(axis=(1, 2)).all():
        mass = tables.pages[int(np.argmin(tables.known.any(axis=(1, 2))))][1]
        raise InputError(f"{where}: the tables of roll and distance over 50 ft at {mass:,.0f} kg have no place in common")
    for figure, grid in tables.printed.items():
        for one in range(len(tables.pages)):
            for other in tables.heavier(one):
                wrong = np.argwhere(_worse(grid[one], grid[other], figure))
                if len(wrong):
                    raise InputError(
                        f"{where}: the {FIGURE_WORDS[figure]} is better at {tables.pages[other][1]:,.0f} kg than at "
                        f"{tables.pages[one][1]:,.0f} kg {_at(tables, (one, *wrong[0]))}; mass never helps: check both tables"
                    )
        wrong = np.argwhere(_worse(_easier(grid, tables, figure), grid, figure))
        if len(wrong):
            raise InputError(
                f"{where}: the {FIGURE_WORDS[figure]} {_at(tables, wrong[0])} and {tables.pages[wrong[0][0]][1]:,.0f} kg is "
                "better than one at less height, heat and mass; these never help: check the figures"
            )


def _at(tables: BookTables, place: Sequence[int]) -> str:
    return f"at {_place(tables.altitudes[place[1]], 0)} and {_place(tables.temperatures[place[2]], 1)}"


def _worse(one: np.ndarray, other: np.ndarray, figure: str) -> np.ndarray:
    """Where a figure is worse than another, by more than rounding: a longer distance or a lower rate of climb."""
    over = one - other if figure != "rate" else other - one
    worse: np.ndarray = over > 1e-9 * np.abs(one)
    return worse


def _easier(grid: np.ndarray, tables: BookTables, figure: str) -> np.ndarray:
    """The worst figure at no more height, heat and mass than at each place, for the same flap; NaN where there is none."""
    return _accumulated(grid, tables, np.fmin if figure == "rate" else np.fmax)


def _harder(grid: np.ndarray, tables: BookTables, figure: str) -> np.ndarray:
    """The best figure at no less height, heat and mass than at each place, for the same flap; NaN where there is none."""
    flipped = replace(tables, pages=tables.pages[::-1])
    return _accumulated(grid[::-1, ::-1, ::-1], flipped, np.fmax if figure == "rate" else np.fmin)[::-1, ::-1, ::-1]


def _accumulated(grid: np.ndarray, tables: BookTables, function: np.ufunc) -> np.ndarray:
    """The function of all places before each, in pages of the same flap, lines and columns."""
    found: np.ndarray = function.accumulate(function.accumulate(grid, axis=1), axis=2)
    flaps = np.array([flap for flap, _ in tables.pages])
    for flap in set(flaps):
        found[flaps == flap] = function.accumulate(found[flaps == flap], axis=0)
    return found


def fill_holes(tables: BookTables, model: Mapping[str, np.ndarray]) -> BookTables:
    """The tables with their holes carried from the nearest figure by the model.

    ``model`` holds the model's figures at all places [pages x lines x columns], NaN where it has none: there a figure
    grows by a tenth from column to column. A carried figure lies between those that are printed for less and for more
    height, heat and mass, and more of these never makes it better. A figure that the manual does not print at all is the
    model's, times what the manual's other figure is to the model's.
    """
    whole = np.all([np.isfinite(values) for values in model.values()], axis=0)
    of_model = {figure: np.where(whole, model[figure], np.nan) for figure in tables.printed}
    filled = {figure: _in_order(_filled(grid, of_model[figure], figure == "rate"), tables, figure)
              for figure, grid in tables.printed.items()}  # fmt: skip
    spare = {figure: _spare(grid, of_model[figure], tables.temperatures, figure == "rate")
             for figure, grid in tables.printed.items()}  # fmt: skip
    if len(filled) == 2:  # a roll is not longer than the distance over 50 ft, where one of them is carried
        printed = np.isfinite(tables.printed["roll"])
        filled["roll"] = np.where(printed, filled["roll"], np.minimum(filled["roll"], filled["distance"]))
        filled["distance"] = np.maximum(filled["distance"], filled["roll"])
    if "rate" not in filled:
        rolled = model["roll"] / model["distance"]
        share = np.where(np.isfinite(rolled), rolled, ROLL_SHARE)
        filled.setdefault("roll", filled.get("distance", 0.0) * share)
        filled.setdefault("distance", filled["roll"] / share)
    return replace(tables, filled=filled, spare=spare)


def _in_order(filled: np.ndarray, tables: BookTables, figure: str) -> np.ndarray:
    """Carried figures between the printed ones of easier and harder places, and never better than at an easier one."""
    printed = tables.printed[figure]
    better, worse = (np.fmax, np.fmin) if figure == "rate" else (np.fmin, np.fmax)
    kept = worse(better(filled, _harder(printed, tables, figure)), _easier(printed, tables, figure))
    return _easier(np.where(np.isfinite(printed), printed, kept), tables, figure)


def _filled(printed: np.ndarray, model: np.ndarray, added: bool) -> np.ndarray:
    filled = printed.copy()
    carry = _added if added else _scaled
    for grid, of_model in zip(filled, model, strict=True):
        for i in range(len(grid)):
            known = np.flatnonzero(np.isfinite(grid[i]))
            if len(known) == 0 and i > 0:  # a line without figures: from the line below it in height
                grid[i] = [carry(grid[i - 1, j], of_model[i - 1, j], of_model[i, j], 1) for j in range(len(grid[i]))]
            elif len(known):
                for j in np.flatnonzero(np.isnan(grid[i])):
                    edge = known[np.argmin(abs(known - j))]
                    grid[i, j] = carry(grid[i, edge], of_model[i, edge], of_model[i, j], j - edge)
        for i in range(len(grid) - 2, -1, -1):  # lines below the first with figures
            if np.isnan(grid[i]).all():
                grid[i] = [carry(grid[i + 1, j], of_model[i + 1, j], of_model[i, j], -1) for j in range(len(grid[i]))]
    return filled


def _spare(printed: np.ndarray, model: np.ndarray, temperatures: np.ndarray, added: bool) -> np.ndarray:
    """For each printed figure what the others of its line tell: put between them, or carried from the nearest."""
    spare = printed.copy()
    carry = _added if added else _scaled
    for page, line, j in np.argwhere(np.isfinite(printed)):
        row, of_model = printed[page, line], model[page, line]
        known = np.flatnonzero(np.isfinite(row) & (np.arange(len(row)) != j))
        if len(known) and known[0] < j < known[-1]:
            spare[page, line, j] = np.interp(temperatures[j], temperatures[known], row[known])
        elif len(known):
            edge = known[np.argmin(abs(known - j))]
            spare[page, line, j] = carry(row[edge], of_model[edge], of_model[j], int(j - edge))
    return spare


def _scaled(figure: float, model: float, model_there: float, steps: int) -> float:
    ratio = model_there / model
    return float(figure * (ratio if np.isfinite(ratio) else STEP_ON**steps))


def _added(figure: float, model: float, model_there: float, steps: int) -> float:
    return float(figure + model_there - model)
