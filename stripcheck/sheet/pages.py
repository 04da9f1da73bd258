"""The pages of labels and values: Aircraft, Day and Rules, each with a live column of SI values beside.

Formulas elsewhere read the SI column, so that a value is converted once and a formula stays short.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from openpyxl import Workbook
from openpyxl.comments import Comment
from openpyxl.utils import quote_sheetname
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.card import Card
from stripcheck.caution import CAUTION
from stripcheck.chain import Input, Step
from stripcheck.day import Day
from stripcheck.inputs import CARD, DAY, RULES, SIDE_WORDS
from stripcheck.rules import Rules
from stripcheck.sheet import styles
from stripcheck.sheet.cell import Cell, formula, reference, where
from stripcheck.sheet.formulas import GROUND_NAMES, WORDS, Place
from stripcheck.sheet.labels import ENGINE, FLAP_HEADER, FLAP_LEAST, FLAP_MOST, GROUND_HEADER, PROPELLER, TABLES
from stripcheck.speeds import greatest_lift_coefficient
from stripcheck.surface import CONDITIONS, GROUNDS, REFERENCE_GROUND
from stripcheck.units import UNITS, from_si, tidy

UNKNOWN_GROUND = "not known"
NO_FIGURE = "none"
STATUS = "Status of the figures: "
FEW_FIGURES = 16  # of the manual's, up to which each has a row of its own
GROUND_COLUMNS = {"ground_rolling": "B", "ground_braking": "C", "ground_takeoff_factor": "D", "ground_landing_factor": "F"}
LABEL, VALUE, UNIT, SI, NOTE = "A", "B", "C", "D", "E"


@dataclass
class Pages:
    """What the pages hand to the other sheets: where each value stands, and the values beside the formulas."""

    book: Workbook
    prefix: str = ""  # of all names, where a workbook holds several aeroplanes
    places: dict[str, Place] = field(default_factory=dict)
    cached: dict[str, dict[str, Any]] = field(default_factory=dict)
    value_cells: dict[str, str] = field(default_factory=dict)  # where a user types each value

    def formula(self, sheet: Worksheet, cell: str, text: str, value: Any) -> None:
        """Write a formula into a cell, and keep the value that it has now."""
        sheet[cell] = "=" + text
        plain = value.item() if isinstance(value, np.generic | np.ndarray) else value
        self.cached.setdefault(sheet.title, {})[cell] = plain

    def name(self, name: str, sheet: Worksheet, cells: str) -> str:
        """Give a range a name, and return the name."""
        first, _, last = cells.partition(":")
        absolute = ":".join(_absolute(cell) for cell in (first, last) if cell)
        whole = self.prefix + name
        self.book.defined_names[whole] = DefinedName(whole, attr_text=f"{quote_sheetname(sheet.title)}!{absolute}")
        return whole


def _absolute(cell: str) -> str:
    letters = cell.rstrip("0123456789")
    return f"${letters}${cell[len(letters) :]}"


def start_page(pages: Pages, title: str, heading: str) -> Worksheet:
    """A new page with its heading, the caution and the header of the value table in row 4."""
    sheet: Worksheet = pages.book.create_sheet(title)
    sheet["A1"], sheet["A1"].font = heading, styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    for column, width in zip("ABCDEF", (40, 20, 9, 16, 70, 14), strict=True):
        sheet.column_dimensions[column].width = width
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet, portrait=False)
    return sheet


def write_header(sheet: Worksheet, row: int, titles: tuple[str, ...], first_column: int = 1) -> None:
    """A header row of a table."""
    for number, title in enumerate(titles, first_column):
        cell = sheet.cell(row, number, title)
        cell.font, cell.fill, cell.alignment = styles.HEADER, styles.HEADER_FILL, styles.CENTRE


def write_wrapped(sheet: Worksheet, row: int, text: str, last_column: str, characters: int) -> None:
    """A line of text over several columns, as high as so many characters a line need."""
    cell = sheet[f"A{row}"]
    cell.value, cell.font, cell.alignment = text, styles.SMALL, styles.WRAP
    sheet.merge_cells(f"A{row}:{last_column}{row}")
    sheet.row_dimensions[row].height = 13.0 * max(1, math.ceil(len(text) / characters))


def write_heading(sheet: Worksheet, row: int, text: str) -> None:
    sheet.cell(row, 1, text).font = styles.HEADING


def value_row(pages: Pages, sheet: Worksheet, row: int, item: Input, value: Any, fill: Any = styles.INPUT_FILL) -> None:
    """One input: label, value to be typed over, unit, SI value by formula, help."""
    label, cell = sheet[f"{LABEL}{row}"], sheet[f"{VALUE}{row}"]
    label.value, label.font, label.border = item.label, styles.BODY, styles.LINE
    cell.fill, cell.border, cell.protection, cell.font = fill, styles.BOX, styles.UNLOCKED, styles.BODY
    sheet[f"{UNIT}{row}"], sheet[f"{UNIT}{row}"].font = item.unit, styles.SMALL
    sheet[f"{NOTE}{row}"], sheet[f"{NOTE}{row}"].font = item.help, styles.SMALL
    sheet[f"{NOTE}{row}"].alignment = sheet[f"{UNIT}{row}"].alignment = styles.INDENT
    pages.value_cells[item.key] = f"{sheet.title}!${VALUE}${row}"
    if item.kind != "number":
        cell.value = value
        pages.places[item.key] = Place(pages.name(item.key, sheet, f"{VALUE}{row}"))
        return
    known = not math.isnan(value)
    shown = tidy(from_si(value, item.unit)) if known else None
    cell.value, cell.number_format = shown, _input_format(item.unit)
    _number_only(sheet, f"{VALUE}{row}")
    source = reference(f"{VALUE}{row}", item.unit)
    text = formula(where(np.isfinite(source), source, np.nan))
    pages.formula(sheet, f"{SI}{row}", text, value if known else "")
    _style_si(sheet, row)
    pages.places[item.key] = Place(pages.name(item.key, sheet, f"{SI}{row}"))


def _input_format(unit: str) -> str:
    return {"": "General", "kg": "#,##0.##", "m": "#,##0.##"}.get(unit, "#,##0.###")


def _number_only(sheet: Worksheet, cell: str) -> None:
    check = DataValidation(type="decimal", allow_blank=True, operator="between", formula1="-1000000", formula2="1000000")
    check.errorTitle, check.error = "A number is needed", "Type a plain number in the unit beside, or leave it blank."
    check.add(cell)
    sheet.add_data_validation(check)


def choice(sheet: Worksheet, cell: str, source: str, message: str) -> None:
    """A drop-down on a cell or range: a list such as '"yes,no"' or a reference."""
    check = DataValidation(type="list", formula1=source, allow_blank=True, showErrorMessage=True)
    check.errorTitle, check.error = "Choose from the list", message
    check.add(cell)
    sheet.add_data_validation(check)


def _style_si(sheet: Worksheet, row: int) -> None:
    cell = sheet[f"{SI}{row}"]
    cell.font, cell.number_format = styles.SMALL, "0.000000"


def write_aircraft(pages: Pages, card: Card, chosen: Mapping[str, Any] | None = None,
                   flap_names: Mapping[str, str] | None = None, tables_follow: bool = False,
                   title: str = "Aircraft") -> Worksheet:  # fmt: skip
    """The aircraft sheet, without the computed steps; returns it with the rows after the inputs free.

    ``chosen`` holds mass and flap of this assessment by chain key, SI, and ``flap_names`` the names of the flap settings;
    without them the sheet has no loading of its own. ``tables_follow``: the manual's figures will stand at the end, and a
    row tells which, so that none of them is lost unseen.
    """
    sheet = start_page(pages, title, card.name)
    sheet["A3"], sheet["A3"].font = card.note, styles.SMALL
    values = {**card.values, **(chosen or {})}
    rows = {item.key: item for item in card.chain.inputs if item.where == "card" and item.kind == "number"}
    masses = [rows.pop(key) for key in ("mass_takeoff", "mass_landing")]
    row, flap_rows = 6, {}
    if flap_names is not None:
        write_header(sheet, 5, ("This assessment", "Value", "Unit", "In SI", "Meaning"))
        for item in masses:
            value_row(pages, sheet, row, item, values[item.key])
            row += 1
        flap_rows = {key: row + i for i, key in enumerate(flap_names)}
        row += 1 + len(flap_rows)
    write_header(sheet, row, ("The aeroplane", "Value", "Unit", "In SI", "Meaning"))
    row += 1
    told = [(TABLES, ", ".join(SIDE_WORDS[side].lower() for side in card.tables))] if tables_follow and card.tables else []
    for label, text in ((PROPELLER, card.propeller), (ENGINE, card.power), *told):
        _fact(sheet, row, label, text)
        row += 1
    for key, item in rows.items():
        if key in ("takeoff_flap", "landing_flap", "flap_least", "flap_most"):
            continue
        fill = styles.CALIBRATED_FILL if key in card.fit.values else styles.INPUT_FILL
        value_row(pages, sheet, row, item, values[key], fill)
        row += 1
    row = _flap_table(pages, sheet, row + 1, card)
    for key, at in flap_rows.items():
        item = next(i for i in CARD if i.key == key)
        _flap_choice(pages, sheet, at, item, (flap_names or {})[key], values[key], len(card.flaps))
    sheet.freeze_panes = "A6"
    return sheet


def _fact(sheet: Worksheet, row: int, label: str, text: str) -> None:
    """What decides how the card is computed, and can't be typed over."""
    sheet[f"{LABEL}{row}"], sheet[f"{VALUE}{row}"] = label, text
    sheet[f"{LABEL}{row}"].font = sheet[f"{VALUE}{row}"].font = styles.BODY
    sheet[f"{LABEL}{row}"].border = styles.LINE


def _flap_table(pages: Pages, sheet: Worksheet, row: int, card: Card) -> int:
    """Flap settings: stall speed in, greatest lift coefficient by formula; returns the next free row."""
    write_heading(sheet, row, "Flap settings (stall speeds at the mass beside them, calibrated airspeed)")
    write_header(sheet, row + 1, FLAP_HEADER)
    sheet.row_dimensions[row + 1].height = 30
    first, last = row + 2, row + 1 + len(card.flaps)
    area = Cell(pages.places["wing_area"].reference)
    for at, flap in enumerate(card.flaps, first):
        lift = card.values["flap_lift"][at - first]
        deflection = tidy(from_si(flap.deflection, "°"))
        _text(sheet, f"A{at}", flap.name)
        _number(sheet, f"B{at}", deflection)
        pages.formula(sheet, f"D{at}", formula(reference(f"B{at}", "°")), flap.deflection)
        told = f"; estimated: {' and '.join(flap.estimated)}" if flap.estimated else ""
        sheet[f"E{at}"] = ", ".join(flap.uses) + told
        _number(sheet, f"F{at}", tidy(from_si(flap.stall_speed, "kt")))
        _number(sheet, f"G{at}", card.stall_mass)
        _number(sheet, f"H{at}", flap.drag)
        text = formula(greatest_lift_coefficient(reference(f"F{at}", "kt"), Cell(f"G{at}"), area))
        pages.formula(sheet, f"I{at}", text, lift)
        sheet[f"I{at}"].number_format, sheet[f"I{at}"].font = "0.0000", styles.BODY
        sheet[f"E{at}"].font, sheet[f"E{at}"].alignment = styles.SMALL, styles.INDENT
        _style_si(sheet, at)
    for column in "FGHI":
        sheet.column_dimensions[column].width = 14
    pages.name("flap_names", sheet, f"A{first}:A{last}")
    for key, column in (("flap_deflection", "D"), ("flap_drag", "H"), ("flap_lift", "I")):
        pages.places[key] = Place(pages.name(key + "s", sheet, f"{column}{first}:{column}{last}"))
    for at, key, name, label in ((last + 1, "flap_least", "MIN", FLAP_LEAST), (last + 2, "flap_most", "MAX", FLAP_MOST)):
        sheet[f"A{at}"], sheet[f"A{at}"].font = label, styles.SMALL
        pages.formula(sheet, f"D{at}", f"{name}({pages.prefix}flap_deflections)", card.values[key])
        _style_si(sheet, at)
        pages.places[key] = Place(pages.name(key, sheet, f"D{at}"))
    return last + 4


def _flap_choice(pages: Pages, sheet: Worksheet, row: int, item: Input, name: str, value: float, count: int) -> None:
    """A flap setting chosen by name; its deflection follows by formula."""
    value_row(pages, sheet, row, Input(item.key, item.label, "", "card", "Name of a setting of the flap table", "choice"), name)
    cell = sheet[f"{VALUE}{row}"]
    cell.number_format = "@"  # so that a setting called 10 stays a name
    cell.alignment = styles.CENTRE
    choice(sheet, f"{VALUE}{row}", f"{pages.prefix}flap_names", "Choose a setting of the flap table below.")
    names, deflections = f"{pages.prefix}flap_names", f"{pages.prefix}flap_deflections"
    same = f'({names}={VALUE}{row}&"")'  # not MATCH, which takes an asterisk in the cell for any name
    text = f'IFERROR(SUMPRODUCT({same}*{deflections})/SUMPRODUCT({same}*1),"")'
    pages.formula(sheet, f"{SI}{row}", text, value)
    _style_si(sheet, row)
    pages.places[item.key] = Place(pages.name(item.key, sheet, f"{SI}{row}"))


def _text(sheet: Worksheet, cell: str, text: str) -> None:
    sheet[cell].value, sheet[cell].number_format, sheet[cell].font = text, "@", styles.BODY
    sheet[cell].data_type = "s"


def _number(sheet: Worksheet, cell: str, value: float) -> None:
    target = sheet[cell]
    target.value = None if math.isnan(value) else value
    target.fill, target.border, target.protection, target.font = (styles.INPUT_FILL, styles.BOX, styles.UNLOCKED, styles.BODY)


def write_book_points(sheet: Worksheet, row: int, card: Card) -> int:
    """Book figures beside what the calibrated card gives; returns the next free row."""
    legend = "Lilac cells above are calibrated on the book points below; typed over, they lose that tie."
    sheet[f"A{row - 1}"], sheet[f"A{row - 1}"].font = legend, styles.SMALL
    write_heading(sheet, row, "Calibration: the manual's figures and the card's, on level dry pavement in still air")
    write_header(sheet, row + 1, ("Book point", "Book [m]", "", "Card [m]", "Difference"))
    rows = _differences(card.fit.residuals)
    for at, cells in enumerate(rows, row + 2):
        for column, value in zip("ABDE", cells, strict=True):
            sheet[f"{column}{at}"], sheet[f"{column}{at}"].font = value, styles.BODY
        sheet[f"E{at}"].alignment = styles.INDENT
    end = row + 2 + len(rows)
    for remark in (*card.fit.remarks, *card.assumed):
        sheet[f"A{end}"], sheet[f"A{end}"].font = remark, styles.SMALL
        end += 1
    return end + 1


def _differences(residuals: list[tuple[str, float, float]]) -> list[tuple[str, float | None, float | None, str]]:
    """A row for each figure: label, book [m], card [m], difference; or, of many, one for each kind of them."""
    if len(residuals) <= FEW_FIGURES:
        return [(label, book, round(model, 1), f"{model / book - 1.0:+.1%}") for label, book, model in residuals]
    kinds: dict[str, list[float]] = {}
    for label, book, model in residuals:
        kinds.setdefault(re.sub(r" \d+:", ",", label), []).append(model / book - 1.0)
    return [
        (f"{kind}: {len(shares)} figures", None, None,
         f"typically {float(np.sqrt(np.mean(np.square(shares)))):.1%}, at the most {max(shares, key=abs):+.1%}")
        for kind, shares in kinds.items()
    ]  # fmt: skip


def write_steps(pages: Pages, sheet: Worksheet, row: int, steps: list[Step]) -> int:
    """Rows for the steps that are the same for all strips; formulas come once all places are known."""
    write_heading(sheet, row, "Follows from it, the same for all strips")
    write_header(sheet, row + 1, ("Value", "Shown", "", "In SI", "Source"))
    for at, step in enumerate(steps, row + 2):
        label = f"{step.label} ({step.symbol})" if step.symbol else step.label
        sheet[f"A{at}"], sheet[f"E{at}"] = label, step.source
        sheet[f"A{at}"].font, sheet[f"A{at}"].border = styles.BODY, styles.LINE
        sheet[f"E{at}"].font, sheet[f"E{at}"].alignment = styles.SMALL, styles.INDENT
        pages.places[step.key] = Place(pages.name(step.key, sheet, f"D{at}"))
    return row + 2 + len(steps)


def fill_steps(pages: Pages, sheet: Worksheet, row: int, steps: list[Step], formulas: Mapping[str, str],
               values: Mapping[str, Any]) -> None:  # fmt: skip
    """The formulas of those rows, now that all places are known."""
    for at, step in enumerate(steps, row + 2):
        value = np.ravel(values[step.key])[0]
        plain = bool(value) if step.truth else (float(value) if np.isfinite(value) else "")
        pages.formula(sheet, f"D{at}", formulas[step.key], plain)
        _style_si(sheet, at)
        if step.truth:
            sheet[f"D{at}"].number_format = "General"
            pages.formula(sheet, f"B{at}", f'IF(D{at},"yes","no")', "yes" if plain else "no")
            sheet[f"B{at}"].font, sheet[f"B{at}"].alignment = styles.BODY, styles.RIGHT
            continue
        entry = UNITS[step.unit]
        shown = f'IF(ISNUMBER(D{at}),(D{at}-{entry.offset:.15g})/{entry.factor:.15g},D{at})'
        number = from_si(plain, step.unit) if isinstance(plain, float) else plain
        pages.formula(sheet, f"B{at}", shown, number)
        cell = sheet[f"B{at}"]
        cell.number_format, cell.font = styles.number_format(step.unit), styles.BODY


def write_day(pages: Pages, day: Day) -> Worksheet:
    """The day sheet."""
    sheet = start_page(pages, "Day", "The day")
    write_header(sheet, 5, ("For all strips that have no value of their own", "Value", "Unit", "In SI", "Meaning"))
    for row, item in enumerate(DAY, 6):
        value_row(pages, sheet, row, item, day.condition if item.key == "day_condition" else day.values[item.key])
        if item.key == "day_condition":
            sheet[f"{VALUE}{row}"].alignment = styles.CENTRE
            choice(sheet, f"{VALUE}{row}", f'"{",".join(CONDITIONS)}"', "dry, wet or soft")
    sheet.freeze_panes = "A6"
    return sheet


def write_rules(pages: Pages, rules: Rules) -> Worksheet:
    """The rules sheet: the set's values, and the ground table."""
    sheet = start_page(pages, "Rules", rules.title)
    for row, text in enumerate(rule_facts(rules), 3):
        write_wrapped(sheet, row, text, "E", 165)
    write_header(sheet, 8, ("Rule", "Value", "Unit", "In SI", "Meaning"))
    row = 9
    for item in RULES:
        if item.kind == "range" or item.key.startswith("reference_"):
            continue
        value = rules.values[item.key]
        value_row(pages, sheet, row, item, ("yes" if value else "no") if item.kind == "flag" else value)
        if item.kind == "flag":
            sheet[f"{VALUE}{row}"].alignment = styles.CENTRE
            choice(sheet, f"{VALUE}{row}", '"yes,no"', "yes or no")
        row += 1
    _ground_table(pages, sheet, row + 1, rules)
    sheet.freeze_panes = "A9"
    return sheet


def rule_facts(rules: Rules) -> tuple[str, ...]:
    """What stands above the rules: issue, citation, status of the figures, note."""
    told = {"read": "taken from the text", "memory": "from memory: compare with the text", "own": "the user's own"}
    return (rules.issue, rules.citation, f"{STATUS}{told[rules.status]}.", " ".join(rules.note.split()))


def _ground_table(pages: Pages, sheet: Worksheet, row: int, rules: Rules) -> None:
    """Coefficients and published corrections by ground; a word where there is no figure keeps the strip unassessed."""
    write_heading(sheet, row, f'Ground table ("{NO_FIGURE}": a strip with this ground is not assessed)')
    write_header(sheet, row + 1, GROUND_HEADER)
    first = row + 2
    names = [*(ground.name for ground in GROUNDS), UNKNOWN_GROUND]
    for i, name in enumerate(names):
        at = first + i
        sheet[f"A{at}"], sheet[f"A{at}"].font = name, styles.BODY
        sheet[f"E{at}"] = GROUNDS[i].source if i < len(GROUNDS) else "always without figures"
        sheet[f"E{at}"].font, sheet[f"E{at}"].alignment = styles.SMALL, styles.INDENT
        for key, column in GROUND_COLUMNS.items():
            value = float(rules.values[key][i])  # type: ignore[index]
            _number(sheet, f"{column}{at}", value)
            if math.isnan(value):
                sheet[f"{column}{at}"] = NO_FIGURE
            sheet[f"{column}{at}"].alignment = styles.CENTRE
    last = first + len(names) - 1
    pages.places[GROUND_NAMES] = Place(pages.name(GROUND_NAMES, sheet, f"A{first}:A{last}"))
    for key, column in GROUND_COLUMNS.items():
        pages.places[key] = Place(pages.name(key, sheet, f"{column}{first}:{column}{last}"))
    reference_row = first + names.index(REFERENCE_GROUND)
    pages.places["reference_rolling"] = Place(pages.name("reference_rolling", sheet, f"B{reference_row}"))
    pages.places["reference_braking"] = Place(pages.name("reference_braking", sheet, f"C{reference_row}"))
    text = "References are those at the head of the surface table: [1] Mason, [2] Raymer and Anderson, [3] common practice."
    sheet[f"A{last + 1}"], sheet[f"A{last + 1}"].font = text, styles.SMALL


def words_places(pages: Pages, sheet: Worksheet, column: str, row: int, step: Step) -> None:
    """A column of the words that a step's number stands for, named so that formulas can look them up."""
    for at, word in enumerate(step.words, row):
        sheet[f"{column}{at}"], sheet[f"{column}{at}"].font = word, styles.SMALL
    name = pages.name(step.key + WORDS, sheet, f"{column}{row}:{column}{row + len(step.words) - 1}")
    pages.places[step.key + WORDS] = Place(name)


def note(text: str, width: int = 320, height: int = 110) -> Comment:
    """A header comment."""
    comment = Comment(text, "stripcheck")
    comment.width, comment.height = width, height
    return comment
