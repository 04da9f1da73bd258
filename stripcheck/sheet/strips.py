"""The Strips sheet: one row for each direction, key columns first, then what was given, then every step for audit."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.caution import CAUTION
from stripcheck.chain import Chain, Input, Step
from stripcheck.inputs import STRIP
from stripcheck.profile import local_slopes
from stripcheck.profile_run import KEYS as PROFILE
from stripcheck.profile_run import profile_slopes
from stripcheck.register import Directions
from stripcheck.sheet import styles
from stripcheck.sheet.formulas import NOWHERE, Place
from stripcheck.sheet.pages import NO_FIGURE, Pages, choice, note, write_header
from stripcheck.sheet.stream import ROW, FormulaColumn, NumberColumn, Table, TextColumn
from stripcheck.sheet.stream import Column as AnyColumn
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import from_si, to_si
from stripcheck.verdict import FAULT

SHEET = "Strips"
HEADER_ROW, FIRST_ROW = 3, 4
REASON_WIDTH = 48

IDENTITY = (
    ("key", "Key", 4, "Key of this direction, by which the Summary finds it"),
    ("strip", "Strip", 11, "Identifier in the list"),
    ("name", "Name", 24, "Name in the list"),
    ("direction", "Direction", 10, "Direction of movement, by its designator"),
)
KEY_STEPS = (
    "landing_verdict", "landing_reason", "landing_margin", "landing_margin_share", "landing_required",
    "takeoff_verdict", "takeoff_reason", "takeoff_margin", "takeoff_margin_share", "takeoff_required",
)  # fmt: skip
# the chance of needing more than there is, beside the margin: shown as long as the margin is the one it was found for
CHANCES = ("landing_chance", "takeoff_chance")
NO_MARGIN = -9e9  # stands for "no margin" where the two are compared
SAME_MARGIN = 0.5  # m
MOVED_ON = "refresh"
TITLE = ": every direction"  # above the table, after the aeroplane's name
AS_FILLED = "As filled"  # the group of columns that tell what held when the workbook was filled
ABOUT = (
    ("surface_given", "Surface in the list", 20, "Spelling in the list"),
    ("survey_date", "Survey date", 12, "From the list"),
    ("notes", "Notes", 30, "From the list"),
)
PROFILE_TEXT = ("profile", "Slope profile", 24, "From the list, from the end where this direction starts; refresh reads it")
# keys of the register's numbers that the chain knows under another name
REGISTER_KEYS = {"own_temperature": "temperature", "own_qnh": "qnh", "own_wind_from": "wind_from",
                 "own_wind_speed": "wind_speed"}  # fmt: skip
GROUPS = (
    ("Air, wind and ground", "elevation"),
    ("Take-off, step by step", "takeoff_known"),
    ("Landing, step by step", "landing_known"),
)


@dataclass(frozen=True)
class Column:
    """One column: its key, header, width, unit and number format, the group it opens under, and its header comment."""

    key: str
    header: str
    width: float
    unit: str = ""
    comment: str = ""
    group: str = ""
    hidden: bool = False
    item: Input | Step | None = None
    carried: bool = False


def given_columns(directions: Directions) -> dict[str, Any]:
    """The strips' inputs by chain key in SI, from the register; numbers rounded as the sheet will show them."""
    columns: dict[str, Any] = {}
    for item in STRIP:
        if item.key in PROFILE:
            columns[item.key] = np.full(directions.n, np.nan)
        elif item.kind == "number":
            values = directions.numbers[REGISTER_KEYS.get(item.key, item.key)]
            columns[item.key] = to_si(np.round(from_si(values, item.unit), 6), item.unit)
    texts = directions.texts
    columns["fault"] = np.array([bool(text) for text in texts["fault"]], dtype=bool)
    columns["land_here"] = np.array([text != "no" for text in texts["land_here"]], dtype=bool)
    columns["take_off_here"] = np.array([text != "no" for text in texts["take_off_here"]], dtype=bool)
    columns["surface"] = codes(texts["surface"], SURFACES)
    columns["condition"] = codes(texts["condition"], CONDITIONS, blank=-1, strange=-2)
    return columns


def profile_columns(chain: Chain, values: Mapping[str, Any], directions: Directions) -> dict[str, Any]:
    """What the slope profiles mean on the day, as the sheet will show it: by chain key in SI."""
    units = {item.key: item.unit for item in STRIP}
    found = profile_slopes(chain, values, directions.profiles)
    found["local_slope"] = local_slopes(values["local_slope"], directions.profiles)
    return {key: to_si(np.round(from_si(column, units[key]), 6), units[key]) for key, column in found.items()}


def codes(words: Sequence[str], table: tuple[str, ...], blank: int = -1, strange: int = -1) -> np.ndarray:
    code = {"": blank, **{word: number for number, word in enumerate(table)}}
    return np.array([code.get(word, strange) for word in words], dtype=np.int64)


def layout(chain: Chain, directions: Directions, full: bool, chances: bool = False) -> list[Column]:
    """The columns of the sheet, in order. A short one leaves out inputs that are blank in every row.

    ``chances``: with the chance of needing more than there is beside each margin.
    """
    varying = chain.depends_on_strip()
    steps = {step.key: step for step in chain.steps if step.key in varying and (full or step.short)}
    columns = [Column(key, header, width, comment=text, hidden=key == "key") for key, header, width, text in IDENTITY]
    for key in KEY_STEPS:
        columns += [step_column(steps.pop(key), "Verdicts")] if key in steps else []
        columns += [_chance_column(key.removesuffix("_margin"))] if chances and key.endswith("_margin") else []
    for item in STRIP:
        if full or _has_any(item, directions):
            columns.append(input_column(item))
    group, openers = "", {key: name for name, key in GROUPS}
    for step in steps.values():
        group = openers.get(step.key, group or GROUPS[0][0])
        columns.append(step_column(step, group, hidden=full))
    columns += [Column(key, header, width, comment=text, group="From the list") for key, header, width, text in ABOUT]
    if any(profile is not None for profile in directions.profiles):
        columns.append(Column(*PROFILE_TEXT[:3], comment=PROFILE_TEXT[3], group="From the list"))
    columns.append(Column("source_row", "Row in the list", 9, comment="Row in the list", group="From the list"))
    columns += _filled_columns() if chances else []
    for header in directions.carried:
        columns.append(Column(header, header, 14, comment="Carried from the list as it is", group="Carried along",
                              carried=True))  # fmt: skip
    return columns


def chance_columns() -> list[Column]:
    """The columns of the chance of needing more: what is shown, and what held when it was worked out."""
    return [*(_chance_column(key.removesuffix("_chance")) for key in CHANCES), *_filled_columns()]


def _filled_columns() -> list[Column]:
    columns = []
    for key in CHANCES:
        word = "take-off" if "takeoff" in key else "landing"
        columns += [
            Column(f"{key}_filled", f"Chance as filled, {word} [%]", 11, "%", "Worked out when the workbook was filled",
                   AS_FILLED, hidden=True),
            Column(f"{key}_margin", f"Margin as filled, {word} [m]", 11, "m", "For which that chance was worked out",
                   AS_FILLED, hidden=True),
        ]  # fmt: skip
    return columns


def _chance_column(side: str) -> Column:
    word = "take-off" if side == "takeoff" else "landing"
    text = (
        f"Chance of needing more than there is, {word}, without factors, by the usual errors of temperature, wind, slope, "
        "mass, surface and technique. Beside the margin, never instead of it. Worked out when the workbook was filled."
    )
    return Column(f"{side}_chance", f"Chance of needing more, {word} [%]", 11, "%", text, "Verdicts")


def _has_any(item: Input, directions: Directions) -> bool:
    """Whether the list gives this input for any row; allowed directions and faults count when they say something."""
    profiled = any(profile is not None for profile in directions.profiles)
    if item.key in PROFILE or (item.key == "local_slope" and profiled):
        return profiled
    if item.kind == "number":
        return bool(np.isfinite(directions.numbers[REGISTER_KEYS.get(item.key, item.key)]).any())
    usual = {"flag": "yes"}.get(item.kind, "")
    return item.key == "surface" or any(text != usual for text in directions.texts[item.key])


def input_column(item: Input) -> Column:
    width = {"fault": 26, "choice": 12, "flag": 9}.get(item.kind, 10)
    return Column(item.key, _header(item.label, item.unit), width, item.unit, item.help, "Given", item=item)


def step_column(step: Step, group: str, hidden: bool = False) -> Column:
    label = f"{step.label}, {step.symbol}" if step.symbol else step.label
    width = REASON_WIDTH if step.key.endswith("_reason") else 13 if step.key.endswith("_verdict") else 11
    unit = f"\nUnit: {step.unit}" if step.unit else ""
    comment = f"{step.label}.{unit}\nSource: {step.source}."
    return Column(step.key, _header(label, step.unit), width, step.unit, comment, group, hidden, step)


def _header(label: str, unit: str) -> str:
    return f"{label} [{unit}]" if unit else label


def places_of(columns: list[Column], chain: Chain) -> dict[str, Place]:
    """Where each strip input and each kept step stands, for one row."""
    places = {item.key: NOWHERE for item in chain.inputs if item.where == "strip"}
    for number, column in enumerate(columns, 1):
        if column.item is not None:
            unit = column.unit if isinstance(column.item, Step) or column.item.kind == "number" else ""
            places[column.key] = Place(f"${get_column_letter(number)}{ROW}", unit)
    return places


def write_skeleton(pages: Pages, columns: list[Column], rows: int, title: str) -> Worksheet:
    """Headers, comments, drop-downs, colours, widths, groups, and one row that carries the styles."""
    sheet: Worksheet = pages.book.create_sheet(SHEET)
    last = FIRST_ROW + max(rows, 1) - 1
    sheet["B1"], sheet["B1"].font = title, styles.HEADING
    styles.write_caution(sheet, "F1", CAUTION)
    write_header(sheet, HEADER_ROW, tuple(column.header for column in columns))
    sheet.row_dimensions[HEADER_ROW].height = 58
    previous = None
    for number, column in enumerate(columns, 1):
        letter = get_column_letter(number)
        if column.group and column.group != previous:
            band = sheet.cell(HEADER_ROW - 1, number, column.group)
            band.font = styles.BOLD
        if column.group:
            sheet.cell(HEADER_ROW - 1, number).fill = styles.BAND_FILL
        previous = column.group
        if column.comment:
            sheet.cell(HEADER_ROW, number).comment = note(column.comment)
        dimension = sheet.column_dimensions[letter]
        dimension.width, dimension.hidden = column.width, column.hidden
        if column.hidden and column.key != "key":
            dimension.outlineLevel = 1
        _style_template(sheet, number, column)
        _dress(sheet, column, f"{letter}{FIRST_ROW}:{letter}{last}")
    sheet.sheet_properties.outlinePr.summaryRight = False
    sheet.freeze_panes = sheet.cell(FIRST_ROW, len(IDENTITY) + 1)
    sheet.auto_filter.ref = f"A{HEADER_ROW}:{get_column_letter(len(columns))}{last}"
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}", "B:D")
    printed = sum(column.group in ("", "Verdicts") for column in columns)
    sheet.print_area = f"B1:{get_column_letter(printed)}{last}"
    return sheet


def _style_template(sheet: Worksheet, number: int, column: Column) -> None:
    cell = sheet.cell(FIRST_ROW, number)
    cell.font, cell.border, cell.alignment = styles.BODY, styles.LINE, styles.MIDDLE
    item = column.item
    if isinstance(item, Input):
        cell.fill, cell.border, cell.protection = styles.INPUT_FILL, styles.BOX, styles.UNLOCKED
        cell.number_format = "#,##0.##" if item.kind == "number" else "General"
    elif isinstance(item, Step):
        cell.number_format = "0" if item.key.endswith("_finding") else styles.number_format(item.unit)
        if item.truth or item.words or item.lookup == "name":
            cell.number_format = "General"
        if item.key.endswith("_verdict"):
            cell.alignment = styles.CENTRE
        elif item.key.endswith("_reason"):
            cell.alignment = styles.INDENT_WRAP
    elif column.unit:
        cell.number_format = '0.0" %"' if column.unit == "%" else "0.0"
    elif not column.carried and column.key != "source_row":
        cell.number_format = "@"
    cell.quotePrefix = column.carried or (item is None and not column.unit and column.key != "source_row")


def _dress(sheet: Worksheet, column: Column, cells: str) -> None:
    """Drop-downs where a choice is made, colours where a verdict stands."""
    item = column.item
    if isinstance(item, Step) and item.key.endswith("_verdict"):
        styles.colour_verdicts(sheet, cells)
    if isinstance(item, Input) and item.kind == "choice":
        words = SURFACES if item.key == "surface" else CONDITIONS
        choice(sheet, cells, f'"{",".join(words)}"', "Choose a word of the ground table, or leave the cell blank.")
    if isinstance(item, Input) and item.kind == "flag":
        choice(sheet, cells, '"yes,no"', "yes or no")


def table_of(columns: list[Column], directions: Directions, given: Mapping[str, Any], formulas: Mapping[str, str],
             values: Mapping[str, Any]) -> Table:  # fmt: skip
    """The rows of the sheet: texts and numbers as given, formulas with the values that they have now."""
    made: list[AnyColumn] = []
    for column in columns:
        item = column.item
        if isinstance(item, Step):
            made.append(FormulaColumn(formulas[item.key], values[item.key]))
        elif isinstance(item, Input) and item.kind == "number":
            made.append(NumberColumn(np.round(np.asarray(from_si(given[item.key], item.unit)), 6)))
        elif column.carried:
            made.append(TextColumn(directions.carried[column.key]))
        elif column.key == "source_row":
            made.append(NumberColumn(directions.numbers["source_row"]))
        elif column.key in CHANCES:
            letters = {one.key: get_column_letter(number) for number, one in enumerate(columns, 1)}
            made.append(FormulaColumn(chance_formula(column.key, letters), 100.0 * values[column.key]))
        elif column.key.endswith(("_chance_filled", "_chance_margin")):
            made.append(NumberColumn(as_filled(column.key, values)))
        elif column.key == "key":
            made.append(TextColumn(direction_keys(directions)))
        elif column.key == PROFILE_TEXT[0]:
            made.append(TextColumn([str(profile or "") for profile in directions.profiles]))
        else:
            made.append(TextColumn(directions.texts[column.key]))
    return Table(FIRST_ROW, made, styles.heights_for(directions.texts["fault"], REASON_WIDTH + 8))


def shown(step: Step, values: Any, faults: Sequence[str]) -> Any:
    """A step's values, one for each of the rows with these faults, as a column shows them: numbers in its unit, truths, or
    texts."""
    values = np.broadcast_to(values, len(faults))
    if step.words:
        return [faults[i] if step.words[n - 1] == FAULT else step.words[n - 1]
                for i, n in enumerate(values.astype(int).tolist())]  # fmt: skip
    if step.lookup.startswith("ground_"):
        return [value if np.isfinite(value) else NO_FIGURE for value in values.tolist()]
    return values if step.truth else np.asarray(from_si(values.astype(float), step.unit))


def chance_formula(key: str, letters: Mapping[str, str]) -> str:
    """The chance as long as the margin is the one that it was worked out for; ``letters`` of the columns by key."""
    places = {one: f"${letter}{ROW}" for one, letter in letters.items()}
    margin, filled, found = places[key.replace("chance", "margin")], places[f"{key}_margin"], places[f"{key}_filled"]
    same = f"ABS(IF(ISNUMBER({margin}),{margin},{NO_MARGIN:.0f})-{filled})<={SAME_MARGIN}"
    return f'IF({same},IF(ISNUMBER({found}),{found},""),"{MOVED_ON}")'


def as_filled(key: str, values: Mapping[str, Any]) -> np.ndarray:
    side = key.split("_")[0]
    if key.endswith("_filled"):
        return np.asarray(100.0 * values[f"{side}_chance"])
    return np.asarray(np.nan_to_num(np.asarray(values[f"{side}_margin"], dtype=float), nan=NO_MARGIN))


def direction_keys(directions: Directions) -> list[str]:
    """A key for each direction: that of its runway and 1 or 2."""
    return [f"{pair} {i % 2 + 1}" for i, pair in enumerate(directions.texts["pair"])]
