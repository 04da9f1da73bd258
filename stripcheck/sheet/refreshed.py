"""The edits that refresh a filled workbook: what its cells, as they stand, come to now.

Only cells that are ours are written. A formula of ours stays one, with its new result beside it; a workbook that was filled
with values keeps values.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from stripcheck.chain import Chain, Step, evaluate
from stripcheck.doors.columns import KNOWN_BY
from stripcheck.errors import InputError
from stripcheck.sheet import strips
from stripcheck.sheet.edits import Edits, Fresh
from stripcheck.sheet.filled import Filled
from stripcheck.sheet.filled_pages import ValuePages
from stripcheck.sheet.filled_strips import DOOR
from stripcheck.sheet.formulas import GROUND_NAMES, NOWHERE, RUN_TABLE, WORDS, Place, write_formulas
from stripcheck.sheet.package import Package
from stripcheck.sheet.raw_sheet import Value
from stripcheck.units import from_si

_NAME = re.compile(r"[a-z]\w+")


class BookEdits:
    """A workbook with the edits to its sheets, by title."""

    def __init__(self, package: Package, pages: ValuePages) -> None:
        self.package, self.pages = package, pages
        self.by_title = {title: Edits(raw) for title, raw in pages.raw.items()}

    def put(self, title: str, row: int, column: int, value: Value) -> None:
        """Type a value into a page."""
        self.by_title[title].set(row, column, value)
        self.pages.put(title, row, column, value)

    def show(self, title: str, row: int, column: int, value: Value) -> None:
        """Show a result in a cell of a page: beside its formula, or as a value where the page has none."""
        edits = self.by_title[title]
        fresh = edits.cells.get(row, {}).get(column)
        cell = edits.sheet.cell(row, column)
        if isinstance(fresh, Fresh):
            edits.set(row, column, value, fresh.formula, fresh.style)
        elif cell is not None and cell.live:
            edits.result(row, column, value)
        elif not self.pages.live:
            edits.set(row, column, value)

    def named(self, name: str) -> bool:
        """Whether the workbook still has a name of ours."""
        return "#REF!" not in self.package.names.get(name, "#REF!")

    def page_places(self, chain: Chain) -> dict[str, Place]:
        """Where the chain's inputs of the pages, and the tables that formulas look up, stand: under their names. Those of
        the strips stand nowhere."""
        places = {name: Place(name) for name in (*(step.key + WORDS for step in chain.steps if step.words), GROUND_NAMES)}
        for item in chain.inputs:
            name = next((name for name in (item.key, f"{item.key}s") if self.named(name)), item.key)
            places[item.key] = Place(name) if item.where != "strip" else NOWHERE
        return places

    def formulas(self, chain: Chain, places: Mapping[str, Place], keys: Collection[str]) -> dict[str, str]:
        """The formulas of some steps. Raises InputError where they would need a name that is gone."""
        try:
            made = write_formulas(chain, places, keys)
        except ValueError as error:
            raise InputError(f'{self.package.path}: columns of the sheet "{strips.SHEET}" are gone, without which a formula '
                             "would be too long; put them back") from error  # fmt: skip
        words = set().union(*(_words(text) for text in made.values()))
        ours = {place.reference for key, place in places.items() if "$" not in place.reference} | set(RUN_TABLE)
        gone = next((name for name in sorted(ours & words) if not self.named(name)), None)
        if gone:
            raise self.pages.without_name(gone)
        return made


@dataclass(frozen=True)
class Computed:
    """What a filled workbook comes to now: its steps in SI, those of the directions as arrays."""

    book: Filled
    found: Mapping[str, Any]

    @property
    def size(self) -> int:
        return len(self.book.strips.rows)

    def shown(self, key: str) -> list[Any]:
        """A step's values, one for each direction, as its column shows them; "" for none."""
        if key not in self._shown:
            self._shown[key] = self._as_shown(key)
        return self._shown[key]

    @cached_property
    def _shown(self) -> dict[str, list[Any]]:
        return {}

    def _as_shown(self, key: str) -> list[Any]:
        step = self.book.chain.by_key[key]
        if not isinstance(step, Step):
            raise TypeError(f"{key} is not a step")
        values = strips.shown(step, self.found[key], self.book.faults)
        return values if isinstance(values, list) else plain(values)

    def once(self, key: str) -> tuple[Any, Any]:
        """A step that is the same for all strips: its value in SI, and as it is shown."""
        step = self.book.chain.by_key[key]
        value = np.ravel(self.found[key])[0]
        if isinstance(step, Step) and step.truth:
            return bool(value), "yes" if value else "no"
        return plain_value(value), plain_value(from_si(value, step.unit))


def compute(book: Filled) -> Computed:
    """Work out the steps that the workbook shows."""
    chain, sheet = book.chain, book.strips
    varying = chain.depends_on_strip()
    keys = [step.key for step in chain.steps if step.key not in varying or step.key in sheet.steps]
    keys += [key for key in KNOWN_BY if sheet.kind == DOOR and key not in keys]
    return Computed(book, evaluate(chain, book.inputs, keys))


def plain(values: np.ndarray) -> list[Any]:
    """Numbers and truths as cells keep them; "" for none."""
    if values.dtype == bool:
        return list(values.tolist())
    return [value if np.isfinite(value) else "" for value in values.tolist()]


def plain_value(value: Any) -> Any:
    """A text, truth or number as a cell keeps it; "" for none."""
    if isinstance(value, str | bool):
        return value
    if isinstance(value, np.bool_):
        return bool(value)
    number = float(value)
    return number if np.isfinite(number) else ""


def _words(formula: str) -> set[str]:
    return set(_NAME.findall(formula))
