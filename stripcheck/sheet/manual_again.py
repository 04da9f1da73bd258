"""The sheet Manual of a filled workbook once more, as it would be filled now: what its formulas come to, and where.

It is made from the figures that the workbook itself has, so that the sheet's own writer tells places and values.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from types import SimpleNamespace
from typing import Any, cast

from openpyxl import Workbook
from openpyxl.utils import column_index_from_string

from stripcheck.card import Card
from stripcheck.doors.range_tables import tables_of
from stripcheck.sheet import manual_tables, pages
from stripcheck.sheet.labels import REST, TABLES
from stripcheck.sheet.raw_sheet import RawCell, RawSheet

_FIGURE = re.compile(r"=IF\(ISNUMBER\(Manual!([A-Z]+)(\d+)\),")


@dataclass(frozen=True)
class ManualAgain:
    """The sheet as written anew: formulas and values by row and column, names of its cells, and the rows that repeat it."""

    formulas: Mapping[tuple[int, int], str]
    values: Mapping[tuple[int, int], Any]
    names: Mapping[str, str]
    repeated: Sequence[tuple[str, Sequence[Any]]]

    def on(self, raw: RawSheet, live: bool) -> dict[tuple[int, int], Any] | None:
        """The values by row and column on a sheet as it stands, wherever rows of a user's moved them; None where that can't
        be told. ``live``: the sheet has formulas."""
        if not live:
            return dict(self.values)
        cells = [((row.number, column), cell) for row in raw.rows for column, cell in sorted(row.cells.items()) if cell.live]
        ours = sorted(self.formulas)
        if len(cells) != len(ours):
            return None
        if not all(_alike(self.formulas[at], cell) for at, (_, cell) in zip(ours, cells, strict=True)):
            return None
        return {there: self.values[at] for at, (there, _) in zip(ours, cells, strict=True)}


def write_again(rows: Sequence[Sequence[Any]], sides: Sequence[str], settings: int,
                values: Mapping[str, Any] | None = None) -> ManualAgain:  # fmt: skip
    """The sheet for the figures in the rows of a sheet Aircraft that has so many flap settings.

    ``values``: mass and flap of the tables by chain key, SI; without them those of the first page count. Names of settings
    don't matter here, only where things stand and what they come to.
    """
    tables = {side: tables_of(rows, side) for side in sides}
    tables = {side: replace(one, spare=one.filled, lift_offs=()) for side, one in tables.items()}
    first = {f"{side}_book_{key}": one.pages[0][at] for side, one in tables.items() for at, key in enumerate(("flap", "mass"))}
    with_pages = sorted({flap for one in tables.values() for flap, _ in one.pages})
    deflections = [*with_pages, *[with_pages[-1]] * (settings - len(with_pages))]
    flaps = [SimpleNamespace(name=str(at), deflection=flap) for at, flap in enumerate(deflections)]
    card = cast(Card, SimpleNamespace(name="", tables=tables, flaps=flaps))
    made = pages.Pages(Workbook())
    aircraft = made.book.create_sheet("Aircraft")
    aircraft["A1"] = TABLES
    manual = manual_tables.write_manual(made, card, values or first)
    manual_tables.write_as_rows(made, aircraft, card, values or first)
    assert manual is not None  # there are tables
    live = [cell for row in manual.iter_rows() for cell in row if cell.data_type == "f"]
    cached = made.cached[manual.title]
    repeated = [(str(row[0].value).split(REST)[0], [cell.value for cell in row[1:]]) for row in aircraft.iter_rows(min_row=2)
                if REST in str(row[0].value)]  # fmt: skip
    return ManualAgain(
        {(cell.row, cell.column): str(cell.value)[1:] for cell in live},
        {(cell.row, cell.column): cached[cell.coordinate] for cell in live},
        {name: defined.attr_text for name, defined in made.book.defined_names.items()},
        repeated,
    )  # fmt: skip


def repeated_cells(again: ManualAgain, rows: Sequence[Sequence[Any]]) -> Iterator[tuple[tuple[int, int], tuple[int, int]]]:
    """Of each cell of the sheet Aircraft, by its rows, that repeats the sheet Manual: row and column on both, from 1."""
    remaining = list(again.repeated)
    for number, row in enumerate(rows, 1):
        at = next((i for i, (label, _) in enumerate(remaining) if label == str(row[0]).split(REST)[0]), None)
        cells = remaining.pop(at)[1] if at is not None else ()
        for column, cell in enumerate(cells, 2):
            match = _FIGURE.match(cell) if isinstance(cell, str) else None
            if match is not None:
                yield (number, column), (int(match[2]), column_index_from_string(match[1]))


def _alike(formula: str, cell: RawCell) -> bool:
    return formula.split("(")[0] == (cell.formula or "").split("(")[0]
