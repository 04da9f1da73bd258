"""The LAMBDA names in a workbook: a new one that lists and shows them, or a copy of a user's own.

Of a user's workbook only the list of names changes; every other part of the package is copied as it is.
"""

from __future__ import annotations

import re
import shutil
import zipfile
from copy import copy
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any
from xml.etree import ElementTree
from xml.sax.saxutils import escape, quoteattr

from stripcheck.caution import CAUTION
from stripcheck.doors.aircraft import NO_REACH
from stripcheck.doors.call import call
from stripcheck.doors.functions import FUNCTIONS, Argument, Function
from stripcheck.doors.lambdas import NO_REACH_HERE, STEP, Library, Name, library, not_a_lambda
from stripcheck.errors import InputError
from stripcheck.safe_file import whole_or_not_at_all
from stripcheck.units import KINDS

if TYPE_CHECKING:
    from openpyxl.worksheet.worksheet import Worksheet

    from stripcheck.card import Card
    from stripcheck.rules import Rules
    from stripcheck.sheet.pages import Pages

SHEET = "Functions"
LIBRARY_FILE = "stripcheck-lambda.xlsx"
DEMO_CARD, DEMO_RULES = "ridge-runner", "part-cat-b"
HEADER_ROW = 6
NEEDS = (
    "These functions are names of this workbook: no Python, no add-in. They work where the program knows LAMBDA: Excel of "
    "Microsoft 365, Excel 2024 and later, on Windows, Mac, web and tablet. Other programs show an error in their cells.",
    "Give every argument. Aircraft and Rules are ranges with the rows of those sheets here, or of a filled workbook. Every "
    "other argument takes a cell or a range, and the result fills the same shape. Names that begin STRIP_X_ are steps that "
    "the functions share.",
)


@dataclass(frozen=True)
class Copied:
    """What became of a copy: names added, and those that were there already with the same meaning."""

    added: int
    kept: int


def write_library(path: Path, card: Card | None = None, rules: Rules | None = None) -> Library:
    """A new workbook with all names, each shown by a live example; usually with a shipped card and rule set.

    Raises InputError where it can't be written.
    """
    from openpyxl import Workbook
    from openpyxl.workbook.defined_name import DefinedName

    from stripcheck.card import load_card
    from stripcheck.rules import load_rules
    from stripcheck.sheet import pages
    from stripcheck.sheet.stream import write_book

    made = pages.Pages(Workbook())
    made.book.remove(made.book.active)
    made.book.properties.title = "Functions of stripcheck as LAMBDA names"
    sheet = made.book.create_sheet(SHEET)
    card, rules = card or load_card(DEMO_CARD), rules or load_rules(DEMO_RULES)
    keys = ("mass_takeoff", "mass_landing", "takeoff_flap", "landing_flap")
    names = {key: next(flap.name for flap in card.flaps if flap.deflection == card.values[key]) for key in keys[2:]}
    aircraft = pages.write_aircraft(made, card, {key: card.values[key] for key in keys}, names)
    _write_functions(made, sheet, aircraft, pages.write_rules(made, rules))
    for name in library().names:
        made.book.defined_names[name.name] = DefinedName(name.name, attr_text=name.text, comment=name.comment)
    live = {SHEET: set(made.cached[SHEET])}
    write_book(made.book, {}, path, cached=made.cached, dynamic=live)
    return library()


def range_of(sheet: Worksheet, last_column: str) -> str:
    """Absolute reference of the sheet's rows up to a column."""
    return f"{sheet.title}!$A$1:${last_column}${sheet.max_row}"


def rows_of(made: Pages, sheet: Worksheet, columns: int) -> list[list[Any]]:
    """The sheet's cells as a spreadsheet hands them over, formulas with the values that they have now."""
    cached = made.cached.get(sheet.title, {})
    return [
        [cached.get(cell.coordinate, cell.value) for cell in row]
        for row in sheet.iter_rows(max_row=sheet.max_row, max_col=columns)
    ]


def whole_example(function: Function) -> tuple[Any, ...]:
    """The function's example with every argument that it leaves out."""
    return (*function.example, *(argument.default for argument in function.arguments[len(function.example) :]))


def _write_functions(made: Pages, sheet: Worksheet, aircraft: Worksheet, rules: Worksheet) -> None:
    from stripcheck.sheet import styles
    from stripcheck.sheet.pages import write_header, write_heading, write_wrapped

    sheet["A1"], sheet["A1"].font = "Functions as LAMBDA names", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    for row, text in enumerate(NEEDS, 3):
        write_wrapped(sheet, row, text, "F", 170)
    for column, width in zip("ABCDEF", (25, 46, 8, 66, 62, 24), strict=True):
        sheet.column_dimensions[column].width = width
    write_header(sheet, HEADER_ROW, ("Name", "Gives", "Unit", "Arguments", "Example", "Result, live"))
    ranges = {"aircraft": range_of(aircraft, "I"), "rules": range_of(rules, "F")}
    rows = {"aircraft": rows_of(made, aircraft, 9), "rules": rows_of(made, rules, 6)}
    row = HEADER_ROW + 1
    left_out = {function.name: why for function, why in library().left_out}
    for function in FUNCTIONS:
        if function.name in left_out:
            continue
        given = dict(zip((argument.key for argument in function.arguments), whole_example(function), strict=True))
        text = f"{function.full_name}({','.join(ranges.get(key) or _typed(value) for key, value in given.items())})"
        value = call(function, *(rows.get(key, value) for key, value in given.items()))
        made.formula(sheet, f"F{row}", text, NO_REACH_HERE if value == NO_REACH else value)
        told = (function.full_name, function.help, function.unit or "", ", ".join(map(_told, function.arguments)), "=" + text)
        for column, words in zip("ABCDE", told, strict=True):
            cell = sheet[f"{column}{row}"]
            cell.value, cell.font, cell.alignment = words, styles.BODY, styles.WRAP
            cell.data_type, cell.quotePrefix = "s", column == "E"
        sheet[f"F{row}"].font, sheet[f"F{row}"].alignment = styles.BODY, styles.WRAP
        sheet[f"F{row}"].number_format = "#,##0.00##"
        lines = max(len(told[1]) / 42, len(told[3]) / 62, len(told[4]) / 58)
        sheet.row_dimensions[row].height = 14.0 * (1 + int(lines))
        row += 1
    row += 1
    write_heading(sheet, row, "Not here")
    for function in FUNCTIONS:
        if function.name in left_out:
            row += 1
            sheet[f"A{row}"], sheet[f"B{row}"] = function.full_name, f"{function.help} Left out: {left_out[function.name]}."
            sheet[f"A{row}"].font = sheet[f"B{row}"].font = styles.BODY
    sheet.freeze_panes = f"B{HEADER_ROW + 1}"
    sheet.sheet_view.showGridLines = False
    styles.set_print(sheet, f"{HEADER_ROW}:{HEADER_ROW}")


def _told(argument: Argument) -> str:
    unit = KINDS[argument.kind][0] if argument.kind in KINDS else ""
    shown = {"pressure": "hPa or inHg"}.get(argument.kind, unit)
    return f"{argument.name} [{shown}]" if shown else argument.name


def _typed(value: Any) -> str:
    return f'"{value}"' if isinstance(value, str) else f"{value:.15g}"


# --- a copy of a user's workbook


def write_copy(book: Path, path: Path) -> Copied:
    """A copy of a workbook with all names. Raises InputError for what is no such workbook, and for a name in use."""
    from stripcheck.register.read_table import check_file
    from stripcheck.register.safe_read import check_workbook

    check_file(book, "workbook")
    check_workbook(book)
    with zipfile.ZipFile(book) as source:
        try:
            part = _workbook_part(source, book)
            changed, result = _with_names(source.read(part).decode("utf-8-sig"), library().names, book)
            with whole_or_not_at_all(path) as file, zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED) as target:
                target.comment = source.comment
                for entry in source.infolist():
                    if entry.filename == part:
                        target.writestr(entry, changed.encode())
                        continue
                    fresh = copy(entry)  # the writer sets its own places in it
                    with source.open(entry) as old, target.open(fresh, "w", force_zip64=entry.file_size >= 2**31) as new:
                        shutil.copyfileobj(old, new, 1 << 20)
        except (zipfile.BadZipFile, UnicodeDecodeError, RuntimeError, NotImplementedError, ElementTree.ParseError) as error:
            raise InputError(f"{book}: the workbook is damaged ({error})") from error
    return result


def _workbook_part(source: zipfile.ZipFile, book: Path) -> str:
    names = source.namelist()
    if any(name.startswith("_xmlsignatures/") for name in names):
        raise InputError(f"{book}: the workbook is signed, and a change would break the signature; remove it first")
    if "_rels/.rels" in names:
        for relation in ElementTree.fromstring(source.read("_rels/.rels")):
            if relation.get("Type", "").endswith("/officeDocument"):
                part = relation.get("Target", "").lstrip("/")
                if part in names and part.endswith(".xml") and b"spreadsheetml" in source.read(part)[:2000]:
                    return part
    raise InputError(f"{book}: this is no .xlsx workbook")


def _with_names(xml: str, names: tuple[Name, ...], book: Path) -> tuple[str, Copied]:
    """The workbook's part with the names that it lacks."""
    there: dict[str, list[str]] = {}
    for element in ElementTree.fromstring(xml.encode()).iter():
        if element.tag.rsplit("}", 1)[-1] == "definedName":
            there.setdefault(element.get("name", "").upper(), []).append(element.text or "")
    for name in names:
        if any(text != name.text for text in there.get(name.name, [])):
            raise InputError(f"{book}: the name {name.name} is in use there with another meaning; delete it first")
    missing = [name for name in names if name.name not in there]
    root = re.search(r"<(\w+:)?workbook\b", xml)
    prefix = (root[1] or "") if root else ""
    made = "".join(
        f"<{prefix}definedName name={quoteattr(name.name)} comment={quoteattr(name.comment)}>"
        f"{escape(name.text)}</{prefix}definedName>"
        for name in missing
    )
    counts = Copied(len(missing), len(names) - len(missing))
    if not missing:
        return xml, counts
    end = f"</{prefix}definedNames>"
    if end in xml:
        return xml.replace(end, made + end, 1), counts
    xml = re.sub(rf"<{prefix}definedNames\s*/>", "", xml)
    for before in ("externalReferences", "functionGroups", "sheets"):  # what may stand before the names, last one first
        mark = f"</{prefix}{before}>"
        if mark in xml:
            return xml.replace(mark, f"{mark}<{prefix}definedNames>{made}{end}", 1), counts
    raise InputError(f"{book}: the workbook has no sheets")


# --- the command


def run(book: Path | None, output: Path | None, force: bool) -> list[str]:
    """What ``stripcheck door lambda`` does; gives the lines to tell. Raises InputError; then nothing was written."""
    place = output or (Path(LIBRARY_FILE) if book is None else book.with_name(f"{book.stem}-lambda.xlsx"))
    if place.suffix != ".xlsx":
        raise InputError(f"{place}: the name of the file to write must end in .xlsx")
    if book is not None and book.suffix.lower() != ".xlsx":
        raise InputError(f"{book}: only a workbook saved as .xlsx can take the names; save it as one")
    if book is not None and place.exists() and book.exists() and place.samefile(book):
        raise InputError(f"{place}: this is the workbook itself; choose another name for the copy")
    if place.exists() and not force:
        raise InputError(f"{place}: this file exists; choose another name, or add --force to replace it")
    if not place.resolve().parent.is_dir():
        raise InputError(f"{place}: the folder does not exist")
    functions = sum(not_a_lambda(function) == "" for function in FUNCTIONS)
    if book is None:
        write_library(place)
        lines = [f"{place}: {functions} functions as LAMBDA names, each with an example"]
    else:
        copied = write_copy(book, place)
        counts = f"{copied.added} names added, {copied.kept} there already"
        lines = [f"{place}: a copy of {book} with {functions} functions, {counts}"]
    without = ", ".join(function.full_name for function, _ in library().left_out)
    lines.append(f"Not among them, see docs/no-python.md: {without}")
    lines.append(f"Names that begin {STEP} are steps that they share. LAMBDA needs Excel of Microsoft 365, or 2024 and later.")
    return lines
