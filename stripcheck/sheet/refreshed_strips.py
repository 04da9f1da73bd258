"""The sheet Strips of a refreshed workbook: the computed columns, each row where it stands now."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from functools import cached_property
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter

from stripcheck.assessment import Result
from stripcheck.chance import chance_of
from stripcheck.doors.columns import PARTS, known_among
from stripcheck.inputs import STRIP
from stripcheck.profile_run import KEYS as PROFILE
from stripcheck.sheet import strips
from stripcheck.sheet.edits import Edits, Growth
from stripcheck.sheet.filled_strips import DOOR, NATIVE, is_of_door
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.raw_sheet import RawCell, Value
from stripcheck.sheet.refreshed import BookEdits, Computed, plain
from stripcheck.sheet.stream import ROW
from stripcheck.units import from_si
from stripcheck.verdict import VERDICTS

SIDES = {"landing": "landing", "takeoff": "take-off"}


class StripEdits:
    """The edits to the sheet Strips, and what they tell: ``keys`` of the directions, ``replaced`` cells where a formula
    was typed over."""

    def __init__(self, work: BookEdits, computed: Computed) -> None:
        self.work, self.computed, self.book = work, computed, computed.book
        self.sheet = self.book.strips
        self.rows = self.sheet.rows
        self.edits = work.by_title.setdefault(strips.SHEET, Edits(self.sheet.raw))
        self.keys = _keys(self.sheet.raw_keys(), self._names())
        self.replaced: list[str] = []

    def write(self) -> None:
        """All edits."""
        self._write_keys()
        formulas = self._formulas() if self.sheet.kind == NATIVE else {}
        for key, column in self.sheet.steps.items():
            self._write_column(key, column, formulas.get(key))
        self._write_profiles()
        self._write_chances()
        self._write_title()
        self._grow()

    def _names(self) -> list[tuple[str, str]]:
        return [(self.sheet.text(row, "strip"), self.sheet.text(row, "name")) for row in self.rows]

    def _write_keys(self) -> None:
        column = self.sheet.identity["key"]
        for row, key in zip(self.rows, self.keys, strict=True):
            if self.sheet.text(row, "key") != key:
                self._set(row, column, key)

    @property
    def ranges(self) -> dict[str, str]:
        """Ranges of the columns by key, from the first direction to the last."""
        numbers = {**self.sheet.steps, **self.sheet.identity, **self.sheet.inputs}
        first, last = self.rows[0], self.rows[-1]
        letters = {key: get_column_letter(number) for key, number in numbers.items()}
        return {key: f"{strips.SHEET}!${letter}${first}:${letter}${last}" for key, letter in letters.items()}

    # --- the steps

    def _formulas(self) -> dict[str, str]:
        chain = self.book.chain
        places = self.work.page_places(chain)
        places |= {step.key: Place(step.key) for step in chain.steps if self.work.named(step.key)}
        for item in STRIP:
            if item.key in self.sheet.inputs:
                unit = item.unit if item.kind == "number" else ""
                places[item.key] = Place(f"${get_column_letter(self.sheet.inputs[item.key])}{ROW}", unit)
        for key, column in self.sheet.steps.items():
            places[key] = Place(f"${get_column_letter(column)}{ROW}", self._unit(key))
        return self.work.formulas(chain, places, self.sheet.steps)

    def _unit(self, key: str) -> str:
        return self.book.chain.by_key[key].unit

    def _write_column(self, key: str, column: int, formula: str | None) -> None:
        shown = self.computed.shown(key)
        of_door = self._of_door(key) if self.sheet.kind == DOOR else None
        for at, row in enumerate(self.rows):
            cell = self.sheet.raw.cell(row, column)
            if of_door is not None and cell is not None and cell.live and is_of_door(cell) and of_door[at] is not None:
                self.edits.result(row, column, of_door[at])
                continue
            if self._is_typed_over(cell, formula):
                self.replaced.append(f"{strips.SHEET}!{get_column_letter(column)}{row}")
            self._set(row, column, shown[at], formula)

    def _is_typed_over(self, cell: RawCell | None, formula: str | None) -> bool:
        return formula is not None and cell is not None and not cell.live and cell.value not in (None, "")

    def _of_door(self, key: str) -> list[Value]:
        """What the formulas of a door give in a column; None where they do not know all that counts."""
        side, _, part = key.partition("_")
        if side not in SIDES or part not in PARTS:
            return [None] * len(self.rows)
        values = {**self.book.inputs, **self.computed.found}
        known = known_among(values, side, len(self.rows)).tolist()
        reasons = self.computed.shown(f"{side}_reason")
        return [None if not one else reason if value == "" else value
                for one, value, reason in zip(known, self.computed.shown(key), reasons, strict=True)]  # fmt: skip

    def _set(self, row: int, column: int, value: Value, formula: str | None = None) -> None:
        """Write a cell in its own style, or where it is new in that of the rows that were there."""
        cell = self.sheet.raw.cell(row, column)
        style = cell.style if cell is not None and (cell.style or self.sheet.text(row, "key")) else self._usual_style(column)
        self.edits.set(row, column, value, formula, style)

    def _usual_style(self, column: int) -> str:
        if column not in self._styles:
            cells = (self.sheet.raw.cell(row, column) for row in reversed(self.rows))
            self._styles[column] = next((cell.style for cell in cells if cell is not None and cell.style), "")
        return self._styles[column]

    @cached_property
    def _styles(self) -> dict[int, str]:
        return {}

    # --- what hangs on the day and stands as a value

    def _write_profiles(self) -> None:
        """What the slope profiles mean now, and nothing where there is none any more."""
        if self.sheet.profile_column is None:
            return
        for item in STRIP:
            column = self.sheet.inputs.get(item.key)
            if column is None or item.key not in (*PROFILE, "local_slope"):
                continue
            values = plain(np.round(np.asarray(from_si(self.book.inputs[item.key], item.unit)), 6))
            for at, row in enumerate(self.rows):
                bare = self.book.profiles[at] is None
                if not bare or (item.key in PROFILE and self.sheet.value(row, column) not in (None, "")):
                    self._set(row, column, values[at])

    def _write_chances(self) -> None:
        """The chances of needing more, where the workbook has them."""
        columns = {one.key: self.sheet.sheet.columns.get(one.header) for one in strips.chance_columns()}
        places = {key: column for key, column in columns.items() if column is not None}
        if len(places) < len(columns):
            return
        case = Result(self.book.chain, len(self.rows), self.book.inputs, {}, self.book.faults, self.book.profiles)
        found = chance_of(case)
        values: dict[str, Any] = {"takeoff_chance": found.takeoff, "landing_chance": found.landing}
        values |= {f"{side}_margin": case[f"{side}_margin"] for side in SIDES}
        letters = {key: get_column_letter(column) for key, column in {**self.sheet.steps, **places}.items()}
        for key, column in places.items():
            is_chance = key in strips.CHANCES
            shown = plain(100.0 * values[key] if is_chance else strips.as_filled(key, values))
            formula = strips.chance_formula(key, letters) if is_chance and self.sheet.kind == NATIVE else None
            for at, row in enumerate(self.rows):
                self._set(row, column, shown[at], formula)

    def _write_title(self) -> None:
        """The aeroplane's name above the table."""
        name = self.work.pages.title("Aircraft")
        for row in self.sheet.raw.rows:
            if row.number >= self.sheet.sheet.header_row:
                return
            for column, cell in row.cells.items():
                if isinstance(cell.value, str) and cell.value.endswith(strips.TITLE) and not cell.live:
                    self.edits.set(row.number, column, f"{name}{strips.TITLE}")

    def _grow(self) -> None:
        keyed = [row for row in self.rows if self.sheet.text(row, "key")]
        if keyed and self.rows[-1] > keyed[-1]:
            ours = {*self.sheet.steps.values(), *self.sheet.inputs.values()}
            self.edits.grow(Growth(keyed[0], keyed[-1], self.rows[-1], ours))

    # --- what changed

    def changes(self) -> list[str]:
        """Each verdict that is another than the one that stood there, in words."""
        told = []
        for side, word in SIDES.items():
            key = f"{side}_verdict"
            both = zip(self.sheet.computed(key), self.computed.shown(key), strict=True)
            told += [f"{self._named(at)}, {word}: {before} -> {after}" for at, (before, after) in enumerate(both)
                     if before in VERDICTS and before != after]  # fmt: skip
        return told

    def unknown_before(self) -> int:
        """How many directions had no verdict in the workbook: new ones, or all where no program worked it out."""
        return sum(value not in VERDICTS for value in self.sheet.computed("landing_verdict"))

    def _named(self, at: int) -> str:
        row = self.rows[at]
        words = (self.sheet.text(row, "strip") or self.sheet.text(row, "name"), self.sheet.text(row, "direction"))
        return " ".join(word for word in words if word) or f"row {row}"


def _keys(found: Sequence[str], names: Sequence[tuple[str, str]]) -> list[str]:
    """Keys of the directions; rows without one, or with one that stood before, get another, two by two.

    >>> _keys(["A 1", "A 2", "", "", "A 2"], [("A", ""), ("A", ""), ("B", ""), ("B", ""), ("A", "")])
    ['A 1', 'A 2', 'row 1 1', 'row 1 2', 'row 2 1']
    """
    again = Counter[str]()
    keys = []
    for key in found:
        again[key] += 1
        keys.append(key if again[key] == 1 else "")
    taken, number = set(keys), 0
    for at, key in enumerate(keys):
        if key:
            continue
        before = keys[at - 1] if at and names[at - 1] == names[at] else ""
        mate = before.removesuffix(" 1") + " 2"
        if not before.endswith(" 1") or mate in taken:
            while not number or f"row {number} 1" in taken:
                number += 1
            mate = f"row {number} 1"
        keys[at] = mate
        taken.add(mate)
    return keys

