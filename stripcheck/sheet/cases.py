"""A sheet of cases: each row one strip direction on one day at one loading, all worked out by the chain's own formulas.

Where a filled workbook has one day and one loading for all its strips, the trip, the what-if and the register put many
beside each other: what differs comes from formulas that read other sheets, and stands in columns before the steps. A step
that only one other reads is written into that one, to keep the file small.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter, quote_sheetname
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.caution import CAUTION
from stripcheck.chain import Chain, Input, Step, evaluate
from stripcheck.day import read_day
from stripcheck.inputs import DAY, STRIP
from stripcheck.numeric import Number
from stripcheck.sheet import pages as page
from stripcheck.sheet import styles, summary
from stripcheck.sheet.cell import Cell, as_cell, formula, where
from stripcheck.sheet.formulas import NOWHERE, Place, write_formulas
from stripcheck.sheet.pages import Pages, note, write_header
from stripcheck.sheet.stream import ROW, FormulaColumn, NumberColumn, Table, TextColumn
from stripcheck.sheet.stream import Column as AnyColumn
from stripcheck.sheet.strips import Column, codes, input_column, shown, step_column
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import to_si

HEADER_ROW, FIRST_ROW = 3, 4
STEP = 1e6  # between the scores of two verdicts: more than any margin [m]
LONG_FORMULA = 4000  # characters: what a step written into others may make of them
SIDES = ("landing", "takeoff")
WANTED = (
    "takeoff_verdict", "takeoff_reason", "takeoff_finding", "takeoff_margin", "takeoff_required", "landing_verdict",
    "landing_reason", "landing_finding", "landing_margin", "landing_required",
)  # fmt: skip


@dataclass(frozen=True)
class About:
    """A column that tells which case a row is: header, width, values or formulas."""

    header: str
    width: float
    column: AnyColumn


@dataclass(frozen=True)
class Given:
    """A column of an input of the chain: what it shows in the input's unit (NaN or "" for none), and the formulas.

    ``formula`` is one for all rows, with ``ROW``, or one for each; None where the values stand as they are.
    """

    shown: np.ndarray | Sequence[str]
    formula: str | Sequence[str] | None = None


@dataclass(frozen=True)
class Elsewhere:
    """Inputs and steps that vary from row to row, and stand on other sheets.

    ``places``: by key; a reference may have marks for row numbers, besides ``ROW`` for the case's own row. ``rows``: of each
    mark the row number that it stands for, case by case. ``faults``: the text of each case's fault.
    """

    places: Mapping[str, Place] = field(default_factory=dict)
    rows: Mapping[str, Sequence[int]] = field(default_factory=dict)
    faults: Sequence[str] = ()

    def in_rows(self, text: str) -> str | list[str]:
        """A formula for all cases, or, where it has marks, one for each."""
        marks = [mark for mark in self.rows if mark in text]
        if not marks:
            return text
        made = [text] * len(self.faults)
        for mark in marks:
            made = [one.replace(mark, str(row)) for one, row in zip(made, self.rows[mark], strict=True)]
        return made


@dataclass(frozen=True)
class Cases:
    """A sheet of cases as written: where each key's column stands, its rows, and what all inputs and steps come to, SI.

    Besides the steps there are ``landing_score`` and ``takeoff_score``: of several cases the greatest is the best.
    """

    sheet: str
    letters: Mapping[str, str]
    rows: int
    table: Table
    values: Mapping[str, Any]

    def cell(self, key: str, row: int) -> str:
        """Reference of a key's cell in a row [from 0], from any sheet."""
        return f"{quote_sheetname(self.sheet)}!${self.letters[key]}${FIRST_ROW + row}"

    def range(self, key: str, first: int = 0, last: int | None = None) -> str:
        """Reference of a key's cells, of all rows or of some [from 0, the last one too]."""
        end = self.rows - 1 if last is None else last
        letter = self.letters[key]
        return f"{quote_sheetname(self.sheet)}!${letter}${FIRST_ROW + first}:${letter}${FIRST_ROW + end}"


def no_inputs() -> dict[str, Any]:
    """The strip's and the day's inputs where nothing is known, SI."""
    flags = {"fault": False, "land_here": True, "take_off_here": True, "surface": -1, "condition": -1}
    day = {**read_day({}).values, "qnh": np.nan, "wind_speed": np.nan, "day_condition": -1}
    return {**{item.key: flags.get(item.key, np.nan) for item in STRIP}, **day}


def write_once(pages: Pages, sheet: Worksheet, row: int, chain: Chain, varying: Collection[str],
               values: Mapping[str, Any]) -> int:  # fmt: skip
    """On a page of values, the steps that hang on none of the ``varying`` keys; returns the next free row.

    ``values`` are the chain's inputs in SI that do not vary.
    """
    differing = chain.depends_on(varying)
    inputs = {**no_inputs(), **values}
    steps = [step for step in chain.steps if step.key not in differing]
    found = evaluate(chain, {key: inputs[key] for key in inputs if key not in varying}, [step.key for step in steps])
    end = page.write_steps(pages, sheet, row, steps)
    formulas = write_formulas(chain, {**_blank_places(pages.places), **pages.places})
    page.fill_steps(pages, sheet, row, steps, formulas, found)
    return end


def write_cases(pages: Pages, name: str, heading: str, chain: Chain, about: Mapping[str, About], given: Mapping[str, Given],
                values: Mapping[str, Any], wanted: Collection[str] = WANTED,
                elsewhere: Elsewhere | None = None) -> Cases:  # fmt: skip
    """Write the sheet's skeleton and work out its rows.

    ``values``: the chain's other inputs in SI, also those ``elsewhere``. ``wanted``: the steps that are read from elsewhere.
    The steps that vary with none of ``given`` must stand on a page already (`write_once`), and so must the inputs with a
    cell of their own.
    """
    inputs = {item.key: item for item in chain.inputs}
    found = _work_out(chain, inputs, given, values)
    faults = _faults(given) if elsewhere is None else elsewhere.faults
    elsewhere = elsewhere or Elsewhere()
    placed = {**pages.places, **elsewhere.places}
    leading = [Column(key, one.header, one.width) for key, one in about.items()]
    leading += [input_column(inputs[key]) for key in given]
    steps = _kept(chain, {*given, *elsewhere.places}, wanted, placed)
    columns = leading + [replace(step_column(step, "Worked out"), hidden=False) for step in steps]
    letters = {column.key: get_column_letter(number) for number, column in enumerate(columns, 1)}
    formulas = write_formulas(chain, _places(placed, given, inputs, letters, steps), [step.key for step in steps])
    made: list[AnyColumn] = [one.column for one in about.values()]
    made += [_given_column(inputs[key], one) for key, one in given.items()]
    made += [FormulaColumn(elsewhere.in_rows(formulas[step.key]), shown(step, found[step.key], faults)) for step in steps]
    for side in [side for side in SIDES if f"{side}_verdict" in letters]:
        columns.append(Column(f"{side}_score", f"{side.capitalize()}, order", 10, comment="By which the best case is found"))
        letters[f"{side}_score"] = get_column_letter(len(columns))
        found[f"{side}_score"] = scores(chain, found, side)
        made.append(FormulaColumn(formula(_score_cell(letters, side)), found[f"{side}_score"]))
    _write_skeleton(pages, name, heading, columns, len(faults), len(about))
    return Cases(name, letters, len(faults), Table(FIRST_ROW, made), found)


def _work_out(chain: Chain, inputs: Mapping[str, Input], given: Mapping[str, Given],
              values: Mapping[str, Any]) -> dict[str, Any]:  # fmt: skip
    """All inputs and steps in SI."""
    columns = {key: _in_si(inputs[key], one) for key, one in given.items()}
    everything = {**no_inputs(), **values, **columns}
    return {**everything, **evaluate(chain, everything)}


def score(order: Number, margin: Number) -> Number:
    """By which of several cases the best is the one with the greatest: the order of its verdict [1 to 4; 0 for a forbidden
    direction], then its margin [m], a known one first; what ``summary.first_is_better`` says of two.

    >>> float(score(4, 120.0)) > float(score(4, np.nan)) > float(score(3, 900.0))
    True
    """
    held = np.minimum(np.maximum(margin, -0.4 * STEP), 0.4 * STEP)
    return order * STEP + np.where(np.isfinite(margin), held, -0.45 * STEP)


def scores(chain: Chain, found: Mapping[str, Any], side: str) -> np.ndarray:
    """By which of several cases the best has the greatest, from their steps; as the sheet of cases has it in a column."""
    verdict = chain.by_key[f"{side}_verdict"]
    rank = summary.ranks_of(found[f"{side}_verdict"], verdict.words) if isinstance(verdict, Step) else 0
    order = np.where(found[f"{side}_finding"] == summary.FORBIDDEN, 0, rank)
    return np.asarray(score(order, found[f"{side}_margin"]))


def _score_cell(letters: Mapping[str, str], side: str) -> Cell:
    verdict, finding, margin = (Cell(f"${letters[f'{side}_{part}']}{ROW}") for part in ("verdict", "finding", "margin"))
    rank = Cell(f"MATCH({verdict.text},{summary.RANK_LIST},0)", depth=1)
    order: Number = where(finding == float(summary.FORBIDDEN), 0.0, rank)
    return as_cell(score(order, margin))


def _in_si(item: Input, given: Given) -> np.ndarray:
    if item.kind == "number":
        return np.asarray(to_si(np.asarray(given.shown, dtype=float), item.unit))
    texts = [str(text) for text in given.shown]
    if item.kind == "fault":
        return np.array([bool(text) for text in texts])
    if item.kind == "flag":
        return np.array([text != "no" for text in texts])
    if item.key == "surface":
        return codes(texts, SURFACES)
    return codes(texts, CONDITIONS, blank=-1, strange=-2)


def _faults(given: Mapping[str, Given]) -> list[str]:
    size = max(len(one.shown) for one in given.values())
    return [str(text) for text in given["fault"].shown] if "fault" in given else [""] * size


def _given_column(item: Input, given: Given) -> AnyColumn:
    if given.formula is not None:
        return FormulaColumn(given.formula, given.shown)
    return NumberColumn(np.asarray(given.shown)) if item.kind == "number" else TextColumn(list(given.shown))


def _blank_places(placed: Mapping[str, Place]) -> dict[str, Place]:
    """Nowhere, for inputs of strip and day that stand neither on a page nor in a column."""
    return {item.key: NOWHERE for item in (*STRIP, *DAY) if item.key not in placed}


def _places(placed: Mapping[str, Place], given: Mapping[str, Given], inputs: Mapping[str, Input], letters: Mapping[str, str],
            steps: Sequence[Step]) -> dict[str, Place]:  # fmt: skip
    places = {**_blank_places(placed), **placed}
    for key in given:
        places[key] = Place(f"${letters[key]}{ROW}", inputs[key].unit if inputs[key].kind == "number" else "")
    for step in steps:
        places[step.key] = Place(f"${letters[step.key]}{ROW}", step.unit)
    return places


def _kept(chain: Chain, varying: Collection[str], wanted: Collection[str], placed: Mapping[str, Place]) -> list[Step]:
    """The steps with a column: those wanted, and those that several others read, or that would make another too long."""
    differing = chain.depends_on(varying)
    steps = [step for step in chain.leading_to(wanted, placed) if step.key in differing and step.key not in placed]
    readers = Counter(key for step in steps for key in {*step.inputs, step.guard})
    lone = {step.key for step in steps if readers[step.key] == 1 and step.key not in wanted and not step.short}
    nowhere = Place(f"$ZZ{ROW}")
    while True:
        kept = [step for step in steps if step.key not in lone]
        places = {**_blank_places(placed), **dict.fromkeys(varying, nowhere), **placed}
        keys = [step.key for step in kept]
        formulas = write_formulas(chain, {**places, **dict.fromkeys(keys, nowhere)}, keys)
        long = [step for step in kept if len(formulas[step.key]) > LONG_FORMULA]
        parts = {key for step in long for key in step.inputs if key in lone}
        if not parts:
            return kept
        lone -= parts


def _write_skeleton(pages: Pages, name: str, heading: str, columns: Sequence[Column], rows: int, about: int) -> None:
    """Headers with comments, widths, verdict colours, and one row that carries the styles."""
    sheet: Worksheet = pages.book.create_sheet(name)
    last = FIRST_ROW + max(rows, 1) - 1
    sheet["A1"], sheet["A1"].font = heading, styles.HEADING
    styles.write_caution(sheet, "A2", CAUTION)
    write_header(sheet, HEADER_ROW, tuple(column.header for column in columns))
    sheet.row_dimensions[HEADER_ROW].height = 58
    for number, column in enumerate(columns, 1):
        letter = get_column_letter(number)
        if column.comment:
            sheet.cell(HEADER_ROW, number).comment = note(column.comment)
        sheet.column_dimensions[letter].width = column.width
        cell = sheet.cell(FIRST_ROW, number)
        cell.font, cell.border, cell.alignment = styles.BODY, styles.LINE, styles.MIDDLE
        if isinstance(column.item, Input):
            cell.number_format = "#,##0.##" if column.item.kind == "number" else "General"
        elif isinstance(column.item, Step) and not (column.item.truth or column.item.words or column.item.lookup == "name"):
            cell.number_format = "0" if column.key.endswith("_finding") else styles.number_format(column.unit)
        if column.key.endswith("_verdict"):
            styles.colour_verdicts(sheet, f"{letter}{FIRST_ROW}:{letter}{last}")
    sheet.freeze_panes = sheet.cell(FIRST_ROW, about + 1)
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")
